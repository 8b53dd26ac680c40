"""A hostile PDF looked at in a process of its own, so that it costs bounded memory and time."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
from collections.abc import Mapping
from typing import Any, Final

from qcreport.errors import EnvironmentFailedError, NotOurReportError, SigningDeniedError
from qcreport.signing.limits import MEGABYTE, VerifyLimits

# Nothing is handed down but what a numeric library needs to stay with one thread.
_ENVIRONMENT: Final = {
    "LANG": "C.UTF-8",
    "OPENBLAS_NUM_THREADS": "1",
    "OMP_NUM_THREADS": "1",
    "MKL_NUM_THREADS": "1",
}
_TOO_LONG = "checking it needs more than {cpu_s} seconds of work and was stopped"
_CRASHED = "the process that read it crashed, which no report of ours causes"
_KILLED = {24: _TOO_LONG, int(signal.SIGTERM): "checking it was stopped from outside"}
"""By signal; 24 is SIGXCPU, which not every system names."""
_ERRORS: Final = {error.kind: error for error in (NotOurReportError, SigningDeniedError)}


class StoppedError(Exception):
    """Checking exceeded a limit, or crashed; the text is the reason, one clause."""


def module_command(module: str) -> tuple[str, ...]:
    """Return the command of a child: our own interpreter, isolated, and one of our modules."""
    return (sys.executable, "-I", "-m", module)


def ask(
    command: tuple[str, ...], order: Mapping[str, Any], payload: bytes, limits: VerifyLimits
) -> dict[str, Any]:
    """Return what a child answers.

    Parameters
    ----------
    command : tuple of str
        From `module_command`.
    order : mapping
        Sent as one line of JSON, with the limits added.
    payload : bytes
        Sent after it.
    limits : VerifyLimits
        What the child may cost.

    Raises
    ------
    StoppedError
        It exceeded a limit or crashed.
    NotOurReportError, SigningDeniedError
        It answered with this error.
    EnvironmentFailedError
        It cannot be started, or fails on its own account.
    """
    line = {"memory_bytes": limits.memory_bytes, "cpu_s": limits.cpu_s, **order}
    try:
        process = subprocess.Popen(  # noqa: S603  our own interpreter and module
            command,
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            stderr=subprocess.DEVNULL,
            env=_environment(),
            start_new_session=True,
        )
    except OSError as error:
        raise EnvironmentFailedError(f"No process can be started to check it: {error.strerror}.") from None
    try:
        given = json.dumps(line).encode("ascii") + b"\n" + payload
        output, _ = process.communicate(given, timeout=limits.wall_s)
    except subprocess.TimeoutExpired:
        _end(process)
        raise StoppedError(
            f"checking it took longer than {limits.wall_s:g} seconds and was stopped"
        ) from None
    except BaseException:
        _end(process)
        raise
    return _answer(process.returncode, output, limits)


def _environment() -> dict[str, str]:
    kept = ("SYSTEMROOT",)  # without it no process starts on Windows
    return {**_ENVIRONMENT, **{name: os.environ[name] for name in kept if name in os.environ}}


def _end(process: subprocess.Popen[bytes]) -> None:
    """Kill the process with everything it started, and wait for it."""
    if os.name == "posix":
        os.killpg(process.pid, signal.SIGKILL)
    else:
        process.kill()
    process.communicate()


def _answer(code: int, output: bytes, limits: VerifyLimits) -> dict[str, Any]:
    answer = _document(output)
    if "answer" in answer:
        told: dict[str, Any] = answer["answer"]
        return told
    if "error" in answer:
        raise _ERRORS.get(answer["error"]["kind"], EnvironmentFailedError)(answer["error"]["text"])
    if "stopped" in answer:
        raise StoppedError(f"checking it needs more than {limits.memory_bytes // MEGABYTE} MB of memory")
    if code < 0:
        raise StoppedError(_KILLED.get(-code, _CRASHED).format(cpu_s=limits.cpu_s))
    raise EnvironmentFailedError(f"The process that checks the report failed (status {code}).")


def _document(output: bytes) -> dict[str, Any]:
    try:
        document = json.loads(output)
    except ValueError:
        return {}
    return document if isinstance(document, dict) else {}
