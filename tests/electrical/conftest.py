"""Builders of small installations, and the published figures that the electrical tests are held against."""

import csv
import re
from collections.abc import Callable, Sequence
from pathlib import Path

import pytest

from balancer.panel import (
    Circuit,
    Installation,
    Leg,
    Load,
    Panel,
    Pole,
    PowerFactor,
    Supply,
    Terminal,
    Volts,
    ordinary_spaces,
)

DATA = Path(__file__).parents[1] / "data"
SPLIT = Supply()


class Builder:
    """Makes circuits and installations in few words; spaces 1, 2 are on leg A and 3, 4 on leg B."""

    leg_a, leg_b = 1, 3

    def single(self, label: str, amps: float, space: int | None = None, pf: float = 1.0, **rest) -> Circuit:
        """A 120 V circuit; a negative power factor leads."""
        load = Load(neutral_a=amps, neutral_pf=PowerFactor(abs(pf), is_leading=pf < 0))
        return Circuit(
            label=label, volts=Volts.V120, load=load, landing=() if space is None else (Terminal(space),), **rest
        )

    def double(self, label: str, amps: float, spaces: Sequence[int] = (), pf: float = 1.0, **rest) -> Circuit:
        """A two-pole circuit with a load from leg to leg only."""
        load = Load(line_a=amps, line_pf=PowerFactor(abs(pf), is_leading=pf < 0))
        landing = tuple(Terminal(space) for space in spaces)
        return Circuit(label=label, volts=Volts.V240, load=load, landing=landing, **rest)

    def mixed(self, label: str, line_a: float, neutral_a: float, spaces: Sequence[int], pole: Pole | None) -> Circuit:
        """A 120/240 V circuit."""
        load = Load(line_a=line_a, neutral_a=neutral_a, neutral_pole=pole)
        landing = tuple(Terminal(space) for space in spaces)
        return Circuit(label=label, volts=Volts.V120_240, load=load, landing=landing)

    def installation(self, *circuits: Circuit, supply: Supply = SPLIT, row_legs: str = "AB") -> Installation:
        """The circuits in an ordinary panel of 84 spaces."""
        return Installation(panel=Panel(spaces=ordinary_spaces(84, row_legs), supply=supply), circuits=circuits)

    def legs(self, amps_a: Sequence[float], amps_b: Sequence[float], supply: Supply = SPLIT) -> Installation:
        """120 V unity power factor loads, one list a leg."""
        panel = Panel(spaces=ordinary_spaces(84), supply=supply)
        spaces = {leg: [space.number for space in panel.spaces if space.leg is leg] for leg in Leg}
        circuits = [
            self.single(f"{leg}{space}", amps, space)
            for leg, loads in ((Leg.A, amps_a), (Leg.B, amps_b))
            for space, amps in zip(spaces[leg], loads, strict=False)
        ]
        return Installation(panel=panel, circuits=tuple(circuits))


@pytest.fixture(scope="session")
def build() -> Builder:
    return Builder()


@pytest.fixture(scope="session")
def published() -> Callable[[str], list[float]]:
    """The expected figures of one row of `tests/data/physics_checks.csv`, which names the source of each."""
    with (DATA / "physics_checks.csv").open(encoding="utf-8") as file:
        rows = {row["id"]: row for row in csv.DictReader(file)}
    assert all(row["source"] and row["confidence"] for row in rows.values())

    def figures(identifier: str) -> list[float]:
        return [float(number) for number in re.findall(r"\d+(?:\.\d+)?", rows[identifier]["expected"])]

    return figures
