"""Every pattern of legs of a larger plain panel, counted outright.

Where single-pole breakers may go anywhere, legs can be chosen freely as long as each has spaces enough: whatever stays
on its leg stays in its space, and a breaker that changes legs takes one landing. A shared-neutral pair takes a space on
either leg and is turned over where it is, in two landings; so is a 120/240 V circuit.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balancer.arrange.results import Options
from balancer.panel import Circuit, Installation, Leg, Pole, Role


@dataclass(frozen=True)
class Switch:
    """Something that is on one leg or on the other."""

    members: tuple[tuple[int, int], ...]
    """Column of a circuit and its sign while the switch is up."""
    landings: int
    is_up_as_found: bool | None
    takes_space: bool


def switches(installation: Installation, options: Options) -> list[Switch]:
    """Single-pole breakers, shared-neutral pairs and, where they may be turned, 120/240 V circuits."""
    found: list[Switch] = []
    pairs: dict[str, list[int]] = {}
    for column, circuit in enumerate(installation.circuits):
        if circuit.shared_neutral:
            pairs.setdefault(circuit.shared_neutral, []).append(column)
        elif circuit.poles == 1 and not circuit.is_fixed:
            up = None if not circuit.landing else _leg(installation, circuit) is Leg.A
            found.append(Switch(((column, 1),), 1 if circuit.landing else 0, up, takes_space=True))
        elif circuit.poles == 2 and circuit.volts.has_neutral and options.turn_240 and circuit.load.neutral_pole:
            up = _leg(installation, circuit) is Leg.A
            found.append(Switch(((column, 1),), 2, up, takes_space=False))
    for one, other in pairs.values():
        up = _leg(installation, installation.circuits[one]) is Leg.A
        found.append(Switch(((one, 1), (other, -1)), 2, up, takes_space=False))
    return found


def _leg(installation: Installation, circuit: Circuit) -> Leg:
    is_second = circuit.load.neutral_pole is Pole.SECOND
    return installation.panel.by_number[circuit.landing[1 if is_second else 0].space].leg


def every_pattern(installation: Installation, options: Options) -> tuple[NDArray[np.int8], NDArray[np.int64]]:
    """Give signs (patterns, circuits) and landings changed (patterns,) of every pattern that has spaces enough."""
    free = switches(installation, options)
    up = ((np.arange(1 << len(free))[:, None] >> np.arange(len(free))) & 1).astype(bool)
    landings = sum(
        (np.where(up[:, i] == s.is_up_as_found, 0, s.landings) for i, s in enumerate(free)),
        np.zeros(len(up), dtype=int),
    )
    taking = [i for i, switch in enumerate(free) if switch.takes_space]
    on_leg = {Leg.A: up[:, taking].sum(axis=1), Leg.B: (~up[:, taking]).sum(axis=1)}
    keep = np.ones(len(up), dtype=bool)
    for leg in Leg:
        keep &= on_leg[leg] <= _room(installation, leg)
    if options.max_landings is not None:
        keep &= landings <= options.max_landings
    signs = np.zeros((int(keep.sum()), len(installation.circuits)), dtype=np.int8)
    for column, circuit in enumerate(installation.circuits):
        if (
            circuit.landing
            and circuit.load.neutral_a
            and not (circuit.poles == 2 and circuit.load.neutral_pole is None)
        ):
            signs[:, column] = 1 if _leg(installation, circuit) is Leg.A else -1
    for position, switch in enumerate(free):
        for column, sign in switch.members:
            if installation.circuits[column].load.neutral_a:
                signs[:, column] = np.where(up[keep, position], sign, -sign)
    return signs, landings[keep]


def _room(installation: Installation, leg: Leg) -> int:
    """Spaces on a leg for single-pole breakers that may move; a spare gives its space up."""
    panel = installation.panel
    taken = [
        terminal.space
        for circuit in installation.circuits
        for terminal in circuit.landing
        if circuit.role is not Role.SPARE
        if circuit.poles == 2 or circuit.is_fixed or circuit.shared_neutral
    ]
    return sum(s.leg is leg and s.number not in taken and s.number not in panel.reserved for s in panel.spaces)
