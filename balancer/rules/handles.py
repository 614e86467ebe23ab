"""Handles and terminals: common disconnects, handle ties, and conductors that share a breaker."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from balancer.panel import Circuit
from balancer.rules.findings import Severity
from balancer.rules.landed import LandedPanel, groups_by
from balancer.rules.rule import Observation, Rule
from balancer.rules.shared_neutrals import landed_pairs

_TWO_POLE_WORDS = ("two pole", "2 pole", "double pole", "2p")


def _is_two_pole_type(circuit: Circuit) -> bool:
    kind = circuit.breaker_type.casefold().replace("-", " ")
    return any(word in kind for word in _TWO_POLE_WORDS)


def _is_tie_declared(first: Circuit, second: Circuit) -> bool:
    is_tied = bool(first.tied) and first.tied.casefold() == second.tied.casefold()
    return is_tied or (_is_two_pole_type(first) and _is_two_pole_type(second))


def _common_disconnect(landed: LandedPanel) -> Iterator[Observation]:
    for pair in landed_pairs(landed):
        if landed.leg(pair[0]) is landed.leg(pair[1]):
            # Another rule says what is worse about it, and mending that moves a breaker anyway.
            continue
        upper, lower = (landed.landing(circuit)[0] for circuit in pair)
        if not landed.are_handles_adjacent(upper, lower):
            message = (
                f"{landed.names(pair)} share a neutral but their breakers are not next to each other, so no handle tie "
                "can join them: one may be off while the other feeds the neutral. The code wants one common "
                "disconnect (older work may have been legal when it was made): bring them together on a two-pole "
                "breaker or on two tied single poles."
            )
            yield Observation(pair, message)
        elif not _is_tie_declared(*pair):
            message = (
                f"{landed.names(pair)} share a neutral: verify that a listed handle tie or a two-pole breaker "
                "disconnects both together. If so, give both the same label in the tied column."
            )
            yield Observation(pair, message, Severity.NOTICE)


def _double_tap(landed: LandedPanel) -> Iterator[Observation]:
    shared = [tuple(c for c in circuits if c.hot_conductors) for circuits in landed.by_terminal.values()]
    for circuits in dict.fromkeys(group for group in shared if len(group) > 1):
        message = (
            f"{landed.names(circuits)}: {len(circuits)} conductors are under one breaker terminal. That is allowed "
            "only where the breaker is listed for it, and its marking says so: check the marking, or splice them to "
            "one pigtail."
        )
        yield Observation(circuits, message)


def _tied_apart(landed: LandedPanel) -> Iterator[Observation]:
    for group in groups_by(landed.landed, lambda circuit: circuit.tied):
        if not _are_in_line(landed, group) and not _is_one_shared_neutral(group):
            message = (
                f"{landed.names(group)} are tied (label {group[0].tied}) but their breakers do not stand in one line, "
                "so no handle tie can join them: check the spaces and the tied column, or bring them together."
            )
            yield Observation(group, message)


def _are_in_line(landed: LandedPanel, group: Sequence[Circuit]) -> bool:
    spaces = {landed.panel.by_number[terminal.space] for circuit in group for terminal in landed.landing(circuit)}
    rows = [space.row for space in spaces]
    return len({space.column for space in spaces}) == 1 and max(rows) - min(rows) == len(spaces) - 1


def _is_one_shared_neutral(group: Sequence[Circuit]) -> bool:
    """Whether the rule on common disconnects speaks of the same circuits already."""
    return bool(group[0].shared_neutral) and len({circuit.shared_neutral.casefold() for circuit in group}) == 1


HANDLE_RULES = (
    Rule("shared-neutral-common-disconnect", Severity.WARNING, "NEC 2023, 210.4(B)", _common_disconnect),
    Rule("conductors-under-one-breaker", Severity.WARNING, "NEC 2023, 110.14(A) (from memory)", _double_tap),
    Rule("tied-breakers-apart", Severity.WARNING, "NEC 2023, 240.15(B) (from memory)", _tied_apart),
)
