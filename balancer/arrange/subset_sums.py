"""What a single scenario proves by plain arithmetic: the nearest to zero that its currents can add up to.

Loads in round numbers often cannot cancel, however they are split: an odd number of half amperes leaves half an ampere
at least, and one load larger than all the others together leaves the difference. A search over all scenarios would have
to try every split to find that out.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from balancer.arrange.legs import LegProblem, Rows
from balancer.units import MA_PER_A

_MOST_ROWS = 200
_MOST_BITS = 4_000_000


def least_peak(problem: LegProblem, rows: Rows) -> float:
    """Lower bound [A] of a quantity's peak: the highest over scenarios of what each cannot get below.

    A magnitude is at least its projection on the real axis, which is the axis of loads at unity power factor. Currents
    are rounded to whole milliamperes, and the bound gives up what rounding may hide.
    """
    offsets = np.rint(rows.offset.real * MA_PER_A).astype(np.int64)
    effects = np.rint(rows.effects.real * MA_PER_A).astype(np.int64)
    exact = np.abs(rows.offset.real * MA_PER_A - offsets) + np.abs(rows.effects.real * MA_PER_A - effects).sum(axis=1)
    is_whole = exact < 1e-6
    # What one load leaves over the others is the most that a scenario is likely to prove.
    leftover = 2 * np.abs(effects).max(axis=1, initial=0) - np.abs(effects).sum(axis=1) - 2 * np.abs(offsets)
    best = 0.0
    for row in np.argsort(-leftover, kind="stable")[:_MOST_ROWS]:
        options = [[0, *(int(effects[row, c]) for c in group)] for group in problem.groups]
        least_ma = float(nearest_to_zero(int(offsets[row]), options))
        if not is_whole[row]:
            least_ma -= len(problem.choices) / 2.0 + 1.0
        best = max(best, least_ma / MA_PER_A)
    return best


def nearest_to_zero(offset: int, options: Sequence[Sequence[int]]) -> int:
    """Smallest magnitude of an offset plus one number of every option; 0, which proves nothing, where that is too big.

    The sums that can be reached are kept as the bits of one whole number.
    """
    lowest = offset + sum(min(each) for each in options)
    if sum(max(each) - min(each) for each in options) > _MOST_BITS:
        return 0
    reached = 1
    for each in options:
        steps = {value - min(each) for value in each}
        shifted = 0
        for step in sorted(steps):
            shifted |= reached << step
        reached = shifted
    if lowest >= 0:
        return lowest
    below = reached & ((1 << (-lowest + 1)) - 1)
    above = reached >> -lowest
    candidates = []
    if below:
        candidates.append(-(lowest + below.bit_length() - 1))
    if above:
        candidates.append((above & -above).bit_length() - 1)
    return min(candidates)
