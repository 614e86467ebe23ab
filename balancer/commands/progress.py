"""A progress line on stderr: only on a terminal, only when it takes long, gone when done."""

from __future__ import annotations

import threading
from types import TracebackType
from typing import TYPE_CHECKING

from rich.console import Console
from rich.status import Status

from balancer.reports.news import planning_news
from balancer.reports.text import crop

if TYPE_CHECKING:
    from balancer.arrange.results import Progress

PATIENCE_S = 1.0
"""Nobody wonders what a program does before this long."""

STOPPING = "Stopping: the best so far follows. Ctrl-C again quits at once."


class ProgressLine:
    """Shows the best value and the bound so far; a listener for the planner, used as a context."""

    def __init__(self, console: Console, *, is_quiet: bool) -> None:
        self._console = console
        self._is_quiet = is_quiet
        self._is_open = False
        self._is_shown = console.is_terminal and not is_quiet
        self._status = Status("Looking for the best arrangement", console=console)
        self._timer = threading.Timer(PATIENCE_S, self._status.start)
        self._timer.daemon = True

    def __call__(self, news: Progress) -> None:
        """Take news from the planner, from whatever thread."""
        if self._is_shown:
            # Beside the spinner and a blank; what wraps would be left behind when the window is made narrower.
            self._status.update(crop(planning_news(news), self._console.width - 2).rstrip())

    def say_stopping(self) -> None:
        """Answer the first Ctrl-C, on a terminal or not, while there is a search to stop."""
        if self._is_quiet or not self._is_open:
            return
        if self._is_shown:
            # The terminal has written ^C.
            self._console.line()
        self._console.print(STOPPING)

    def __enter__(self) -> ProgressLine:
        """Start waiting."""
        self._is_open = True
        if self._is_shown:
            self._timer.start()
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        """Take the line away."""
        self._is_open = False
        if self._is_shown:
            self._timer.cancel()
            self._timer.join()
            self._status.stop()
