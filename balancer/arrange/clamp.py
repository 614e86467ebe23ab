"""The clamp check: a few circuits to switch on, and what the clamp meter must read then.

Nobody can bring a peak about on demand; a few known loads, alone in the panel, show whether each landed on its leg.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from balancer.electrical.phasors import LegCurrents, PanelCurrents
from balancer.electrical.scenarios import ScenarioKind, Scenarios
from balancer.panel import Arrangement, Circuit, Installation, Leg, Role, SupplySystem, Volts

_LEAST_LOAD_A = 1.0
"""Below this a clamp meter tells too little."""

_ENOUGH_LOAD_A = 4.0
"""From here on a load stands well clear of the tolerance."""

_TELLING_A = 0.05
"""Differences below this are none."""

_METER_TOLERANCE_A = 0.5
_KNOWN_LOAD_SHARE = 0.05
_ASSUMED_LOAD_SHARE = 0.20

_UNSTEADY_WORDS = (
    *("refriger", "freez", "heat", "cool", "air cond", "pump", "sump", "motor", "ventil", "fan", "compress"),
    *("wash", "laundry"),
)
"""Uses with a thermostat, a float switch, a programme or a motor: they start and stop by themselves."""


@dataclass(frozen=True, kw_only=True)
class ClampReading:
    """What to read [A] with exactly the circuits of `circuits_on` running at full load, everything else off.

    `switch_on` is the circuit added since the reading before. Every reading may be off by `tolerance_a`: the clamp
    meter's own error and how well the loads are known.
    """

    switch_on: str
    circuits_on: tuple[str, ...]
    leg_a_a: float
    leg_b_a: float
    neutral_a: float
    tolerance_a: float
    is_assumed: bool
    """The amps of a circuit that is on are a shipped default."""
    text: str
    """What to do and what to see, in one sentence."""


def clamp_check(installation: Installation, as_left: Arrangement) -> tuple[ClampReading, ...]:
    """Choose circuits to switch on one after the other, and foretell the readings; empty where none is fit.

    Notes
    -----
    First a 120 V load alone, then one on the opposite leg, then another one that was moved, and last a pure 240 V load,
    which must not change the neutral. Steady loads of known amps come first, of those the ones that were moved.
    """
    chosen = _choose(installation, as_left)
    readings: list[ClampReading] = []
    for count in range(1, len(chosen) + 1):
        before = readings[-1] if readings else None
        readings.append(_reading(installation, as_left, chosen[:count], before))
    return tuple(readings)


def _choose(installation: Installation, as_left: Arrangement) -> list[Circuit]:
    ranked = sorted(
        (circuit for circuit in installation.circuits if _is_fit(circuit, as_left)),
        key=lambda circuit: _rank(circuit, as_left),
    )
    leg = {c.label: installation.panel.leg(as_left[c.label][0].space) for c in ranked}
    chosen: list[Circuit] = []

    def add(is_wanted: Callable[[Circuit], bool]) -> None:
        found = next((c for c in ranked if is_wanted(c) and _may_join(c, chosen)), None)
        if found is not None:
            chosen.append(found)

    add(lambda c: c.poles == 1)
    if chosen:
        opposite: Leg = leg[chosen[0].label].other
        add(lambda c: c.poles == 1 and leg[c.label] is opposite)
        add(lambda c: c.poles == 1 and _is_moved(c, as_left) and not _is_unsteady(c))
    if installation.panel.supply.system is not SupplySystem.IN_PHASE:
        add(lambda c: c.poles == 2)
    return chosen


def _is_fit(circuit: Circuit, as_left: Arrangement) -> bool:
    """Whether it is a single load: 120 V, or purely from leg to leg."""
    load = circuit.load
    if circuit.role is not Role.LOAD or not as_left.get(circuit.label):
        return False
    if circuit.volts is Volts.V120:
        return load.neutral_a >= _LEAST_LOAD_A
    return load.line_a >= _LEAST_LOAD_A and load.neutral_a == 0.0


def _is_unsteady(circuit: Circuit) -> bool:
    use = circuit.use.casefold()
    return circuit.start_a is not None or any(word in use for word in _UNSTEADY_WORDS)


def _is_moved(circuit: Circuit, as_left: Arrangement) -> bool:
    return as_left[circuit.label] != circuit.landing


def _rank(circuit: Circuit, as_left: Arrangement) -> tuple[bool, bool, bool, bool, float, str]:
    load_a = circuit.load.neutral_a + circuit.load.line_a
    return (
        _is_unsteady(circuit),
        load_a < _ENOUGH_LOAD_A,
        circuit.load.is_assumed,
        not _is_moved(circuit, as_left),
        -load_a,
        circuit.label,
    )


def _may_join(circuit: Circuit, chosen: Sequence[Circuit]) -> bool:
    if circuit in chosen:
        return False
    label = circuit.not_with.casefold()
    return not label or all(label != other.not_with.casefold() for other in chosen)


def _reading(
    installation: Installation, as_left: Arrangement, circuits: Sequence[Circuit], before: ClampReading | None
) -> ClampReading:
    labels = tuple(circuit.label for circuit in circuits)
    on = np.array([circuit.label in labels for circuit in installation.circuits], dtype=float)
    loads = [circuit.load for circuit in installation.circuits]
    scenarios = Scenarios(
        kind=ScenarioKind.CONNECTED,
        names=(" + ".join(labels),),
        neutral_a=(on * [load.neutral_a for load in loads])[np.newaxis],
        line_a=(on * [load.line_a for load in loads])[np.newaxis],
    )
    possible = [PanelCurrents(each, scenarios).currents(as_left) for each in _rotations(installation)]
    readings_a = np.array([[c.leg_a[0], c.leg_b[0], c.neutral[0]] for c in possible])
    middle_a, spread_a = (readings_a.max(axis=0) + readings_a.min(axis=0)) / 2, np.ptp(readings_a, axis=0) / 2
    leg_a_a, leg_b_a, neutral_a = map(float, middle_a)
    return ClampReading(
        switch_on=labels[-1],
        circuits_on=labels,
        leg_a_a=leg_a_a,
        leg_b_a=leg_b_a,
        neutral_a=neutral_a,
        tolerance_a=_tolerance_a(circuits) + float(spread_a.max()),
        is_assumed=any(circuit.load.is_assumed for circuit in circuits),
        text=_text(circuits[-1], possible[0], before),
    )


def _rotations(installation: Installation) -> tuple[Installation, ...]:
    """Give the installation with either leg of a wye leading where that is not known: the meter shows one of the two.

    A plan takes the worse of both; a reading that is neither too high nor too low lies between them.
    """
    supply = installation.panel.supply
    if supply.system is not SupplySystem.WYE or supply.leading_leg is not None:
        return (installation,)
    supplies = (replace(supply, leading_leg=leg) for leg in Leg)
    return tuple(replace(installation, panel=replace(installation.panel, supply=each)) for each in supplies)


def _tolerance_a(circuits: Sequence[Circuit]) -> float:
    """Give what a reading may be off [A]: the meter's own error, or how badly the running loads are known.

    Notes
    -----
    max(0.5, sum of share * load), with a share of 5 % for loads that somebody measured or read from a nameplate and
    20 % for assumed ones: our own planning figures. The neutral is a difference, so the errors of both sides add.
    """
    unsure_a = sum(
        (_ASSUMED_LOAD_SHARE if circuit.load.is_assumed else _KNOWN_LOAD_SHARE)
        * (circuit.load.neutral_a + circuit.load.line_a)
        for circuit in circuits
    )
    return max(_METER_TOLERANCE_A, unsure_a)


def _text(added: Circuit, currents: LegCurrents, before: ClampReading | None) -> str:
    if before is None:
        return f"Switch everything off but {added.label}, at full load: one leg and the neutral carry it."
    if added.poles == 2:
        return f"Switch on {added.label} as well: the legs change, the neutral stays as it was."
    neutral_a = float(currents.neutral[0])
    change = "falls" if neutral_a < before.neutral_a else "rises"
    # Unlike power factors, and legs not opposite to each other, leave more than the difference.
    is_difference = abs(neutral_a - float(currents.imbalance[0])) < _TELLING_A
    how_far = " to the difference of the legs" if is_difference else ""
    return f"Switch on {added.label} as well: the neutral {change}{how_far}."
