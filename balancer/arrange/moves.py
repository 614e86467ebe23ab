"""Where a unit could go by its own shape: staying, shifting whole, turning over, stacking. No limits are asked here."""

from __future__ import annotations

import itertools
from collections.abc import Iterator, Sequence

from balancer.arrange.grouping import keeps_company
from balancer.panel import Arrangement, Circuit, Installation, Terminal, Volts

_MOST_ORDERED = 5
"""Up to here every order of new circuits that go together is tried; beyond, the inventory's and its reverse."""


def single_moves(installation: Installation, circuit: Circuit) -> Iterator[Arrangement]:
    """Seat a full-width single-pole breaker in every space."""
    for space in installation.panel.spaces:
        yield {circuit.label: (Terminal(space.number),)}


def pair_moves(installation: Installation, group: Sequence[Circuit]) -> Iterator[Arrangement]:
    """Seat a shared-neutral pair in adjacent spaces on opposite legs, either way up."""
    first, second = group
    for upper, lower in installation.panel.two_pole_seats:
        yield {first.label: (Terminal(upper),), second.label: (Terminal(lower),)}
        yield {first.label: (Terminal(lower),), second.label: (Terminal(upper),)}


def rigid_moves(installation: Installation, group: Sequence[Circuit]) -> Iterator[Arrangement]:
    """Shift a landed body, halves and all, to every place of the same shape."""
    anchor = min(t.space for c in group for t in c.landing)
    for target in installation.panel.spaces:
        moved: Arrangement = {}
        for circuit in group:
            landing = [_shifted(installation, t, anchor, target.number) for t in circuit.landing]
            moved[circuit.label] = tuple(t for t in landing if t is not None)
        if all(len(moved[circuit.label]) == len(circuit.landing) for circuit in group):
            yield moved


def _shifted(installation: Installation, terminal: Terminal, anchor: int, target: int) -> Terminal | None:
    panel = installation.panel
    here, base, there = (panel.by_number[n] for n in (terminal.space, anchor, target))
    space = panel.at(there.column + here.column - base.column, there.row + here.row - base.row)
    return Terminal(space.number, terminal.half) if space else None


def stacked_moves(installation: Installation, group: Sequence[Circuit]) -> Iterator[Arrangement]:
    """Seat full-width breakers one below the other, in every order that keeps ties and pairs together."""
    for order in _orders(group):
        for start in installation.panel.spaces:
            yield from _stack(installation, order, start.number, {})


def beside_moves(installation: Installation, body: Arrangement, newcomers: Sequence[Circuit]) -> Iterator[Arrangement]:
    """Stack circuits without a place directly above or below a body that has one."""
    panel = installation.panel
    spaces = [panel.by_number[t.space] for landing in body.values() for t in landing]
    height = sum(circuit.poles for circuit in newcomers)
    starts = []
    for column in dict.fromkeys(space.column for space in spaces):
        rows = [space.row for space in spaces if space.column == column]
        starts += [panel.at(column, max(rows) + 1), panel.at(column, min(rows) - height)]
    for order in _orders(newcomers):
        for start in starts:
            if start is not None:
                for stack in _stack(installation, order, start.number, {}):
                    yield {**body, **stack}


def _orders(group: Sequence[Circuit]) -> list[tuple[Circuit, ...]]:
    if len(group) > _MOST_ORDERED:
        return [tuple(group), tuple(reversed(group))]
    return [order for order in itertools.permutations(group) if keeps_company(order)]


def _stack(
    installation: Installation, rest: Sequence[Circuit], start: int | None, done: Arrangement
) -> Iterator[Arrangement]:
    if not rest:
        yield done
        return
    if start is None:
        return
    panel, circuit = installation.panel, rest[0]
    below = panel.below(start)
    if circuit.poles == 1:
        after = below.number if below else None
        yield from _stack(installation, rest[1:], after, {**done, circuit.label: (Terminal(start),)})
        return
    if below is None or below.leg is panel.leg(start):
        return
    following = panel.below(below.number)
    landing = (Terminal(start), Terminal(below.number))
    # Nothing tells the two ends of a load without a neutral apart.
    ways = [landing] if circuit.volts in (Volts.V240, Volts.V208) else [landing, landing[::-1]]
    for way in ways:
        after = following.number if following else None
        yield from _stack(installation, rest[1:], after, {**done, circuit.label: way})
