"""From a checked row of the inventory to a circuit."""

from __future__ import annotations

from collections.abc import Sequence

from balancer.files import columns as c
from balancer.files.group_checks import ReadLabel, joined_spelling, neutral_label
from balancer.files.inventory_row import InventoryRow
from balancer.files.landing_checks import check_poles
from balancer.files.loads import read_load
from balancer.panel import Circuit, Load, Panel, Role, SupplySystem, Volts

_NOT_ON = {
    SupplySystem.SPLIT: (Volts.V208, Volts.V120_208),
    SupplySystem.WYE: (Volts.V240, Volts.V120_240),
    SupplySystem.IN_PHASE: (Volts.V208, Volts.V120_208),
}
"""Voltages that a supply does not have. 240 V on legs in phase is found often enough to be a finding of its own."""


def check_row(row: InventoryRow, panel: Panel | None) -> None:
    """Report what contradicts itself within one row."""
    check_poles(row)
    if panel is not None:
        _check_volts(row, panel)
    mca, mop = row.get(c.MCA), row.get(c.MOP)
    if mca is not None and mop is not None and mca > mop:
        row.report(
            c.MCA, f"is above the maximum overcurrent device ({c.MOP.name} {mop:g} A)", "read the nameplate again"
        )


def _check_volts(row: InventoryRow, panel: Panel) -> None:
    volts, system = row.get(c.VOLTS), panel.supply.system
    if volts not in _NOT_ON[system]:
        return
    if panel.is_assumed:
        remedy = 'give a panel file with system = "120/208", or correct the voltage'
    else:
        remedy = "correct the voltage, or system in the panel file"
    row.report(c.VOLTS, f"a {system} V supply has no {volts} V", remedy)


def read_row_load(row: InventoryRow, panel: Panel | None) -> Load:
    """Read the load of a row; spares and devices carry none when planning."""
    role = row.get(c.ROLE) or Role.LOAD
    if role is Role.SPARE or role.is_device:
        return Load()
    return read_load(row, None if panel is None else panel.supply.system)


class CircuitBuilder:
    """Builds the circuits of an inventory without problems; labels that differ in case only become one."""

    def __init__(self, rows: Sequence[InventoryRow]) -> None:
        self._neutrals = joined_spelling(rows, neutral_label)
        self._tied = joined_spelling(rows, _label_in(c.TIED))
        self._not_with = joined_spelling(rows, _label_in(c.NOT_WITH))

    def build(self, row: InventoryRow, load: Load) -> Circuit:
        """Build one circuit."""
        role = row.get(c.ROLE) or Role.LOAD
        return Circuit(
            label=row.label,
            description=row.text(c.DESCRIPTION),
            landing=row.get(c.SPACE) or (),
            volts=row.required(c.VOLTS),
            role=role,
            load=load,
            breaker_a=row.get(c.BREAKER_A),
            breaker_type=row.text(c.BREAKER_TYPE),
            wire=row.get(c.WIRE),
            mca_a=row.get(c.MCA),
            mop_a=row.get(c.MOP),
            use=row.get(c.USE) or "",
            is_continuous=row.get(c.CONTINUOUS) or False,
            start_a=row.get(c.START_A),
            shared_neutral=self._neutrals[neutral_label(row).casefold()],
            is_neutral_checked=row.get(c.SHARED_NEUTRAL) is not None,
            tied=self._tied[row.text(c.TIED).casefold()],
            not_with=self._not_with[row.text(c.NOT_WITH).casefold()],
            is_fixed=row.get(c.FIXED) or role.is_device,
            slack_in=row.get(c.SLACK_IN),
            effort=row.get(c.EFFORT) or Circuit.effort,
            priority=row.get(c.PRIORITY) or "",
            kwh_day=row.get(c.KWH_DAY),
            notes=row.text(c.NOTES),
            line_number=row.line,
            cells=row.cells,
        )


def _label_in(column: c.Column[str]) -> ReadLabel:
    return lambda row: row.text(column)
