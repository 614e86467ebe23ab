"""Scenarios: states of the panel, each a current for every circuit at one moment."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
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
    """

    kind: ScenarioKind
    names: Sequence[str]
    neutral_a: FloatArray
    line_a: FloatArray
    are_averages: bool = False
    notes: tuple[str, ...] = ()

    def __len__(self) -> int:
        """Count the scenarios."""
        return len(self.names)
