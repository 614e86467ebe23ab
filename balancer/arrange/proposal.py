"""An arrangement up for judgement, and the facts about it that the solver-free re-check asks for.

All is worked out anew from the installation and the landings, so that a fault of the arrangement model shows.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property

from balancer.arrange.breakers import Body, breaker_bodies
from balancer.arrange.results import Options
from balancer.panel import (
    Arrangement,
    Circuit,
    Installation,
    Landing,
    Leg,
    Panel,
    SupplySystem,
    Terminal,
    Volts,
    format_landing,
)
from balancer.rules.landed import groups_by

Pair = tuple[Circuit, Circuit]
"""Two 120 V circuits on one neutral."""

Shift = tuple[int, int]
"""How far something moved: columns to the right, rows down."""

_GFCI_AFCI_EFFORT = 0.5
"""Extra effort, in landings, of moving a GFCI or AFCI breaker's neutral along."""


@dataclass(frozen=True)
class Proposal:
    """What is judged: landings as left, under the wishes that they are to keep."""

    installation: Installation
    options: Options
    as_left: Arrangement
    removed_spares: tuple[str, ...] = ()

    @property
    def panel(self) -> Panel:
        """The panel that it is for."""
        return self.installation.panel

    def left(self, circuit: Circuit) -> Landing:
        """Terminals of a circuit as left; empty where it has none."""
        return self.as_left.get(circuit.label, ())

    @cached_property
    def placed(self) -> tuple[Circuit, ...]:
        """Circuits that have a place as left, in the order of the inventory."""
        return tuple(circuit for circuit in self.installation.circuits if self.left(circuit))

    @cached_property
    def moved(self) -> tuple[Circuit, ...]:
        """Circuits with another place than the one as found."""
        return tuple(circuit for circuit in self.placed if circuit.is_landed and self.left(circuit) != circuit.landing)

    @cached_property
    def by_terminal(self) -> dict[Terminal, tuple[Circuit, ...]]:
        """The circuits on every terminal as left, by space and half."""
        found: dict[Terminal, tuple[Circuit, ...]] = {}
        for circuit in self.placed:
            for terminal in self.left(circuit):
                found[terminal] = (*found.get(terminal, ()), circuit)
        return dict(sorted(found.items()))

    @cached_property
    def bodies_found(self) -> tuple[Body, ...]:
        """Breaker bodies as found, each with all that is landed on it."""
        return breaker_bodies(self.installation.as_found)

    @cached_property
    def tied_groups(self) -> tuple[tuple[Circuit, ...], ...]:
        """Circuits with a place under a common `tied` label."""
        return tuple(group for group in groups_by(self.placed, lambda circuit: circuit.tied) if len(group) > 1)

    @cached_property
    def pairs(self) -> tuple[Pair, ...]:
        """Shared-neutral pairs: exactly two 120 V circuits under one label."""
        singles = [circuit for circuit in self.installation.circuits if circuit.volts is Volts.V120]
        groups = groups_by(singles, lambda circuit: circuit.shared_neutral)
        return tuple((group[0], group[1]) for group in groups if len(group) == 2)

    @property
    def has_opposite_legs(self) -> bool:
        """Whether two hots on one neutral cancel at all: not where both legs are in phase."""
        return self.panel.supply.system is not SupplySystem.IN_PHASE

    @cached_property
    def to_mend(self) -> frozenset[str]:
        """Labels of pairs found on one leg that may be put right: mending takes them out of what they share.

        One of the two may be fixed, where a full-width breaker fits beside it.
        """
        wrong = [
            pair
            for pair in self.pairs
            if self.has_opposite_legs
            and all(circuit.is_landed for circuit in pair)
            and len(self.legs(pair, self.installation.as_found)) == 1
            and _leaves_room_to_mend([circuit for circuit in pair if stays_put(circuit)])
        ]
        return frozenset(circuit.label for pair in wrong for circuit in pair)

    @cached_property
    def restacked(self) -> frozenset[str]:
        """Labels of pairs to mend and of new circuits, with all that hangs on them: they are put together anew."""
        anew = [c for c in self.installation.circuits if not c.is_landed or c.label in self.to_mend]
        return self._hanging_on(anew, self.installation.circuits)

    @cached_property
    def immovable(self) -> frozenset[str]:
        """Labels of what stays put, and of all that hangs on it."""
        landed = [circuit for circuit in self.installation.circuits if circuit.is_landed]
        held = [circuit for circuit in landed if stays_put(circuit) or circuit.poles == 2]
        # Three hots on one neutral are wrong wherever they are.
        held += [c for group in groups_by(landed, lambda c: c.shared_neutral) if len(group) > 2 for c in group]
        return self.hanging_on(held)

    def hanging_on(self, circuits: Iterable[Circuit]) -> frozenset[str]:
        """Labels of some circuits and of all landed ones that hang on them by a body, a tie or a shared neutral."""
        return self._hanging_on(circuits, [circuit for circuit in self.installation.circuits if circuit.is_landed])

    def _hanging_on(self, circuits: Iterable[Circuit], among: Sequence[Circuit]) -> frozenset[str]:
        joined = groups_by(among, lambda c: c.tied) + groups_by(among, lambda c: c.shared_neutral)
        groups = [body.circuits for body in self.bodies_found]
        groups += [tuple(circuit.label for circuit in group) for group in joined]
        found = {circuit.label for circuit in circuits}
        while more := {label for group in groups if found & set(group) for label in group} - found:
            found |= more
        return frozenset(found)

    def legs(self, pair: Pair, arrangement: Mapping[str, Landing]) -> tuple[Leg, ...]:
        """Legs that the hots of a pair are on, each once."""
        return tuple(dict.fromkeys(self.panel.leg(arrangement[circuit.label][0].space) for circuit in pair))

    def shift(self, circuit: Circuit) -> Shift | None:
        """Give how far a landed circuit moved; None where it changed its width or its poles went different ways."""
        old, new = circuit.landing, self.left(circuit)
        if new == old[::-1]:
            return (0, 0)
        if [terminal.half for terminal in old] != [terminal.half for terminal in new]:
            return None
        shifts = list(dict.fromkeys(self._offset(a.space, b.space) for a, b in zip(old, new, strict=True)))
        return shifts[0] if len(shifts) == 1 else None

    def _offset(self, here: int, there: int) -> Shift:
        old, new = self.panel.by_number[here], self.panel.by_number[there]
        return (new.column - old.column, new.row - old.row)

    def are_next_to_each_other(self, one: Terminal, other: Terminal) -> bool:
        """Whether two terminals are in spaces one below the other in a column."""
        column, row = self._offset(one.space, other.space)
        return column == 0 and abs(row) == 1

    @cached_property
    def landings_changed(self) -> int:
        """Hot conductors whose terminal is another than as found; circuits not landed before cost none."""
        return sum(self._landings_of(circuit) for circuit in self.moved)

    @cached_property
    def effort(self) -> float:
        """Landings weighted with each circuit's effort, and the neutrals of GFCI and AFCI breakers moved along."""
        return sum(
            self._landings_of(circuit) * circuit.effort + (_GFCI_AFCI_EFFORT if circuit.has_gfci_or_afci else 0.0)
            for circuit in self.moved
            if circuit.hot_conductors
        )

    def _landings_of(self, circuit: Circuit) -> int:
        if not circuit.hot_conductors:
            return 0
        return sum(old != new for old, new in zip(circuit.landing, self.left(circuit), strict=True))

    def name(self, circuit: Circuit) -> str:
        """Name a circuit with its place as found and as left."""
        found, left = format_landing(circuit.landing), format_landing(self.left(circuit))
        if found and found == left:
            return f"{circuit.label} ({found})"
        return f"{circuit.label} ({found or 'not landed'} as found, {left or 'no place'} as left)"


def stays_put(circuit: Circuit) -> bool:
    """Whether the inventory says that it stays where it is landed."""
    return circuit.is_landed and (circuit.is_fixed or circuit.role.is_device)


def _leaves_room_to_mend(held: Sequence[Circuit]) -> bool:
    """Whether a pair of which these stay put can be put right."""
    return not held or (len(held) == 1 and not any(terminal.half for terminal in held[0].landing))
