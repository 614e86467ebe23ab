"""A circuit of the inventory: what is connected, to which breaker, and what holds it in place."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from enum import StrEnum

from balancer.panel.terminals import Landing


class Volts(StrEnum):
    """Nominal circuit voltage as the inventory writes it."""

    V120 = "120"
    V240 = "240"
    V120_240 = "120/240"
    V208 = "208"
    V120_208 = "120/208"

    @property
    def poles(self) -> int:
        """Breaker poles that the circuit needs."""
        return 1 if self is Volts.V120 else 2

    @property
    def has_neutral(self) -> bool:
        """Whether line-to-neutral current can flow."""
        return self in (Volts.V120, Volts.V120_240, Volts.V120_208)


class Role(StrEnum):
    """What a breaker does in the panel."""

    LOAD = "load"
    SPARE = "spare"
    FEEDER = "feeder"
    BACKFED = "backfed"
    INTERLOCK = "interlock"
    SURGE = "surge"

    @property
    def is_device(self) -> bool:
        """Whether it is a device that stays put and carries no load when planning."""
        return self in (Role.BACKFED, Role.INTERLOCK, Role.SURGE)


class Pole(StrEnum):
    """One of a two-pole circuit's poles, by its space number."""

    FIRST = "first"
    SECOND = "second"


@dataclass(frozen=True)
class PowerFactor:
    """Displacement power factor, 0 < value <= 1."""

    value: float = 1.0
    is_leading: bool = False

    @property
    def unit_phasor(self) -> complex:
        """Current of 1 A in the leg's own reference: cos(phi) - j sin(phi), below the axis when it lags."""
        reactive = math.sqrt(max(0.0, 1.0 - self.value * self.value))
        return complex(self.value, reactive if self.is_leading else -reactive)


@dataclass(frozen=True)
class Wire:
    """A conductor: trade size (``12``, ``2/0``, ``250``) and metal (``cu`` or ``al``)."""

    size: str
    metal: str

    def __str__(self) -> str:
        """Print as the inventory writes it."""
        return f"{self.size} {self.metal}"


@dataclass(frozen=True, kw_only=True)
class Load:
    """Running current of a circuit at full use, split by what it flows through.

    A 120 V circuit has only `neutral_a`. A two-pole circuit has `line_a`, the part from leg to leg, and, where it has a
    neutral, `neutral_a`, the part from one pole to neutral; `neutral_pole` None says that the pole is not known.
    """

    neutral_a: float = 0.0
    neutral_pf: PowerFactor = PowerFactor()
    neutral_pole: Pole | None = None
    line_a: float = 0.0
    line_pf: PowerFactor = PowerFactor()
    is_assumed: bool = False
    """The amps are a shipped default."""
    is_pf_assumed: bool = False
    """The power factor is a shipped default of the use, not the user's."""


@dataclass(frozen=True, kw_only=True)
class Circuit:
    """One row of the inventory, checked and with its defaults filled in.

    Amps are in amperes [A], slack in inches [in]; ``None`` means that the cell is blank and no default applies.
    `slack_in` is ``inf`` for ``ok``, 0 for ``short`` and None for blank (anywhere, but a splice may be needed).
    """

    label: str
    description: str = ""
    landing: Landing = ()
    volts: Volts
    role: Role = Role.LOAD
    load: Load = Load()
    breaker_a: float | None = None
    breaker_type: str = ""
    wire: Wire | None = None
    mca_a: float | None = None
    mop_a: float | None = None
    use: str = ""
    is_continuous: bool = False
    start_a: float | None = None
    shared_neutral: str = ""
    """Pair label; "" when the user wrote ``none`` or left it blank (then `is_neutral_checked` tells which)."""
    is_neutral_checked: bool = False
    tied: str = ""
    not_with: str = ""
    is_fixed: bool = False
    slack_in: float | None = None
    effort: float = 1.0
    priority: str = ""
    kwh_day: float | None = None
    notes: str = ""
    line_number: int = 0
    """Line in the inventory file, for messages."""
    cells: dict[str, str] = field(default_factory=dict, compare=False)
    """The row as written, header to text, unknown columns included: what saving carries through."""

    @property
    def poles(self) -> int:
        """Breaker poles: 1 or 2."""
        return self.volts.poles

    @property
    def is_landed(self) -> bool:
        """Whether it has a place in the panel as found."""
        return bool(self.landing)

    @property
    def carries_load(self) -> bool:
        """Whether it counts as a load when planning: loads and feeders do, spares and devices do not."""
        return self.role in (Role.LOAD, Role.FEEDER)

    @property
    def hot_conductors(self) -> int:
        """Hot conductors that are landed with it; a spare breaker has none."""
        return 0 if self.role is Role.SPARE else self.poles

    @property
    def has_gfci_or_afci(self) -> bool:
        """Whether the breaker also takes the circuit's neutral (GFCI, AFCI, dual function)."""
        kind = self.breaker_type.casefold()
        return any(word in kind for word in ("gfci", "afci", "dual function"))
