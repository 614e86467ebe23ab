"""The table [supply] of a panel file: how the legs stand to each other, and what is between them and the source."""

from __future__ import annotations

import re

from balancer.files.cells import read_wire
from balancer.files.panel_spaces import ONLY_TWO_LEGS
from balancer.files.quantities import Cell, CellError
from balancer.files.toml_table import TomlTable
from balancer.panel import Leg, Supply, SupplySystem, Wire

SUPPLY_KEYS = (
    *("system", "rotation", "source", "transformer_kva", "impedance_pct", "service_wire", "neutral_wire", "length_ft"),
)

_MOST_KVA = 5000.0
_MOST_PCT = 20.0
_MOST_FT = 10_000.0

_ROTATIONS = {"A leads": Leg.A, "B leads": Leg.B, "unknown": None}
_TRIPS_PER_LEG = ("inverter", "generator")
_OTHER_SUPPLY = re.compile(r"(three|3)[\s-]*ph|delta|high[\s-]*leg|wild|stinger|277|347|480|600")


def read_supply(table: TomlTable) -> Supply | None:
    """Read what feeds the panel; None where what is wrong leaves the system in doubt."""
    table.refuse_unknown(SUPPLY_KEYS)
    system = _system(table)
    supply = Supply(
        system=system or SupplySystem.SPLIT,
        leading_leg=_leading_leg(table, system),
        is_trip_per_leg=table.word("source", ("utility", *_TRIPS_PER_LEG)) in _TRIPS_PER_LEG,
        transformer_kva=table.number("transformer_kva", _MOST_KVA),
        impedance_pct=table.number("impedance_pct", _MOST_PCT),
        service_wire=_wire(table, "service_wire"),
        neutral_wire=_wire(table, "neutral_wire"),
        length_ft=table.number("length_ft", _MOST_FT),
    )
    return None if system is None else supply


def _system(table: TomlTable) -> SupplySystem | None:
    """Read the system, 120/240 V where nothing is said; None where it has been reported."""
    value = table.raw("system")
    if value is None:
        return SupplySystem.SPLIT
    text = re.sub(r"\s*v(olts?)?$", "", str(value).casefold().strip())
    if text in tuple(SupplySystem):
        return SupplySystem(text)
    if _OTHER_SUPPLY.search(text) or text.count("/") > 1:
        table.report("system", "is not a supply with two hot legs", ONLY_TWO_LEGS)
    else:
        remedy = 'write "120/240", "120/208" for two legs of a wye, or "120" for one source on both legs'
        table.report("system", "is not a supply known here", remedy)
    return None


def _leading_leg(table: TomlTable, system: SupplySystem | None) -> Leg | None:
    rotation = table.word("rotation", tuple(_ROTATIONS))
    if rotation is None:
        return None
    if system not in (None, SupplySystem.WYE):
        remedy = 'take it out, or write system = "120/208"'
        table.report("rotation", "matters only on two legs of a wye", remedy)
    return _ROTATIONS[rotation]


def _wire(table: TomlTable, key: str) -> Wire | None:
    text = table.text(key)
    if text is None:
        return None
    try:
        return read_wire(Cell(text))
    except CellError as error:
        table.report(key, error.problem, error.remedy)
        return None
