"""What a conductor may carry and what breaker may protect it: ampacities, small conductors, standard sizes."""

from __future__ import annotations

import csv
from functools import cache
from importlib.resources import files

from balancer.panel import Circuit, Wire

STANDARD_SIZES_A = (
    *(10, 15, 20, 25, 30, 35, 40, 45, 50, 60, 70, 80, 90, 100, 110, 125, 150, 175, 200, 225, 250, 300, 350, 400, 450),
    *(500, 600, 700, 800, 1000, 1200, 1600, 2000, 2500, 3000, 4000, 5000, 6000),
)
"""Standard breaker ratings [A]: NEC 2023, 240.6(A), from memory; 10 A is standard from the 2023 edition on."""

SMALL_CONDUCTOR_LIMITS_A = {
    Wire("18", "cu"): 7.0,
    Wire("16", "cu"): 10.0,
    Wire("14", "cu"): 15.0,
    Wire("12", "cu"): 20.0,
    Wire("10", "cu"): 30.0,
    Wire("12", "al"): 15.0,
    Wire("10", "al"): 25.0,
}
"""Largest breaker [A] on a small conductor: NEC 2023, 240.4(D); copper 18 and 16 from memory."""


@cache
def _ampacity_table() -> dict[tuple[Wire, int], float]:
    text = (files("balancer.rules") / "tables" / "ampacity_310_16.csv").read_text(encoding="utf-8")
    return {
        (Wire(row["size"], row["metal"]), column_c): float(row[f"ampacity_{column_c}c_a"])
        for row in csv.DictReader(text.splitlines())
        for column_c in (60, 75)
    }


def ampacity_a(wire: Wire, column_c: int) -> float | None:
    """Look up what a conductor may carry.

    Parameters
    ----------
    wire
        Trade size and metal.
    column_c
        Temperature column, 60 or 75 [degC].

    Returns
    -------
    float or None
        Ampacity [A]; None where the table has no such conductor.

    References
    ----------
    NEC 2023, Table 310.16 (Table 310.15(B)(16) before 2020): not more than three current-carrying conductors, 30 degC
    ambient. Cells that changed in 2011 carry the newer value.
    """
    return _ampacity_table().get((wire, column_c))


def next_standard_size_a(current_a: float) -> float:
    """Give the smallest standard breaker rating [A] that is not below a current [A].

    References
    ----------
    NEC 2023, 240.4(B) (from memory): the next standard size above an ampacity may protect it, up to 800 A and not on
    cord-and-plug circuits with several receptacles.
    """
    return float(next((size for size in STANDARD_SIZES_A if size >= current_a), STANDARD_SIZES_A[-1]))


def largest_breaker_a(wire: Wire, column_c: int = 75) -> float | None:
    """Give the largest breaker [A] that may protect a conductor at all; None where the tables have no such conductor.

    Notes
    -----
    240.4(D) for small conductors; for the others the next standard size at or above the ampacity of a column. The 75
    degC column is the most that panel terminals allow (110.14(C), from memory), so nothing above it is right anywhere.
    """
    small_a = SMALL_CONDUCTOR_LIMITS_A.get(wire)
    if small_a is not None:
        return small_a
    carried_a = ampacity_a(wire, column_c)
    return None if carried_a is None else next_standard_size_a(carried_a)


def conductor_limit_a(circuit: Circuit) -> float | None:
    """Give the largest breaker [A] that a circuit's conductors may end on.

    Returns
    -------
    float or None
        `mop_a` where the nameplate gives it, otherwise the limit of the wire. None where neither is known, and where a
        nameplate gives a minimum circuit ampacity alone: the limit is then on a nameplate that nobody copied.

    References
    ----------
    NEC 2023, 240.4(B), 240.4(D), 240.4(G), Table 310.16; 440.4(B) (from memory) for nameplate figures.
    """
    if circuit.mop_a is not None:
        return circuit.mop_a
    if circuit.mca_a is not None or circuit.wire is None:
        return None
    return largest_breaker_a(circuit.wire)
