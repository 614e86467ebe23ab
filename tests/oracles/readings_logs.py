"""Logs of readings to plan on, and the lowest peak neutral of a whole log by two ways that share no code with ours."""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass, replace
from pathlib import Path

import highspy
import numpy as np
from numpy.typing import NDArray
from oracles.leg_counts import every_pattern, switches

import balancer
from balancer.arrange.results import Options
from balancer.electrical.scenarios import ScenarioKind, Scenarios
from balancer.files import read_inventory
from balancer.files.readings import read_readings
from balancer.panel import Circuit, Installation, Leg, Load, Panel, PowerFactor, Role, Terminal, Volts, ordinary_spaces

DATA = Path(balancer.__file__).parents[1] / "data"
PAIR = ("kitchen_counter_1", "living_av")
"""Circuits one below the other, which some tests take to share a neutral."""

_BLOCK = 4096
_CUT_OFF_A = 2e-4


def readings(neutral_a: NDArray[np.floating], line_a: NDArray[np.floating] | None = None) -> Scenarios:
    """Readings every quarter of an hour."""
    count = len(neutral_a)
    return Scenarios(
        kind=ScenarioKind.READINGS,
        names=tuple(f"interval {number}" for number in range(count)),
        neutral_a=neutral_a,
        line_a=np.zeros_like(neutral_a) if line_a is None else line_a,
        are_averages=True,
        times=np.datetime64("2023-01-02T00:00:00") + np.arange(count) * np.timedelta64(900, "s"),
        interval_s=900.0,
    )


def metered_house(fixed: Iterable[str] = (), *, pair: bool = False, unity: bool = False) -> Installation:
    """Give the metered house with conductors that reach every space, some circuits fixed in theirs."""
    held = frozenset(fixed)

    def changed(circuit: Circuit) -> Circuit:
        load = replace(circuit.load, neutral_pf=PowerFactor(), line_pf=PowerFactor()) if unity else circuit.load
        shared = "n1" if pair and circuit.label in PAIR else circuit.shared_neutral
        is_fixed = circuit.is_fixed or circuit.label in held
        return replace(circuit, load=load, slack_in=None, shared_neutral=shared, is_fixed=is_fixed)

    installation = read_inventory(DATA / "readings_house.csv")
    return replace(installation, circuits=tuple(changed(circuit) for circuit in installation.circuits))


def four_weeks(installation: Installation) -> Scenarios:
    """Read the log of the metered house."""
    return read_readings(DATA / "readings_28d_15min.csv", installation).scenarios


def plain_panel(amps: Iterable[float], factors: Iterable[PowerFactor] = ()) -> Installation:
    """Give a panel of free single-pole breakers with spaces enough to put all on one leg."""
    loads = list(amps)
    pfs = list(factors) or [PowerFactor()] * len(loads)
    circuits = tuple(
        Circuit(
            label=f"c{number}",
            landing=(Terminal(number),),
            volts=Volts.V120,
            is_neutral_checked=True,
            load=Load(neutral_a=load, neutral_pf=pf),
        )
        for number, (load, pf) in enumerate(zip(loads, pfs, strict=True), start=1)
    )
    return Installation(panel=Panel(spaces=ordinary_spaces(4 * ((len(loads) + 1) // 2))), circuits=circuits)


def dense_log(seed: int, free: int, rows: int, *, mixed: bool = False) -> tuple[Installation, Scenarios]:
    """Give a panel whose circuits are often on, so that hardly two rows are equal."""
    rng = np.random.default_rng(seed)
    full_a = rng.uniform(1.0, 16.0, free).round(1)
    chances = rng.uniform(0.05, 0.3, free)
    is_on = rng.random((rows, free)) < chances
    amps = (is_on * rng.uniform(0.3, 1.0, (rows, free)) * full_a).round(3)
    factors = [PowerFactor(float(f)) for f in rng.choice([1.0, 0.95, 0.9, 0.8], free)] if mixed else ()
    return plain_panel(full_a, factors), readings(amps)


@dataclass(frozen=True, eq=False)
class Whole:
    """The legs of a 120/240 V panel under every row of a log, no row twice."""

    installation: Installation
    options: Options
    phasors: NDArray[np.complex128]
    """Shape (rows, circuits)."""

    @classmethod
    def of(cls, installation: Installation, scenarios: Scenarios, options: Options) -> Whole:
        turns = np.array([_turn(circuit.load.neutral_pf) for circuit in installation.circuits])
        distinct = np.unique(scenarios.neutral_a.astype(float), axis=0)
        return cls(installation, options, distinct * turns)

    def exhausted(self) -> float:
        """Least peak neutral [A] of every pattern of legs, each held against every row."""
        signs, _ = every_pattern(self.installation, self.options)
        signs = signs[:, np.abs(self.phasors).any(axis=0)].astype(float)
        signs = np.unique(signs, axis=0)
        return min(self._lowest(signs[start : start + _BLOCK]) for start in range(0, len(signs), _BLOCK))

    def _lowest(self, signs: NDArray[np.float64]) -> float:
        phasors = self.phasors[:, np.abs(self.phasors).any(axis=0)]
        squares = (signs @ phasors.real.T) ** 2
        if phasors.imag.any():
            squares += (signs @ phasors.imag.T) ** 2
        return math.sqrt(squares.max(axis=1).min())

    def solved(self) -> float:
        """Least peak neutral [A] by HiGHS, to 0.2 mA: rows are cut off where its answer breaks its own bound."""
        free = switches(self.installation, self.options)
        effects = np.stack(
            [sum(2.0 * sign * self.phasors[:, column] for column, sign in switch.members) for switch in free], axis=1
        )
        offset = self._standing(frozenset(column for switch in free for column, _ in switch.members))
        offset = offset - effects.sum(axis=1) / 2.0
        return _Program(self.installation, self.options, offset, effects).lowest()

    def _standing(self, moving: frozenset[int]) -> NDArray[np.complex128]:
        total = np.zeros(len(self.phasors), dtype=complex)
        for column, circuit in enumerate(self.installation.circuits):
            if column not in moving and circuit.load.neutral_a:
                second = circuit.load.neutral_pole is not None and circuit.load.neutral_pole.value == "second"
                leg = self.installation.panel.leg(circuit.landing[1 if second else 0].space)
                total += (1 if leg is Leg.A else -1) * self.phasors[:, column]
        return total


@dataclass(frozen=True, eq=False)
class _Program:
    """Mixed-integer program: lowest z above every row's magnitude, as far as it was cut off."""

    installation: Installation
    options: Options
    offset: NDArray[np.complex128]
    effects: NDArray[np.complex128]

    def lowest(self) -> float:
        highs = highspy.Highs()
        highs.silent()
        highs.setOptionValue("mip_rel_gap", 1e-9)
        highs.setOptionValue("mip_abs_gap", 1e-6)
        peak = highs.addVariable(lb=0.0)
        ups = [highs.addBinary() for _ in range(self.effects.shape[1])]
        self._count(highs, ups)
        while True:
            highs.minimize(peak)
            assert highs.getModelStatus() == highspy.HighsModelStatus.kOptimal
            bound = float(highs.getInfo().objective_function_value)
            taken = np.rint([highs.val(up) for up in ups])
            values = self.offset + self.effects @ taken
            worst = np.argsort(-np.abs(values), kind="stable")[:24]
            if np.abs(values[worst[0]]) <= bound + _CUT_OFF_A:
                return float(np.abs(values[worst[0]]))
            for row in worst[np.abs(values[worst]) > bound + _CUT_OFF_A]:
                turn = np.exp(-1j * np.angle(values[row]))
                for sign in (1.0, -1.0):
                    factors = sign * (self.effects[row] * turn).real
                    total = sum(float(f) * up for f, up in zip(factors, ups, strict=True) if abs(f) > 1e-9)
                    highs.addConstr(total - peak <= -sign * float((self.offset[row] * turn).real))

    def _count(self, highs: highspy.Highs, ups: list[highspy.highs_var]) -> None:
        """Spaces on either leg, and the cap on landings."""
        free = switches(self.installation, self.options)
        panel = self.installation.panel
        taken = [
            terminal.space
            for c in self.installation.circuits
            for terminal in c.landing
            if c.role is not Role.SPARE and (c.poles == 2 or c.is_fixed or c.shared_neutral)
        ]
        room = {leg: sum(s.leg is leg and s.number not in taken for s in panel.spaces) for leg in Leg}
        singles = [up for up, switch in zip(ups, free, strict=True) if switch.takes_space]
        highs.addConstr(sum(singles) <= room[Leg.A])
        highs.addConstr(sum(singles) >= len(singles) - room[Leg.B])
        if self.options.max_landings is not None:
            turned = [
                switch.landings * (1 - up if switch.is_up_as_found else up)
                for up, switch in zip(ups, free, strict=True)
                if switch.landings
            ]
            highs.addConstr(sum(turned) <= self.options.max_landings)


def _turn(factor: PowerFactor) -> complex:
    return complex(factor.value, math.sqrt(1.0 - factor.value**2) * (1 if factor.is_leading else -1))
