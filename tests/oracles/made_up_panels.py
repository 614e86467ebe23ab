"""Small seeded panels with a bit of everything that holds a plan up."""

from __future__ import annotations

from dataclasses import dataclass, field, replace

import numpy as np

from balancer.arrange.results import Aim, Options
from balancer.electrical.scenario_sets import share_scenarios
from balancer.electrical.scenarios import Scenarios
from balancer.panel import (
    Circuit,
    Installation,
    Leg,
    Load,
    Panel,
    Pole,
    PowerFactor,
    Role,
    Supply,
    SupplySystem,
    Terminal,
    Volts,
    ordinary_spaces,
)

SUPPLIES = (
    Supply(),
    Supply(),
    Supply(system=SupplySystem.WYE),
    Supply(system=SupplySystem.WYE, leading_leg=Leg.A),
    Supply(system=SupplySystem.WYE, leading_leg=Leg.B),
    Supply(system=SupplySystem.IN_PHASE),
)
POWER_FACTORS = (PowerFactor(), PowerFactor(0.9), PowerFactor(0.7), PowerFactor(0.95, is_leading=True))
KINDS = ("single", "single", "single", "two-pole", "range", "pair", "tandem", "spare", "vacant")


def amps(rng: np.random.Generator, highest: float = 16.0) -> float:
    return float(rng.integers(1, round(highest * 10))) / 10


def load_120(rng: np.random.Generator) -> Load:
    return Load(neutral_a=amps(rng), neutral_pf=POWER_FACTORS[rng.integers(len(POWER_FACTORS))])


@dataclass
class Wall:
    """A panel that is being filled."""

    rng: np.random.Generator
    panel: Panel
    circuits: list[Circuit] = field(default_factory=list)

    def add(self, *spaces: int, half: str = "", **cells: object) -> None:
        cells.setdefault("volts", Volts.V120)
        cells.setdefault("load", load_120(self.rng))
        cells.setdefault("breaker_a", float(self.rng.choice([15, 20, 30])))
        label = f"c{len(self.circuits) + 1}"
        self.circuits.append(Circuit(label=label, landing=tuple(Terminal(s, half) for s in spaces), **cells))

    def draw(self, chance: float) -> bool:
        return bool(self.rng.random() < chance)

    def holds(self) -> dict[str, object]:
        """What may keep a landed single-pole breaker in place or make moving it dear."""
        return {
            "is_fixed": self.draw(0.12),
            "slack_in": float(self.rng.choice([0, 1, 2, 12, 13])) if self.draw(0.25) else None,
            "effort": float(self.rng.choice([1.0, 1.0, 1.5, 3.0])),
            "breaker_type": "gfci" if self.draw(0.2) else "standard",
        }

    def two_pole(self, kind: str, *spaces: int) -> None:
        system = self.panel.supply.system
        if kind == "range" and system is SupplySystem.SPLIT:
            pole = (Pole.FIRST, Pole.SECOND, None)[self.rng.integers(3)]
            load = Load(line_a=amps(self.rng, 30.0), neutral_a=amps(self.rng, 6.0), neutral_pole=pole)
            self.add(*spaces, volts=Volts.V120_240, load=load)
        elif system is not SupplySystem.IN_PHASE:
            volts = Volts.V240 if system is SupplySystem.SPLIT else Volts.V208
            load = Load(line_a=amps(self.rng, 30.0), line_pf=POWER_FACTORS[self.rng.integers(len(POWER_FACTORS))])
            self.add(*spaces, volts=volts, load=load)

    def fill(self, space: int, taken: set[int]) -> None:
        kind = str(self.rng.choice(KINDS))
        below = space + 2
        has_room_below = (space, below) in self.panel.two_pole_seats and below not in taken
        if kind in ("two-pole", "range") and has_room_below:
            self.two_pole(kind, space, below)
        elif kind == "pair" and has_room_below and not any(c.shared_neutral for c in self.circuits):
            for number in (space, below):
                self.add(number, shared_neutral="n1")
        elif kind == "tandem":
            for half in "ab":
                self.add(space, half=half)
        elif kind == "spare":
            self.add(space, role=Role.SPARE, load=Load())
        elif kind == "single":
            self.add(space, **self.holds())
        taken.update(terminal.space for circuit in self.circuits for terminal in circuit.landing)

    def add_new(self) -> None:
        """One or two units that are not landed yet."""
        kind = str(self.rng.choice(["single", "single", "two-pole", "range", "pair", "tied", "trio"]))
        name = f"new{len(self.circuits)}"
        if kind in ("two-pole", "range"):
            self.two_pole(kind)
        elif kind == "pair":
            self.add(shared_neutral=name)
            self.add(shared_neutral=name)
        elif kind == "trio":
            self.add(shared_neutral=name)
            self.add(shared_neutral=name, tied=name)
            self.add(tied=name)
        elif kind == "tied":
            self.add(tied=name)
            self.add(tied=name)
        else:
            self.add()

    def vary_loose_breakers(self) -> None:
        """Tie two of the breakers that stand alone, and let some be of the plug-on kind."""
        loose = [
            index
            for index, circuit in enumerate(self.circuits)
            if circuit.poles == 1 and circuit.landing and not circuit.landing[0].half and not circuit.shared_neutral
            if circuit.role is Role.LOAD
        ]
        if len(loose) >= 2 and self.draw(0.25):
            for index in self.rng.choice(loose, 2, replace=False).tolist():
                self.circuits[index] = replace(self.circuits[index], tied="t2")
        for index in loose:
            if self.draw(0.15):
                self.circuits[index] = replace(self.circuits[index], breaker_type="plug-on gfci")

    def break_a_pair(self) -> None:
        """Join two breakers of one row, hence of one leg, under one neutral."""
        by_row: dict[int, list[int]] = {}
        for index, circuit in enumerate(self.circuits):
            is_plain = circuit.poles == 1 and circuit.landing and not circuit.landing[0].half
            if is_plain and circuit.role is Role.LOAD and not circuit.shared_neutral and not circuit.is_fixed:
                by_row.setdefault(self.panel.by_number[circuit.landing[0].space].row, []).append(index)
        for pair in by_row.values():
            if len(pair) == 2:
                for index in pair:
                    landing = self.circuits[index].landing
                    load = self.circuits[index].load
                    self.circuits[index] = Circuit(
                        label=f"c{index + 1}", landing=landing, load=load, volts=Volts.V120, shared_neutral="n3"
                    )
                return


def small_installation(seed: int) -> Installation:
    """Give a panel of 8 spaces, full of what a real one holds and with hardly any room."""
    rng = np.random.default_rng(seed)
    draw = rng.random(8)
    panel = Panel(
        spaces=ordinary_spaces(8, "AB" if draw[0] < 0.6 else "BA" if draw[0] < 0.85 else "AABB"),
        supply=SUPPLIES[rng.integers(len(SUPPLIES))],
        tandem_spaces=frozenset({5, 6, 7, 8}) if draw[1] < 0.3 else None,
        reserved=frozenset({8}) if draw[2] < 0.2 else frozenset(),
        bolt_on=frozenset({1, 2}) if draw[3] < 0.15 else frozenset(),
        plug_on_neutral=frozenset({1, 2, 4, 6, 7}) if draw[6] < 0.25 else frozenset(),
        crossing_in=1.0 if draw[7] < 0.25 else 12.0,
        stab_a=60.0 if draw[4] < 0.15 else None,
        main_a=60.0 if draw[5] < 0.4 else None,
    )
    wall = Wall(rng, panel)
    taken: set[int] = set(panel.reserved)
    for space in rng.permutation(range(1, 9)).tolist():
        if space not in taken:
            wall.fill(space, taken)
    for _ in range(int(rng.integers(3))):
        if wall.draw(0.5):
            wall.add_new()
    if wall.draw(0.2):
        wall.break_a_pair()
    wall.vary_loose_breakers()
    return Installation(panel=panel, circuits=tuple(wall.circuits))


def some_scenarios(seed: int, installation: Installation, count: int = 3) -> Scenarios:
    """Give random shares of full load, quarter by quarter."""
    rng = np.random.default_rng(seed)
    shares = rng.integers(0, 5, (count, len(installation.circuits))) / 4
    return share_scenarios(installation, [f"scenario {n}" for n in range(count)], shares)


def some_options(seed: int) -> Options:
    """Give options that widen and narrow the choice."""
    rng = np.random.default_rng(seed)
    return Options(
        within_a=0.0,
        aim=Aim.LEGS if rng.random() < 0.3 else Aim.NEUTRAL,
        max_landings=int(rng.integers(5)) if rng.random() < 0.3 else None,
        turn_240=bool(rng.random() < 0.4),
        splice=bool(rng.random() < 0.3),
    )


def plain_installation(seed: int, free: int, vacant: int = 1) -> Installation:
    """Give a panel of `free` single-pole breakers, a range, a water heater, a pair, two fixed ones and a vacancy."""
    rng = np.random.default_rng(seed)
    fixed_spaces = 8
    spaces = free + fixed_spaces + vacant
    supply = SUPPLIES[seed % len(SUPPLIES)]
    wall = Wall(rng, Panel(spaces=ordinary_spaces(spaces + spaces % 2), supply=supply))
    wall.two_pole("range", 1, 3)
    wall.two_pole("two-pole", 2, 4)
    for space in (5, 7):
        wall.add(space, shared_neutral="n1")
    for space in (6, 8):
        wall.add(space, is_fixed=True)
    numbers = rng.permutation(range(9, len(wall.panel.spaces) + 1)).tolist()
    for index in range(free):
        # One in eight is new, one in eight idle, the others lopsided: heavy ones tend to be on leg A.
        load = Load() if index % 8 == 5 else load_120(rng)
        wall.add(*([] if index % 8 == 7 else [numbers[index]]), load=load)
    return Installation(panel=wall.panel, circuits=tuple(wall.circuits))


def short_conductors(seed: int, spaces: int = 14) -> Installation:
    """Give a full panel in which every conductor reaches the next row and no further: legs are easy, seats are not."""
    rng = np.random.default_rng(seed)
    wall = Wall(rng, Panel(spaces=ordinary_spaces(spaces)))
    for space in range(1, spaces + 1):
        wall.add(space, slack_in=1.0)
    return Installation(panel=wall.panel, circuits=tuple(wall.circuits))
