"""Seats of every unit: each placement that the panel, its breaker and its conductors allow.

A *unit* is what moves as one: a single-pole breaker with its circuit, a shared-neutral pair, a tandem or quad body, or
circuits joined by `tied`. All that forbids a seat is judged here, so that the arrangement model only chooses.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass

from balancer.arrange.grouping import canonical_key, circuits_to_mend, group_circuits, shared_neutral_pairs
from balancer.arrange.limits import Hold, Limits
from balancer.arrange.moves import beside_moves, pair_moves, rigid_moves, single_moves, stacked_moves
from balancer.arrange.placements import (
    Part,
    Placement,
    Unit,
    conductors_moved,
    scaled_effort,
    total_reach_in,
)
from balancer.arrange.results import Options
from balancer.electrical.phasors import neutral_leg
from balancer.panel import Arrangement, Circuit, Installation, Landing, Leg, Panel, Role, SupplySystem, Terminal


def build_units(
    installation: Installation,
    options: Options,
    ignored: frozenset[tuple[Hold, str]] = frozenset(),
    idle: frozenset[str] = frozenset(),
) -> tuple[Unit, ...]:
    """Group the circuits into units and list the placements of each, the as-found one first.

    Parameters
    ----------
    installation
        Panel and circuits.
    options
        `turn_240` and `splice` widen the choice.
    ignored
        Constraints to leave aside, as (kind, label), when looking for what is in the way; a label of "" is the panel's.
    idle
        Labels of circuits that carry no line-to-neutral current in any scenario: their leg is nobody's concern.

    Returns
    -------
    tuple of Unit
        In the order of their first circuit's place as found, then label: the same for any order of rows.
    """
    seating = _Seating(installation, options, ignored, idle)
    units = [seating.unit(group) for group in group_circuits(installation)]
    return tuple(sorted(units, key=lambda unit: canonical_key(unit.circuits)))


def _is_landed(circuits: Iterable[Circuit]) -> bool:
    return all(circuit.is_landed for circuit in circuits)


@dataclass
class _Seating:
    """Lists placements under one installation's constraints."""

    installation: Installation
    options: Options
    ignored: frozenset[tuple[Hold, str]]
    idle: frozenset[str]

    def __post_init__(self) -> None:
        self._limits = Limits(self.installation, self.options, self.ignored)
        self._pairs = shared_neutral_pairs(self.installation)
        self._to_mend = circuits_to_mend(self.installation)

    @property
    def panel(self) -> Panel:
        return self.installation.panel

    def unit(self, group: tuple[Circuit, ...]) -> Unit:
        """Build one unit with every placement that nothing forbids."""
        seen: dict[tuple[tuple[str, Landing], ...], Placement] = {}
        for landings in self._stay(group) if self._stays(group) else self._moves(group):
            key = tuple((circuit.label, landings[circuit.label]) for circuit in group)
            if key not in seen and self._is_allowed(group, landings):
                seen[key] = self._placement(group, landings)
        found = tuple((circuit.label, circuit.landing) for circuit in group)
        placements = sorted(seen.values(), key=lambda p: (p.landings != found, *_placement_order(p)))
        is_optional = all(circuit.role is Role.SPARE and not self._limits.is_fixed(circuit) for circuit in group)
        return Unit(group, tuple(placements), is_optional)

    def _stays(self, group: Sequence[Circuit]) -> bool:
        """Whether the unit keeps its place: fixed, or with a landed two-pole circuit in it."""
        if not _is_landed(group) or self._is_half_fixed_pair(group):
            return False
        return any(self._limits.is_fixed(c) or (c.poles == 2) for c in group) or self._is_beyond_mending(group)

    def _is_half_fixed_pair(self, group: Sequence[Circuit]) -> bool:
        """Tell a pair on one leg of which one may move: it goes beside the other."""
        return self._must_mend(group) and self._is_flexible_pair(group)

    def _is_beyond_mending(self, group: Sequence[Circuit]) -> bool:
        """Three hots on one neutral stay wrong wherever they go; moving them would only hide it."""
        labels = [c.shared_neutral.casefold() for c in group if c.shared_neutral]
        return any(labels.count(label) > 2 for label in labels)

    def _stay(self, group: Sequence[Circuit]) -> Iterator[Arrangement]:
        """Give the place as found, and with `--turn-240` every turn of its 120/240 V circuits."""
        arrangements: list[Arrangement] = [{c.label: c.landing for c in group}]
        if self.options.turn_240:
            for circuit in group:
                can_turn = circuit.volts.has_neutral and circuit.poles == 2 and not self._limits.is_fixed(circuit)
                if can_turn and not circuit.role.is_device:
                    turned = circuit.landing[::-1]
                    arrangements += [{**a, circuit.label: turned} for a in arrangements]
        yield from arrangements

    def _moves(self, group: tuple[Circuit, ...]) -> Iterator[Arrangement]:
        installation = self.installation
        is_full_width = all(not t.half for c in group for t in c.landing)
        if _is_landed(group) and not self._must_mend(group):
            yield {c.label: c.landing for c in group}
        if len(group) == 1 and group[0].poles == 1 and is_full_width:
            yield from single_moves(installation, group[0])
        elif self._is_flexible_pair(group):
            yield from pair_moves(installation, group)
        elif _is_landed(group) and not self._must_mend(group):
            yield from rigid_moves(installation, group)
        else:
            yield from self._new_places(group)

    def _new_places(self, group: Sequence[Circuit]) -> Iterator[Arrangement]:
        """Seat circuits of which some have no place yet, or must leave theirs, together.

        Bodies, double taps and two-pole breakers that stay whole keep their shape, and the others stack beside them.
        """
        kept = [circuit for circuit in group if not self._needs_place(circuit)]
        spaces = [t.space for c in kept for t in c.landing]
        is_plain = len(spaces) == len(set(spaces)) and not any(t.half for c in kept for t in c.landing)
        if is_plain and all(c.poles == 1 for c in kept):
            yield from stacked_moves(self.installation, group)
        if not kept:
            return
        others = [circuit for circuit in group if self._needs_place(circuit)]
        bodies: list[Arrangement] = [{c.label: c.landing for c in kept}]
        if not any(self._limits.is_fixed(c) or c.poles == 2 for c in kept):
            bodies += rigid_moves(self.installation, kept)
        for body in bodies:
            yield from beside_moves(self.installation, body, others)

    def _needs_place(self, circuit: Circuit) -> bool:
        """Whether it is new, or of a pair on one leg and free to leave what it shares."""
        return not circuit.is_landed or (circuit.label in self._to_mend and not self._limits.is_fixed(circuit))

    def _must_mend(self, group: Sequence[Circuit]) -> bool:
        return any(circuit.label in self._to_mend for circuit in group)

    def _is_flexible_pair(self, group: Sequence[Circuit]) -> bool:
        """Two circuits on one neutral whose breakers are nobody else's: they may be turned over."""
        if len(group) != 2 or any(c.poles != 1 for c in group) or not group[0].shared_neutral:
            return False
        if group[0].shared_neutral.casefold() != group[1].shared_neutral.casefold():
            return False
        return self._must_mend(group) or not any(t.half for c in group for t in c.landing)

    def _is_allowed(self, group: Sequence[Circuit], landings: Mapping[str, Landing]) -> bool:
        moved = [c for c in group if landings[c.label] != c.landing]
        if any(self._limits.is_fixed(c) and c.is_landed for c in moved):
            return False
        if len(group) > 1 and not (self._keeps_pairs_whole(group, landings) and self._keeps_ties(group, landings)):
            return False
        if not self._stays(group) and not self._limits.tandems_fit(landings):
            return False
        return all(self._limits.may_land(circuit, landings[circuit.label]) for circuit in moved)

    def _keeps_pairs_whole(self, group: Sequence[Circuit], landings: Mapping[str, Landing]) -> bool:
        """Both hots of a shared neutral on opposite legs, and beside each other unless they stay as found."""
        if self.panel.supply.system is SupplySystem.IN_PHASE or self._stays(group):
            return True
        for pair in self._pairs:
            if pair[0] in group:
                first, second = (landings[c.label][0].space for c in pair)
                is_opposite = self.panel.leg(first) is not self.panel.leg(second)
                if all(landings[c.label] == c.landing for c in pair):
                    # A pair that nothing can put right may stay as it is.
                    is_whole = is_opposite or pair[0].label not in self._to_mend
                else:
                    is_whole = is_opposite and self._are_adjacent(first, second)
                if not is_whole:
                    return False
        return True

    def _keeps_ties(self, group: Sequence[Circuit], landings: Mapping[str, Landing]) -> bool:
        """Put what gets a new place directly above or below what it is tied to: a handle tie reaches no further."""
        for name in dict.fromkeys(c.tied.casefold() for c in group if c.tied and self._needs_place(c)):
            tied = [landings[c.label] for c in group if c.tied.casefold() == name]
            spaces = [self.panel.by_number[t.space] for landing in tied for t in landing]
            rows = sorted({space.row for space in spaces})
            if len({space.column for space in spaces}) > 1 or rows[-1] - rows[0] >= len(rows):
                return False
        return True

    def _are_adjacent(self, first: int, second: int) -> bool:
        below_first, below_second = self.panel.below(first), self.panel.below(second)
        return (below_first is not None and below_first.number == second) or (
            below_second is not None and below_second.number == first
        )

    def _placement(self, group: Sequence[Circuit], landings: Mapping[str, Landing]) -> Placement:
        placed = [(circuit, landings[circuit.label]) for circuit in group]
        return Placement(
            landings=tuple((circuit.label, landing) for circuit, landing in placed),
            parts=_parts(landings.values()),
            signs=tuple(self._sign(circuit, landing) for circuit, landing in placed),
            landings_changed=sum(conductors_moved(circuit, landing) for circuit, landing in placed),
            effort=sum(scaled_effort(circuit, landing) for circuit, landing in placed),
            reach_in=sum(total_reach_in(self.panel, circuit.landing, landing) for circuit, landing in placed),
            row_rating_a=self._row_ratings(group, landings),
        )

    def _sign(self, circuit: Circuit, landing: Landing) -> int:
        if not circuit.carries_load or circuit.label in self.idle:
            return 0
        leg = neutral_leg(self.panel, circuit, landing)
        return 0 if leg is None else 1 if leg is Leg.A else -1

    def _row_ratings(self, group: Sequence[Circuit], landings: Mapping[str, Landing]) -> tuple[tuple[int, float], ...]:
        handles: dict[Terminal, float] = {}
        for circuit in group:
            for terminal in landings[circuit.label]:
                # Two circuits under one breaker have one handle.
                handles[terminal] = max(handles.get(terminal, 0.0), circuit.breaker_a or 0.0)
        rows: dict[int, float] = {}
        for terminal, rating in handles.items():
            row = self.panel.by_number[terminal.space].row
            rows[row] = rows.get(row, 0.0) + rating
        return tuple(sorted(rows.items()))


def _placement_order(placement: Placement) -> tuple[int, float, tuple[Landing, ...]]:
    return (placement.effort, placement.reach_in, tuple(landing for _, landing in placement.landings))


def _parts(landings: Iterable[Landing]) -> tuple[Part, ...]:
    # A half-width breaker comes in a body that fills its whole space.
    spaces = {terminal.space for landing in landings for terminal in landing}
    return tuple((space, half) for space in sorted(spaces) for half in ("a", "b"))
