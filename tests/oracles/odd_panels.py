"""Seeded panels as many hands in a hurry leave them: wrong pairs half fixed, ties across, quads and newcomers."""

from __future__ import annotations

from dataclasses import dataclass, field, replace

import numpy as np
from oracles.made_up_panels import load_120, small_installation

from balancer.panel import Circuit, Installation, Leg, Load, Role, SupplySystem, Terminal, Volts, ordinary_spaces


@dataclass
class OddWall:
    """A small panel to which oddities are added."""

    rng: np.random.Generator
    installation: Installation
    circuits: list[Circuit] = field(init=False)

    def __post_init__(self) -> None:
        self.circuits = list(self.installation.circuits)

    def draw(self, chance: float) -> bool:
        return bool(self.rng.random() < chance)

    def add(self, *places: Terminal, volts: Volts = Volts.V120, **cells: object) -> None:
        load = Load(line_a=5.0) if volts.poles == 2 else load_120(self.rng)
        label = f"odd{len(self.circuits)}"
        self.circuits.append(Circuit(label=label, landing=places, volts=volts, load=load, breaker_a=20.0, **cells))

    def change(self, index: int, **cells: object) -> None:
        self.circuits[index] = replace(self.circuits[index], **cells)

    def singles(self, *, without_neutral: bool = True) -> list[int]:
        """Landed 120 V loads, halves and all."""
        return [
            index
            for index, circuit in enumerate(self.circuits)
            if circuit.poles == 1 and circuit.landing and circuit.role is Role.LOAD
            if not (without_neutral and circuit.shared_neutral)
        ]

    def some(self, indices: list[int], count: int) -> list[int]:
        return self.rng.choice(indices, count, replace=False).tolist() if len(indices) >= count else []

    def fix_spares(self) -> None:
        for index, circuit in enumerate(self.circuits):
            if circuit.role is Role.SPARE and self.draw(0.4):
                self.change(index, is_fixed=True)

    def add_quad(self) -> None:
        """An inner two-pole and two outer halves, on one neutral at times."""
        panel = self.installation.panel
        taken = {t.space for c in self.circuits for t in c.landing} | panel.reserved
        free = [pair for pair in panel.two_pole_seats if not taken.intersection(pair)]
        if not free or panel.supply.system is SupplySystem.IN_PHASE:
            return
        upper, lower = free[0]
        volts = Volts.V240 if panel.supply.system is SupplySystem.SPLIT else Volts.V208
        neutral = "q" if self.draw(0.4) else ""
        self.add(Terminal(upper, "b"), Terminal(lower, "a"), volts=volts)
        self.add(Terminal(upper, "a"), shared_neutral=neutral)
        self.add(Terminal(lower, "b"), shared_neutral=neutral)

    def break_a_pair(self) -> None:
        """Two hots of one leg on one neutral, wherever they are; one or both of them may be fixed."""
        panel = self.installation.panel
        leg = Leg.A if self.draw(0.5) else Leg.B
        there = [i for i in self.singles() if panel.leg(self.circuits[i].landing[0].space) is leg]
        for index, chance in zip(self.some(there, 2), (0.4, 0.15), strict=False):
            self.change(index, shared_neutral="wrong", is_fixed=self.draw(chance))

    def tie(self, count: int) -> None:
        for index in self.some(self.singles(without_neutral=False), count):
            self.change(index, tied="tie")

    def double_tap(self) -> None:
        for index in self.some(self.singles(), 1):
            self.add(*self.circuits[index].landing)

    def add_newcomer(self) -> None:
        """One that shares the neutral of a landed circuit or is tied to it."""
        for index in self.some(self.singles(), 1):
            joint = "tied" if self.draw(0.5) and not self.circuits[index].tied else "shared_neutral"
            self.change(index, **{joint: f"with {index}"})
            self.add(**{joint: f"with {index}"})


def odd_installation(seed: int) -> Installation:
    """Give a small panel with a few oddities."""
    wall = OddWall(np.random.default_rng(seed + 7), small_installation(seed))
    wall.fix_spares()
    for chance, oddity in (
        (0.3, wall.add_quad),
        (0.5, wall.break_a_pair),
        (0.25, lambda: wall.tie(3)),
        (0.2, wall.double_tap),
        (0.4, wall.add_newcomer),
        (0.3, wall.add_newcomer),
    ):
        if wall.draw(chance):
            oddity()
    panel = wall.installation.panel
    if wall.draw(0.4):
        panel = replace(panel, spaces=ordinary_spaces(12))
    return replace(wall.installation, panel=panel, circuits=tuple(wall.circuits))
