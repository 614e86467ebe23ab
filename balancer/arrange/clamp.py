"""The clamp check: a few circuits to switch on, and what the clamp meter must read then."""

from __future__ import annotations

from dataclasses import dataclass

from balancer.panel import Arrangement, Installation


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
    """Choose circuits to switch on one after the other, and foretell the readings; empty where none is fit."""
    raise NotImplementedError
