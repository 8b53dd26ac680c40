"""Stopping on a signal: at the next step where possible, in the middle of one where it takes too long.

Being stopped in the middle is safe, because every step of handling an export may be repeated; so the service
is down within ten seconds whatever it is doing.
"""

from __future__ import annotations

import signal
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from types import FrameType

GRACE_S = 6.0

_SIGNALS = (signal.SIGINT, signal.SIGTERM)


class StopNowError(BaseException):
    """The work in hand is broken off; no handler of ordinary errors may catch this."""


class Stop:
    """Whether the service was asked to stop, and whether it may be broken off."""

    def __init__(self) -> None:
        self.requested = False
        self.may_break_off = False

    def request(self) -> None:
        """Ask it to stop."""
        self.requested = True

    @contextmanager
    def breakable(self) -> Iterator[None]:
        """Allow the block to be broken off; its end, and what comes after, is not."""
        self.may_break_off = True
        try:
            yield
        finally:
            self.may_break_off = False


@contextmanager
def stop_on_signals(stop: Stop, pull: Callable[[], None], *, grace_s: float = GRACE_S) -> Iterator[None]:
    """Turn SIGINT and SIGTERM into a request to stop while the block runs (main thread only).

    The first signal asks; `grace_s` seconds later, or at a second signal, `StopNowError` is raised in what
    may be broken off. It is raised again each second, in case it met a place that cannot pass it on.
    """

    def ask(_number: int, _frame: FrameType | None) -> None:
        if stop.requested and stop.may_break_off:
            raise StopNowError
        stop.request()
        signal.setitimer(signal.ITIMER_REAL, grace_s, 1.0)
        pull()

    def now(_number: int, _frame: FrameType | None) -> None:
        if stop.may_break_off:
            raise StopNowError

    before = {number: signal.signal(number, ask) for number in _SIGNALS}
    before[signal.SIGALRM] = signal.signal(signal.SIGALRM, now)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_REAL, 0.0)
        for number, handler in before.items():
            signal.signal(number, handler)
