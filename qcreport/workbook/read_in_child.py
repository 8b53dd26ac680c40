"""Reading an export in a process of its own: a hostile workbook must not take the service down."""

from __future__ import annotations

import contextlib
import json
import os
import signal
import subprocess
import sys
import threading
from typing import IO, Any, Protocol, TypeVar

from qcreport.canonical import sha256_hex
from qcreport.errors import ExportRefusedError
from qcreport.measurements import MeasurementSet
from qcreport.workbook.layout import parse_layout
from qcreport.workbook.limits import Limits, megabytes
from qcreport.workbook.refusals import damaged, refused
from qcreport.workbook.wire import MAX_LINE, Decoder, WireError, limits_as_json

_MODULE = "qcreport.workbook.reader_child"
_Result = TypeVar("_Result", covariant=True)


class Answer(Protocol[_Result]):
    """Takes the lines of a child, checks them strictly, and builds the result."""

    def take(self, line: bytes) -> None:
        """Take one line; a WireError where the child would not write it, a refusal where it is one."""

    def finished(self) -> _Result:
        """Return the whole; a WireError where it is incomplete."""


def read_in_child(
    data: bytes,
    *,
    name: str,
    layout_bytes: bytes,
    layout_file: str,
    limits: Limits | None = None,
    second_look: bool = False,
) -> MeasurementSet:
    """Return all that an export holds, read by a bounded child process.

    Parameters
    ----------
    data : bytes
        The file as dropped.
    name : str
        Its name, without folders.
    layout_bytes : bytes
        The layout file.
    layout_file : str
        The layout file's name, for its faults.
    limits : Limits or None
        Bounds of the reading; the shipped ones where None.
    second_look : bool
        Compare what was read, cell by cell, with an independent reader.

    Returns
    -------
    MeasurementSet
        The same as `read_export` gives.

    Raises
    ------
    ConfigError
        The layout is wrong.
    ExportRefusedError
        The export is refused, or reading it took more memory or time than it may.
    """
    limits = limits if limits is not None else Limits()
    parse_layout(layout_bytes, layout_file)
    header = {
        "name": name,
        "layout_file": layout_file,
        "layout_text": layout_bytes.decode("utf-8-sig"),
        "limits": limits_as_json(limits),
        "second_look": second_look,
    }
    decoder = Decoder(name=name, sha256=sha256_hex(data), limits=limits)
    return ask_child(_MODULE, header, data, decoder, limits=limits, name=name)


def ask_child(
    module: str, header: dict[str, Any], data: bytes, answer: Answer[_Result], *, limits: Limits, name: str
) -> _Result:
    """Return what a bounded child process makes of an export.

    Parameters
    ----------
    module : str
        The child's module.
    header : dict
        The request, sent as one JSON line before the bytes.
    data : bytes
        The file as dropped.
    answer : Answer
        Takes what the child writes.
    limits : Limits
        Bounds of the child.
    name : str
        The file's name, for refusals.
    """
    try:
        _refuse_oversized(data, limits)
        request = json.dumps(header).encode("ascii") + b"\n"
        return _ask([sys.executable, "-I", "-m", module], request, data, answer, limits)
    except ExportRefusedError as refusal:
        refusal.file = name
        raise


def _refuse_oversized(data: bytes, limits: Limits) -> None:
    if len(data) > limits.max_file_bytes:
        raise refused(
            "too_large",
            where="the file",
            found=f"The file has {megabytes(len(data))}. It was not opened.",
            expected=f"The limit is {megabytes(limits.max_file_bytes)}.",
            next_step="Export fewer rows at a time, or ask IT to raise the limit in site.toml.",
        )


def _ask(command: list[str], request: bytes, data: bytes, answer: Answer[_Result], limits: Limits) -> _Result:
    child = subprocess.Popen(  # noqa: S603 - our own module, no shell
        command,
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        stderr=subprocess.DEVNULL,
        env={},
        start_new_session=True,
        close_fds=True,
    )
    late = threading.Event()

    def end_late_child() -> None:
        late.set()
        kill_group(child)

    clock = threading.Timer(limits.wall_s, end_late_child)
    clock.daemon = True
    clock.start()
    fault = False
    try:
        if child.stdin is None or child.stdout is None:
            raise WireError("no pipes")
        with contextlib.suppress(BrokenPipeError), child.stdin as pipe:
            pipe.write(request)
            pipe.write(data)
        _take_lines(child.stdout, answer, limits)
        child.wait()
        result = answer.finished()
    except WireError:
        fault = True
    finally:
        kill_group(child)
        child.wait()
        clock.cancel()
        if child.stdout is not None:
            child.stdout.close()
    if late.is_set():
        raise _timed_out(f"{limits.wall_s:g} seconds")
    if fault:
        raise _died(child.returncode, limits)
    return result


def _take_lines(pipe: IO[bytes], answer: Answer[Any], limits: Limits) -> None:
    taken = 0
    while line := pipe.readline(MAX_LINE + 1):
        taken += len(line)
        if len(line) > MAX_LINE or taken > limits.max_answer_bytes:
            raise WireError("the answer is too long")
        answer.take(line)


def kill_group(child: subprocess.Popen[bytes]) -> None:
    """End a child and whatever it started; nothing happens where it has ended and was waited for."""
    if child.returncode is not None:
        return
    if sys.platform == "win32":
        child.kill()
        return
    with contextlib.suppress(ProcessLookupError, PermissionError):
        os.killpg(child.pid, signal.SIGKILL)


def _timed_out(limit: str) -> ExportRefusedError:
    return refused(
        "timed_out",
        where="the file",
        found="Reading the export takes too long; it was stopped.",
        expected=f"The limit is {limit}.",
        next_step="Export fewer rows at a time, or save the workbook anew in the spreadsheet program.",
    )


def _died(code: int, limits: Limits) -> ExportRefusedError:
    """Return why a child gave no answer, as far as its end tells."""
    if sys.platform != "win32" and code == -signal.SIGXCPU:
        return _timed_out(f"{limits.cpu_s} seconds of processor time")
    if sys.platform != "win32" and code in (-signal.SIGKILL, -signal.SIGABRT):
        return refused(
            "too_large_unpacked",
            where="the file",
            found="Reading the export takes too much memory; it was stopped.",
            expected=f"The limit is {megabytes(limits.memory_bytes)} of memory.",
            next_step="Export fewer rows at a time; clear cells far away from the table.",
        )
    return damaged(f"The reading ended without an answer (code {code}).")
