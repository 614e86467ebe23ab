"""Units and their seats: what moves as one, and where each may go.

A *unit* is what moves as one: a single-pole breaker with its circuit, a shared-neutral pair, a tandem or quad body, or
circuits joined by `tied`. A *placement* is one way to seat a unit; all that a panel, a breaker or a conductor forbids
is left out here, so that the arrangement model only chooses.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from enum import StrEnum

from balancer.arrange.results import Options
from balancer.electrical.phasors import neutral_leg
from balancer.panel import (
    Arrangement,
    Circuit,
    Installation,
    Landing,
    Leg,
    Panel,
    Role,
    SupplySystem,
    Terminal,
    Volts,
)

EFFORT_SCALE = 1000
"""Effort is counted in whole thousandths of a landing."""

GFCI_AFCI_EFFORT = 0.5
"""Extra effort of moving a GFCI or AFCI breaker's neutral along."""

_SPARE_MOVE = 1
_SPARE_REMOVAL = 1_000 * EFFORT_SCALE
"""A spare breaker has no conductor: it moves for next to nothing, and comes out only where nothing else helps."""

Part = tuple[int, str]
"""Half a space, the smallest thing that a breaker fills: (space, "a" or "b")."""


class Hold(StrEnum):
    """Kinds of constraints that keep a unit from a seat; the report names them when nothing fits."""

    FIXED = "fixed"
    REACH = "slack_in"
    RESERVED = "reserved"
    TANDEM = "tandem_spaces"
    PLUG_ON = "plug_on_neutral"
    BOLT_ON = "bolt_on"
    STAB = "stab_a"


@dataclass(frozen=True)
class Placement:
    """One way to seat a unit."""

    landings: tuple[tuple[str, Landing], ...]
    """Label and landing of every circuit of the unit."""
    parts: tuple[Part, ...]
    signs: tuple[int, ...]
    """For every circuit: +1 where its line-to-neutral part is on leg A, -1 on leg B, 0 for none or not known."""
    landings_changed: int
    effort: int
    """In thousandths of a landing, spares' own small costs included."""
    reach_in: float
    """Conductor length [in] that the re-landings take up together."""
    row_rating_a: tuple[tuple[int, float], ...]
    """Row and sum of the known handle ratings [A] that it puts there."""

    @property
    def spaces(self) -> tuple[int, ...]:
        """Spaces that it fills, wholly or by a half, in rising order."""
        return tuple(sorted({space for space, _ in self.parts}))


@dataclass(frozen=True)
class Unit:
    """What moves as one. `is_optional` units (spares) may be left out of the panel."""

    circuits: tuple[Circuit, ...]
    placements: tuple[Placement, ...]
    is_optional: bool = False

    @property
    def name(self) -> str:
        """Labels of its circuits, for messages."""
        return " + ".join(circuit.label for circuit in self.circuits)

    @property
    def as_found(self) -> Placement | None:
        """The placement that changes nothing, where there is one."""
        found = tuple((circuit.label, circuit.landing) for circuit in self.circuits)
        return self.placements[0] if self.placements and self.placements[0].landings == found else None


def _is_landed(circuits: Iterable[Circuit]) -> bool:
    return all(circuit.is_landed for circuit in circuits)


def build_units(
    installation: Installation, options: Options, ignored: frozenset[tuple[Hold, str]] = frozenset()
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

    Returns
    -------
    tuple of Unit
        In the order of their first circuit's place as found, then label: the same for any order of rows.
    """
    seating = _Seating(installation, options, ignored)
    groups = _group_circuits(installation)
    units = [seating.unit(group) for group in groups]
    return tuple(sorted(units, key=lambda unit: _canonical_key(unit.circuits)))


def _canonical_key(circuits: Sequence[Circuit]) -> tuple[object, ...]:
    landed = [terminal for circuit in circuits for terminal in circuit.landing]
    first = min(landed) if landed else Terminal(10_000)
    return (first.space, first.half, min(circuit.label for circuit in circuits))


def is_pair_broken(panel: Panel, first: Circuit, second: Circuit) -> bool:
    """Whether a shared-neutral pair has both hots on one leg as found."""
    if not (first.is_landed and second.is_landed):
        return False
    return panel.leg(first.landing[0].space) is panel.leg(second.landing[0].space)


def _group_circuits(installation: Installation) -> list[tuple[Circuit, ...]]:
    """Join circuits that move as one: one body, one terminal, one tie, one shared neutral."""
    circuits = installation.circuits
    parent = list(range(len(circuits)))

    def root(index: int) -> int:
        while parent[index] != index:
            index = parent[index]
        return index

    def join(members: Sequence[int]) -> None:
        for member in members[1:]:
            parent[root(member)] = root(members[0])

    pulled_out = _pulled_out_of_bodies(installation)
    by_key: dict[tuple[str, object], list[int]] = {}
    for index, circuit in enumerate(circuits):
        if circuit.label not in pulled_out:
            for terminal in circuit.landing:
                by_key.setdefault(("space", terminal.space), []).append(index)
        if circuit.tied:
            by_key.setdefault(("tied", circuit.tied.casefold()), []).append(index)
        if circuit.shared_neutral:
            by_key.setdefault(("neutral", circuit.shared_neutral.casefold()), []).append(index)
    for members in by_key.values():
        join(members)
    groups: dict[int, list[Circuit]] = {}
    for index, circuit in enumerate(circuits):
        groups.setdefault(root(index), []).append(circuit)
    return [tuple(sorted(group, key=lambda c: _canonical_key((c,)))) for group in groups.values()]


def _pulled_out_of_bodies(installation: Installation) -> frozenset[str]:
    """Give labels of pairs found on one leg: mending them takes them out of the body or terminal they share."""
    if installation.panel.supply.system is SupplySystem.IN_PHASE:
        return frozenset()
    pairs = shared_neutral_pairs(installation)
    return frozenset(
        circuit.label
        for pair in pairs
        if is_pair_broken(installation.panel, *pair) and not any(c.is_fixed for c in pair)
        for circuit in pair
    )


def shared_neutral_pairs(installation: Installation) -> tuple[tuple[Circuit, Circuit], ...]:
    """Give the shared-neutral pairs: exactly two 120 V circuits under one label."""
    by_label: dict[str, list[Circuit]] = {}
    for circuit in installation.circuits:
        if circuit.shared_neutral and circuit.poles == 1:
            by_label.setdefault(circuit.shared_neutral.casefold(), []).append(circuit)
    return tuple((group[0], group[1]) for group in by_label.values() if len(group) == 2)


def _keeps_company(order: Sequence[Circuit]) -> bool:
    """Whether circuits of one tie, and those of one shared neutral, follow each other without a stranger between."""
    for names in ([c.tied.casefold() for c in order], [c.shared_neutral.casefold() for c in order]):
        runs = [name for name, _ in itertools.groupby(names) if name]
        if len(runs) != len(set(runs)):
            return False
    return True


@dataclass
class _Seating:
    """Lists placements under one installation's constraints."""

    installation: Installation
    options: Options
    ignored: frozenset[tuple[Hold, str]]
    _tandem_spaces: frozenset[int] = field(init=False)

    def __post_init__(self) -> None:
        panel = self.installation.panel
        halves = {t.space for c in self.installation.circuits for t in c.landing if t.half}
        # Nobody said where half-width breakers fit: only where one is already is it known to.
        self._tandem_spaces = panel.tandem_spaces if panel.tandem_spaces is not None else frozenset(halves)

    @property
    def panel(self) -> Panel:
        return self.installation.panel

    def unit(self, group: tuple[Circuit, ...]) -> Unit:
        """Build one unit with every placement that nothing forbids."""
        candidates = self._stay(group) if self._stays(group) else self._moves(group)
        seen: dict[tuple[tuple[str, Landing], ...], Placement] = {}
        for landings in candidates:
            key = tuple((circuit.label, landings[circuit.label]) for circuit in group)
            if key not in seen and self._is_allowed(group, landings):
                seen[key] = self._placement(group, landings)
        found = tuple((circuit.label, circuit.landing) for circuit in group)
        placements = sorted(seen.values(), key=lambda p: (p.landings != found, *_placement_order(p)))
        is_optional = all(circuit.role is Role.SPARE for circuit in group)
        return Unit(group, tuple(placements), is_optional)

    def _stays(self, group: Sequence[Circuit]) -> bool:
        """Whether the unit keeps its place: fixed, or with a landed two-pole circuit in it."""
        if not _is_landed(group):
            return False
        return any(self._is_fixed(c) or (c.poles == 2) for c in group) or self._is_beyond_mending(group)

    def _is_fixed(self, circuit: Circuit) -> bool:
        return (circuit.is_fixed or circuit.role.is_device) and (Hold.FIXED, circuit.label) not in self.ignored

    def _is_beyond_mending(self, group: Sequence[Circuit]) -> bool:
        """Three hots on one neutral stay wrong wherever they go; moving them would only hide it."""
        labels = [c.shared_neutral.casefold() for c in group if c.shared_neutral]
        return any(labels.count(label) > 2 for label in labels)

    def _stay(self, group: Sequence[Circuit]) -> Iterator[Arrangement]:
        """Give the place as found, and with `--turn-240` every turn of its 120/240 V circuits."""
        arrangements: list[Arrangement] = [{c.label: c.landing for c in group}]
        if self.options.turn_240:
            for circuit in group:
                can_turn = circuit.volts.has_neutral and circuit.poles == 2 and not self._is_fixed(circuit)
                if can_turn and not circuit.role.is_device:
                    turned = circuit.landing[::-1]
                    arrangements += [{**a, circuit.label: turned} for a in arrangements]
        yield from arrangements

    def _moves(self, group: tuple[Circuit, ...]) -> Iterator[Arrangement]:
        if _is_landed(group) and not self._must_mend(group):
            yield {c.label: c.landing for c in group}
        if len(group) == 1 and group[0].poles == 1 and not (group[0].landing and group[0].landing[0].half):
            for space in self.panel.spaces:
                yield {group[0].label: (Terminal(space.number),)}
        elif self._is_flexible_pair(group):
            yield from self._pair_moves(group)
        elif _is_landed(group):
            yield from self._rigid_moves(group)
        else:
            yield from self._block_moves(group)

    def _must_mend(self, group: Sequence[Circuit]) -> bool:
        pairs = [p for p in shared_neutral_pairs(self.installation) if p[0] in group]
        is_split = self.panel.supply.system is not SupplySystem.IN_PHASE
        return is_split and any(is_pair_broken(self.panel, *pair) for pair in pairs)

    def _is_flexible_pair(self, group: Sequence[Circuit]) -> bool:
        """Two circuits on one neutral whose breakers are nobody else's: they may be turned over."""
        if len(group) != 2 or any(c.poles != 1 for c in group) or not group[0].shared_neutral:
            return False
        if group[0].shared_neutral.casefold() != group[1].shared_neutral.casefold():
            return False
        return self._must_mend(group) or not any(t.half for c in group for t in c.landing)

    def _pair_moves(self, group: Sequence[Circuit]) -> Iterator[Arrangement]:
        first, second = group
        for upper, lower in self.panel.two_pole_seats:
            yield {first.label: (Terminal(upper),), second.label: (Terminal(lower),)}
            yield {first.label: (Terminal(lower),), second.label: (Terminal(upper),)}

    def _rigid_moves(self, group: Sequence[Circuit]) -> Iterator[Arrangement]:
        """Shift the whole body, halves and all, to any place of the same shape."""
        panel = self.panel
        anchor = panel.by_number[min(t.space for c in group for t in c.landing)]
        for target in panel.spaces:
            moved: Arrangement = {}
            for circuit in group:
                landing = [self._shifted(t, anchor.number, target.number) for t in circuit.landing]
                if None in landing:
                    break
                moved[circuit.label] = tuple(t for t in landing if t is not None)
            else:
                yield moved

    def _shifted(self, terminal: Terminal, anchor: int, target: int) -> Terminal | None:
        panel = self.panel
        here, base, there = (panel.by_number[n] for n in (terminal.space, anchor, target))
        space = panel.at(there.column + here.column - base.column, there.row + here.row - base.row)
        return Terminal(space.number, terminal.half) if space else None

    def _block_moves(self, group: Sequence[Circuit]) -> Iterator[Arrangement]:
        """Seat circuits of which some have no place yet one below the other, in any order."""
        for order in itertools.permutations(group):
            if _keeps_company(order):
                for start in self.panel.spaces:
                    yield from self._stack(list(order), start.number, {})

    def _stack(self, rest: list[Circuit], start: int | None, done: Arrangement) -> Iterator[Arrangement]:
        if not rest:
            yield done
            return
        if start is None:
            return
        circuit = rest[0]
        below = self.panel.below(start)
        if circuit.poles == 1:
            after = below.number if below else None
            yield from self._stack(rest[1:], after, {**done, circuit.label: (Terminal(start),)})
            return
        if below is None or below.leg is self.panel.leg(start):
            return
        following = self.panel.below(below.number)
        after = following.number if following else None
        landing = (Terminal(start), Terminal(below.number))
        orientations = [landing, landing[::-1]] if circuit.volts is not Volts.V240 else [landing]
        for orientation in orientations:
            yield from self._stack(rest[1:], after, {**done, circuit.label: orientation})

    def _is_allowed(self, group: Sequence[Circuit], landings: Mapping[str, Landing]) -> bool:
        moved = [c for c in group if landings[c.label] != c.landing]
        if any(self._is_fixed(c) and c.is_landed for c in moved):
            return False
        if len(group) > 1 and not self._keeps_pairs_whole(group, landings):
            return False
        if not self._stays(group) and not self._tandems_fit(landings):
            return False
        return all(self._may_land(circuit, landings[circuit.label]) for circuit in moved)

    def _keeps_pairs_whole(self, group: Sequence[Circuit], landings: Mapping[str, Landing]) -> bool:
        """Both hots of a shared neutral on opposite legs, unless that is beyond mending."""
        if self.panel.supply.system is SupplySystem.IN_PHASE or self._stays(group):
            return True
        for first, second in shared_neutral_pairs(self.installation):
            if first in group:
                legs = {self.panel.leg(landings[c.label][0].space) for c in (first, second)}
                if len(legs) == 1:
                    return False
        return True

    def _tandems_fit(self, landings: Mapping[str, Landing]) -> bool:
        """Keep half-width breakers where they fit; one found elsewhere must go, where it can."""
        halves = [t.space for landing in landings.values() for t in landing if t.half]
        return self._spaces_hold(halves, self._tandem_spaces, Hold.TANDEM)

    def _may_land(self, circuit: Circuit, landing: Landing) -> bool:
        spaces = [terminal.space for terminal in landing]
        return (
            self._is_open(spaces)
            and self._is_within_reach(circuit, landing)
            and self._plug_on_fits(circuit, spaces)
            and self._bolt_on_fits(circuit, spaces)
        )

    def _is_open(self, spaces: Sequence[int]) -> bool:
        if (Hold.RESERVED, "") in self.ignored:
            return True
        return not any(space in self.panel.reserved for space in spaces)

    def _spaces_hold(self, spaces: Sequence[int], allowed: frozenset[int], hold: Hold) -> bool:
        return (hold, "") in self.ignored or all(space in allowed for space in spaces)

    def _is_within_reach(self, circuit: Circuit, landing: Landing) -> bool:
        if self.options.splice or (Hold.REACH, circuit.label) in self.ignored:
            return True
        if circuit.slack_in is None or not circuit.landing or circuit.hot_conductors == 0:
            return True
        return longest_reach_in(self.panel, circuit.landing, landing) <= circuit.slack_in

    def _plug_on_fits(self, circuit: Circuit, spaces: Sequence[int]) -> bool:
        """Keep a plug-on-neutral breaker beside the neutral bar.

        A GFCI or AFCI breaker found at the bar is taken for one unless its type says ``pigtail``.
        """
        allowed = self.panel.plug_on_neutral
        kind = circuit.breaker_type.casefold()
        was_at_bar = circuit.is_landed and all(t.space in allowed for t in circuit.landing)
        needs_bar = "plug-on" in kind or "plug on" in kind
        needs_bar = needs_bar or (circuit.has_gfci_or_afci and was_at_bar and "pigtail" not in kind)
        return not (needs_bar and allowed) or self._spaces_hold(spaces, allowed, Hold.PLUG_ON)

    def _bolt_on_fits(self, circuit: Circuit, spaces: Sequence[int]) -> bool:
        """Keep bolted breakers on bolted spaces and plugged ones on the others; a new one is bought to fit."""
        if not circuit.is_landed or (Hold.BOLT_ON, "") in self.ignored:
            return True
        was_bolted = circuit.landing[0].space in self.panel.bolt_on
        return all((space in self.panel.bolt_on) == was_bolted for space in spaces)

    def _placement(self, group: Sequence[Circuit], landings: Mapping[str, Landing]) -> Placement:
        changed, effort, reach = 0, 0, 0.0
        for circuit in group:
            moved = conductors_moved(circuit, landings[circuit.label])
            changed += moved
            effort += _effort_of(circuit, landings[circuit.label], moved)
            reach += total_reach_in(self.panel, circuit.landing, landings[circuit.label])
        return Placement(
            landings=tuple((c.label, landings[c.label]) for c in group),
            parts=_parts(landings.values()),
            signs=tuple(self._sign(c, landings[c.label]) for c in group),
            landings_changed=changed,
            effort=effort,
            reach_in=reach,
            row_rating_a=self._row_ratings(group, landings),
        )

    def _sign(self, circuit: Circuit, landing: Landing) -> int:
        if circuit.load.neutral_a == 0:
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


def conductors_moved(circuit: Circuit, landing: Landing) -> int:
    """Count the hot conductors whose terminal differs from the one as found; circuits not landed before cost none."""
    if not circuit.landing or circuit.hot_conductors == 0:
        return 0
    return sum(old != new for old, new in zip(circuit.landing, landing, strict=True))


def landing_effort(circuit: Circuit, landing: Landing) -> float:
    """Relative effort of landing a circuit there: its landings, weighted, and a GFCI or AFCI breaker's neutral."""
    moved = conductors_moved(circuit, landing)
    if not moved:
        return 0.0
    return moved * circuit.effort + (GFCI_AFCI_EFFORT if circuit.has_gfci_or_afci else 0.0)


def _effort_of(circuit: Circuit, landing: Landing, moved: int) -> int:
    if circuit.role is Role.SPARE:
        return _SPARE_MOVE if circuit.landing and landing != circuit.landing else 0
    return round(landing_effort(circuit, landing) * EFFORT_SCALE) if moved else 0


def removal_effort() -> int:
    """Effort in thousandths of a landing at which a spare breaker is taken out to make room."""
    return _SPARE_REMOVAL


def longest_reach_in(panel: Panel, old: Landing, new: Landing) -> float:
    """Longest conductor length [in] that one of a circuit's re-landings takes up."""
    reaches = (panel.reach_in(a.space, b.space) for a, b in zip(old, new, strict=True) if a != b)
    return max(reaches, default=0.0)


def total_reach_in(panel: Panel, old: Landing, new: Landing) -> float:
    """Conductor length [in] that a circuit's re-landings take up together; none for one not landed before."""
    if not old:
        return 0.0
    return math.fsum(panel.reach_in(a.space, b.space) for a, b in zip(old, new, strict=True) if a != b)
