"""Scenarios: states of the panel, each a current for every circuit at one moment."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from enum import StrEnum

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.floating]


class ScenarioKind(StrEnum):
    """Where scenarios come from, in rising order of trust."""

    CONNECTED = "connected"
    PROFILES = "profiles"
    SCENARIOS = "scenarios"
    READINGS = "readings"


@dataclass(frozen=True, kw_only=True, eq=False)
class Scenarios:
    """Currents of every circuit in every scenario.

    Attributes
    ----------
    neutral_a, line_a
        Shape (scenarios, circuits), columns in the order of the installation's circuits: amps [A] of the
        line-to-neutral and of the leg-to-leg part of each circuit. Negative values are export.
    names
        What the report calls each scenario.
    are_averages
        All figures are averages over an interval or an hour, none of them moments.
    notes
        What the report must say about where the figures come from.
    average_rows
        Which scenarios are averages, where some are and some are not; None otherwise.
    times
        Of readings: when every interval begins, shape (scenarios,), as the log's clock showed it; None otherwise.
    interval_s
        Of readings: length of an interval in seconds [s]; None otherwise.
    """

    kind: ScenarioKind
    names: Sequence[str]
    neutral_a: FloatArray
    line_a: FloatArray
    are_averages: bool = False
    notes: tuple[str, ...] = ()
    average_rows: NDArray[np.bool_] | None = None
    times: NDArray[np.datetime64] | None = None
    interval_s: float | None = None

    def __len__(self) -> int:
        """Count the scenarios."""
        return len(self.names)

    def part(self, which: slice) -> Scenarios:
        """Keep a run of the scenarios, without copying their currents."""
        return replace(
            self,
            names=self.names[which],
            neutral_a=self.neutral_a[which],
            line_a=self.line_a[which],
            average_rows=None if self.average_rows is None else self.average_rows[which],
            times=None if self.times is None else self.times[which],
        )

    def subset(self, rows: Sequence[int]) -> Scenarios:
        """Keep the scenarios with these indices, in this order."""
        return replace(
            self,
            names=tuple(self.names[row] for row in rows),
            neutral_a=self.neutral_a[list(rows)],
            line_a=self.line_a[list(rows)],
            average_rows=None if self.average_rows is None else self.average_rows[list(rows)],
            times=None if self.times is None else self.times[list(rows)],
        )


def split_scenarios(scenarios: Scenarios, until: np.datetime64) -> tuple[Scenarios, Scenarios]:
    """Part readings, which stand in order of time, into those before a moment and the rest; nothing is copied.

    Raises
    ------
    ValueError
        When the scenarios have no times.
    """
    if scenarios.times is None:
        msg = "only readings have times to part them at"
        raise ValueError(msg)
    later = np.flatnonzero(scenarios.times >= until)
    cut = int(later[0]) if len(later) else len(scenarios)
    return scenarios.part(slice(None, cut)), scenarios.part(slice(cut, None))


def averages_only(scenarios: Scenarios) -> Scenarios | None:
    """Keep the scenarios that are averages over an hour or an interval; None where there are none."""
    if scenarios.are_averages:
        return scenarios
    if scenarios.average_rows is None or not scenarios.average_rows.any():
        return None
    rows = np.flatnonzero(scenarios.average_rows).tolist()
    return replace(scenarios.subset(rows), are_averages=True, average_rows=None)
