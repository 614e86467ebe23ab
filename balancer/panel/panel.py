"""The panel on the wall: numbered spaces with their column, row and leg, and what each of them allows."""

from __future__ import annotations

from dataclasses import dataclass, field
from enum import StrEnum
from functools import cached_property

from balancer.panel.circuit import Circuit, Wire
from balancer.panel.terminals import Arrangement


class Leg(StrEnum):
    """One of the two hot legs."""

    A = "A"
    B = "B"

    @property
    def other(self) -> Leg:
        """The opposite leg."""
        return Leg.B if self is Leg.A else Leg.A


class SupplySystem(StrEnum):
    """How the two legs stand to each other."""

    SPLIT = "120/240"
    """180 degrees apart: a single-phase three-wire service."""
    WYE = "120/208"
    """Two legs of a four-wire wye, 120 degrees apart."""
    IN_PHASE = "120"
    """One 120 V source feeding both legs: the neutral carries the sum."""


@dataclass(frozen=True, kw_only=True)
class Supply:
    """What feeds the panel. Impedance fields are None where the panel file does not give them.

    `leading_leg` matters on a wye only; None means not known, and the worse of both counts. `is_trip_per_leg` says that
    an inverter or generator feeds the panel, which trips per leg.
    """

    system: SupplySystem = SupplySystem.SPLIT
    leading_leg: Leg | None = None
    is_trip_per_leg: bool = False
    transformer_kva: float | None = None
    impedance_pct: float | None = None
    service_wire: Wire | None = None
    neutral_wire: Wire | None = None
    length_ft: float | None = None


@dataclass(frozen=True)
class Space:
    """One breaker position: its number, column (0 left, 1 right), row (1 at the top) and leg."""

    number: int
    column: int
    row: int
    leg: Leg


@dataclass(frozen=True, kw_only=True)
class Panel:
    """A panelboard. Ratings in amperes [A], distances in inches [in]; None is "not said".

    `tandem_spaces` None means that nobody said where half-width breakers fit.
    """

    spaces: tuple[Space, ...]
    name: str = ""
    main_a: float | None = None
    bus_a: float | None = None
    feed: str = "top"
    tandem_spaces: frozenset[int] | None = None
    plug_on_neutral: frozenset[int] = frozenset()
    bolt_on: frozenset[int] = frozenset()
    reserved: frozenset[int] = frozenset()
    crossing_in: float = 12.0
    stab_a: float | None = None
    supply: Supply = Supply()
    is_assumed: bool = False
    """True where no panel file was given and the panel is the ordinary one that holds the highest space."""

    @cached_property
    def by_number(self) -> dict[int, Space]:
        """Every space by its number."""
        return {space.number: space for space in self.spaces}

    @cached_property
    def _by_place(self) -> dict[tuple[int, int], Space]:
        return {(space.column, space.row): space for space in self.spaces}

    @property
    def rows(self) -> int:
        """Rows from the top to the lowest space."""
        return max(space.row for space in self.spaces)

    @property
    def columns(self) -> tuple[int, ...]:
        """Columns from left to right."""
        return tuple(sorted({space.column for space in self.spaces}))

    def leg(self, number: int) -> Leg:
        """Leg of a space."""
        return self.by_number[number].leg

    def at(self, column: int, row: int) -> Space | None:
        """Give the space at a place, or None where the panel has none."""
        return self._by_place.get((column, row))

    def below(self, number: int) -> Space | None:
        """Give the next space down the same column, or None at the end."""
        space = self.by_number[number]
        return self.at(space.column, space.row + 1)

    @cached_property
    def two_pole_seats(self) -> tuple[tuple[int, int], ...]:
        """Vertically adjacent spaces of one column on opposite legs, as (upper, lower), by number."""
        seats = []
        for space in self.spaces:
            lower = self.below(space.number)
            if lower is not None and lower.leg is not space.leg:
                seats.append((space.number, lower.number))
        return tuple(seats)

    def reach_in(self, here: int, there: int) -> float:
        """Conductor length [in] that a re-landing takes up: 1 in a row, plus `crossing_in` to change columns."""
        a, b = self.by_number[here], self.by_number[there]
        return abs(a.row - b.row) + (self.crossing_in if a.column != b.column else 0.0)


def ordinary_spaces(count: int, row_legs: str = "", *, numbered_down: bool = False) -> tuple[Space, ...]:
    """Lay out `count` spaces in two columns.

    Parameters
    ----------
    count
        Number of spaces; common practice (from memory) has odd numbers left, even right, 1 and 2 in the top row.
    row_legs
        Leg of every row from the top, ``"ABAB..."``; shorter text repeats, blank is ``"AB"``.
    numbered_down
        Numbers run down the left column, then down the right one.

    Returns
    -------
    tuple of Space
        In order of their numbers.
    """
    legs = (row_legs or "AB").upper()
    rows = (count + 1) // 2
    spaces = []
    for number in range(1, count + 1):
        if numbered_down:
            column, row = divmod(number - 1, rows)
            row += 1
        else:
            column, row = (number + 1) % 2, (number + 1) // 2
        spaces.append(Space(number, column, row, Leg(legs[(row - 1) % len(legs)])))
    return tuple(spaces)


@dataclass(frozen=True, kw_only=True)
class Installation:
    """A panel and the circuits of its inventory: all that the rest of the program works on."""

    panel: Panel
    circuits: tuple[Circuit, ...]
    inventory_file: str = ""
    columns: tuple[str, ...] = field(default=(), compare=False)
    """Header of the inventory as written, for saving."""
    notices: tuple[str, ...] = field(default=(), compare=False)
    """What the reader wants said: unknown columns, assumed panel, assumed loads."""

    @cached_property
    def by_label(self) -> dict[str, Circuit]:
        """Every circuit by its label."""
        return {circuit.label: circuit for circuit in self.circuits}

    @cached_property
    def as_found(self) -> Arrangement:
        """The landings of the circuits that have one."""
        return {circuit.label: circuit.landing for circuit in self.circuits if circuit.landing}
