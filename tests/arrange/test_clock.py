"""When planning must stop."""

import signal
import threading

import pytest

from balancer.arrange.clock import Clock
from balancer.arrange.results import Stop


def test_without_a_limit_nothing_stops() -> None:
    clock = Clock()
    assert (clock.stop, clock.is_stopped, clock.remaining_s) == (Stop.NONE, False, None)


def test_spent_limit_stops() -> None:
    clock = Clock(0.0)
    assert (clock.stop, clock.remaining_s) == (Stop.TIME_LIMIT, 0.0)


def test_time_left_is_not_more_than_the_limit() -> None:
    remaining_s = Clock(60.0).remaining_s
    assert remaining_s is not None
    assert 50.0 < remaining_s <= 60.0


def test_first_ctrl_c_is_a_wish_and_the_second_an_order() -> None:
    told: list[str] = []
    clock = Clock(on_interrupt=lambda: told.append("stopping"))
    with clock.listening():
        signal.raise_signal(signal.SIGINT)
        assert clock.stop is Stop.INTERRUPTED
        with pytest.raises(KeyboardInterrupt):
            signal.raise_signal(signal.SIGINT)
    assert told == ["stopping"]


def test_ctrl_c_outweighs_a_spent_limit() -> None:
    clock = Clock(0.0)
    with clock.listening():
        signal.raise_signal(signal.SIGINT)
    assert clock.stop is Stop.INTERRUPTED


def test_ctrl_c_is_given_back() -> None:
    before = signal.getsignal(signal.SIGINT)
    with Clock().listening():
        assert signal.getsignal(signal.SIGINT) is not before
    assert signal.getsignal(signal.SIGINT) is before


def test_other_threads_listen_to_nothing() -> None:
    before, seen = signal.getsignal(signal.SIGINT), []

    def listen() -> None:
        with Clock().listening():
            seen.append(signal.getsignal(signal.SIGINT))

    thread = threading.Thread(target=listen)
    thread.start()
    thread.join()
    assert seen == [before]


def test_a_job_that_ignores_ctrl_c_goes_on_ignoring_it() -> None:
    before = signal.signal(signal.SIGINT, signal.SIG_IGN)
    try:
        clock = Clock()
        with clock.listening():
            signal.raise_signal(signal.SIGINT)
        assert clock.stop is Stop.NONE
    finally:
        signal.signal(signal.SIGINT, before)
