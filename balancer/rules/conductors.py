"""Breakers against the conductors and nameplates that they protect."""

from __future__ import annotations

from collections.abc import Iterator

from balancer.electrical.defaults import normal_use
from balancer.panel import Circuit, Role
from balancer.rules.ampacity import (
    SMALL_CONDUCTOR_LIMITS_A,
    STANDARD_SIZES_A,
    ampacity_a,
    conductor_limit_a,
    largest_breaker_a,
)
from balancer.rules.findings import Severity
from balancer.rules.landed import LandedPanel
from balancer.rules.rule import Observation, Rule

_MOTOR_USES = ("motor", "pump", "cooling")
_DWELLING_FEEDER_SHARE = 0.83
"""Ampacity that conductors of a dwelling's whole load need, as a share of the breaker: NEC 2020 and 2023, 310.12."""
_LARGEST_60C_CIRCUIT_A = 100.0
"""Circuits up to this rating [A] use the 60 degC column unless marked for 75: NEC 2023, 110.14(C)(1), from memory."""


def _above_conductor(landed: LandedPanel) -> Iterator[Observation]:
    for circuit in landed.loads:
        limit_a = conductor_limit_a(circuit)
        if circuit.mop_a is not None or limit_a is None or circuit.breaker_a is None or circuit.breaker_a <= limit_a:
            continue
        wire, breaker_a = circuit.wire, circuit.breaker_a
        severity, doubt = _doubt_about_limit(circuit, breaker_a)
        message = (
            f"{landed.name(circuit)}: a {breaker_a:g} A breaker on {wire} wire, whose limit is {limit_a:g} A. {doubt}"
            f"Check the wire entered; if it is right, fit a breaker of {limit_a:g} A or less."
        )
        yield Observation((circuit,), message, severity)


def _doubt_about_limit(circuit: Circuit, breaker_a: float) -> tuple[Severity | None, str]:
    """Say what may make a breaker above the ordinary limit right; only then it is no error."""
    if circuit.start_a is not None or normal_use(circuit.use) in _MOTOR_USES:
        return Severity.WARNING, (
            "Motor and air-conditioning circuits may have more (240.4(G)): enter mca and mop from the nameplate. "
        )
    carried_a = ampacity_a(circuit.wire, 75) if circuit.wire else None
    if circuit.role is Role.FEEDER and carried_a is not None and carried_a >= _DWELLING_FEEDER_SHARE * breaker_a:
        return Severity.WARNING, "Only a feeder that carries the whole load of a dwelling may have that (310.12). "
    return None, ""


def _above_60c_column(landed: LandedPanel) -> Iterator[Observation]:
    for circuit in landed.loads:
        wire, breaker_a = circuit.wire, circuit.breaker_a
        if wire is None or breaker_a is None or wire in SMALL_CONDUCTOR_LIMITS_A or circuit.mop_a is not None:
            continue
        limit_a, cool_limit_a = conductor_limit_a(circuit), largest_breaker_a(wire, column_c=60)
        if limit_a is None or cool_limit_a is None or breaker_a > _LARGEST_60C_CIRCUIT_A:
            continue
        if cool_limit_a < breaker_a <= limit_a:
            message = (
                f"{landed.name(circuit)}: a {breaker_a:g} A breaker on {wire} wire is right only where the breaker, "
                "the far terminals and the cable are all good for 75 \N{DEGREE SIGN}C. At 60 \N{DEGREE SIGN}C "
                f"(nonmetallic cable always) the limit is {cool_limit_a:g} A: check the markings."
            )
            yield Observation((circuit,), message)


def _above_nameplate(landed: LandedPanel) -> Iterator[Observation]:
    for circuit in landed.loads:
        if circuit.mop_a is not None and circuit.breaker_a is not None and circuit.breaker_a > circuit.mop_a:
            message = (
                f"{landed.name(circuit)}: a {circuit.breaker_a:g} A breaker, but the nameplate allows at most "
                f"{circuit.mop_a:g} A (mop). Fit a breaker of {circuit.mop_a:g} A or less."
            )
            yield Observation((circuit,), message)


def _below_nameplate(landed: LandedPanel) -> Iterator[Observation]:
    for circuit in landed.loads:
        if circuit.mca_a is None or circuit.wire is None:
            continue
        cool_a, warm_a = ampacity_a(circuit.wire, 60), ampacity_a(circuit.wire, 75)
        if cool_a is None or warm_a is None or circuit.mca_a <= cool_a:
            continue
        message = (
            f"{landed.name(circuit)}: the nameplate asks for {circuit.mca_a:g} A of wire (mca), {circuit.wire} carries "
            f"{cool_a:g} A at 60 \N{DEGREE SIGN}C and {warm_a:g} A at 75 \N{DEGREE SIGN}C. "
        )
        if circuit.mca_a > warm_a:
            yield Observation((circuit,), message + "Run larger wire.")
        else:
            remedy = (
                "It is right only where terminals and cable are all good for 75 \N{DEGREE SIGN}C: check the markings."
            )
            yield Observation((circuit,), message + remedy, Severity.WARNING)


def _nameplate_limit_missing(landed: LandedPanel) -> Iterator[Observation]:
    for circuit in landed.loads:
        if circuit.mca_a is None or circuit.mop_a is not None or circuit.breaker_a is None or circuit.wire is None:
            continue
        usual_a = largest_breaker_a(circuit.wire)
        if usual_a is not None and circuit.breaker_a > usual_a:
            message = (
                f"{landed.name(circuit)}: a {circuit.breaker_a:g} A breaker on {circuit.wire} wire may be right for "
                "this nameplate, but mop is blank: copy the maximum breaker from the nameplate."
            )
            yield Observation((circuit,), message)


def _not_standard(landed: LandedPanel) -> Iterator[Observation]:
    for circuit in landed.circuits:
        if circuit.breaker_a is not None and circuit.breaker_a not in STANDARD_SIZES_A:
            message = (
                f"{landed.name(circuit)}: {circuit.breaker_a:g} A is not a standard breaker size (15, 20, 25, 30, 35, "
                "40, 45, 50, 60, ...): read the handle again."
            )
            yield Observation((circuit,), message)


CONDUCTOR_RULES = (
    Rule(
        "breaker-above-conductor",
        Severity.ERROR,
        "NEC 2023, 240.4(B) (from memory) and (D), Table 310.16",
        _above_conductor,
    ),
    Rule("breaker-above-nameplate", Severity.ERROR, "NEC 2023, 110.3(B) and 440.4(B) (from memory)", _above_nameplate),
    Rule("wire-below-nameplate", Severity.ERROR, "NEC 2023, 440.4(B) (from memory), Table 310.16", _below_nameplate),
    Rule(
        "breaker-above-60c-column",
        Severity.WARNING,
        "NEC 2023, 110.14(C)(1) and 334.80 (from memory), Table 310.16",
        _above_60c_column,
    ),
    Rule("nameplate-limit-missing", Severity.NOTICE, "NEC 2023, 240.4(G) (from memory)", _nameplate_limit_missing),
    Rule("breaker-size-not-standard", Severity.NOTICE, "NEC 2023, 240.6(A) (list from memory)", _not_standard),
)
