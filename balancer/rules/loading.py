"""Running loads against the breakers that carry them."""

from __future__ import annotations

from collections.abc import Iterator

from balancer.electrical.defaults import normal_use
from balancer.electrical.supply import supply_factors
from balancer.panel import Circuit, Supply
from balancer.rules.findings import Severity
from balancer.rules.landed import LandedPanel
from balancer.rules.rule import Observation, Rule

CONTINUOUS_SHARE = 0.8
"""Most that a continuous load may take of its breaker: NEC 2023, 210.20(A), 125 % the other way round."""

_CONTINUOUS_BY_CODE = {
    "EV charging": "625.42",
    "heating": "424.4(B)",
    "water heating": "422.13",
}
"""Uses whose loads the code counts as continuous: NEC 2023, from memory; tank water heaters up to 120 gallons."""

_ROUNDING_A = 1e-6


def running_a(supply: Supply, circuit: Circuit) -> float:
    """Give the current [A] of a circuit's larger pole at full use.

    Notes
    -----
    The pole with the 120 V part carries k i_line + i_neutral, as phasors, with k the factor by which a leg-to-leg
    current appears in that leg (1 for legs 180 degrees apart). Where both legs of a wye are possible the worse counts.
    """
    load = circuit.load
    neutral_phasor_a = load.neutral_a * load.neutral_pf.unit_phasor
    line_phasor_a = load.line_a * load.line_pf.unit_phasor
    return max(
        abs(factor * line_phasor_a + neutral_phasor_a)
        for factors in supply_factors(supply)
        for factor in (factors.line_a, factors.line_b)
    )


def _loaded(landed: LandedPanel) -> Iterator[tuple[Circuit, float, float]]:
    """Give every load with a known breaker: circuit, running amps at full use, breaker rating [A]."""
    for circuit in landed.loads:
        if circuit.breaker_a is not None:
            yield circuit, running_a(landed.panel.supply, circuit), circuit.breaker_a


def _is_above(load_a: float, limit_a: float) -> bool:
    return load_a > limit_a + _ROUNDING_A


def _continuous(landed: LandedPanel) -> Iterator[Observation]:
    for circuit, load_a, breaker_a in _loaded(landed):
        article = _CONTINUOUS_BY_CODE.get(normal_use(circuit.use) or "")
        allowed_a = CONTINUOUS_SHARE * breaker_a
        if not (circuit.is_continuous or article) or not _is_above(load_a, allowed_a):
            continue
        assumed = " (assumed load)" if circuit.load.is_assumed else ""
        why = (
            ""
            if circuit.is_continuous
            else f" Not marked continuous, but {article} (from memory) counts most such loads so."
        )
        message = (
            f"{landed.name(circuit)}: {load_a:.1f} A{assumed} of continuous load on a {breaker_a:g} A breaker, which "
            f"may carry {allowed_a:g} A for three hours or more (80 %).{why} Take load off it, or fit a larger breaker "
            "if the conductor allows it."
        )
        yield Observation((circuit,), message, _severity_of_continuous(circuit))


def _severity_of_continuous(circuit: Circuit) -> Severity | None:
    if circuit.load.is_assumed:
        return Severity.NOTICE
    return None if circuit.is_continuous else Severity.WARNING


def _above_breaker(landed: LandedPanel) -> Iterator[Observation]:
    for circuit, load_a, breaker_a in _loaded(landed):
        if circuit.is_continuous or not _is_above(load_a, breaker_a):
            continue
        assumed = " (assumed)" if circuit.load.is_assumed else ""
        message = (
            f"{landed.name(circuit)}: {load_a:.1f} A{assumed} at full use on a {breaker_a:g} A breaker, which trips if "
            "that lasts. Check the load and the breaker; if the loads never all run together, enter what does."
        )
        yield Observation((circuit,), message, Severity.NOTICE if circuit.load.is_assumed else None)


LOADING_RULES = (
    Rule(
        "continuous-load-above-80-percent",
        Severity.ERROR,
        "NEC 2023, 210.20(A); feeders 215.3 (from memory)",
        _continuous,
    ),
    Rule("load-above-breaker", Severity.WARNING, "NEC 2023, 210.23 (from memory)", _above_breaker),
)
