"""Leg amps and neutral current of an arrangement: plain phasor sums, no solver.

Currents are phasors p - jq in the reference of their own leg's voltage (q positive for a lagging load), so that loads
of one power factor add and subtract like plain numbers. See `supply.SupplyFactors` for how legs join in the neutral.
"""

from __future__ import annotations

import cmath
import itertools
import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balancer.electrical.scenarios import FloatArray, Scenarios
from balancer.electrical.supply import SupplyFactors, supply_factors
from balancer.panel import Circuit, Installation, Landing, Leg, Panel, Pole

ComplexArray = NDArray[np.complexfloating]

MOST_UNKNOWN = 6
"""Parts of unknown pole up to which every combination is looked at, for the difference of the legs."""

_BLOCK = 65_536


@dataclass(frozen=True, eq=False)
class LegCurrents:
    """Clamp-meter readings in every scenario, arrays of shape (scenarios,) in amperes [A].

    Where something is not known (the pole of a 120 V part, the rotation of a wye) every array carries the worst case of
    its own quantity.
    """

    leg_a: FloatArray
    leg_b: FloatArray
    heavy_leg: FloatArray
    imbalance: FloatArray
    neutral: FloatArray


@dataclass(frozen=True)
class Peak:
    """The highest value of a quantity [A] and the index of the scenario in which it happens."""

    value_a: float
    scenario: int


@dataclass(frozen=True, kw_only=True)
class Peaks:
    """What the legs and the neutral carry at worst, and what the neutral could ever carry."""

    leg_a: Peak
    leg_b: Peak
    heavy_leg: Peak
    imbalance: Peak
    neutral: Peak
    mean_neutral_a: float
    imbalance_pct: float
    """Imbalance in percent of the legs' mean, in the scenario with the highest heavy leg."""
    largest_possible_neutral_a: float


def neutral_leg(panel: Panel, circuit: Circuit, landing: Landing) -> Leg | None:
    """Leg that carries a circuit's line-to-neutral part; None where the pole is not known or it is not landed."""
    if not landing:
        return None
    if circuit.poles == 1:
        return panel.leg(landing[0].space)
    pole = circuit.load.neutral_pole
    if pole is None:
        return None
    return panel.leg(landing[0 if pole is Pole.FIRST else 1].space)


@dataclass(frozen=True, eq=False)
class Case:
    """Sum S and difference D of the leg phasors in one combination of what is not known, arrays (scenarios,)."""

    factors: SupplyFactors
    sum_phasor_a: ComplexArray
    difference_phasor_a: ComplexArray

    @property
    def neutral_phasor_a(self) -> ComplexArray:
        """Neutral phasor [A] in leg A's reference."""
        return self.factors.neutral_sum * self.sum_phasor_a + self.factors.neutral_difference * self.difference_phasor_a


class PanelCurrents:
    """Sums the scenarios' currents for any arrangement of one installation."""

    def __init__(self, installation: Installation, scenarios: Scenarios) -> None:
        self.installation = installation
        self.scenarios = scenarios
        loads = [circuit.load for circuit in installation.circuits]
        self._neutral_unit = np.array([load.neutral_pf.unit_phasor for load in loads])
        self._line_unit = np.array([load.line_pf.unit_phasor for load in loads])

    def neutral_phasors(self) -> ComplexArray:
        """Line-to-neutral phasors [A] of every circuit in its own leg's reference, (scenarios, circuits)."""
        return np.asarray(self.scenarios.neutral_a * self._neutral_unit)

    def line_phasors(self) -> ComplexArray:
        """Leg-to-leg phasors [A] of every circuit at its own power factor, (scenarios, circuits)."""
        return np.asarray(self.scenarios.line_a * self._line_unit)

    def cases(self, arrangement: Mapping[str, Landing], *, only_extreme: bool = True) -> Iterator[Case]:
        """Give S and D for every combination of what is not known.

        The 120 V parts whose pole is not known have unity power factor and stay in S wherever they flow. Leg and
        neutral magnitudes are convex in how much of them flows on leg A, so all on A and all on B are the worst cases.
        The difference of the legs is not: `only_extreme` False gives every combination of up to `MOST_UNKNOWN` parts.
        """
        circuits, panel = self.installation.circuits, self.installation.panel
        landed = np.array([bool(arrangement.get(c.label)) for c in circuits], dtype=bool)
        legs = [neutral_leg(panel, c, arrangement.get(c.label, ())) for c in circuits]
        sign = np.array([0.0 if leg is None else 1.0 if leg is Leg.A else -1.0 for leg in legs])
        unknown = landed & (sign == 0.0)
        neutral, line = self.scenarios.neutral_a, self.scenarios.line_a
        sum_neutral = _phasor_sum(neutral, self._neutral_unit * landed)
        difference = _phasor_sum(neutral, self._neutral_unit * sign)
        line_sum = _phasor_sum(line, self._line_unit * landed)
        for factors in supply_factors(panel.supply):
            total = sum_neutral + (factors.line_a + factors.line_b) * line_sum
            base = difference + (factors.line_a - factors.line_b) * line_sum
            for shift in self._shifts(unknown, only_extreme=only_extreme):
                yield Case(factors, total, np.asarray(base + shift, dtype=base.dtype))

    def _shifts(self, unknown: NDArray[np.bool_], *, only_extreme: bool) -> Iterator[FloatArray]:
        """Give what parts of unknown pole add to D, in every combination or with all on one leg."""
        columns = (self.scenarios.neutral_a[:, c] for c in np.nonzero(unknown)[0])
        parts = [column for column in columns if column.any()]
        if only_extreme or len(parts) > MOST_UNKNOWN:
            parts = [np.sum(parts, axis=0, dtype=float)] if parts else []
        for signs in itertools.product((1.0, -1.0), repeat=len(parts)):
            shift = np.zeros(len(self.scenarios))
            for sign, part in zip(signs, parts, strict=True):
                shift += sign * part
            yield shift

    def currents(self, arrangement: Mapping[str, Landing]) -> LegCurrents:
        """Clamp-meter readings of an arrangement in every scenario."""
        worst: dict[str, FloatArray] = {}
        for case in self.cases(arrangement, only_extreme=False):
            leg_a = np.abs(case.sum_phasor_a + case.difference_phasor_a) / 2.0
            leg_b = np.abs(case.sum_phasor_a - case.difference_phasor_a) / 2.0
            readings = {
                "leg_a": leg_a,
                "leg_b": leg_b,
                "heavy_leg": np.maximum(leg_a, leg_b),
                "imbalance": np.abs(leg_a - leg_b),
                "neutral": np.abs(case.neutral_phasor_a),
            }
            for name, values in readings.items():
                worst[name] = np.maximum(worst[name], values) if name in worst else values
        return LegCurrents(**worst)

    def peaks(self, arrangement: Mapping[str, Landing]) -> Peaks:
        """Find the worst of every quantity over all scenarios, and the largest possible neutral."""
        currents = self.currents(arrangement)
        heavy = _peak(currents.heavy_leg)
        mean_leg = (currents.leg_a[heavy.scenario] + currents.leg_b[heavy.scenario]) / 2.0
        imbalance_there = currents.imbalance[heavy.scenario]
        return Peaks(
            leg_a=_peak(currents.leg_a),
            leg_b=_peak(currents.leg_b),
            heavy_leg=heavy,
            imbalance=_peak(currents.imbalance),
            neutral=_peak(currents.neutral),
            mean_neutral_a=float(np.mean(currents.neutral)),
            imbalance_pct=float(100.0 * imbalance_there / mean_leg) if mean_leg > 0 else 0.0,
            largest_possible_neutral_a=largest_possible_neutral(self.installation, arrangement),
        )


def _phasor_sum(magnitudes: FloatArray, unit_phasors: ComplexArray) -> ComplexArray:
    # Readings are in single precision, whose sums depend on their order by more than re-checks allow for; block by
    # block, a year of them needs no copy in double precision.
    parts = np.stack([unit_phasors.real, unit_phasors.imag], axis=1)
    total = np.empty(len(magnitudes), dtype=complex)
    for start in range(0, len(magnitudes), _BLOCK):
        block = magnitudes[start : start + _BLOCK].astype(float, copy=False) @ parts
        total[start : start + _BLOCK] = block[:, 0] + 1j * block[:, 1]
    return total


def _peak(values: FloatArray) -> Peak:
    index = int(np.argmax(values))
    return Peak(float(values[index]), index)


def largest_possible_neutral(installation: Installation, arrangement: Mapping[str, Landing]) -> float:
    """Largest neutral current [A] over every subset of the landed loads running at full load, exactly.

    Notes
    -----
    max over theta of sum of max(0, Re(v e^(-j theta))), v the neutral phasors of the loads. The best subset is the
    loads on one side of a line through the origin, so one direction between any two neighbouring normals of the v
    decides it.
    A load whose pole is not known counts with the better sign of both.
    """
    panel = installation.panel
    worst = 0.0
    for factors in supply_factors(panel.supply):
        on_leg = {
            Leg.A: factors.neutral_sum + factors.neutral_difference,
            Leg.B: factors.neutral_sum - factors.neutral_difference,
        }
        choices: list[tuple[complex, ...]] = []
        for circuit in installation.circuits:
            landing = arrangement.get(circuit.label, ())
            phasor = circuit.load.neutral_a * circuit.load.neutral_pf.unit_phasor
            if not landing or phasor == 0 or not circuit.carries_load:
                continue
            leg = neutral_leg(panel, circuit, landing)
            legs = (Leg.A, Leg.B) if leg is None else (leg,)
            choices.append((0j, *(on_leg[each] * phasor for each in legs)))
        worst = max(worst, _largest_subset_sum(choices))
    return worst


def _largest_subset_sum(choices: Sequence[tuple[complex, ...]]) -> float:
    """Largest magnitude of a sum that takes one phasor of every tuple."""
    normals = sorted(
        {
            (cmath.phase(one - other) + quarter) % math.tau
            for options in choices
            for index, one in enumerate(options)
            for other in options[index + 1 :]
            if one != other
            for quarter in (math.pi / 2.0, -math.pi / 2.0)
        }
    )
    best = 0.0
    for index, start in enumerate(normals):
        end = normals[index + 1] if index + 1 < len(normals) else normals[0] + math.tau
        direction = cmath.rect(1.0, -(start + end) / 2.0)
        total = sum(max(options, key=lambda v: (v * direction).real) for options in choices)
        best = max(best, abs(total))
    return best
