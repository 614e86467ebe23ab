"""The three-wire 120/240 V network: voltages and losses behind a centre-tapped transformer and a service drop.

Every leg's voltage and current stands in the reference of that leg's own source voltage, as in `phasors`: a balanced
resistive panel has two equal real currents, and the neutral carries their difference.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import NDArray

from balancer.errors import InfeasibleError

LEG_V = 120.0
"""Nominal voltage [V] from leg to neutral."""

LINE_V = 2.0 * LEG_V
"""Nominal voltage [V] from leg to leg."""

_TOLERANCE_V = 1e-9
_MAX_STEPS = 50
_DIFFERENCE_STEP_V = 1e-5


class LoadModel(StrEnum):
    """What a load keeps constant when its voltage changes."""

    CURRENT = "constant current"
    IMPEDANCE = "constant impedance"
    POWER = "constant power"

    def current(self, nominal_phasor_a: complex, voltage_v: complex, nominal_v: float) -> complex:
        """Give the current phasor [A] at a voltage; the power factor stays, so constant current turns along."""
        if self is LoadModel.IMPEDANCE:
            return nominal_phasor_a * voltage_v / nominal_v
        if self is LoadModel.POWER:
            return nominal_phasor_a * nominal_v / voltage_v.conjugate()
        return nominal_phasor_a * voltage_v / abs(voltage_v)


@dataclass(frozen=True, kw_only=True)
class NominalLoads:
    """Current phasors [A] at nominal voltage: of the two legs' 120 V loads and of the 240 V loads."""

    leg_a_phasor_a: complex = 0j
    leg_b_phasor_a: complex = 0j
    line_phasor_a: complex = 0j


@dataclass(frozen=True, kw_only=True)
class ServiceImpedances:
    """Impedances [ohm] between a stiff 120/240 V source and the panel, all at the 120 V level.

    `common_ohm` carries the sum of both legs' currents (the transformer's primary, referred to one secondary half),
    `leg_ohm` one leg's current (a secondary half and a hot conductor), `neutral_ohm` the neutral's.
    """

    common_ohm: complex = 0j
    leg_ohm: complex = 0j
    neutral_ohm: complex = 0j


@dataclass(frozen=True, kw_only=True)
class ServiceVoltages:
    """What a voltmeter at the panel reads, and what the service wastes.

    Phasors stand in each leg's own reference, volts [V] and amps [A].
    """

    leg_a_phasor_v: complex
    leg_b_phasor_v: complex
    neutral_shift_phasor_v: complex
    leg_a_phasor_a: complex
    leg_b_phasor_a: complex
    impedances: ServiceImpedances

    @property
    def leg_a_v(self) -> float:
        """Leg A to neutral [V]."""
        return abs(self.leg_a_phasor_v)

    @property
    def leg_b_v(self) -> float:
        """Leg B to neutral [V]."""
        return abs(self.leg_b_phasor_v)

    @property
    def line_v(self) -> float:
        """Leg to leg [V]."""
        return abs(self.leg_a_phasor_v + self.leg_b_phasor_v)

    @property
    def neutral_shift_v(self) -> float:
        """Panel neutral against the transformer's neutral [V]."""
        return abs(self.neutral_shift_phasor_v)

    @property
    def neutral_a(self) -> float:
        """Neutral current [A]."""
        return abs(self.leg_a_phasor_a - self.leg_b_phasor_a)

    @property
    def light_leg_rise_v(self) -> float:
        """How far [V] the leg with the lower current stands above 120 V; negative where it stands below."""
        is_a_light = abs(self.leg_a_phasor_a) <= abs(self.leg_b_phasor_a)
        return (self.leg_a_v if is_a_light else self.leg_b_v) - LEG_V

    @property
    def neutral_loss_w(self) -> float:
        """Heat [W] in the neutral conductor."""
        return self.impedances.neutral_ohm.real * self.neutral_a**2

    @property
    def total_loss_w(self) -> float:
        """Heat [W] in the transformer's windings and in all three conductors."""
        legs = abs(self.leg_a_phasor_a) ** 2 + abs(self.leg_b_phasor_a) ** 2
        common = abs(self.leg_a_phasor_a + self.leg_b_phasor_a) ** 2
        return self.impedances.leg_ohm.real * legs + self.impedances.common_ohm.real * common + self.neutral_loss_w


def solve_three_wire(
    impedances: ServiceImpedances, loads: Mapping[LoadModel, NominalLoads], *, is_neutral_open: bool = False
) -> ServiceVoltages:
    """Solve the three-wire network for its voltages.

    Parameters
    ----------
    impedances
        Between the source and the panel [ohm].
    loads
        Nominal currents [A] by what the loads keep constant.
    is_neutral_open
        The neutral is lost: it carries nothing and its end at the panel floats.

    Raises
    ------
    InfeasibleError
        When no steady voltage exists: the loads are more than such a service can carry, or, with the neutral open, the
        loads do not settle it.

    Notes
    -----
    With E = 120 V, leg currents a and b, neutral shift n, common, leg and neutral impedances Zc, Zl, Zn:
    V_A = E - Zc (a + b) - Zl a - n, V_B = E - Zc (a + b) - Zl b + n, and n = Zn (a - b), or a = b where the neutral is
    open. Solved by Newton's method on the six real unknowns; constant impedances take one step.
    """
    state = np.array([LEG_V, 0.0, LEG_V, 0.0, 0.0, 0.0])
    network = _Network(impedances, loads, is_neutral_open)
    for _ in range(_MAX_STEPS):
        mismatch = network.mismatch(state)
        if not np.isfinite(mismatch).all():
            break
        if np.abs(mismatch).max() < _TOLERANCE_V:
            return network.voltages(state)
        try:
            state = state - np.linalg.solve(network.jacobian(state), mismatch)
        except np.linalg.LinAlgError:
            break
    raise InfeasibleError(
        ["no steady voltage: these loads are more than the service in the panel file can carry"],
        ["check transformer_kva, impedance_pct, service_wire, neutral_wire and length_ft"],
    )


@dataclass(frozen=True)
class _Network:
    """The equations of the network; a state is V_A, V_B and the neutral shift, real and imaginary parts in turn."""

    impedances: ServiceImpedances
    loads: Mapping[LoadModel, NominalLoads]
    is_neutral_open: bool

    def leg_currents(self, leg_a_v: complex, leg_b_v: complex) -> tuple[complex, complex]:
        leg_a, leg_b, line = 0j, 0j, 0j
        for model, nominal in self.loads.items():
            leg_a += model.current(nominal.leg_a_phasor_a, leg_a_v, LEG_V)
            leg_b += model.current(nominal.leg_b_phasor_a, leg_b_v, LEG_V)
            line += model.current(nominal.line_phasor_a, leg_a_v + leg_b_v, LINE_V)
        return leg_a + line, leg_b + line

    def mismatch(self, state: NDArray[np.float64]) -> NDArray[np.float64]:
        leg_a_v, leg_b_v, shift_v = _complex(state)
        leg_a, leg_b = self.leg_currents(leg_a_v, leg_b_v)
        z = self.impedances
        source_v = LEG_V - z.common_ohm * (leg_a + leg_b)
        # With the neutral open the equation is in amps; the tolerance serves both.
        neutral = leg_a - leg_b if self.is_neutral_open else shift_v - z.neutral_ohm * (leg_a - leg_b)
        mismatches = [
            leg_a_v - (source_v - z.leg_ohm * leg_a - shift_v),
            leg_b_v - (source_v - z.leg_ohm * leg_b + shift_v),
            neutral,
        ]
        return np.array(mismatches, dtype=np.complex128).view(np.float64)

    def jacobian(self, state: NDArray[np.float64]) -> NDArray[np.float64]:
        steps = np.eye(len(state)) * _DIFFERENCE_STEP_V
        columns = [(self.mismatch(state + step) - self.mismatch(state - step)) / (2 * step.sum()) for step in steps]
        return np.column_stack(columns)

    def voltages(self, state: NDArray[np.float64]) -> ServiceVoltages:
        leg_a_v, leg_b_v, shift_v = _complex(state)
        leg_a, leg_b = self.leg_currents(leg_a_v, leg_b_v)
        return ServiceVoltages(
            leg_a_phasor_v=leg_a_v,
            leg_b_phasor_v=leg_b_v,
            neutral_shift_phasor_v=shift_v,
            leg_a_phasor_a=leg_a,
            leg_b_phasor_a=leg_b,
            impedances=self.impedances,
        )


def _complex(state: NDArray[np.float64]) -> tuple[complex, complex, complex]:
    leg_a, leg_b, shift = state.view(np.complex128).tolist()
    return leg_a, leg_b, shift
