"""What planning returns: options in, objectives with their proofs and an arrangement out."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from enum import StrEnum

from balancer.electrical.durations import HoldOut
from balancer.electrical.phasors import Peaks
from balancer.electrical.scenarios import Scenarios
from balancer.panel import Arrangement, Installation


class Aim(StrEnum):
    """Which objective comes first."""

    NEUTRAL = "neutral"
    LEGS = "legs"


class ObjectiveName(StrEnum):
    """The objectives, as the report names them."""

    NEUTRAL = "peak neutral"
    IMBALANCE = "peak imbalance"
    HEAVY_LEG = "peak heavy leg"
    EFFORT = "effort"
    MEAN_NEUTRAL = "mean neutral"


class Stop(StrEnum):
    """Why planning ended before every objective was closed."""

    NONE = ""
    TIME_LIMIT = "time limit"
    INTERRUPTED = "interrupted"


@dataclass(frozen=True, kw_only=True)
class Options:
    """What the user asks of a plan. `within_a` [A] is given up on the amps objectives to save landings."""

    aim: Aim = Aim.NEUTRAL
    within_a: float = 0.25
    max_landings: int | None = None
    turn_240: bool = False
    splice: bool = False
    time_limit_s: float | None = None


@dataclass(frozen=True, kw_only=True)
class ObjectiveResult:
    """How far one objective was closed.

    `value` is recomputed from the arrangement that closed the objective, `bound` the proven lower bound over the
    arrangements that keep the earlier objectives; both in amperes [A], effort in landings. Imbalance is the projected
    difference that the solver minimises, not the true one.
    """

    name: ObjectiveName
    value: float
    bound: float
    is_proven: bool
    proved_by: str
    """What closed the proof: ``search``, ``solver``, ``arithmetic``, or "" where nothing did."""

    @property
    def gap(self) -> float:
        """At most how far the value is above the best possible."""
        return max(0.0, self.value - self.bound)


@dataclass(frozen=True, kw_only=True, eq=False)
class Plan:
    """An arrangement, and how good it is proven to be.

    `as_left` holds every circuit that has a place; `removed_spares` are spare breakers that had to make room.
    `optimum_peak_neutral_a` is the lowest peak neutral found before `within_a` gave any away, `bound_peak_neutral_a`
    the proven lower bound over all allowed arrangements.
    """

    installation: Installation
    scenarios: Scenarios
    options: Options
    as_found: Arrangement
    as_left: Arrangement
    peaks_as_found: Peaks | None
    peaks_as_left: Peaks
    objectives: tuple[ObjectiveResult, ...]
    optimum_peak_neutral_a: float
    bound_peak_neutral_a: float
    is_proven: bool
    landings_changed: int
    effort: float
    removed_spares: tuple[str, ...] = ()
    stop: Stop = Stop.NONE
    notes: tuple[str, ...] = ()
    """What the report must say about this plan, such as a leg limit that no arrangement of everything-on can keep."""
    search_rows: int | None = None
    """Scenarios that had to be weighed for the first objective, the others cannot raise it; None: not counted."""
    holdout: HoldOut | None = None
    """Of readings: what the plan does in those that it was not made on, where some were kept from it."""

    @property
    def is_complete(self) -> bool:
        """Whether neither the clock nor Ctrl-C cut it off."""
        return self.stop is Stop.NONE


@dataclass(frozen=True, kw_only=True, eq=False)
class TradeoffPoint:
    """The best that a number of landings buys; the bound is on the first objective [A]."""

    landings: int
    """The cap; `landings_changed` may be lower where more buys nothing."""
    landings_changed: int
    peak_neutral_a: float
    peak_imbalance_a: float
    peak_heavy_leg_a: float
    bound_a: float
    is_proven: bool
    arrangement: Arrangement


@dataclass(frozen=True, kw_only=True, eq=False)
class Tradeoff:
    """A curve of landings against amps, and where it goes flat."""

    points: tuple[TradeoffPoint, ...]
    flat_from: int | None
    """Landings from which further ones buy under 0.05 A of the first objective.

    None where the curve still falls, or not every point is proven.
    """
    stop: Stop = Stop.NONE
    refused: tuple[int, ...] = ()
    """Caps under which no arrangement fits."""
    refusal: str = ""
    """Why none fits under the highest of them, in the user's words."""


@dataclass(frozen=True)
class Progress:
    """News from a running plan, for a progress line: objective, best value and bound so far."""

    objective: ObjectiveName
    best: float
    bound: float
    rows: int = 0
    rows_that_matter: int | None = None
    """Of `rows` scenarios those that can still decide the objective; None where they are not counted."""


ProgressListener = Callable[[Progress], None]
