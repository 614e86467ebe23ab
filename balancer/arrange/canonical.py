"""One order for the same panel and scenarios, however the rows of the inventory and of the scenarios were sorted.

Sums of floats depend on the order of their terms in the last bit, and among arrangements that are equal but for such
bits the first one found is kept.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from balancer.arrange.grouping import canonical_key
from balancer.electrical.scenarios import Scenarios
from balancer.panel import Installation


def in_canonical_order(installation: Installation, scenarios: Scenarios) -> tuple[Installation, Scenarios]:
    """Sort circuits by place as found, then label, and scenarios by their currents."""
    circuits = installation.circuits
    columns = sorted(range(len(circuits)), key=lambda index: canonical_key((circuits[index],)))
    neutral_a, line_a = (np.take(each, columns, axis=1) for each in (scenarios.neutral_a, scenarios.line_a))
    rows = np.lexsort(np.concatenate([line_a, neutral_a], axis=1).T)
    ordered = replace(scenarios, neutral_a=neutral_a, line_a=line_a).subset(rows.tolist())
    return replace(installation, circuits=tuple(circuits[index] for index in columns)), ordered
