"""Exact seat assignment: give every unit a seat on the legs that an answer chose, with the least effort."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property

from ortools.sat.python import cp_model

from balancer.arrange.clock import Clock
from balancer.arrange.placements import SPARE_REMOVAL_EFFORT, Part, Placement, Unit
from balancer.arrange.solve import SolveStatus, solve
from balancer.panel import Arrangement, Panel

_SEAT_WORK_S = 20.0
_REACH_SCALE = 10
_RATING_SCALE = 10


@dataclass(frozen=True)
class Seating:
    """A placement for every unit, None for a spare that was taken out."""

    units: tuple[Unit, ...]
    placements: tuple[Placement | None, ...]

    @property
    def arrangement(self) -> Arrangement:
        """Landing of every circuit that has a seat."""
        return {label: landing for p in self.placements if p is not None for label, landing in p.landings}

    @property
    def effort(self) -> int:
        """Effort in thousandths of a landing, with what moving and taking out spares costs."""
        return sum(SPARE_REMOVAL_EFFORT if p is None else p.effort for p in self.placements)

    @property
    def spares_effort(self) -> int:
        """What of the effort is for moving and taking out spares, in thousandths of a landing."""
        spares = [p for u, p in zip(self.units, self.placements, strict=True) if u.is_optional]
        return sum(SPARE_REMOVAL_EFFORT if p is None else p.effort for p in spares)

    @property
    def landings_changed(self) -> int:
        """Hot conductors whose terminal differs from the one as found."""
        return sum(p.landings_changed for p in self.placements if p is not None)

    @property
    def removed(self) -> tuple[str, ...]:
        """Labels of landed spares that were taken out."""
        return tuple(
            circuit.label
            for unit, placement in zip(self.units, self.placements, strict=True)
            if placement is None
            for circuit in unit.circuits
            if circuit.is_landed
        )


def row_limits_a(stab_a: float | None, units: Sequence[Unit]) -> dict[int, float]:
    """Limit of the handle ratings [A] in every row: `stab_a`, or what is there as found and cannot leave; none without.

    All placements of the units count, whichever legs are chosen later.
    """
    if stab_a is None:
        return {}
    limits: dict[int, float] = {}
    for unit in units:
        ratings = [dict(placement.row_rating_a) for placement in unit.placements]
        for row in sorted({row for rating in ratings for row in rating}):
            found = dict(unit.as_found.row_rating_a).get(row, 0.0) if unit.as_found else 0.0
            stuck = 0.0 if unit.is_optional else min(found, *(rating.get(row, 0.0) for rating in ratings))
            limits[row] = limits.get(row, 0.0) + stuck
    return {row: max(stab_a, stuck) for row, stuck in limits.items()}


class SeatModel:
    """Seats as CP-SAT literals: each unit takes one of its placements, each half space holds one breaker."""

    def __init__(self, model: cp_model.CpModel, units: Sequence[Unit], row_limits_a: Mapping[int, float]) -> None:
        self.model = model
        self.units = tuple(units)
        self.seats = [[model.new_bool_var(f"{u.name} at {p.landings}") for p in u.placements] for u in units]
        self._add_one_seat_each()
        self._add_one_breaker_a_part()
        self._add_stab_limits(row_limits_a)

    def _add_one_seat_each(self) -> None:
        for unit, seats in zip(self.units, self.seats, strict=True):
            if unit.is_optional:
                self.model.add_at_most_one(seats)
            else:
                self.model.add_exactly_one(seats)

    def _pairs(self) -> list[tuple[Unit, Placement, cp_model.IntVar]]:
        return [
            (unit, placement, seat)
            for unit, seats in zip(self.units, self.seats, strict=True)
            for placement, seat in zip(unit.placements, seats, strict=True)
        ]

    def _add_one_breaker_a_part(self) -> None:
        users: dict[Part, list[cp_model.IntVar]] = {}
        for _, placement, seat in self._pairs():
            for part in placement.parts:
                users.setdefault(part, []).append(seat)
        # Both halves of a space mostly have the same users: one constraint serves both.
        for seats in {tuple(v.index for v in seats): seats for seats in users.values()}.values():
            self.model.add_at_most_one(seats)

    def _add_stab_limits(self, row_limits_a: Mapping[int, float]) -> None:
        rows: dict[int, list[tuple[int, cp_model.IntVar]]] = {}
        for _, placement, seat in self._pairs():
            for row, rating in placement.row_rating_a:
                rows.setdefault(row, []).append((round(rating * _RATING_SCALE), seat))
        for row, terms in rows.items():
            if row in row_limits_a:
                total = cp_model.LinearExpr.weighted_sum([seat for _, seat in terms], [rating for rating, _ in terms])
                self.model.add(total <= round(row_limits_a[row] * _RATING_SCALE))

    @cached_property
    def effort(self) -> cp_model.LinearExpr:
        """Effort of the seating in thousandths of a landing."""
        terms = self._pairs()
        optional = sum(SPARE_REMOVAL_EFFORT for unit in self.units if unit.is_optional)
        costs = [p.effort - (SPARE_REMOVAL_EFFORT if unit.is_optional else 0) for unit, p, _ in terms]
        total = cp_model.LinearExpr.weighted_sum([seat for _, _, seat in terms], costs)
        return cp_model.LinearExpr.affine(total, 1, optional)

    @cached_property
    def landings_changed(self) -> cp_model.LinearExpr:
        """Landings changed by the seating."""
        terms = self._pairs()
        return cp_model.LinearExpr.weighted_sum([s for _, _, s in terms], [p.landings_changed for _, p, _ in terms])

    @cached_property
    def reach(self) -> cp_model.LinearExpr:
        """Conductor length that the re-landings take up, in tenths of an inch."""
        terms = self._pairs()
        lengths = [round(p.reach_in * _REACH_SCALE) for _, p, _ in terms]
        return cp_model.LinearExpr.weighted_sum([seat for _, _, seat in terms], lengths)

    @property
    def flat(self) -> list[cp_model.IntVar]:
        """Every seat literal, unit by unit."""
        return [seat for seats in self.seats for seat in seats]

    def seating(self, values: Sequence[int]) -> Seating:
        """Read a seating from the values of `flat`."""
        placements: list[Placement | None] = []
        start = 0
        for unit in self.units:
            chosen = values[start : start + len(unit.placements)]
            start += len(unit.placements)
            placements.append(unit.placements[chosen.index(1)] if 1 in chosen else None)
        return Seating(self.units, tuple(placements))


class Seater:
    """Finds seats for answers, and remembers them."""

    def __init__(self, panel: Panel, units: tuple[Unit, ...], max_landings: int | None, clock: Clock) -> None:
        self._units = units
        self._row_limits_a = row_limits_a(panel.stab_a, units)
        self.max_landings = max_landings
        self._clock = clock
        self._known: dict[tuple[tuple[int, ...], ...], Seating | None] = {}
        self.has_given_up = False
        """Whether some answer was left undecided: then no seats found does not mean that there are none."""
        self.has_settled_for_more = False
        """Whether some seats were taken that may not be those of the least effort."""

    def least_effort(self, signs: tuple[tuple[int, ...], ...]) -> Seating | None:
        """Seating of least effort for a pattern of every unit; None where there is none."""
        if signs not in self._known:
            easy = self._each_at_its_best(signs)
            self._known[signs] = easy if easy is not None else self._solve(signs, lambda s: s.model.minimize(s.effort))
        return self._known[signs]

    def _each_at_its_best(self, signs: tuple[tuple[int, ...], ...]) -> Seating | None:
        """Every unit on its own least effort, where they do not get in each other's way: the panel as found, mostly."""
        placements = []
        for unit, wanted in zip(self._units, signs, strict=True):
            matching = [placement for placement in unit.placements if placement.signs == wanted]
            placements.append(min(matching, key=lambda placement: placement.effort))
        parts = [part for placement in placements for part in placement.parts]
        rows: dict[int, float] = {}
        for placement in placements:
            for row, rating in placement.row_rating_a:
                rows[row] = rows.get(row, 0.0) + rating
        seating = Seating(self._units, tuple(placements))
        fits = len(parts) == len(set(parts))
        fits = fits and all(rating <= self._row_limits_a.get(row, rating) for row, rating in rows.items())
        fits = fits and (self.max_landings is None or seating.landings_changed <= self.max_landings)
        return seating if fits else None

    def canonical(self, signs: tuple[tuple[int, ...], ...], seating: Seating) -> Seating:
        """Choose among the seatings of the same effort: the least reach, then unit by unit the earliest placement."""
        seating = self._shortest(signs, seating)
        for index, unit in enumerate(self._units):
            first = next(placement for placement in unit.placements if placement.signs == signs[index])
            if seating.placements[index] is not first:
                seating = self._settle_one(signs, seating, index) or seating
        return seating

    def _shortest(self, signs: tuple[tuple[int, ...], ...], seating: Seating) -> Seating:
        """Seating of the same effort whose conductors reach least."""

        def aim(seats: SeatModel) -> None:
            seats.model.add(seats.effort <= seating.effort)
            seats.model.minimize(seats.reach)

        return self._solve(signs, aim) or seating

    def _settle_one(self, signs: tuple[tuple[int, ...], ...], seating: Seating, index: int) -> Seating | None:
        """Give a unit its earliest placement, the units before it as they are; a spare comes out last of all."""
        reach = sum(round(p.reach_in * _REACH_SCALE) for p in seating.placements if p is not None)

        def aim(seats: SeatModel) -> None:
            seats.model.add(seats.effort <= seating.effort)
            seats.model.add(seats.reach <= reach)
            settled = zip(seats.units[:index], seats.seats, seating.placements, strict=False)
            for unit, literals, wanted in settled:
                for placement, literal in zip(unit.placements, literals, strict=True):
                    seats.model.add(literal == int(placement is wanted))
            ranks = [rank - len(seats.seats[index]) for rank in range(len(seats.seats[index]))]
            seats.model.minimize(cp_model.LinearExpr.weighted_sum(seats.seats[index], ranks))

        return self._solve(signs, aim)

    def _solve(self, signs: tuple[tuple[int, ...], ...], aim: Callable[[SeatModel], None]) -> Seating | None:
        model = cp_model.CpModel()
        narrowed = [
            Unit(unit.circuits, tuple(p for p in unit.placements if p.signs == wanted), unit.is_optional)
            for unit, wanted in zip(self._units, signs, strict=True)
        ]
        seats = SeatModel(model, narrowed, self._row_limits_a)
        if self.max_landings is not None:
            model.add(seats.landings_changed <= self.max_landings)
        aim(seats)
        solved = solve(model, seats.flat, self._clock, _SEAT_WORK_S, is_assignment=True)
        self.has_given_up |= solved.status is SolveStatus.UNKNOWN
        self.has_settled_for_more |= solved.status is SolveStatus.FEASIBLE
        if not solved.status.has_answer:
            return None
        return Seating(self._units, seats.seating(solved.values).placements)
