"""The columns of the inventory: the one place that knows their names, what they mean and how they are read."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, Generic, TypeVar

from balancer.files import cells
from balancer.files.quantities import AMPS, KILOWATT_HOURS, NO_UNIT, VOLT_AMPS, WATTS, Cell, Quantity

Value = TypeVar("Value")

_MOST_A = 400.0
"""Largest current of a circuit taken for meant: no breaker of a panel with 120/240 V circuits is larger."""
_MOST_START_A = 1000.0
_MOST_W = 100_000.0
_MOST_KWH_DAY = 1000.0
_MOST_EFFORT = 100.0

_WATTS_BELONG = "where these are watts, put them into {}; else write amps, such as 12.5"


@dataclass(frozen=True, eq=False)
class Column(Generic[Value]):
    """One column; `default` says what a blank cell means."""

    name: str
    meaning: str
    default: str
    read: Callable[[Cell], Value]

    @property
    def is_required(self) -> bool:
        """Whether every inventory must have it."""
        return self.default == "required"

    @property
    def is_number(self) -> bool:
        """Whether its cells hold numbers."""
        return isinstance(self.read, Quantity) or self.name in ("pf", "slack_in")


def _amps(if_other: str = "", *, most: float = _MOST_A, is_zero_allowed: bool = True) -> Quantity:
    return Quantity(AMPS, most=most, is_zero_allowed=is_zero_allowed, if_other=if_other)


CIRCUIT = Column("circuit", "unique short label", "required", cells.read_text)
DESCRIPTION = Column("description", "wording for the panel's directory", "none", cells.read_text)
SPACE = Column(
    "space",
    "where it is landed: `7`, `5-7` (two poles), `7-5` (turned), `12a` (half), `12b-14a` or `12a-14b` (quad poles)",
    "not landed yet: a place is found",
    cells.read_space,
)
VOLTS = Column(
    "volts",
    "`120`, `240`, `120/240` (two poles with a neutral); on a 120/208 V supply also `208`, `120/208`",
    "required",
    cells.read_volts,
)
ROLE = Column(
    "role",
    "`load`, `spare`, `feeder`, `backfed`, `interlock` or `surge`; the last three stay put",
    "load",
    cells.read_role,
)
LOAD_A = Column(
    "load_a",
    "running amps at full use; of a 120/240 V circuit its part from leg to leg",
    "a shipped default by use and breaker, marked assumed",
    _amps(_WATTS_BELONG.format("load_w")),
)
LOAD_W = Column(
    "load_w",
    "the same in watts, instead of `load_a`",
    "see load_a",
    Quantity(WATTS, most=_MOST_W, if_other="put amps into load_a and volt-amperes into load_va"),
)
LOAD_VA = Column(
    "load_va",
    "the same in volt-amperes, instead of `load_a`",
    "see load_a",
    Quantity(VOLT_AMPS, most=_MOST_W, if_other="put amps into load_a and watts into load_w"),
)
PF = Column(
    "pf", "power factor, lagging unless `0.95 lead`", "a shipped default by use, else 1", cells.read_power_factor
)
LOAD_120_A = Column(
    "load_120_a",
    "amps of the 120 V part of a 120/240 V circuit, at power factor 1",
    "none",
    _amps(_WATTS_BELONG.format("load_120_w")),
)
LOAD_120_W = Column(
    "load_120_w",
    "the same in watts, instead of `load_120_a`",
    "none",
    Quantity(WATTS, most=_MOST_W, if_other="put amps into load_120_a"),
)
POLE_120 = Column(
    "pole_120",
    "pole of the 120 V part: `first` (the space named first) or `second`",
    "not known: the worse of both counts",
    cells.read_pole,
)
AMPS_FIRST = Column(
    "amps_first",
    "measured amps on the first pole of a two-pole circuit, instead of the loads",
    "none",
    _amps("write the amps that the clamp meter read on the pole"),
)
AMPS_SECOND = Column(
    "amps_second",
    "the same on the second pole",
    "none",
    _amps("write the amps that the clamp meter read on the pole"),
)
BREAKER_A = Column(
    "breaker_a", "breaker rating in amps", "not known: matches no other breaker", _amps(is_zero_allowed=False)
)
BREAKER_TYPE = Column(
    "breaker_type", "`standard`, `gfci`, `afci`, `dual function` or your own words", "matches no other", cells.read_text
)
WIRE = Column("wire", "conductor size and metal: `12 cu`, `2/0 al`", "not checked", cells.read_wire)
MCA = Column("mca", "nameplate minimum circuit ampacity in amps", "none", _amps(is_zero_allowed=False))
MOP = Column("mop", "nameplate maximum overcurrent device in amps", "none", _amps(is_zero_allowed=False))
USE = Column("use", "name of a use profile, such as `lighting` or `heating`", "general", cells.read_use)
CONTINUOUS = Column("continuous", "yes where it runs for 3 hours or more", "no", cells.read_yes_no)
START_A = Column(
    "start_a", "motor starting (locked-rotor) amps", "none", _amps("write amps, such as 40", most=_MOST_START_A)
)
SHARED_NEUTRAL = Column(
    "shared_neutral",
    "one label on the circuits that share a neutral; `none` where it was checked to have its own",
    "not checked: a test is asked for before it is moved",
    cells.read_shared_neutral,
)
TIED = Column("tied", "one label on the circuits that must move together", "moves alone", cells.read_text)
NOT_WITH = Column("not_with", "one label on the loads that never run together", "none", cells.read_text)
FIXED = Column("fixed", "yes: it stays where it is landed", "no", cells.read_yes_no)
SLACK_IN = Column(
    "slack_in",
    "inches that the conductor can be re-landed without a splice, or `short`, `ok`",
    "anywhere; beyond 6 in a splice may be needed",
    cells.read_slack,
)
EFFORT = Column(
    "effort", "relative effort of re-landing it", "1", Quantity(NO_UNIT, most=_MOST_EFFORT, is_zero_allowed=False)
)
PRIORITY = Column("priority", "for backup sources: `must`, `never` or 0 to 100", "none", cells.read_priority)
KWH_DAY = Column("kwh_day", "energy a day in kWh, where known", "none", Quantity(KILOWATT_HOURS, most=_MOST_KWH_DAY))
NOTES = Column("notes", "free text", "none", cells.read_text)

COLUMNS: tuple[Column[Any], ...] = (
    *(CIRCUIT, DESCRIPTION, SPACE, VOLTS, ROLE),
    *(LOAD_A, LOAD_W, LOAD_VA, PF, LOAD_120_A, LOAD_120_W, POLE_120, AMPS_FIRST, AMPS_SECOND),
    *(BREAKER_A, BREAKER_TYPE, WIRE, MCA, MOP),
    *(USE, CONTINUOUS, START_A, SHARED_NEUTRAL, TIED, NOT_WITH),
    *(FIXED, SLACK_IN, EFFORT, PRIORITY, KWH_DAY, NOTES),
)
"""Every column that the tool knows, in the order of a blank inventory."""
