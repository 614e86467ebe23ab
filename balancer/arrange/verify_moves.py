"""Re-check of what was moved: whether the inventory, the panel and the user's wishes let it move like that."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from balancer.arrange.proposal import Pair, Proposal, stays_put
from balancer.arrange.verify_places import Check
from balancer.panel import Circuit
from balancer.rules import check_installation, errors_of, new_errors

_JUDGED_HERE = ("stab-limit",)
"""Rules whose findings change with every breaker that comes or goes, however little it adds: checked below."""


def _names(proposal: Proposal, circuits: Sequence[Circuit]) -> str:
    return ", ".join(proposal.name(circuit) for circuit in circuits)


def _fixed_moved(proposal: Proposal) -> Iterator[str]:
    for circuit in proposal.moved:
        if stays_put(circuit):
            yield f"{proposal.name(circuit)} stays where it is landed and was moved"


def _two_poles_moved(proposal: Proposal) -> Iterator[str]:
    """Keep landed two-pole circuits on their terminals; one with a neutral may exchange them where that is wished."""
    for circuit in proposal.moved:
        if circuit.poles != 2:
            continue
        if proposal.left(circuit) != circuit.landing[::-1]:
            yield f"{proposal.name(circuit)}: a landed two-pole circuit was moved"
        elif not circuit.volts.has_neutral:
            yield f"{proposal.name(circuit)} was turned over and has no neutral, so that turning it changes nothing"
        elif not proposal.options.turn_240:
            yield f"{proposal.name(circuit)} was turned over without --turn-240"


def _bodies_apart(proposal: Proposal) -> Iterator[str]:
    """Tandems, quads and conductors under one breaker move whole; only a pair to mend is taken out of them."""
    by_label = proposal.installation.by_label
    for body in proposal.bodies_found:
        circuits = [by_label[label] for label in body.circuits if label not in proposal.to_mend]
        placed = [circuit for circuit in circuits if proposal.left(circuit)]
        if placed and (len(placed) < len(circuits) or not _moved_as_one(proposal, placed)):
            yield f"{_names(proposal, circuits)}: one breaker body was taken apart"


def _moved_as_one(proposal: Proposal, circuits: Sequence[Circuit]) -> bool:
    shifts = list(dict.fromkeys(proposal.shift(circuit) for circuit in circuits))
    return len(circuits) == 1 or (len(shifts) == 1 and shifts[0] is not None)


def _halves_misplaced(proposal: Proposal) -> Iterator[str]:
    """Let half-width breakers move only to where one fits, as far as anybody said or the panel shows."""
    allowed = proposal.panel.tandem_spaces
    if allowed is None:
        found = proposal.installation.as_found.values()
        allowed = frozenset(terminal.space for landing in found for terminal in landing if terminal.half)
    for circuit in proposal.moved:
        if any(terminal.half and terminal.space not in allowed for terminal in proposal.left(circuit)):
            yield f"{proposal.name(circuit)}: a half-width breaker in a space that is not known to take one"


def _ties_broken(proposal: Proposal) -> Iterator[str]:
    """Tied circuits keep their places to each other, or stand in one line where they are put together anew."""
    for group in proposal.tied_groups:
        if _may_be_turned_over(proposal, group):
            continue
        is_landed = all(circuit.is_landed for circuit in group)
        if is_landed and _moved_as_one(proposal, group):
            continue
        if not proposal.restacked.issuperset(circuit.label for circuit in group):
            yield f"{_names(proposal, group)} are tied and did not move together"
        elif not _are_in_line(proposal, group):
            yield f"{_names(proposal, group)} are tied and do not stand in one line"


def _may_be_turned_over(proposal: Proposal, group: Sequence[Circuit]) -> bool:
    """Whether a tied group is a shared-neutral pair on breakers of its own, which is judged as a pair."""
    if tuple(group) not in proposal.pairs:
        return False
    has_halves = any(terminal.half for circuit in group for terminal in circuit.landing)
    return not has_halves or group[0].label in proposal.to_mend


def _are_in_line(proposal: Proposal, group: Sequence[Circuit]) -> bool:
    numbers = dict.fromkeys(terminal.space for circuit in group for terminal in proposal.left(circuit))
    spaces = [proposal.panel.by_number[number] for number in numbers]
    rows = [space.row for space in spaces]
    return len({space.column for space in spaces}) == 1 and max(rows) - min(rows) == len(spaces) - 1


def _pairs_apart(proposal: Proposal) -> Iterator[str]:
    """Keep a shared-neutral pair on opposite legs, one below the other or exactly as found."""
    for pair in proposal.pairs if proposal.has_opposite_legs else ():
        if not all(proposal.left(circuit) for circuit in pair):
            continue
        if len(proposal.legs(pair, proposal.as_left)) == 1:
            if not _is_beyond_mending(proposal, pair):
                yield f"{_names(proposal, pair)} share a neutral and both hots are on one leg"
        elif not _stands_together(proposal, pair):
            yield f"{_names(proposal, pair)} share a neutral and are not next to each other in one column"


def _is_beyond_mending(proposal: Proposal, pair: Pair) -> bool:
    return all(_is_as_found(proposal, c) for c in pair) and any(c.label in proposal.immovable for c in pair)


def _stands_together(proposal: Proposal, pair: Pair) -> bool:
    if all(_is_as_found(proposal, circuit) for circuit in pair):
        return True
    first, second = (proposal.left(circuit)[0] for circuit in pair)
    return proposal.are_next_to_each_other(first, second)


def _is_as_found(proposal: Proposal, circuit: Circuit) -> bool:
    return circuit.is_landed and proposal.left(circuit) == circuit.landing


def _off_the_bar(proposal: Proposal) -> Iterator[str]:
    allowed = proposal.panel.plug_on_neutral
    for circuit in (*proposal.moved, *_new_ones(proposal)):
        if _needs_neutral_bar(proposal, circuit) and not all(t.space in allowed for t in proposal.left(circuit)):
            yield f"{proposal.name(circuit)}: a plug-on-neutral breaker away from the neutral bar"


def _new_ones(proposal: Proposal) -> tuple[Circuit, ...]:
    return tuple(circuit for circuit in proposal.placed if not circuit.is_landed)


def _needs_neutral_bar(proposal: Proposal, circuit: Circuit) -> bool:
    """Whether its type says so, or it is a GFCI or AFCI breaker found at the bar and not said to have a pigtail."""
    allowed, kind = proposal.panel.plug_on_neutral, circuit.breaker_type.casefold().replace("-", " ")
    if not allowed:
        return False
    was_at_bar = circuit.is_landed and all(terminal.space in allowed for terminal in circuit.landing)
    return "plug on" in kind or (circuit.has_gfci_or_afci and was_at_bar and "pigtail" not in kind)


def _bolted_wrongly(proposal: Proposal) -> Iterator[str]:
    bolted = proposal.panel.bolt_on
    for circuit in proposal.moved:
        pairs = zip(circuit.landing, proposal.left(circuit), strict=True)
        if any((old.space in bolted) != (new.space in bolted) for old, new in pairs):
            yield f"{proposal.name(circuit)}: bolt-on and plug-on breakers do not fit each other's spaces"


def _out_of_reach(proposal: Proposal) -> Iterator[str]:
    for circuit in proposal.moved:
        slack_in = circuit.slack_in
        if proposal.options.splice or slack_in is None or not circuit.hot_conductors:
            continue
        for old, new in zip(circuit.landing, proposal.left(circuit), strict=True):
            reach_in = 0.0 if old == new else proposal.panel.reach_in(old.space, new.space)
            if reach_in > slack_in:
                yield f"{proposal.name(circuit)}: {reach_in:g} in away, and its conductor reaches {slack_in:g} in"


def _stabs_overloaded(proposal: Proposal) -> Iterator[str]:
    """Keep rows to the stab limit; one that was above it may not hold more than it did as found."""
    limit_a = proposal.panel.stab_a
    if limit_a is None:
        return
    found = Proposal(proposal.installation, proposal.options, proposal.installation.as_found)
    before = {row: _handle_sum_a(handles) for row, handles in _handles_by_row(found).items()}
    for row, handles in _handles_by_row(proposal).items():
        total_a = _handle_sum_a(handles)
        if total_a > max(limit_a, before.get(row, 0.0)):
            names = _names(proposal, [circuit for circuits in handles for circuit in circuits if circuit.breaker_a])
            yield f"row {row}: handle ratings of {total_a:g} A where stab_a allows {limit_a:g} A, with {names} there"


def _handle_sum_a(handles: Sequence[tuple[Circuit, ...]]) -> float:
    # Two circuits under one breaker have one handle.
    return sum(max(circuit.breaker_a or 0.0 for circuit in circuits) for circuits in handles)


def _handles_by_row(proposal: Proposal) -> dict[int, list[tuple[Circuit, ...]]]:
    rows: dict[int, list[tuple[Circuit, ...]]] = {}
    for terminal, circuits in proposal.by_terminal.items():
        rows.setdefault(proposal.panel.by_number[terminal.space].row, []).append(circuits)
    return rows


def _too_many_landings(proposal: Proposal) -> Iterator[str]:
    most = proposal.options.max_landings
    if most is not None and proposal.landings_changed > most:
        yield f"{proposal.landings_changed} landings are changed and at most {most} may be"


def _errors_created(proposal: Proposal) -> Iterator[str]:
    before = check_installation(proposal.installation)
    struck = [(finding.rule, frozenset(finding.circuits)) for finding in errors_of(before)]
    by_label = proposal.installation.by_label
    for finding in new_errors(before, check_installation(proposal.installation, proposal.as_left)):
        circuits = frozenset(finding.circuits)
        is_old = any(rule == finding.rule and circuits < others for rule, others in struck)
        # A circuit that had no place before may bring an error with it, wherever it is put.
        is_brought = not all(by_label[label].is_landed for label in finding.circuits)
        if not is_old and not is_brought and finding.rule not in _JUDGED_HERE:
            yield f"the plan creates an error ({finding.rule}): {finding.message}"


MOVE_CHECKS: tuple[Check, ...] = (
    _fixed_moved,
    _two_poles_moved,
    _bodies_apart,
    _halves_misplaced,
    _ties_broken,
    _pairs_apart,
    _off_the_bar,
    _bolted_wrongly,
    _out_of_reach,
    _stabs_overloaded,
    _too_many_landings,
    _errors_created,
)
"""Whether everything may be where it ends, seen from where it was."""
