"""The load of a circuit, from whichever columns give it."""

from __future__ import annotations

import math
from dataclasses import dataclass

from balancer.electrical.defaults import default_load_a, default_pf
from balancer.files.columns import (
    AMPS_FIRST,
    AMPS_SECOND,
    BREAKER_A,
    LOAD_120_A,
    LOAD_120_W,
    LOAD_A,
    LOAD_VA,
    LOAD_W,
    PF,
    POLE_120,
    USE,
    VOLTS,
)
from balancer.files.inventory_row import InventoryRow
from balancer.panel import Load, Pole, PowerFactor, SupplySystem, Volts

NOMINAL_V = {Volts.V120: 120.0, Volts.V240: 240.0, Volts.V120_240: 240.0, Volts.V208: 208.0, Volts.V120_208: 208.0}
"""Nominal volts across a circuit's main part: of a 120/240 V circuit, from leg to leg."""

_NEUTRAL_PART_V = 120.0
_FULL_LOADS = (LOAD_A, LOAD_W, LOAD_VA)
_PARTS_120 = (LOAD_120_A, LOAD_120_W)
_MEASURED = (AMPS_FIRST, AMPS_SECOND)

LOAD_COLUMNS = (*_FULL_LOADS, *_PARTS_120, *_MEASURED)
"""Every column that gives a load."""

_LIKELY_LEAST_W = {1: 2.0, 2: 50.0}
"""Watts below which a circuit of one or two poles is taken for kilowatts or amps in the wrong column."""

_FAR_ABOVE_BREAKER = 4.0
"""No breaker holds this multiple of its rating as a running load, so the figure is a slip."""

_METER_TOLERANCE_A = 0.5
"""Two clamp readings of one and the same current may differ by this."""


def read_load(row: InventoryRow, system: SupplySystem | None) -> Load:
    """Read the load of a load or feeder circuit; where anything is reported the result means nothing.

    `system` None means that the panel file cannot be read, so what hangs on the supply is not checked.
    """
    _refuse_contradictions(row)
    volts = row.get(VOLTS)
    if volts is None:
        return Load()
    _refuse_tiny_watts(row, volts)
    _refuse_parts_without_neutral(row, volts)
    if row.is_faulty(PF, USE, BREAKER_A, POLE_120, *LOAD_COLUMNS):
        return Load()
    load = _measured_load(row, volts, system) if row.has(*_MEASURED) else _given_load(row, volts)
    if not load.is_assumed:
        _refuse_far_above_breaker(row, load)
    return load


def _refuse_contradictions(row: InventoryRow) -> None:
    for column in _MEASURED:
        others = (*_FULL_LOADS, *_PARTS_120, POLE_120)
        row.refuse_beside(column, others, lambda other: f"measured amps stand beside {other}")
    for index, column in enumerate(_FULL_LOADS):
        row.refuse_beside(column, _FULL_LOADS[:index], lambda other: f"the load is given already in {other}")
    row.refuse_beside(LOAD_120_W, (LOAD_120_A,), lambda other: f"the 120 V part is given already in {other}")


def _refuse_parts_without_neutral(row: InventoryRow, volts: Volts) -> None:
    if volts.poles == 1:
        for column in _PARTS_120:
            if row.has(column):
                row.report(column, "is for the 120 V part of a 120/240 V circuit", "use load_a or load_w here")
    elif not volts.has_neutral:
        for column in _PARTS_120:
            if row.has(column):
                remedy = f"write 120/{volts} under volts where the circuit has a neutral"
                row.report(column, f"a {volts} V circuit without a neutral has no 120 V part", remedy)
    if row.has(POLE_120) and not row.has(*_PARTS_120):
        row.report(POLE_120, "there is no 120 V part to put on a pole", "give load_120_a or load_120_w, or clear this")


def _refuse_tiny_watts(row: InventoryRow, volts: Volts) -> None:
    for column, amps_column in ((LOAD_W, LOAD_A), (LOAD_VA, LOAD_A), (LOAD_120_W, LOAD_120_A)):
        value = row.get(column)
        least = _LIKELY_LEAST_W[1 if column is LOAD_120_W else volts.poles]
        if value is not None and 0.0 < value < least:
            remedy = f"write {1000.0 * value:g} if these are thousands; put amps into {amps_column.name}"
            row.report(column, "is too little for a circuit at full use", remedy)


def _given_load(row: InventoryRow, volts: Volts) -> Load:
    power_factor, is_pf_assumed = _power_factor(row, volts)
    main_a = _main_part_a(row, volts, power_factor)
    is_assumed = not row.has(*_FULL_LOADS)
    if volts.poles == 1:
        return Load(neutral_a=main_a, neutral_pf=power_factor, is_assumed=is_assumed, is_pf_assumed=is_pf_assumed)
    watts_120 = row.get(LOAD_120_W)
    return Load(
        neutral_a=row.get(LOAD_120_A) or 0.0 if watts_120 is None else watts_120 / _NEUTRAL_PART_V,
        neutral_pole=row.get(POLE_120),
        line_a=main_a,
        line_pf=power_factor,
        is_assumed=is_assumed,
        is_pf_assumed=is_pf_assumed,
    )


def _power_factor(row: InventoryRow, volts: Volts) -> tuple[PowerFactor, bool]:
    """Power factor of the main part, and whether it is a shipped default."""
    given = row.get(PF)
    if given is not None:
        return given, False
    default = default_pf(row.get(USE) or "", volts) if row.has(USE) else None
    return (PowerFactor(), False) if default is None else (default, True)


def _main_part_a(row: InventoryRow, volts: Volts, power_factor: PowerFactor) -> float:
    """Amps [A] of the main part: I = P/(V cos phi) or S/V at nominal volts, else the shipped default.

    Without any of them that is reported, and the result is 0.
    """
    load_a, load_w, load_va = row.get(LOAD_A), row.get(LOAD_W), row.get(LOAD_VA)
    if load_a is not None:
        return load_a
    if load_w is not None:
        return load_w / (NOMINAL_V[volts] * power_factor.value)
    if load_va is not None:
        return load_va / NOMINAL_V[volts]
    assumed = default_load_a(row.get(USE) or "", row.get(BREAKER_A), volts)
    if assumed is None:
        row.report(LOAD_A, "no load, and nothing to assume it from", "give load_a, load_w or load_va, or breaker_a")
    return assumed or 0.0


def _refuse_far_above_breaker(row: InventoryRow, load: Load) -> None:
    breaker_a = row.get(BREAKER_A)
    pole_a = load.line_a + load.neutral_a
    given = next((column for column in (*_FULL_LOADS, *_MEASURED, *_PARTS_120) if row.has(column)), None)
    if given is None or breaker_a is None or row.is_faulty(given) or pole_a <= _FAR_ABOVE_BREAKER * breaker_a:
        return
    problem = f"makes {pole_a:.4g} A on a {breaker_a:g} A breaker"
    right = {LOAD_A: "put watts into load_w", LOAD_120_A: "put watts into load_120_w", LOAD_W: "put amps into load_a"}
    row.report(given, problem, f"check both figures; {right.get(given, 'give running amps')}")


def _measured_load(row: InventoryRow, volts: Volts, system: SupplySystem | None) -> Load:
    first, second = row.get(AMPS_FIRST), row.get(AMPS_SECOND)
    if volts.poles == 1:
        row.report(AMPS_FIRST if row.has(AMPS_FIRST) else AMPS_SECOND, "is for two-pole circuits", "use load_a here")
        return Load()
    if first is None or second is None:
        row.report(AMPS_FIRST if first is None else AMPS_SECOND, "is blank", "give the amps of both poles")
        return Load()
    power_factor, is_pf_assumed = _power_factor(row, volts)
    measured = _PoleAmps(first, second)
    if not volts.has_neutral:
        if abs(first - second) > _METER_TOLERANCE_A:
            problem = "differs from amps_first, which a circuit without a neutral cannot"
            row.report(AMPS_SECOND, problem, "measure again, or write a voltage with a neutral under volts")
        return Load(line_a=(first + second) / 2.0, line_pf=power_factor, is_pf_assumed=is_pf_assumed)
    if system is SupplySystem.IN_PHASE and measured.smaller_a > 0.0:
        problem = "legs in phase have no voltage between them, so no part of this flows from leg to leg"
        row.report(AMPS_FIRST, problem, "write one 120 V row for each pole, with one label under tied")
    return Load(
        neutral_a=measured.neutral_part_a(is_wye=system is SupplySystem.WYE),
        neutral_pf=power_factor,
        neutral_pole=measured.larger_pole,
        line_a=measured.smaller_a,
        line_pf=power_factor,
        is_pf_assumed=is_pf_assumed,
    )


@dataclass(frozen=True)
class _PoleAmps:
    """Clamp readings [A] of a circuit's two poles."""

    first_a: float
    second_a: float

    @property
    def smaller_a(self) -> float:
        return min(self.first_a, self.second_a)

    @property
    def larger_pole(self) -> Pole | None:
        if self.first_a == self.second_a:
            return None
        return Pole.FIRST if self.first_a > self.second_a else Pole.SECOND

    def neutral_part_a(self, *, is_wye: bool) -> float:
        """Find the part [A] that flows from the larger pole to the neutral.

        Notes
        -----
        The smaller reading is the part L from leg to leg. Both parts have one power factor, so on legs 180 degrees
        apart the larger reading is M = L + N. On two legs of a wye the leg-to-leg part stands at 30 degrees to the
        neutral part in its pole, M^2 = L^2 + N^2 + 2 L N cos 30, hence N = sqrt(M^2 - (L sin 30)^2) - L cos 30.
        """
        line, larger = self.smaller_a, max(self.first_a, self.second_a)
        if not is_wye or larger == line:
            return larger - line
        angle = math.radians(30.0)
        return math.sqrt(larger**2 - (line * math.sin(angle)) ** 2) - line * math.cos(angle)
