"""The order of the moves: as few conductors set aside at any time as the panel allows."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from balancer.panel import Terminal

_STATES_SEARCHED = 20_000
"""Sets of lifted conductors looked at before the first order found is taken as it is."""


@dataclass(frozen=True, kw_only=True)
class Item:
    """What is lifted and landed in one go. `conductors` are the hot conductors that hang loose while it is aside.

    `source` are the terminals that it blocks until it goes; circuits without a place as found have none.
    """

    circuits: tuple[str, ...]
    source: frozenset[Terminal]
    target: frozenset[Terminal]
    conductors: int


@dataclass(frozen=True)
class Operation:
    """One move: the item at an index goes to its target, after the items `lifted_before` it were set aside."""

    item: int
    lifted_before: tuple[int, ...]
    was_lifted: bool


@dataclass(frozen=True)
class MoveOrder:
    """Operations in order, and the most hot conductors set aside at any one time."""

    operations: tuple[Operation, ...]
    max_loose: int


def order_moves(items: Sequence[Item]) -> MoveOrder:
    """Order the moves so that the fewest conductors are set aside at any time.

    Notes
    -----
    An item waits for those on its target. Items that wait for each other form a knot; a knot that waits for nothing
    outside itself is undone first, so knots never add up. A chain towards a vacant place takes no conductor aside, a
    round of single conductors one.
    """
    blockers = _blockers(items)
    reach = _reachable(blockers)
    peak, operations, done = 0, list[Operation](), 0
    while done != (1 << len(items)) - 1:
        knot = _free_knot(reach, done)
        lifts = _fewest_loose(items, blockers, knot)
        replay = _Replay(items, blockers, knot)
        operations += replay.run(lifts)
        peak = max(peak, replay.peak)
        done |= knot
    return MoveOrder(tuple(operations), peak)


def _places(terminals: frozenset[Terminal]) -> frozenset[tuple[int, str]]:
    return frozenset(part for terminal in terminals for part in terminal.parts)


def _blockers(items: Sequence[Item]) -> list[int]:
    """For every item the set of others, as bits, that must leave its target first."""
    sources = [_places(item.source) for item in items]
    masks = []
    for index, item in enumerate(items):
        target = _places(item.target)
        masks.append(sum(1 << j for j, source in enumerate(sources) if j != index and source & target))
    return masks


def _bits(mask: int) -> Iterator[int]:
    while mask:
        low = mask & -mask
        yield low.bit_length() - 1
        mask ^= low


def _reachable(blockers: Sequence[int]) -> list[int]:
    reach = list(blockers)
    for middle in range(len(reach)):
        for index, mask in enumerate(reach):
            if mask >> middle & 1:
                reach[index] |= reach[middle]
    return reach


def _free_knot(reach: Sequence[int], done: int) -> int:
    """First set of items, as bits, that wait for each other (or one alone) and for nothing else that is not done."""
    for index, mask in enumerate(reach):
        if done >> index & 1:
            continue
        knot = 1 << index | sum(1 << j for j in _bits(mask) if reach[j] >> index & 1)
        if not mask & ~knot & ~done:
            return knot
    message = "every finite graph has a free knot"
    raise AssertionError(message)


def _clear(blockers: Sequence[int], knot: int, aside: int, done: int) -> tuple[int, int]:
    """Move and land everything in the knot whose target is free, until nothing more is."""
    moved = True
    while moved:
        moved = False
        for index in _bits(knot & ~done):
            if not blockers[index] & knot & ~(aside | done):
                aside &= ~(1 << index)
                done |= 1 << index
                moved = True
    return aside, done


def _fewest_loose(items: Sequence[Item], blockers: Sequence[int], knot: int) -> tuple[int, ...]:
    """Find which items to lift, in order, whenever the knot is stuck, so that the fewest conductors are ever aside."""
    states = 0
    total = sum(items[index].conductors for index in _bits(knot))
    for limit in range(total + 1):
        if states > _STATES_SEARCHED and limit < total:
            continue
        seen: set[tuple[int, int]] = set()
        stack: list[tuple[int, int, tuple[int, ...]]] = [(0, 0, ())]
        while stack:
            aside, done, lifts = stack.pop()
            aside, done = _clear(blockers, knot, aside, done)
            if done == knot:
                return lifts
            if (aside, done) in seen:
                continue
            seen.add((aside, done))
            loose = sum(items[index].conductors for index in _bits(aside))
            # Pushed in reverse, so that the first item in the list is tried first.
            for index in reversed(list(_bits(knot & ~(aside | done)))):
                if loose + items[index].conductors <= limit:
                    stack.append((aside | 1 << index, done, (*lifts, index)))
        states += len(seen)
    message = "with everything lifted every knot comes undone"
    raise AssertionError(message)


class _Replay:
    """Carries out the lifts of one knot, moving on whenever something can move, and keeps count."""

    def __init__(self, items: Sequence[Item], blockers: Sequence[int], knot: int) -> None:
        self.items, self.blockers, self.knot = items, blockers, knot
        self.aside = self.done = self.peak = 0
        self.last: int | None = None

    def run(self, lifts: Sequence[int]) -> Iterator[Operation]:
        pending = list(lifts)
        lifted: list[int] = []
        while self.done != self.knot:
            index = self._next_free()
            if index is None:
                lifted.append(pending.pop(0))
                self._lift(lifted[-1])
                continue
            yield Operation(index, tuple(lifted), bool(self.aside >> index & 1))
            lifted = []
            self._land(index)

    def _next_free(self) -> int | None:
        free = [
            index
            for index in _bits(self.knot & ~self.done)
            if not self.blockers[index] & self.knot & ~(self.aside | self.done)
        ]
        # Going on to the place just left keeps the work in one corner of the panel.
        following = [i for i in free if self.last is not None and self.blockers[i] >> self.last & 1]
        return next(iter(following or free), None)

    def _lift(self, index: int) -> None:
        self.aside |= 1 << index
        self.last = index
        self.peak = max(self.peak, sum(self.items[i].conductors for i in _bits(self.aside)))

    def _land(self, index: int) -> None:
        if self.items[index].source == self.items[index].target:
            # Two conductors of one breaker change places: one of them hangs loose meanwhile.
            self.peak = max(self.peak, self.items[index].conductors // 2)
        self.aside &= ~(1 << index)
        self.done |= 1 << index
        self.last = index
