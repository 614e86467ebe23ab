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


def with_circuits_in_order(installation: Installation, scenarios: Scenarios) -> tuple[Installation, Scenarios]:
    """Sort circuits by place as found, then label."""
    circuits = installation.circuits
    columns = sorted(range(len(circuits)), key=lambda index: canonical_key((circuits[index],)))
    neutral_a, line_a = (np.take(each, columns, axis=1) for each in (scenarios.neutral_a, scenarios.line_a))
    ordered = replace(installation, circuits=tuple(circuits[index] for index in columns))
    return ordered, replace(scenarios, neutral_a=neutral_a, line_a=line_a)


def with_rows_in_order(scenarios: Scenarios) -> Scenarios:
    """Sort scenarios by their currents."""
    rows = np.lexsort(np.concatenate([scenarios.line_a, scenarios.neutral_a], axis=1).T)
    return scenarios.subset(rows.tolist())
