"""What makes the peak neutral, and what holds it up."""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from balancer.arrange.hold import HeldBy, find_hold
from balancer.arrange.moment import Contribution, Moment
from balancer.arrange.results import Options
from balancer.electrical.phasors import PanelCurrents
from balancer.panel import Arrangement, Leg

__all__ = ["Contribution", "HeldBy", "PeakExplanation", "explain_peak"]

_SHARE_SHOWN = 0.9


@dataclass(frozen=True, kw_only=True)
class PeakExplanation:
    """The governing scenario of the peak neutral, the circuits that make it and what holds it up.

    `leg_a` and `leg_b` list the largest contributions that make nine tenths of each leg's line-to-neutral current, the
    rest is `rest_a_a` and `rest_b_a` [A] (sums of magnitudes) in `rest_count_a` and `rest_count_b` circuits.
    """

    scenario: int
    scenario_name: str
    neutral_a: float
    leg_a: tuple[Contribution, ...]
    leg_b: tuple[Contribution, ...]
    rest_a_a: float
    rest_b_a: float
    rest_count_a: int
    rest_count_b: int
    held_by: HeldBy
    sentence: str
    """What holds it up, in plain words."""


def explain_peak(currents: PanelCurrents, arrangement: Arrangement, options: Options | None = None) -> PeakExplanation:
    """Explain the peak neutral of an arrangement.

    Parameters
    ----------
    currents
        The installation and its scenarios.
    arrangement
        A landing for every circuit that has a place.
    options
        What the plan was allowed to do (turning 240 V circuits, splices), so that no move is named that was not.
    """
    neutral_a = currents.currents(arrangement).neutral
    scenario = int(np.argmax(neutral_a))
    moment = Moment(currents, arrangement, scenario)
    shown_a, rest_a = _shown(moment.contributions, Leg.A)
    shown_b, rest_b = _shown(moment.contributions, Leg.B)
    held_by, sentence = find_hold(moment, float(neutral_a[scenario]), options or Options())
    return PeakExplanation(
        scenario=scenario,
        scenario_name=currents.scenarios.names[scenario],
        neutral_a=float(neutral_a[scenario]),
        leg_a=shown_a,
        leg_b=shown_b,
        rest_a_a=sum(each.current_a for each in rest_a),
        rest_b_a=sum(each.current_a for each in rest_b),
        rest_count_a=len(rest_a),
        rest_count_b=len(rest_b),
        held_by=held_by,
        sentence=sentence,
    )


def _shown(
    contributions: Sequence[Contribution], leg: Leg
) -> tuple[tuple[Contribution, ...], tuple[Contribution, ...]]:
    """Split one leg's contributions, largest first, into those that make most of it and the rest."""
    on_leg = sorted((c for c in contributions if c.leg is leg), key=lambda c: -c.current_a)
    enough_a = _SHARE_SHOWN * sum(each.current_a for each in on_leg)
    sums = itertools.accumulate((each.current_a for each in on_leg), initial=0.0)
    count = sum(before_a < enough_a for before_a, _ in zip(sums, on_leg, strict=False))
    return tuple(on_leg[:count]), tuple(on_leg[count:])
