"""A report checked in a process of its own, so that a hostile PDF costs bounded memory and time."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
from datetime import datetime
from typing import TYPE_CHECKING, Any

from qcreport.audit.limits import MEGABYTE, VerifyLimits
from qcreport.audit.verdict import Json, not_judged
from qcreport.errors import EnvironmentFailedError, NotOurReportError
from qcreport.signing.reading import require_pdf

if TYPE_CHECKING:
    from cryptography import x509

_COMMAND = (sys.executable, "-I", "-m", "qcreport.audit.child")
# Nothing is handed down but what a numeric library needs to stay with one thread.
_ENVIRONMENT = {
    "LANG": "C.UTF-8",
    "OPENBLAS_NUM_THREADS": "1",
    "OMP_NUM_THREADS": "1",
    "MKL_NUM_THREADS": "1",
}

_TOO_LONG = "checking it needs more than {cpu_s} seconds of work and was stopped"
_CRASHED = "the process that read it crashed, which no report of ours causes"
_KILLED = {24: _TOO_LONG, int(signal.SIGTERM): "checking it was stopped from outside"}
"""By signal; 24 is SIGXCPU, which not every system names."""


def verify_in_child(
    pdf: bytes,
    *,
    roots: tuple[x509.Certificate, ...] | None,
    now: datetime,
    recompute: bool = True,
    limits: VerifyLimits | None = None,
) -> Json:
    """Check one report in a limited process and return the document `qcreport/verify/1`.

    A report whose checking exceeds the limits is not valid, with that as its reason.

    Raises
    ------
    NotOurReportError
        Not a PDF, or not a sealed report that can be read.
    EnvironmentFailedError
        The process cannot be started, or fails on its own account.
    """
    require_pdf(pdf)
    bounds = limits if limits is not None else VerifyLimits()
    order = _order(roots, now, recompute, bounds)
    try:
        process = subprocess.Popen(  # noqa: S603  our own interpreter and module
            _COMMAND,
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            stderr=subprocess.DEVNULL,
            env=_environment(),
            start_new_session=True,
        )
    except OSError as error:
        raise EnvironmentFailedError(f"No process can be started to check it: {error.strerror}.") from None
    try:
        output, _ = process.communicate(order + pdf, timeout=bounds.wall_s)
    except subprocess.TimeoutExpired:
        _end(process)
        return not_judged(f"checking it took longer than {bounds.wall_s:g} seconds and was stopped")
    except BaseException:
        _end(process)
        raise
    return _answer(process.returncode, output, bounds)


def _order(
    roots: tuple[x509.Certificate, ...] | None, now: datetime, recompute: bool, bounds: VerifyLimits
) -> bytes:
    order = {
        "memory_bytes": bounds.memory_bytes,
        "cpu_s": bounds.cpu_s,
        "roots": None if roots is None else [_pem(root) for root in roots],
        "now": now.isoformat(),
        "recompute": recompute,
    }
    return json.dumps(order).encode("ascii") + b"\n"


def _pem(certificate: x509.Certificate) -> str:
    from cryptography.hazmat.primitives.serialization import Encoding

    return certificate.public_bytes(Encoding.PEM).decode("ascii")


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


def _answer(code: int, output: bytes, bounds: VerifyLimits) -> Json:
    answer = _document(output)
    if "verdict" in answer:
        verdict: Json = answer["verdict"]
        return verdict
    if "error" in answer:
        if answer["error"]["kind"] == NotOurReportError.kind:
            raise NotOurReportError(answer["error"]["text"])
        raise EnvironmentFailedError(answer["error"]["text"])
    if "stopped" in answer:
        return not_judged(f"checking it needs more than {bounds.memory_bytes // MEGABYTE} MB of memory")
    if code < 0:
        return not_judged(_KILLED.get(-code, _CRASHED).format(cpu_s=bounds.cpu_s))
    raise EnvironmentFailedError(f"The process that checks the report failed (status {code}).")


def _document(output: bytes) -> dict[str, Any]:
    try:
        document = json.loads(output)
    except ValueError:
        return {}
    return document if isinstance(document, dict) else {}
