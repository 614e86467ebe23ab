"""What a circuit is taken to carry where the inventory leaves it blank: shipped defaults by use and breaker."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

from balancer.electrical.shipped_tables import read_table
from balancer.panel import PowerFactor, Volts

GENERAL_USE = "general"
"""The use of a circuit whose `use` cell is blank."""


@dataclass(frozen=True)
class _UseDefault:
    share_of_breaker: float
    power_factor: PowerFactor | None


@cache
def _defaults() -> dict[tuple[str, int], _UseDefault]:
    """Every default by use and number of poles."""
    table = {}
    for _, row in read_table("use_defaults.csv"):
        power_factor = PowerFactor(float(row["pf"])) if row["pf"] else None
        default = _UseDefault(float(row["share_of_breaker"]), power_factor)
        for poles in (int(row["poles"]),) if row["poles"] else (1, 2):
            table[row["use"], poles] = default
    return table


@cache
def known_uses() -> tuple[str, ...]:
    """Names of all uses, as the tool writes them, in the order of the shipped table."""
    return tuple(dict.fromkeys(use for use, _ in _defaults()))


def _folded(text: str) -> str:
    return " ".join(text.casefold().replace("_", " ").replace("-", " ").split())


@cache
def _uses_by_folded_name() -> dict[str, str]:
    return {_folded(use): use for use in known_uses()} | {"": GENERAL_USE}


def normal_use(text: str) -> str | None:
    """Give a use as the tool writes it, whatever its case, spaces and underscores; blank is `general`.

    None where no use has that name.
    """
    return _uses_by_folded_name().get(_folded(text))


def _default_of(use: str, volts: Volts) -> _UseDefault | None:
    name = normal_use(use)
    return None if name is None else _defaults()[name, volts.poles]


def default_load_a(use: str, breaker_a: float | None, volts: Volts) -> float | None:
    """Give the running amps [A] at full use, by use and breaker; None where either is not known.

    Notes
    -----
    A share of the breaker's rating, from the shipped table `use_defaults.csv`: a planning assumption. On a two-pole
    circuit it is the part from leg to leg.
    """
    default = _default_of(use, volts)
    return None if default is None or breaker_a is None else default.share_of_breaker * breaker_a


def default_pf(use: str, volts: Volts = Volts.V120) -> PowerFactor | None:
    """Look up the displacement power factor of a use; None where the shipped table has none and 1 is to be taken."""
    default = _default_of(use, volts)
    return None if default is None else default.power_factor
