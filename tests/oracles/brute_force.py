"""Every arrangement of a small panel, listed outright: what the planner is held against.

Written from what the words mean on the wall, sharing no code with the planner: legs, reach and phasors are worked out
anew from the panel's spaces and the circuits' cells.
"""

from __future__ import annotations

import cmath
import itertools
import math
from collections.abc import Iterator
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from balancer.arrange.results import ObjectiveName, Options
from balancer.electrical.scenarios import ScenarioKind, Scenarios
from balancer.panel import Circuit, Installation, Landing, Leg, Panel, Pole, Role, SupplySystem, Terminal, Volts

SPARE_MOVED = 0.001
"""A spare breaker has no conductor to land, yet it is not moved for nothing."""

_BLOCK = 1 << 13

Placing = dict[str, Landing]
Signs = tuple[int, ...]
"""For every circuit: +1 with its 120 V part on leg A, -1 on leg B, 0 where there is none or its pole is unknown."""


@dataclass(frozen=True)
class Cost:
    """What an arrangement takes: spares given up, then effort in landings, where a spare moved counts for a hair."""

    removed: int
    effort: float


@dataclass
class Enumeration:
    """Every pattern of legs that some arrangement gives, with the least it takes."""

    installation: Installation
    cheapest: dict[Signs, Cost] = field(default_factory=dict)
    placings: list[list[Placing]] = field(default_factory=list)

    def allows(self, arrangement: Placing) -> bool:
        """Whether an arrangement seats every unit in one of its allowed places, no space twice."""
        taken: list[int] = []
        for choices in self.placings:
            labels = {label for choice in choices for label in choice}
            here = {label: landing for label, landing in arrangement.items() if label in labels}
            if here not in choices:
                return False
            taken += _spaces(here)
        return len(taken) == len(set(taken))


def enumerate_arrangements(installation: Installation, options: Options) -> Enumeration:
    """List every arrangement that keeps every constraint but the limit on the legs."""
    placings = placings_of_units(installation, options)
    result = Enumeration(installation, placings=placings)
    costs = [[_cost(installation, unit, placing) for placing in unit] for unit in placings]
    stuck = _unavoidable_ratings(installation, placings)
    order = sorted(range(len(placings)), key=lambda index: len(placings[index]))
    most = math.inf if options.max_landings is None else options.max_landings

    def descend(depth: int, taken: frozenset[int], done: Placing, landings: int, cost: Cost) -> None:
        if depth == len(order):
            if _keeps_stabs(installation, done, stuck):
                signs = pattern(installation, done)
                known = result.cheapest.get(signs)
                if known is None or (cost.removed, cost.effort) < (known.removed, known.effort):
                    result.cheapest[signs] = cost
            return
        unit = order[depth]
        for placing, (moved, step) in zip(placings[unit], costs[unit], strict=True):
            spaces = _spaces(placing)
            if taken.isdisjoint(spaces) and landings + moved <= most:
                total = Cost(cost.removed + step.removed, round(cost.effort + step.effort, 6))
                descend(depth + 1, taken.union(spaces), done | placing, landings + moved, total)

    descend(0, frozenset(), {}, 0, Cost(0, 0.0))
    return result


def placings_of_units(installation: Installation, options: Options) -> list[list[Placing]]:
    """Every allowed place of every unit on its own."""
    return [_placings(installation, options, unit) for unit in _units(installation)]


def pattern(installation: Installation, arrangement: Placing) -> Signs:
    """Give the leg of every circuit's 120 V part."""
    return tuple(
        _sign(installation.panel, circuit, arrangement.get(circuit.label)) for circuit in installation.circuits
    )


def _sign(panel: Panel, circuit: Circuit, landing: Landing | None) -> int:
    if not landing or circuit.load.neutral_a == 0:
        return 0
    if len(landing) == 1:
        space = landing[0].space
    elif circuit.load.neutral_pole is None:
        return 0
    else:
        space = landing[0 if circuit.load.neutral_pole is Pole.FIRST else 1].space
    return 1 if panel.by_number[space].leg is Leg.A else -1


def _spaces(placing: Placing) -> list[int]:
    return sorted({terminal.space for landing in placing.values() for terminal in landing})


def _units(installation: Installation) -> list[list[Circuit]]:
    """Circuits that share a space, a tie or a neutral, directly or by way of another."""
    units: list[list[Circuit]] = []
    broken = _broken_pairs(installation)
    for circuit in installation.circuits:
        joined = [unit for unit in units if any(_belong_together(circuit, other, broken) for other in unit)]
        units = [unit for unit in units if unit not in joined]
        units.append([*itertools.chain.from_iterable(joined), circuit])
    return units


def _belong_together(one: Circuit, other: Circuit, broken: frozenset[str]) -> bool:
    bodies = [{t.space for t in c.landing} if c.label not in broken else set() for c in (one, other)]
    is_tied = bool(one.tied) and one.tied == other.tied
    is_pair = bool(one.shared_neutral) and one.shared_neutral == other.shared_neutral
    return is_tied or is_pair or bool(bodies[0] & bodies[1])


def _broken_pairs(installation: Installation) -> frozenset[str]:
    """Labels of shared neutrals with both hots on one leg: they must come apart, even out of one body."""
    if installation.panel.supply.system is SupplySystem.IN_PHASE:
        return frozenset()
    legs = {c.label: [installation.panel.by_number[t.space].leg for t in c.landing] for c in installation.circuits}
    return frozenset(
        circuit.label
        for one, other in itertools.permutations(installation.circuits, 2)
        if one.shared_neutral and one.shared_neutral == other.shared_neutral and legs[one.label]
        for circuit in (one, other)
        if legs[one.label] == legs[other.label] and not (one.is_fixed or other.is_fixed)
    )


def _placings(installation: Installation, options: Options, unit: list[Circuit]) -> list[Placing]:
    """Every allowed place of a unit; the empty one where a spare may be left out."""
    allowed: list[Placing] = []
    for placing in _candidates(installation, options, unit):
        is_allowed = all(_may_go(installation, options, circuit, placing[circuit.label]) for circuit in unit)
        if is_allowed and placing not in allowed and _keeps_pairs(installation, unit, placing):
            allowed.append(placing)
    may_come_out = all(circuit.role is Role.SPARE and not _is_stuck(circuit) for circuit in unit)
    return [*allowed, {}] if may_come_out else allowed


def _keeps_pairs(installation: Installation, unit: list[Circuit], placing: Placing) -> bool:
    """A shared neutral's breakers one below the other on opposite legs, but for what stays as it was found."""
    panel = installation.panel
    is_in_phase = panel.supply.system is SupplySystem.IN_PHASE
    for one, other in itertools.combinations(unit, 2):
        if _is_pair(one, other) and (placing[one.label], placing[other.label]) != (one.landing, other.landing):
            here, there = (panel.by_number[placing[c.label][0].space] for c in (one, other))
            if here.column != there.column or abs(here.row - there.row) != 1:
                return False
            if here.leg is there.leg and not is_in_phase:
                return False
    return True


def _candidates(installation: Installation, options: Options, unit: list[Circuit]) -> Iterator[Placing]:
    panel = installation.panel
    found = {circuit.label: circuit.landing for circuit in unit}
    is_landed = all(found.values())
    is_broken = any(circuit.label in _broken_pairs(installation) for circuit in unit)
    if is_landed and not is_broken:
        yield found
    if is_landed and any(_is_stuck(circuit) or circuit.poles == 2 for circuit in unit):
        yield from _turned(options, unit, found)
    elif len(unit) == 2 and _is_pair(*unit):
        yield from _pair_places(panel, unit)
    elif is_landed:
        yield from _shifted(panel, unit)
    else:
        yield from _stacked(panel, unit)


def _is_stuck(circuit: Circuit) -> bool:
    return circuit.is_fixed or circuit.role in (Role.BACKFED, Role.INTERLOCK, Role.SURGE)


def _is_pair(one: Circuit, other: Circuit) -> bool:
    return bool(one.shared_neutral) and one.shared_neutral == other.shared_neutral


def _turned(options: Options, unit: list[Circuit], found: Placing) -> Iterator[Placing]:
    turnable = [c for c in unit if c.poles == 2 and c.volts.has_neutral and not _is_stuck(c)]
    if options.turn_240:
        for chosen in itertools.product((False, True), repeat=len(turnable)):
            turned = {c.label: c.landing[::-1] for c, is_turned in zip(turnable, chosen, strict=True) if is_turned}
            yield found | turned


def _vertical_pairs(panel: Panel) -> Iterator[tuple[int, int]]:
    """Adjacent spaces of a column on opposite legs, in both orders."""
    for one, other in itertools.permutations(panel.spaces, 2):
        if one.column == other.column and abs(one.row - other.row) == 1 and one.leg is not other.leg:
            yield one.number, other.number


def _pair_places(panel: Panel, unit: list[Circuit]) -> Iterator[Placing]:
    for one, other in _vertical_pairs(panel):
        yield {unit[0].label: (Terminal(one),), unit[1].label: (Terminal(other),)}


def _shifted(panel: Panel, unit: list[Circuit]) -> Iterator[Placing]:
    """The unit elsewhere in the same shape, halves and all."""
    place = {(space.column, space.row): space.number for space in panel.spaces}
    for columns in (-1, 0, 1):
        for rows in range(-len(panel.spaces), len(panel.spaces) + 1):
            moved: Placing = {}
            for circuit in unit:
                terminal = circuit.landing[0]
                old = panel.by_number[terminal.space]
                number = place.get((old.column + columns, old.row + rows))
                if number is not None:
                    moved[circuit.label] = (Terminal(number, terminal.half),)
            if len(moved) == len(unit):
                yield moved


def _stacked(panel: Panel, unit: list[Circuit]) -> Iterator[Placing]:
    """One below the other down a column, in any order, two-poles either way up."""
    for column in sorted({space.column for space in panel.spaces}):
        numbers = [s.number for s in sorted(panel.spaces, key=lambda s: s.row) if s.column == column]
        for order in itertools.permutations(unit):
            places = [index for index, circuit in enumerate(order) if circuit.tied]
            if places and places[-1] - places[0] >= len(places):
                continue  # a handle tie reaches the next breaker
            poles = [circuit.poles for circuit in order]
            for start in range(len(numbers) - sum(poles) + 1):
                offsets = list(itertools.accumulate([start, *poles]))
                landings = [tuple(Terminal(n) for n in numbers[a:b]) for a, b in itertools.pairwise(offsets)]
                for turned in itertools.product((False, True), repeat=len(order)):
                    yield {
                        c.label: landing[::-1] if is_turned else landing
                        for c, landing, is_turned in zip(order, landings, turned, strict=True)
                    }


def _may_go(installation: Installation, options: Options, circuit: Circuit, landing: Landing) -> bool:
    panel = installation.panel
    spaces = [terminal.space for terminal in landing]
    legs = {panel.by_number[space].leg for space in spaces}
    if circuit.poles == 2 and len(legs) != 2:
        return False
    if circuit.poles == 2 and circuit.volts is Volts.V240 and not circuit.landing and spaces != sorted(spaces):
        return False  # turned over it is the same
    if landing == circuit.landing:
        is_half = any(terminal.half for terminal in landing)
        return not is_half or _stays_with_body(installation, circuit) or _takes_half(installation, spaces)
    if circuit.landing and _is_stuck(circuit):
        return False
    if panel.reserved.intersection(spaces):
        return False
    if any(terminal.half for terminal in landing) and not _takes_half(installation, spaces):
        return False
    if _needs_neutral_bar(panel, circuit) and not panel.plug_on_neutral.issuperset(spaces):
        return False
    if circuit.landing:
        was_bolted = circuit.landing[0].space in panel.bolt_on
        if any((space in panel.bolt_on) != was_bolted for space in spaces):
            return False
    return options.splice or _reaches(panel, circuit, landing)


def _needs_neutral_bar(panel: Panel, circuit: Circuit) -> bool:
    """A plug-on breaker, and a GFCI or AFCI breaker found at the bar; nobody minds where no bar is known."""
    at_bar = [terminal.space in panel.plug_on_neutral for terminal in circuit.landing]
    is_found_at_bar = bool(at_bar) and all(at_bar) and _takes_neutral(circuit)
    return bool(panel.plug_on_neutral) and ("plug-on" in circuit.breaker_type or is_found_at_bar)


def _takes_neutral(circuit: Circuit) -> bool:
    return any(word in circuit.breaker_type for word in ("gfci", "afci", "dual function"))


def _stays_with_body(installation: Installation, circuit: Circuit) -> bool:
    mates = [c for c in installation.circuits if {t.space for t in c.landing} & {t.space for t in circuit.landing}]
    return any(_is_stuck(c) or c.poles == 2 for c in mates)


def _takes_half(installation: Installation, spaces: list[int]) -> bool:
    """Where nobody says which spaces take half-width breakers, those that have one are known to."""
    known = {t.space for c in installation.circuits for t in c.landing if t.half}
    allowed = installation.panel.tandem_spaces
    return (known if allowed is None else allowed).issuperset(spaces)


def _reaches(panel: Panel, circuit: Circuit, landing: Landing) -> bool:
    if circuit.slack_in is None or not circuit.landing:
        return True
    for old, new in zip(circuit.landing, landing, strict=True):
        here, there = panel.by_number[old.space], panel.by_number[new.space]
        length_in = abs(here.row - there.row) + (panel.crossing_in if here.column != there.column else 0)
        if length_in > circuit.slack_in:
            return False
    return True


def _keeps_stabs(installation: Installation, arrangement: Placing, stuck: dict[int, float]) -> bool:
    """Handle ratings of a row within its limit; a row that breakers overload wherever they go gets no more."""
    limit = installation.panel.stab_a
    ratings = _row_ratings(installation, arrangement)
    return limit is None or all(rating <= max(limit, stuck.get(row, 0.0)) for row, rating in ratings.items())


def _unavoidable_ratings(installation: Installation, placings: list[list[Placing]]) -> dict[int, float]:
    """What of the ratings found in each row stays there wherever the units go; what is new may not overload a row."""
    stuck: dict[int, float] = {}
    for unit in placings:
        labels = [label for label in installation.as_found if any(label in placing for placing in unit)]
        found = _row_ratings(installation, {label: installation.as_found[label] for label in labels})
        ratings = [_row_ratings(installation, placing) for placing in unit]
        for row, rating in found.items():
            stuck[row] = stuck.get(row, 0.0) + min(rating, *(each.get(row, 0.0) for each in ratings))
    return stuck


def _row_ratings(installation: Installation, arrangement: Placing) -> dict[int, float]:
    ratings: dict[int, float] = {}
    for label, landing in arrangement.items():
        for terminal in landing:
            row = installation.panel.by_number[terminal.space].row
            ratings[row] = ratings.get(row, 0.0) + (installation.by_label[label].breaker_a or 0.0)
    return ratings


def _cost(installation: Installation, unit: list[Placing], placing: Placing) -> tuple[int, Cost]:
    """Landings changed and what they take; spares have no conductor."""
    landings, effort = 0, 0.0
    for label, landing in placing.items():
        circuit = installation.by_label[label]
        if circuit.role is Role.SPARE:
            effort += SPARE_MOVED if circuit.landing and landing != circuit.landing else 0.0
            continue
        if not circuit.landing:
            continue
        moved = sum(old != new for old, new in zip(circuit.landing, landing, strict=True))
        landings += moved
        effort += moved * circuit.effort + (0.5 if moved and _takes_neutral(circuit) else 0.0)
    spares = {label for choice in unit for label in choice if installation.by_label[label].landing}
    return landings, Cost(0 if placing else len(spares), effort)


@dataclass(frozen=True)
class Figures:
    """Objectives of many patterns of legs, arrays of shape (patterns,) in amps."""

    neutral: NDArray[np.float64]
    imbalance: NDArray[np.float64]
    heavy_leg: NDArray[np.float64]
    mean_neutral: NDArray[np.float64]

    def of(self, name: ObjectiveName) -> NDArray[np.float64]:
        """Give one objective by its name."""
        return {
            ObjectiveName.NEUTRAL: self.neutral,
            ObjectiveName.IMBALANCE: self.imbalance,
            ObjectiveName.HEAVY_LEG: self.heavy_leg,
            ObjectiveName.MEAN_NEUTRAL: self.mean_neutral,
        }[name]


def figures(installation: Installation, scenarios: Scenarios, signs: NDArray[np.int8]) -> Figures:
    """Work out the objectives of patterns of shape (patterns, circuits), some at a time to stay within the cache."""
    blocks = [signs[start : start + _BLOCK] for start in range(0, len(signs), _BLOCK)]
    unknown = [i for i, c in enumerate(installation.circuits) if c.load.neutral_a and not signs[:, i].any()]
    parts = [_figures(installation, scenarios, block, unknown) for block in blocks]
    return Figures(*(np.concatenate(values) for values in zip(*parts, strict=True)))


def _figures(
    installation: Installation, scenarios: Scenarios, signs: NDArray[np.int8], unknown: list[int]
) -> tuple[NDArray[np.float64], ...]:
    """Add up complex currents, every angle against leg A's voltage, for every pattern.

    Notes
    -----
    A load at power factor cos(phi) on a leg whose voltage stands at angle theta draws I at theta - phi (lagging). Leg B
    stands at 180 degrees, at +-120 on a wye, at 0 in phase. A leg-to-leg current flows along V_A - V_B, into A and out
    of B. The neutral returns I_A + I_B. The imbalance is the legs' difference, each leg in its own voltage's reference,
    projected on the direction of their sum.
    """
    loads = [circuit.load for circuit in installation.circuits]
    turns = np.array([_turn(load.neutral_pf.value, load.neutral_pf.is_leading) for load in loads])
    line_turns = np.array([_turn(load.line_pf.value, load.line_pf.is_leading) for load in loads])
    neutral, line = scenarios.neutral_a * turns, (scenarios.line_a * line_turns).sum(axis=1)
    worst: list[NDArray[np.float64]] = []
    for volt_b in _leg_b_voltages(installation):
        along = (1 - volt_b) / abs(1 - volt_b) if volt_b != 1 else 0
        for sides in itertools.product((1, -1), repeat=len(unknown)):
            filled = signs.astype(np.float64)
            filled[:, unknown] = sides
            leg_a = (filled > 0).astype(float) @ neutral.T + along * line
            leg_b = volt_b * ((filled < 0).astype(float) @ neutral.T) - along * line
            own_b = leg_b / volt_b
            total, difference = leg_a + own_b, leg_a - own_b
            size = np.where(np.abs(total) > 1e-9, np.abs(total), np.inf)
            projected = np.abs((difference * np.conj(total)).real) / size
            values = np.array([np.abs(leg_a + leg_b), projected, np.maximum(np.abs(leg_a), np.abs(own_b))])
            worst.append(values)
    over_cases = np.max(np.array(worst), axis=0)
    peaks = over_cases.max(axis=2)
    return (*peaks, over_cases[0].mean(axis=1))


def _turn(power_factor: float, is_leading: bool) -> complex:
    angle = math.acos(power_factor)
    return cmath.rect(1.0, angle if is_leading else -angle)


def _leg_b_voltages(installation: Installation) -> list[complex]:
    supply = installation.panel.supply
    if supply.system is SupplySystem.SPLIT:
        return [-1 + 0j]
    if supply.system is SupplySystem.IN_PHASE:
        return [1 + 0j]
    lags = {Leg.A: [-120.0], Leg.B: [120.0], None: [-120.0, 120.0]}[supply.leading_leg]
    return [cmath.rect(1.0, math.radians(lag)) for lag in lags]


def keeps_main(installation: Installation, scenarios: Scenarios, values: Figures) -> NDArray[np.bool_]:
    """Which patterns keep the legs at or below the main; with everything on no main is asked to carry it."""
    main_a = installation.panel.main_a
    if main_a is None or scenarios.kind is ScenarioKind.CONNECTED:
        return np.ones(len(values.neutral), dtype=bool)
    return values.heavy_leg <= main_a + 1e-9
