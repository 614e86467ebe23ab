"""Impedances of a service: the centre-tapped transformer and the conductors to the panel."""

from __future__ import annotations

import math
from functools import cache

from balancer.electrical.shipped_tables import read_table
from balancer.electrical.three_wire import LEG_V, ServiceImpedances
from balancer.errors import OptionError
from balancer.panel import Supply, SupplySystem, Wire

REACTANCE_TO_RESISTANCE = 0.018 / 0.011
"""Of a transformer that is known only by its percent impedance.

References
----------
Kersting, Distribution System Modeling and Analysis, ch. 11, Example 11.1: 0.011 + j0.018 per unit at 50 kVA.
"""


@cache
def _ohm_per_kft() -> dict[tuple[str, str], complex]:
    return {
        (row["size"], row["metal"]): complex(float(row["resistance_ohm_per_kft"]), float(row["reactance_ohm_per_kft"]))
        for _, row in read_table("conductor_resistance.csv")
    }


def conductor_ohm(wire: Wire, length_ft: float) -> complex:
    """Impedance [ohm] of one conductor of a length [ft].

    Raises
    ------
    OptionError
        When the shipped table has no such size.

    References
    ----------
    NEC Chapter 9 Tables 8 and 9; the shipped table names the source of every row.
    """
    key = (wire.size.casefold(), wire.metal.casefold())
    if key not in _ohm_per_kft():
        sizes = ", ".join(size for size, metal in _ohm_per_kft() if metal == "cu")
        problem = f"no resistance is known for the wire {wire} of the panel file"
        raise OptionError(problem, f"write one of the sizes {sizes} with cu or al")
    return _ohm_per_kft()[key] * length_ft / 1000.0


def centre_tapped_ohm(kva: float, per_unit: complex) -> tuple[complex, complex]:
    """Split a centre-tapped transformer's impedance into its primary and one secondary half.

    Parameters
    ----------
    kva
        Rating [kVA].
    per_unit
        Impedance R + jX of the whole transformer, per unit of its rating.

    Returns
    -------
    tuple of complex
        Primary, referred to one 120 V half, and one secondary half, both in ohm at 120 V.

    Notes
    -----
    Interlaced secondary: Z0 = 0.5 R + j 0.8 X, Z1 = Z2 = R + j 0.4 X. A balanced load sees 4 Z0 + 2 Z1 = 4 (R + jX) of
    the 120 V base, which is R + jX of the 240 V winding.

    References
    ----------
    Kersting, Distribution System Modeling and Analysis, ch. 11.
    """
    base_ohm = LEG_V**2 / (kva * 1000.0)
    resistance, reactance = per_unit.real, per_unit.imag
    primary = complex(0.5 * resistance, 0.8 * reactance)
    secondary_half = complex(resistance, 0.4 * reactance)
    return primary * base_ohm, secondary_half * base_ohm


def _per_unit(impedance_pct: float) -> complex:
    resistance = impedance_pct / 100.0 / math.hypot(1.0, REACTANCE_TO_RESISTANCE)
    return complex(resistance, resistance * REACTANCE_TO_RESISTANCE)


def service_impedances(supply: Supply) -> ServiceImpedances | None:
    """Impedances that the panel file gives; None where it gives none or the supply is not three-wire 120/240 V.

    A transformer needs kva and percent impedance, conductors need a wire and a length; what is not given is taken as
    stiff. A neutral wire that is not given is taken to be like the hot ones.
    """
    has_transformer = supply.transformer_kva is not None and supply.impedance_pct is not None
    has_conductors = supply.service_wire is not None and supply.length_ft is not None
    if supply.system is not SupplySystem.SPLIT or not (has_transformer or has_conductors):
        return None
    common = leg = neutral = 0j
    if supply.transformer_kva is not None and supply.impedance_pct is not None:
        common, leg = centre_tapped_ohm(supply.transformer_kva, _per_unit(supply.impedance_pct))
    if supply.service_wire is not None and supply.length_ft is not None:
        leg += conductor_ohm(supply.service_wire, supply.length_ft)
        neutral = conductor_ohm(supply.neutral_wire or supply.service_wire, supply.length_ft)
    return ServiceImpedances(common_ohm=common, leg_ohm=leg, neutral_ohm=neutral)
