import io
import time

from rich.console import Console

from balancer.arrange.results import ObjectiveName, Progress
from balancer.commands import progress
from balancer.commands.progress import STOPPING, ProgressLine

NEWS = Progress(ObjectiveName.NEUTRAL, best=4.3, bound=4.1)


def terminal() -> tuple[Console, io.StringIO]:
    stream = io.StringIO()
    return Console(file=stream, force_terminal=True, width=100), stream


def test_a_quick_answer_shows_no_progress() -> None:
    console, stream = terminal()
    with ProgressLine(console, is_quiet=False) as line:
        line(NEWS)
    assert "best so far" not in stream.getvalue()


def test_a_slow_answer_shows_the_best_and_the_bound_and_cleans_up(monkeypatch) -> None:
    monkeypatch.setattr(progress, "PATIENCE_S", 0.01)
    console, stream = terminal()
    with ProgressLine(console, is_quiet=False) as line:
        line(NEWS)
        time.sleep(0.3)
    assert "peak neutral: best so far 4.3, no less than 4.1" in stream.getvalue()
    assert stream.getvalue().rstrip().endswith("\x1b[2K")


def test_quiet_and_pipes_show_nothing(monkeypatch) -> None:
    monkeypatch.setattr(progress, "PATIENCE_S", 0.0)
    console, stream = terminal()
    pipe = io.StringIO()
    for each, is_quiet in ((console, True), (Console(file=pipe), False)):
        with ProgressLine(each, is_quiet=is_quiet) as line:
            line(NEWS)
            time.sleep(0.05)
    assert stream.getvalue() == pipe.getvalue() == ""


def test_the_progress_is_one_line_however_narrow_the_window(monkeypatch) -> None:
    monkeypatch.setattr(progress, "PATIENCE_S", 0.01)
    stream = io.StringIO()
    with ProgressLine(Console(file=stream, force_terminal=True, width=40), is_quiet=False) as line:
        line(NEWS)
        time.sleep(0.3)
    shown = stream.getvalue()
    assert "peak neutral: best so far 4.3" in shown
    # The cursor goes up once, to take the line away at the end, and not over a second line at every turn.
    assert shown.count("\x1b[1A") == 1


def test_stopping_is_said_while_there_is_a_search_only() -> None:
    stream = io.StringIO()
    line = ProgressLine(Console(file=stream), is_quiet=False)
    line.say_stopping()
    with line:
        line.say_stopping()
    line.say_stopping()
    assert stream.getvalue() == f"{STOPPING}\n"
