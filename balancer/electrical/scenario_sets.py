"""Builds scenarios where nothing was measured: from use profiles, from shares of full load, or with everything on."""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from balancer.electrical.defaults import normal_use
from balancer.electrical.profiles import HOURS, Season, UseProfiles, shipped_profiles
from balancer.electrical.scenarios import FloatArray, ScenarioKind, Scenarios
from balancer.panel import Circuit, Installation

MAX_CONNECTED_CHOICES = 256
"""Most combinations of loads that never run together, with everything else on."""

MAX_HOURLY_CHOICES = 16
"""Most such combinations in one hour of a profile, where each is followed by one scenario a circuit."""

CONNECTED_NOTE = "Everything on at full load at once: a planning assumption, not a measurement."
PROFILE_NOTE = (
    "Use profiles are planning assumptions: average shares of full load for 24 hours in summer and in winter, and in "
    "every hour each circuit in turn at full load."
)


@dataclass(frozen=True, eq=False)
class _FullLoad:
    """Amps [A] of every circuit at full use, zero where it carries no load when planning."""

    neutral_a: FloatArray
    line_a: FloatArray

    @classmethod
    def of(cls, circuits: Sequence[Circuit]) -> _FullLoad:
        loads = [(c.load.neutral_a, c.load.line_a) if c.carries_load else (0.0, 0.0) for c in circuits]
        neutral_a, line_a = np.array(loads, dtype=float).reshape(-1, 2).T
        return cls(neutral_a, line_a)

    @property
    def has_load(self) -> NDArray[np.bool_]:
        return np.asarray((self.neutral_a != 0.0) | (self.line_a != 0.0))


@dataclass(frozen=True)
class _Choice:
    """One way to choose who runs of the loads that never run together: the columns that stand still."""

    stopped: tuple[int, ...]

    def name(self, state: str, circuits: Sequence[Circuit]) -> str:
        labels = ", ".join(circuits[column].label for column in self.stopped)
        return f"{state}, without {labels}" if labels else state


class _NeverTogether:
    """The groups of circuits that share a `not_with` label, in inventory order."""

    def __init__(self, circuits: Sequence[Circuit], full_load: _FullLoad) -> None:
        groups: dict[str, list[int]] = {}
        for column, circuit in enumerate(circuits):
            if circuit.not_with and full_load.has_load[column]:
                groups.setdefault(circuit.not_with.casefold(), []).append(column)
        self._circuits = circuits
        self._size_a = full_load.neutral_a + full_load.line_a
        self._groups = [tuple(columns) for columns in groups.values()]
        self._frozen: dict[str, None] = {}

    def choices(self, can_run: NDArray[np.bool_], limit: int) -> Iterator[_Choice]:
        """Give every choice of one runner a group; beyond `limit` choices a group's largest load always runs."""
        options: list[tuple[int, ...]] = []
        for group in self._groups:
            runners = tuple(column for column in group if can_run[column])
            if math.prod(map(len, options)) * len(runners) > limit:
                self._frozen.setdefault(self._circuits[group[0]].not_with)
                runners = (max(runners, key=lambda column: self._size_a[column]),)
            options.append(runners or (-1,))
        for chosen in itertools.product(*options):
            pairs = zip(self._groups, chosen, strict=True)
            stopped = [c for group, runner in pairs for c in group if c != runner and can_run[c]]
            yield _Choice(tuple(sorted(stopped)))

    def notes(self) -> tuple[str, ...]:
        """Say which groups were cut short."""
        return tuple(
            f"Too many loads that never run together: of those with not_with {label} only the largest is taken to run."
            for label in self._frozen
        )


@dataclass
class _Rows:
    """Shares of full load row by row, no row twice."""

    names: list[str] = field(default_factory=list)
    shares: list[FloatArray] = field(default_factory=list)
    averages: list[bool] = field(default_factory=list)
    _seen: set[tuple[bytes, bool]] = field(default_factory=set)

    def add(self, name: str, shares: FloatArray, *, is_average: bool) -> None:
        key = (shares.tobytes(), is_average)
        if key in self._seen:
            return
        self._seen.add(key)
        self.names.append(name)
        self.shares.append(shares)
        self.averages.append(is_average)


def connected_scenarios(installation: Installation) -> Scenarios:
    """Switch everything on; of loads that never run together, every choice of one."""
    circuits = installation.circuits
    full_load = _FullLoad.of(circuits)
    groups = _NeverTogether(circuits, full_load)
    names, shares = [], []
    for choice in groups.choices(full_load.has_load, MAX_CONNECTED_CHOICES):
        names.append(choice.name("all on", circuits))
        shares.append(_with_stopped(np.ones(len(circuits)), choice))
    scenarios = _scaled(installation, ScenarioKind.CONNECTED, names, np.array(shares))
    return replace(scenarios, notes=(CONNECTED_NOTE, *groups.notes()))


def profile_scenarios(installation: Installation, profiles: UseProfiles | None = None) -> Scenarios:
    """Run every hour of the use profiles, and in every hour each circuit that may run then at full load.

    Parameters
    ----------
    installation
        Its circuits' `use` picks the profile; blank is `general`.
    profiles
        None takes the shipped ones.

    Notes
    -----
    An hour's shares are averages, and the neutral feels moments: a 25 A heater that runs a quarter of the hour
    averages 6.25 A and is never seen at that. So every hour also yields, for every circuit whose share is above 0, the
    scenario with that circuit at full load and the others at their shares. Of loads that never run together each takes
    its turn. Rows that repeat an earlier one are left out.
    """
    circuits = installation.circuits
    full_load = _FullLoad.of(circuits)
    groups = _NeverTogether(circuits, full_load)
    rows = _Rows()
    for season, hour in itertools.product(Season, HOURS):
        hourly = _hourly_shares(circuits, profiles or shipped_profiles(), season, hour) * full_load.has_load
        for choice in groups.choices(hourly > 0.0, MAX_HOURLY_CHOICES):
            _add_hour(rows, choice.name(f"{season} {hour:02d}:00", circuits), _with_stopped(hourly, choice), circuits)
    scenarios = _scaled(installation, ScenarioKind.PROFILES, rows.names, np.array(rows.shares))
    return replace(scenarios, notes=(PROFILE_NOTE, *groups.notes()), average_rows=np.array(rows.averages, dtype=bool))


def share_scenarios(installation: Installation, names: Sequence[str], shares: FloatArray) -> Scenarios:
    """Scale full loads by given shares of shape (scenarios, circuits); both parts of a 120/240 V circuit alike."""
    return _scaled(installation, ScenarioKind.SCENARIOS, names, np.asarray(shares))


def choose_scenarios(installation: Installation, profiles: UseProfiles | None = None) -> Scenarios:
    """Take use profiles where any load has a `use`, else everything on."""
    if any(circuit.use and circuit.carries_load for circuit in installation.circuits):
        return profile_scenarios(installation, profiles)
    return connected_scenarios(installation)


def _add_hour(rows: _Rows, name: str, shares: FloatArray, circuits: Sequence[Circuit]) -> None:
    rows.add(name, shares, is_average=True)
    for column, share in enumerate(shares):
        if not 0.0 < share < 1.0:
            continue
        single = shares.copy()
        single[column] = 1.0
        rows.add(f"{name}, {circuits[column].label} at full load", single, is_average=False)


def _hourly_shares(circuits: Sequence[Circuit], profiles: UseProfiles, season: Season, hour: int) -> FloatArray:
    return np.array([profiles.share(normal_use(circuit.use) or "", season, hour) for circuit in circuits])


def _with_stopped(shares: FloatArray, choice: _Choice) -> FloatArray:
    running = shares.copy()
    running[list(choice.stopped)] = 0.0
    return running


def _scaled(installation: Installation, kind: ScenarioKind, names: Sequence[str], shares: FloatArray) -> Scenarios:
    full_load = _FullLoad.of(installation.circuits)
    return Scenarios(
        kind=kind, names=tuple(names), neutral_a=shares * full_load.neutral_a, line_a=shares * full_load.line_a
    )
