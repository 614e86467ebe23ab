"""What each further landing buys: the best first objective under a rising cap on landings."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace

from balancer.arrange.clock import Clock
from balancer.arrange.plan import Planner
from balancer.arrange.results import Aim, Options, ProgressListener, Tradeoff, TradeoffPoint
from balancer.arrange.verify import verify_arrangement
from balancer.electrical.phasors import PanelCurrents
from balancer.electrical.scenarios import Scenarios
from balancer.errors import InfeasibleError, NoAnswerInTime, SelfCheckError
from balancer.panel import Installation

_FLAT_A = 0.05


def trade_landings(  # noqa: PLR0913 - what plan_arrangement takes, and the landings
    installation: Installation,
    scenarios: Scenarios,
    options: Options,
    landings: Sequence[int],
    progress: ProgressListener | None = None,
    on_interrupt: Callable[[], None] | None = None,
) -> Tradeoff:
    """Find the lowest first objective for every number of landings, each with its proof.

    Parameters
    ----------
    installation, scenarios, options, progress, on_interrupt
        As for `plan_arrangement`; `options.within_a` and `options.max_landings` do not apply here.
    landings
        Caps on the landings changed, rising.

    Returns
    -------
    Tradeoff
        A point for every cap under which the circuits fit at all; the others are `refused`. Fewer where the clock or
        Ctrl-C cut it off. More landings never make a point worse.

    Raises
    ------
    InfeasibleError
        When the circuits fit under none of the caps.
    """
    clock = Clock(options.time_limit_s, on_interrupt)
    points: list[TradeoffPoint] = []
    refusals: list[tuple[int, InfeasibleError]] = []
    with clock.listening():
        for cap in landings:
            if clock.is_stopped:
                break
            try:
                planner = Planner(
                    installation,
                    scenarios,
                    replace(options, max_landings=cap, within_a=0.0),
                    clock,
                    progress,
                    start=points[-1].arrangement if points else None,
                )
                points.append(_point(planner, cap))
            except NoAnswerInTime:
                break
            except InfeasibleError as error:
                refusals.append((cap, error))
    if not points and refusals and not clock.is_stopped:
        raise refusals[-1][1]
    return Tradeoff(
        points=tuple(points),
        flat_from=_flat_from(points, options.aim),
        stop=clock.stop,
        refused=tuple(cap for cap, _ in refusals),
        refusal=str(refusals[-1][1]) if refusals else "",
    )


def _point(planner: Planner, cap: int) -> TradeoffPoint:
    stages, objectives = planner.closed()
    result = objectives[0]
    stages.close_effort()
    seating = planner.settled(stages)
    problems = verify_arrangement(planner.installation, planner.options, seating.arrangement, seating.removed)
    if problems:
        raise SelfCheckError(problems)
    peaks = PanelCurrents(planner.installation, planner.scenarios).peaks(seating.arrangement)
    return TradeoffPoint(
        landings=cap,
        landings_changed=seating.landings_changed,
        peak_neutral_a=peaks.neutral.value_a,
        peak_imbalance_a=peaks.imbalance.value_a,
        peak_heavy_leg_a=peaks.heavy_leg.value_a,
        bound_a=result.bound,
        is_proven=result.is_proven,
        arrangement=seating.arrangement,
    )


def _flat_from(points: Sequence[TradeoffPoint], aim: Aim) -> int | None:
    """Fewest landings from which no further one of the curve buys anything a clamp meter shows; None if unproven."""
    if not all(point.is_proven for point in points):
        return None
    values = [p.peak_neutral_a if aim is Aim.NEUTRAL else p.peak_heavy_leg_a for p in points]
    if len(points) < 2 or values[-2] - values[-1] > _FLAT_A:
        return None
    for point, value in zip(points, values, strict=True):
        if value - values[-1] <= _FLAT_A:
            return point.landings
    return None
