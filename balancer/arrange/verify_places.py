"""Re-check of where breakers end: whether everything has a place, and whether breakers can stand like that."""

from __future__ import annotations

import itertools
from collections.abc import Callable, Iterator

from balancer.arrange.proposal import Proposal
from balancer.panel import Circuit, Role, Terminal

Check = Callable[[Proposal], Iterator[str]]
"""Gives a sentence for everything that is wrong."""

_HALVES = ("", "a", "b")
_QUAD_POLES = (("b", "a"), ("a", "b"))
"""Halves of the upper and the lower space that a quad's inner and outer two-pole take."""


def _strangers(proposal: Proposal) -> Iterator[str]:
    known = proposal.installation.by_label
    for label in (*proposal.as_left, *proposal.removed_spares):
        if label not in known:
            yield f"{label} is no circuit of the inventory"


def _left_out(proposal: Proposal) -> Iterator[str]:
    for circuit in proposal.installation.circuits:
        if proposal.left(circuit) or circuit.label in proposal.removed_spares:
            continue
        if circuit.role is not Role.SPARE or circuit.is_landed:
            yield f"{proposal.name(circuit)} is left without a place"


def _taken_out(proposal: Proposal) -> Iterator[str]:
    for circuit in proposal.installation.circuits:
        if circuit.label not in proposal.removed_spares:
            continue
        if circuit.role is not Role.SPARE or not circuit.is_landed:
            yield f"{proposal.name(circuit)} is listed as taken out and is no spare breaker of the panel as found"
        elif proposal.left(circuit):
            yield f"{proposal.name(circuit)} is listed as taken out and has a place all the same"
        elif circuit.is_fixed:
            yield f"{proposal.name(circuit)} is fixed and is taken out"


def _wrong_poles(proposal: Proposal) -> Iterator[str]:
    for circuit in proposal.placed:
        if len(proposal.left(circuit)) != circuit.poles:
            yield f"{proposal.name(circuit)} has {circuit.poles} poles and {len(proposal.left(circuit))} terminals"


def _outside(proposal: Proposal) -> Iterator[str]:
    for circuit in proposal.placed:
        for terminal in proposal.left(circuit):
            if terminal.space not in proposal.panel.by_number or terminal.half not in _HALVES:
                yield f"{proposal.name(circuit)}: the panel has no terminal {terminal}"


def _in_reserved(proposal: Proposal) -> Iterator[str]:
    for circuit in proposal.placed:
        own = {terminal.space for terminal in circuit.landing}
        for terminal in proposal.left(circuit):
            if terminal.space in proposal.panel.reserved and terminal.space not in own:
                yield f"{proposal.name(circuit)}: space {terminal.space} is reserved"


def _crowded(proposal: Proposal) -> Iterator[str]:
    """Find what stands beside a full-width breaker in its space."""
    for space, terminals in _by_space(proposal):
        if len(terminals) > 1 and not all(terminal.half for terminal in terminals):
            names = _names(proposal, [c for terminal in terminals for c in proposal.by_terminal[terminal]])
            yield f"space {space}: a full-width breaker and a half ({names})"


def _by_space(proposal: Proposal) -> Iterator[tuple[int, list[Terminal]]]:
    # The terminals come sorted by space.
    for space, terminals in itertools.groupby(proposal.by_terminal, lambda terminal: terminal.space):
        yield space, list(terminals)


def _names(proposal: Proposal, circuits: list[Circuit]) -> str:
    return ", ".join(proposal.name(circuit) for circuit in dict.fromkeys(circuits))


def _new_double_taps(proposal: Proposal) -> Iterator[str]:
    """Allow two circuits on one terminal only where they were found so."""
    for terminal, circuits in proposal.by_terminal.items():
        for one, other in itertools.combinations(circuits, 2):
            if not set(one.landing) & set(other.landing):
                yield f"terminal {terminal}: two breakers in one place ({_names(proposal, [one, other])})"


def _strange_halves(proposal: Proposal) -> Iterator[str]:
    """Allow two halves in one space only where they are of one body."""
    body = {label: index for index, each in enumerate(proposal.bodies_found) for label in each.circuits}
    for space, terminals in _by_space(proposal):
        circuits = [c for terminal in terminals if terminal.half for c in proposal.by_terminal[terminal]]
        if len({body.get(circuit.label, circuit.label) for circuit in circuits}) > 1:
            yield f"space {space}: halves of two breaker bodies ({_names(proposal, circuits)})"


def _poles_apart(proposal: Proposal) -> Iterator[str]:
    """Keep two poles one below the other in a column, on opposite legs, full width or as a quad has them."""
    for circuit in proposal.placed:
        if circuit.poles == 2 and not _fit_two_pole(proposal, *proposal.left(circuit)):
            yield f"{proposal.name(circuit)}: no two-pole breaker fits these two terminals"


def _fit_two_pole(proposal: Proposal, first: Terminal, second: Terminal) -> bool:
    panel = proposal.panel
    upper, lower = sorted((first, second), key=lambda terminal: panel.by_number[terminal.space].row)
    return (
        proposal.are_next_to_each_other(upper, lower)
        and panel.leg(upper.space) is not panel.leg(lower.space)
        and (upper.half, lower.half) in (("", ""), *_QUAD_POLES)
    )


def _width_changed(proposal: Proposal) -> Iterator[str]:
    """Keep the width of breakers; a new one is full-width, and so is one that mends a pair."""
    for circuit in proposal.placed:
        new = sorted(terminal.half for terminal in proposal.left(circuit))
        is_full_width = not any(new)
        if is_full_width and (not circuit.is_landed or circuit.label in proposal.to_mend):
            continue
        if new != sorted(terminal.half for terminal in circuit.landing):
            yield f"{proposal.name(circuit)}: its breaker is not of the width, or not the half, that this place takes"


LISTING_CHECKS: tuple[Check, ...] = (_strangers, _left_out, _taken_out, _wrong_poles, _outside)
"""Whether the landings name circuits and terminals that there are; the other checks build on that."""

PLACE_CHECKS: tuple[Check, ...] = (
    _in_reserved,
    _crowded,
    _new_double_taps,
    _strange_halves,
    _poles_apart,
    _width_changed,
)
"""Whether breakers can stand as the landings say."""
