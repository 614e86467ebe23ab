"""When planning must stop: the user's clock and Ctrl-C, asked for by everything that runs long."""

from __future__ import annotations

import signal
import threading
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from types import FrameType

from balancer.arrange.results import Stop


class Clock:
    """Tells whether to stop, and why. Without a limit only Ctrl-C stops."""

    def __init__(self, time_limit_s: float | None = None, on_interrupt: Callable[[], None] | None = None) -> None:
        self._deadline = None if time_limit_s is None else time.monotonic() + time_limit_s
        self._on_interrupt = on_interrupt
        self._is_interrupted = False

    @property
    def stop(self) -> Stop:
        """Why to stop now, or `Stop.NONE`."""
        if self._is_interrupted:
            return Stop.INTERRUPTED
        if self._deadline is not None and time.monotonic() >= self._deadline:
            return Stop.TIME_LIMIT
        return Stop.NONE

    @property
    def is_stopped(self) -> bool:
        """Whether to stop now."""
        return self.stop is not Stop.NONE

    @property
    def remaining_s(self) -> float | None:
        """Seconds left [s], or None without a limit."""
        return None if self._deadline is None else max(0.0, self._deadline - time.monotonic())

    @contextmanager
    def listening(self) -> Iterator[None]:
        """Take the first Ctrl-C as a wish to stop soon; the second one stops at once.

        A solver in C++ would swallow the signal or die of it, so it becomes a flag that is asked for. A job that was
        told to ignore Ctrl-C goes on ignoring it.
        """
        is_ignored = signal.getsignal(signal.SIGINT) is signal.SIG_IGN
        if is_ignored or threading.current_thread() is not threading.main_thread():
            yield
            return
        before = signal.signal(signal.SIGINT, self._interrupt)
        try:
            yield
        finally:
            signal.signal(signal.SIGINT, before)

    def _interrupt(self, signum: int, frame: FrameType | None) -> None:
        if self._is_interrupted:
            raise KeyboardInterrupt
        self._is_interrupted = True
        if self._on_interrupt is not None:
            self._on_interrupt()
