"""How the two legs of a supply stand to each other, as the few complex factors that the sums need."""

from __future__ import annotations

import cmath
import math
from dataclasses import dataclass

from balancer.panel import Leg, Supply, SupplySystem


@dataclass(frozen=True)
class SupplyFactors:
    """Factors that turn currents in each leg's own reference into leg and neutral phasors.

    With I_A and I_B the leg currents, each in the reference of its own leg's voltage, S = I_A + I_B and D = I_A - I_B,
    the neutral is ``neutral_sum * S + neutral_difference * D``. A leg-to-leg current i appears as ``line_a * i`` in I_A
    and ``line_b * i`` in I_B. All are dimensionless.
    """

    line_a: complex
    line_b: complex
    neutral_sum: complex
    neutral_difference: complex


def _two_legs_of_a_wye(lag_of_b_deg: float) -> SupplyFactors:
    leg_b = cmath.rect(1.0, -math.radians(lag_of_b_deg))
    line = (1.0 - leg_b) / abs(1.0 - leg_b)
    return SupplyFactors(
        line_a=line,
        line_b=-line / leg_b,
        neutral_sum=(1.0 + leg_b) / 2.0,
        neutral_difference=(1.0 - leg_b) / 2.0,
    )


def supply_factors(supply: Supply) -> tuple[SupplyFactors, ...]:
    """Give the factors of a supply; two sets where the rotation of a wye is not known and the worse counts.

    Notes
    -----
    The neutral returns I_A * a + I_B * b, where a = 1 and b is leg B's voltage in leg A's reference: -1 for legs 180
    degrees apart, 1 for legs in phase, 1 at -120 degrees where leg A of a wye leads and at +120 degrees where B leads.
    A leg-to-leg current lies along V_A - V_B. Legs in phase have no voltage between them, so no such current flows.
    """
    if supply.system is SupplySystem.SPLIT:
        return (SupplyFactors(1.0, 1.0, 0.0, 1.0),)
    if supply.system is SupplySystem.IN_PHASE:
        return (SupplyFactors(0.0, 0.0, 1.0, 0.0),)
    a_leads, b_leads = _two_legs_of_a_wye(120.0), _two_legs_of_a_wye(-120.0)
    if supply.leading_leg is None:
        return (a_leads, b_leads)
    return (a_leads if supply.leading_leg is Leg.A else b_leads,)
