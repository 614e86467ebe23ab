"""A circuit written back as cells of the inventory: the reverse of `circuit_row`."""

from __future__ import annotations

import math
from decimal import Decimal
from typing import Any

from balancer.files import columns as c
from balancer.files.columns import COLUMNS, Column
from balancer.files.table import header_key
from balancer.panel import Circuit, Landing, Pole, PowerFactor, Role, format_landing


def cells_of(circuit: Circuit, landing: Landing) -> dict[str, str]:
    """Give the cells of a circuit by `header_key`, as written where it was read from a file, with its landing.

    Decimal commas of the columns that hold numbers become points.
    """
    if circuit.cells:
        cells = {header_key(name): text for name, text in circuit.cells.items()}
        for column in COLUMNS:
            key = header_key(column.name)
            if column.is_number and key in cells:
                cells[key] = cells[key].replace(",", ".")
    else:
        cells = {header_key(name): text for name, text in _cells_from_values(circuit).items() if text}
    cells[header_key(c.SPACE.name)] = format_landing(landing)
    return cells


def _cells_from_values(circuit: Circuit) -> dict[str, str]:
    """Write a circuit that was not read from a file."""
    texts: dict[Column[Any], str] = {
        c.CIRCUIT: circuit.label,
        c.DESCRIPTION: circuit.description,
        c.VOLTS: str(circuit.volts),
        c.ROLE: "" if circuit.role is Role.LOAD else str(circuit.role),
        c.BREAKER_A: _number(circuit.breaker_a),
        c.BREAKER_TYPE: circuit.breaker_type,
        c.WIRE: "" if circuit.wire is None else str(circuit.wire),
        c.MCA: _number(circuit.mca_a),
        c.MOP: _number(circuit.mop_a),
        c.USE: circuit.use,
        c.CONTINUOUS: _yes(circuit.is_continuous),
        c.START_A: _number(circuit.start_a),
        c.SHARED_NEUTRAL: circuit.shared_neutral or ("none" if circuit.is_neutral_checked else ""),
        c.TIED: circuit.tied,
        c.NOT_WITH: circuit.not_with,
        c.FIXED: _yes(circuit.is_fixed and not circuit.role.is_device),
        c.SLACK_IN: _slack(circuit.slack_in),
        c.EFFORT: _number(circuit.effort),
        c.PRIORITY: circuit.priority,
        c.KWH_DAY: _number(circuit.kwh_day),
        c.NOTES: circuit.notes,
    }
    return {column.name: text for column, text in texts.items()} | _load_cells(circuit)


def _load_cells(circuit: Circuit) -> dict[str, str]:
    load = circuit.load
    parts: dict[Column[Any], str]
    if not circuit.carries_load:
        return {}
    if circuit.poles == 1:
        parts = {c.LOAD_A: _number(load.neutral_a), c.PF: _power_factor(load.neutral_pf)}
    elif load.neutral_a and load.neutral_pole and load.neutral_pf != PowerFactor():
        larger, smaller = _number(load.line_a + load.neutral_a), _number(load.line_a)
        is_first = load.neutral_pole is Pole.FIRST
        first, second = (larger, smaller) if is_first else (smaller, larger)
        parts = {c.AMPS_FIRST: first, c.AMPS_SECOND: second, c.PF: _power_factor(load.neutral_pf)}
    else:
        parts = {c.LOAD_A: _number(load.line_a), c.PF: _power_factor(load.line_pf)}
        if load.neutral_a:
            parts |= {c.LOAD_120_A: _number(load.neutral_a), c.POLE_120: load.neutral_pole or ""}
    # Figures that were assumed stay blank, to be assumed again.
    if load.is_assumed:
        parts.pop(c.LOAD_A, None)
    if load.is_pf_assumed:
        parts.pop(c.PF, None)
    return {column.name: text for column, text in parts.items()}


def _number(value: float | None) -> str:
    """Print a number in full: no exponent, and nothing that reading would not give back."""
    return "" if value is None else format(Decimal(repr(float(value))).normalize(), "f")


def _power_factor(power_factor: PowerFactor) -> str:
    return f"{_number(power_factor.value)}{' lead' if power_factor.is_leading else ''}"


def _slack(slack_in: float | None) -> str:
    return "ok" if slack_in == math.inf else _number(slack_in)


def _yes(is_so: bool) -> str:
    return "yes" if is_so else ""
