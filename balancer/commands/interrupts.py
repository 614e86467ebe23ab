"""Ctrl-C: the first one asks for the best so far, the second one quits."""

from __future__ import annotations

import signal
import threading
from collections.abc import Callable
from types import FrameType, TracebackType
from typing import Self

from balancer.errors import InfeasibleError, NoAnswerInTime


class _Listener:
    """Listens to Ctrl-C while it is used as a context; other threads, and jobs told to ignore it, hear nothing."""

    def __init__(self) -> None:
        self._is_listening = False

    def hear(self, signum: int, frame: FrameType | None) -> None:
        """Take a Ctrl-C."""
        raise NotImplementedError

    def __enter__(self) -> Self:
        """Begin to listen."""
        is_main_thread = threading.current_thread() is threading.main_thread()
        self._is_listening = is_main_thread and signal.getsignal(signal.SIGINT) is not signal.SIG_IGN
        if self._is_listening:
            self._before = signal.signal(signal.SIGINT, self.hear)
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        """Give Ctrl-C back."""
        if self._is_listening:
            signal.signal(signal.SIGINT, self._before)


class Interruption(_Listener):
    """Remembers that a Ctrl-C ended the command: a library that is being loaded may turn it into any other error."""

    has_come = False

    def hear(self, signum: int, frame: FrameType | None) -> None:
        """Remember the Ctrl-C and end what is running."""
        self.has_come = True
        raise KeyboardInterrupt


class StopRequest(_Listener):
    """A wish to stop, made by the first Ctrl-C; used as a context around a search and the showing of its answer.

    `tell` is called once, when the wish is made.
    """

    def __init__(self, tell: Callable[[], None]) -> None:
        super().__init__()
        self.is_made = False
        self._tell = tell

    def make(self) -> None:
        """Wish to stop."""
        self.is_made = True
        self._tell()

    def raise_if_made(self) -> None:
        """End the command where there is nothing to show yet."""
        if self.is_made:
            raise KeyboardInterrupt

    def hear(self, signum: int, frame: FrameType | None) -> None:
        """Take the first Ctrl-C as a wish and the second as an order."""
        self.raise_if_made()
        self.make()

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        """Give Ctrl-C back; a search that was asked to stop found nothing because it was, not because there is none."""
        super().__exit__(kind, error, trace)
        if self.is_made and isinstance(error, NoAnswerInTime | InfeasibleError):
            raise KeyboardInterrupt from error
