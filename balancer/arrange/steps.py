"""The steps from as-found to as-left, with the fewest conductors loose at any time."""

from __future__ import annotations

from collections.abc import Sequence

from balancer.arrange.work import Work
from balancer.panel import Arrangement, Installation


def build_work(installation: Installation, as_left: Arrangement, removed_spares: Sequence[str] = ()) -> Work:
    """Work out the steps, the parts and the tests before, that take the panel as found to `as_left`."""
    raise NotImplementedError
