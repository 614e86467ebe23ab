"""From the figures of a log to the amps of every circuit's two parts."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from balancer.files.loads import NOMINAL_V
from balancer.files.readings_columns import LogColumn, ReadingUnit
from balancer.panel import Circuit, Installation, Load, Pole, SupplySystem

Readings = NDArray[np.float32]

_LEG_V = 120.0
_WYE_RAD = math.radians(30.0)


@dataclass(frozen=True, eq=False)
class LogAmps:
    """Amps [A], (intervals, circuits), and the installation whose loads say what they mean."""

    neutral_a: Readings
    line_a: Readings
    installation: Installation
    turned: tuple[str, ...]
    """Circuits on two legs of a wye whose heavier pole changes, which one fixed pole cannot show."""


def amps_of(installation: Installation, columns: Sequence[LogColumn], values: Readings) -> LogAmps:
    """Turn readings into amps; circuits without a column get 0.

    Parameters
    ----------
    installation
        Its power factors and, for a two-pole circuit read as one, the shares of its parts hold for the readings too.
    columns
        By circuit, the first pole before the second.
    values
        Readings [A] or [W], shape (intervals, columns).
    """
    circuits, turned = list(installation.circuits), []
    system = installation.panel.supply.system
    to_neutral, to_line = np.zeros((2, len(columns), len(circuits)), dtype=np.float32)
    on_wye: list[tuple[int, Readings]] = []
    for place, column in enumerate(columns):
        here = column.circuit
        if column.pole is None:
            to_neutral[place, here], to_line[place, here] = factors(circuits[here], column.unit, system)
        elif column.pole is Pole.FIRST:
            pair, amps = slice(place, place + 2), amps_per_unit(circuits[here], column, system)
            if system is SupplySystem.WYE and circuits[here].volts.has_neutral:
                on_wye.append((here, values[:, pair] * np.float32(amps)))
            else:
                circuits[here] = _as_poles(circuits[here], circuits[here].load.neutral_pole or Pole.FIRST)
                to_neutral[pair, here], to_line[pair, here] = amps * _pole_parts(circuits[here])
    # One product with a matrix is several times faster than columns in turn, and as exact: all else in it is zero.
    neutral_a, line_a = values @ to_neutral, values @ to_line
    for here, poles in on_wye:
        is_first, is_turned = _heavier_pole(poles)
        turned += [circuits[here].label] if is_turned else []
        circuits[here] = _as_poles(circuits[here], Pole.FIRST if is_first else Pole.SECOND)
        neutral_a[:, here], line_a[:, here] = _parts_on_wye(poles)
    return LogAmps(neutral_a, line_a, replace(installation, circuits=tuple(circuits)), tuple(turned))


def factors(circuit: Circuit, unit: ReadingUnit, system: SupplySystem) -> tuple[float, float]:
    """Amps [A] of the line-to-neutral and of the leg-to-leg part for one unit read of the whole circuit.

    Notes
    -----
    120 V: I = P/(120 cos phi). Leg to leg: I = P/(V cos phi), V the nominal volts. A circuit with both parts keeps the
    proportion of its full load: the reading over the heavier pole's amps, or over the total watts, scales both.
    """
    load = circuit.load
    if circuit.poles == 1:
        return (1.0 if unit is ReadingUnit.AMPS else 1.0 / (_LEG_V * load.neutral_pf.value)), 0.0
    if not load.neutral_a:
        return 0.0, (1.0 if unit is ReadingUnit.AMPS else 1.0 / (NOMINAL_V[circuit.volts] * load.line_pf.value))
    full = _heavier_pole_a(load, system) if unit is ReadingUnit.AMPS else full_load_w(circuit)
    return load.neutral_a / full, load.line_a / full


def full_load_w(circuit: Circuit) -> float:
    """Real power [W] of both parts at full load."""
    load = circuit.load
    line_w = NOMINAL_V[circuit.volts] * load.line_a * load.line_pf.value if circuit.poles == 2 else 0.0
    return _LEG_V * load.neutral_a * load.neutral_pf.value + line_w


def amps_per_unit(circuit: Circuit, column: LogColumn, system: SupplySystem) -> float:
    """Amps [A] on the heavier pole for one unit read in a column."""
    if column.pole is None:
        return sum(factors(circuit, column.unit, system))
    return 1.0 if column.unit is ReadingUnit.AMPS else 1.0 / (_LEG_V * circuit.load.line_pf.value)


def _heavier_pole_a(load: Load, system: SupplySystem) -> float:
    """Amps [A] that a clamp shows at full load on the pole with both parts, which stand 30 degrees apart on a wye."""
    if system is SupplySystem.IN_PHASE:
        return load.neutral_a
    turn = _WYE_RAD if system is SupplySystem.WYE else 0.0
    line = load.line_a * load.line_pf.unit_phasor * complex(math.cos(turn), math.sin(turn))
    return abs(load.neutral_a * load.neutral_pf.unit_phasor + line)


def _as_poles(circuit: Circuit, pole: Pole) -> Circuit:
    """Take a circuit as its two poles were read: one power factor for both parts, and a pole that is known."""
    if not circuit.volts.has_neutral:
        return circuit
    return replace(circuit, load=replace(circuit.load, neutral_pole=pole, neutral_pf=circuit.load.line_pf))


def _pole_parts(circuit: Circuit) -> Readings:
    """Shares of the first and the second pole's amps in the line-to-neutral part, then in the leg-to-leg part.

    Notes
    -----
    On legs 180 degrees apart the pole with the 120 V part carries L + N and the other L. Where the other reads more, N
    is negative: L - abs(N) on the one pole and L on the other are the same currents as abs(N) on the other pole.
    Without a neutral both readings are one current, and their mean counts.
    """
    if not circuit.volts.has_neutral:
        parts = [[0.0, 0.0], [0.5, 0.5]]
    elif circuit.load.neutral_pole is Pole.FIRST:
        parts = [[1.0, -1.0], [0.0, 1.0]]
    else:
        parts = [[-1.0, 1.0], [1.0, 0.0]]
    return np.array(parts, dtype=np.float32)


def _heavier_pole(poles: Readings) -> tuple[bool, bool]:
    """Whether the first pole carries more in all, and whether the other one does at some time."""
    first_a, second_a = poles.sum(axis=0, dtype=float)
    is_first = bool(first_a >= second_a)
    more, less = (0, 1) if is_first else (1, 0)
    return is_first, bool((poles[:, less] > poles[:, more]).any())


def _parts_on_wye(poles: Readings) -> tuple[Readings, Readings]:
    """Split the amps of two poles on two legs of a wye into the line-to-neutral and the leg-to-leg part.

    Notes
    -----
    With L the smaller and M the larger reading N = sqrt(M^2 - (L sin 30)^2) - L cos 30, as for measured amps in the
    inventory (`loads`).
    """
    line = poles.min(axis=1)
    across = np.square(poles.max(axis=1)) - np.square(line * np.float32(math.sin(_WYE_RAD)))
    neutral = np.sqrt(np.maximum(across, 0.0)) - line * np.float32(math.cos(_WYE_RAD))
    return np.maximum(neutral, 0.0), line
