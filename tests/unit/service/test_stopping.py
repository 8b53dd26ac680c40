"""Stopping on signals, and that it takes no longer than it may."""

from __future__ import annotations

import os
import signal
import time

import pytest

from qcreport.service.stopping import Stop, StopNowError, stop_on_signals


def send(number: int) -> None:
    os.kill(os.getpid(), number)


def work(stop: Stop, *signals: int) -> None:
    """Be signalled, and then be busy for half a minute."""
    begun = time.monotonic()
    with stop.breakable():
        for number in signals:
            send(number)
        while time.monotonic() - begun < 30:
            pass


@pytest.mark.parametrize("number", [signal.SIGINT, signal.SIGTERM])
def test_the_first_signal_asks_and_pulls(number: int) -> None:
    stop, pulls = Stop(), []
    before = signal.getsignal(number)
    with stop_on_signals(stop, lambda: pulls.append(1)):
        with stop.breakable():
            send(number)
        assert stop.requested
        assert pulls == [1]
    assert signal.getsignal(number) == before
    assert signal.getitimer(signal.ITIMER_REAL) == (0.0, 0.0)


def test_work_that_takes_too_long_is_broken_off() -> None:
    stop = Stop()
    begun = time.monotonic()
    with stop_on_signals(stop, lambda: None, grace_s=0.05), pytest.raises(StopNowError):
        work(stop, signal.SIGTERM)
    assert time.monotonic() - begun < 30


def test_a_second_signal_breaks_off_at_once() -> None:
    stop = Stop()
    with stop_on_signals(stop, lambda: None), pytest.raises(StopNowError):
        work(stop, signal.SIGINT, signal.SIGINT)


def test_what_comes_after_the_work_is_not_broken_off() -> None:
    stop = Stop()
    with stop_on_signals(stop, lambda: None, grace_s=0.01):
        send(signal.SIGTERM)
        send(signal.SIGTERM)
        begun = time.monotonic()
        while time.monotonic() - begun < 0.05:
            pass
    assert stop.requested


def test_no_handler_of_ordinary_errors_catches_the_breaking_off() -> None:
    assert not issubclass(StopNowError, Exception)
