"""Which breaker each circuit ends on: one that stays, the circuit's own that goes along, or a new one."""

from __future__ import annotations

import itertools
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from enum import StrEnum
from functools import cached_property

from balancer.panel import Arrangement, Circuit, Installation, Landing, Terminal
from balancer.rules import conductor_limit_a
from balancer.rules.landed import LandedPanel

Kind = tuple[float, str]
"""What makes two breakers equal: rating [A] and type."""

Tie = frozenset[str]
"""Labels of two circuits whose handles are tied or that share a two-pole breaker."""


class Source(StrEnum):
    """Where the breaker comes from that a circuit ends on."""

    STAYS = "stays"
    GOES_ALONG = "goes along"
    NEW = "new"


@dataclass(frozen=True)
class Body:
    """One breaker body: everything landed on it, and the terminals in use, by space."""

    circuits: tuple[str, ...]
    terminals: tuple[Terminal, ...]

    @property
    def spaces(self) -> frozenset[int]:
        """Spaces that it fills."""
        return frozenset(terminal.space for terminal in self.terminals)


@dataclass(frozen=True)
class BreakerPlan:
    """The source of every as-left circuit's breaker.

    `ties_found` and `ties_left` are the pairs that stand tied before and after. `taken_out` are as-found bodies that
    neither stay nor go along.
    """

    source: Mapping[str, Source]
    ties_found: frozenset[Tie]
    ties_left: frozenset[Tie]
    taken_out: tuple[Body, ...]


def needed_rating_a(circuit: Circuit) -> float | None:
    """Give the rating [A] of the breaker that a moved circuit ends on; None where its breaker is not known.

    The lesser of its as-found breaker and its conductor's limit: no conductor ends on more.
    """
    limit_a = conductor_limit_a(circuit)
    if circuit.breaker_a is None or limit_a is None:
        return circuit.breaker_a
    return min(circuit.breaker_a, limit_a)


def plan_breakers(installation: Installation, as_left: Arrangement) -> BreakerPlan:
    """Decide for every as-left circuit where its breaker comes from.

    Notes
    -----
    A breaker stays where the circuit that arrives needs exactly its rating and type, where that one leaves a breaker
    that stays too, and where every circuit that leaves it arrives at another breaker that stays. So conductors change
    places on standing breakers in closed rounds only, and breakers neither run out nor are left over; everywhere else
    the breaker goes with its circuit. A new circuit may end a round on the breaker of a spare that gives way.
    """
    return _Assignment(installation, as_left).plan()


def breaker_bodies(arrangement: Mapping[str, Landing]) -> tuple[Body, ...]:
    """Group circuits by the breaker body they are on: whatever shares a space does, two-pole landings join theirs."""
    groups: list[tuple[set[int], list[str]]] = []
    for label, landing in arrangement.items():
        spaces, labels = {terminal.space for terminal in landing}, [label]
        apart = []
        for group in groups:
            if group[0] & spaces:
                spaces |= group[0]
                labels = group[1] + labels
            else:
                apart.append(group)
        groups = [*apart, (spaces, labels)]
    return tuple(
        Body(tuple(labels), tuple(sorted({terminal for label in labels for terminal in arrangement[label]})))
        for _, labels in groups
    )


def tied_pairs(installation: Installation, arrangement: Mapping[str, Landing]) -> frozenset[Tie]:
    """Find the single-pole circuits with a common label whose handles stand side by side."""
    landed = LandedPanel(installation, arrangement)
    singles = [c for c in installation.circuits if c.poles == 1 and arrangement.get(c.label)]
    return frozenset(
        frozenset((one.label, other.label))
        for one, other in itertools.combinations(singles, 2)
        if _belong_together(one, other)
        and landed.are_handles_adjacent(arrangement[one.label][0], arrangement[other.label][0])
    )


def _belong_together(one: Circuit, other: Circuit) -> bool:
    return any(
        mine and mine.casefold() == theirs.casefold()
        for mine, theirs in ((one.shared_neutral, other.shared_neutral), (one.tied, other.tied))
    )


class _Assignment:
    """Works out one breaker plan."""

    def __init__(self, installation: Installation, as_left: Arrangement) -> None:
        self.circuits = installation.by_label
        self.found = installation.as_found
        self.left = {label: landing for label, landing in as_left.items() if landing}
        self.ties_found = tied_pairs(installation, self.found)
        self.ties_left = tied_pairs(installation, self.left)
        self.found_bodies = breaker_bodies(self.found)
        self.left_bodies = breaker_bodies(self.left)

    def plan(self) -> BreakerPlan:
        staying = self._staying()
        source = {label: Source.STAYS for body in staying for label in body.circuits}
        stayed_spaces = frozenset(space for body in staying for space in body.spaces)
        waiting = [body for body in self.found_bodies if not body.spaces & stayed_spaces]
        for body in self.left_bodies:
            if body in staying:
                continue
            own = next((each for each in waiting if self._can_follow(each, body)), None)
            if own is not None:
                waiting.remove(own)
            source.update(dict.fromkeys(body.circuits, Source.GOES_ALONG if own else Source.NEW))
        return BreakerPlan(source, self.ties_found, self.ties_left, tuple(waiting))

    def _staying(self) -> list[Body]:
        """As-left bodies whose breaker is the one found there: the largest choice that closes upon itself."""
        staying = [body for body in self.left_bodies if self._fits(body)]
        while True:
            closed = [body for body in staying if self._is_untouched(body) or self._is_closed(body, staying)]
            if len(closed) == len(staying):
                return closed
            staying = closed

    def _is_untouched(self, body: Body) -> bool:
        return all(self.found.get(label) == self.left[label] for label in body.circuits)

    def _is_closed(self, body: Body, staying: Sequence[Body]) -> bool:
        served = {label for each in staying for label in each.circuits}
        spaces = {space for each in staying for space in each.spaces}
        leaving = [label for each in self.found_bodies if each.spaces & body.spaces for label in each.circuits]
        partners = [label for tie in self.ties_left for label in tie if tie & set(body.circuits)]
        came_from = {terminal.space for label in body.circuits for terminal in self.found.get(label, ())}
        return came_from <= spaces and all(label in served for label in (*leaving, *partners) if label in self.left)

    def _fits(self, body: Body) -> bool:
        if self._is_untouched(body):
            return True
        if not set(body.terminals) <= self._circuits_found.keys():
            return False
        return (
            self._keeps_poles(body)
            and self._keeps_ties(body)
            and all(
                self._fits_terminal(self.circuits[label], terminal)
                for label in body.circuits
                for terminal in self.left[label]
            )
        )

    def _keeps_poles(self, body: Body) -> bool:
        """Whether two-pole circuits end on two-pole breakers found there, and single circuits on single ones."""
        return all(
            set(self.left[label]) == set(self.found[other])
            for label in body.circuits
            for terminal in self.left[label]
            for other in self._circuits_found[terminal]
        )

    @cached_property
    def _circuits_found(self) -> dict[Terminal, tuple[str, ...]]:
        by_terminal: dict[Terminal, tuple[str, ...]] = {}
        for label, landing in self.found.items():
            for terminal in landing:
                by_terminal[terminal] = (*by_terminal.get(terminal, ()), label)
        return by_terminal

    def _fits_terminal(self, circuit: Circuit, terminal: Terminal) -> bool:
        """Whether the breaker found on a terminal is the circuit's own or equal to what it needs."""
        here = self._circuits_found[terminal]
        if circuit.label in here:
            return True
        needed_a = needed_rating_a(circuit)
        kinds = {_kind(self.circuits[label]) for label in here}
        return bool(needed_a and circuit.breaker_type) and kinds == {(needed_a, circuit.breaker_type.casefold())}

    def _keeps_ties(self, body: Body) -> bool:
        """Whether the body's handles are tied to the same terminals as found: a common disconnect stays one."""
        spots = set(body.terminals)
        return _tied_terminals(self.ties_found, self.found, spots) == _tied_terminals(self.ties_left, self.left, spots)

    def _can_follow(self, found: Body, left: Body) -> bool:
        """Whether a body taken up with its circuits fills the new place: same shape, none of them above its limit."""
        if not set(left.circuits) <= set(found.circuits):
            return False
        if any(needed_rating_a(self.circuits[label]) != self.circuits[label].breaker_a for label in left.circuits):
            return False
        return _shape(self.found, left.circuits) == _shape(self.left, left.circuits)


def _kind(circuit: Circuit) -> Kind | None:
    if circuit.breaker_a is None or not circuit.breaker_type:
        return None
    return (circuit.breaker_a, circuit.breaker_type.casefold())


def _tied_terminals(
    ties: frozenset[Tie], arrangement: Mapping[str, Landing], spots: set[Terminal]
) -> frozenset[tuple[Terminal, ...]]:
    landings = (tuple(sorted(arrangement[label][0] for label in tie)) for tie in ties)
    return frozenset(pair for pair in landings if spots & set(pair))


def _shape(arrangement: Mapping[str, Landing], labels: Iterable[str]) -> tuple[object, ...]:
    """How circuits sit on their body: poles in use, whole or halves, and which of them a two-pole circuit has."""
    landings = [arrangement[label] for label in labels]
    rank = {space: index for index, space in enumerate(sorted({t.space for landing in landings for t in landing}))}
    poles = sorted((rank[t.space], bool(t.half)) for landing in landings for t in landing)
    inner = sorted(sorted((rank[t.space], t.half) for t in landing) for landing in landings if len(landing) > 1)
    return (tuple(poles), tuple(map(tuple, inner)))
