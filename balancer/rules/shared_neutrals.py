"""Shared neutrals: how many hots return on them, from which legs, and whether anybody looked."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from balancer.electrical.supply import supply_factors
from balancer.panel import Circuit, Leg, Role, Supply, SupplySystem, Volts
from balancer.rules.findings import Severity
from balancer.rules.landed import LandedPanel, groups_by
from balancer.rules.rule import Observation, Rule

_MULTIWIRE = "NEC 2023, 210.4; Article 100, multiwire branch circuit (from memory)"


def neutral_current_a(supply: Supply, hots: Sequence[tuple[Circuit, Leg]]) -> float:
    """Sum the currents of 120 V circuits at full load on one neutral, as a magnitude [A].

    Notes
    -----
    I_N = sum of a * i over the circuits, with i = p - j q in the reference of the circuit's own leg and a the voltage
    of that leg in leg A's reference: 1 for leg A; for leg B -1 (180 degrees apart), 1 (in phase), or 1 at 120 degrees
    (two legs of a wye; the worse direction counts where the rotation is not known).
    """
    currents_a = []
    for factors in supply_factors(supply):
        on_leg = {
            Leg.A: factors.neutral_sum + factors.neutral_difference,
            Leg.B: factors.neutral_sum - factors.neutral_difference,
        }
        phasors = [on_leg[leg] * c.load.neutral_a * c.load.neutral_pf.unit_phasor for c, leg in hots]
        currents_a.append(abs(sum(phasors)))
    return max(currents_a)


def _groups(circuits: Sequence[Circuit]) -> Iterator[tuple[Circuit, ...]]:
    for group in groups_by((c for c in circuits if c.volts is Volts.V120), lambda c: c.shared_neutral):
        if len(group) > 1:
            yield group


def landed_pairs(landed: LandedPanel) -> Iterator[tuple[Circuit, Circuit]]:
    """Give the groups of two hots that return on one neutral, both landed; none where the legs are in phase."""
    if landed.panel.supply.system is SupplySystem.IN_PHASE:
        return
    for group in _groups(landed.landed):
        if len(group) == 2:
            yield group[0], group[1]


def _one_leg(landed: LandedPanel) -> Iterator[Observation]:
    supply = landed.panel.supply
    for first, second in landed_pairs(landed):
        leg = landed.leg(first)
        if leg is not landed.leg(second):
            continue
        now_a = neutral_current_a(supply, [(first, leg), (second, leg)])
        opposite_a = neutral_current_a(supply, [(first, leg), (second, leg.other)])
        assumed = " (assumed loads)" if first.load.is_assumed or second.load.is_assumed else ""
        message = (
            f"{landed.names((first, second))} share a neutral and both hots are on leg {leg}: the neutral carries the "
            f"sum, {now_a:.1f} A at full load{assumed}, and no breaker protects it. On opposite legs it carries "
            f"{opposite_a:.1f} A. Land one of the two on the other leg, beside its partner, on a common disconnect."
        )
        yield Observation((first, second), message)


def _three_hots(landed: LandedPanel) -> Iterator[Observation]:
    for group in _groups(landed.landed):
        if len(group) < 3 or landed.panel.supply.system is SupplySystem.IN_PHASE:
            continue
        total_a = neutral_current_a(landed.panel.supply, [(circuit, landed.leg(circuit)) for circuit in group])
        message = (
            f"{landed.names(group)} share one neutral: with two legs, at least two of {len(group)} hots are on the "
            f"same leg and their currents add in it ({total_a:.1f} A with all of them at full load). A neutral serves "
            "two hots on opposite legs at most: trace the conductors, and give every further circuit its own neutral."
        )
        yield Observation(group, message)


def _in_phase(landed: LandedPanel) -> Iterator[Observation]:
    if landed.panel.supply.system is not SupplySystem.IN_PHASE:
        return
    for group in _groups(landed.circuits):
        total_a = neutral_current_a(landed.panel.supply, [(circuit, Leg.A) for circuit in group])
        message = (
            f"{landed.names(group)} share a neutral on a 120 V supply that feeds both legs in phase: the neutral "
            f"carries the sum, {total_a:.1f} A at full load, wherever they are landed. No shared neutral is allowed on "
            "such a supply: give each circuit its own neutral or leave it off this panel."
        )
        yield Observation(group, message)


def _not_checked(landed: LandedPanel) -> Iterator[Observation]:
    blank = tuple(
        circuit
        for circuit in landed.circuits
        if circuit.volts is Volts.V120
        and circuit.role is Role.LOAD
        and not circuit.shared_neutral
        and not circuit.is_neutral_checked
    )
    if blank:
        message = (
            f"shared_neutral is blank, so nobody checked whether they share a neutral: {landed.names(blank)}. Before "
            "one is moved, clamp its hot and its neutral together with the load on: 0 A says that the neutral is its "
            "own. Then write none, or the label of the pair."
        )
        yield Observation(blank, message)


SHARED_NEUTRAL_RULES = (
    Rule("shared-neutral-one-leg", Severity.ERROR, _MULTIWIRE, _one_leg),
    Rule("shared-neutral-three-hots", Severity.ERROR, _MULTIWIRE, _three_hots),
    Rule("shared-neutral-in-phase", Severity.ERROR, "NEC 2023, 710.15(C) (from memory)", _in_phase),
    Rule("shared-neutral-not-checked", Severity.NOTICE, "NEC 2023, 210.4", _not_checked),
)
