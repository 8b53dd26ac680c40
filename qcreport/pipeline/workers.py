"""Worker processes that compute and render; they hold no key and no database."""

from __future__ import annotations

import multiprocessing
import os
import signal
from collections.abc import Callable
from concurrent.futures import ProcessPoolExecutor
from concurrent.futures.process import BrokenProcessPool
from multiprocessing import forkserver
from types import TracebackType
from typing import Final, TypeVar

from qcreport.errors import EnvironmentFailedError

_T = TypeVar("_T")
_A = TypeVar("_A")

PASSPHRASE_VARIABLE: Final = "QCREPORT_KEY_PASSPHRASE"  # noqa: S105  the name of a variable, no secret
_ONE_THREAD: Final = ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS")
_TRIES: Final = 2


class Workers:
    """A pool of processes; one that is killed is replaced and its job is tried once more.

    Started by forkserver, before any thread: the server itself imports nothing of ours, so a worker holds
    neither the parent's key nor its database.
    """

    def __init__(self, count: int) -> None:
        self._count = count
        self._context = multiprocessing.get_context("forkserver")
        self._pool: ProcessPoolExecutor | None = None

    def __enter__(self) -> Workers:
        """Start the server that makes workers, before any thread; the first job starts the workers."""
        forkserver.ensure_running()
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        """Stop the workers; jobs that have not begun are dropped."""
        if self._pool is not None:
            self._pool.shutdown(wait=True, cancel_futures=True)
            self._pool = None

    def run(self, function: Callable[[_A], _T], argument: _A) -> _T:
        """Return `function(argument)` computed in a worker.

        Raises
        ------
        EnvironmentFailedError
            Where the worker died twice over the same job (killed, or out of memory).
        Exception
            What the function itself raises.
        """
        for _ in range(_TRIES):
            pool = self._started()
            try:
                return pool.submit(function, argument).result()
            except BrokenProcessPool:
                pool.shutdown(wait=False, cancel_futures=True)
                self._pool = None
        raise EnvironmentFailedError(
            "A worker process died twice over the same report: killed, or out of memory. "
            "Check the memory of this machine and start again; nothing was issued."
        )

    def _started(self) -> ProcessPoolExecutor:
        if self._pool is None:
            self._pool = ProcessPoolExecutor(
                self._count, mp_context=self._context, initializer=_prepare_worker
            )
        return self._pool


def _prepare_worker() -> None:
    """Keep a worker to one thread and without the passphrase; runs before numpy is imported.

    An interrupt at the terminal reaches every process of the group; only the parent answers it.
    """
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    os.environ.pop(PASSPHRASE_VARIABLE, None)
    for name in _ONE_THREAD:
        os.environ[name] = "1"
