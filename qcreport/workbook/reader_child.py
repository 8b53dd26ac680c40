"""The process that reads an export: `python -I -m qcreport.workbook.reader_child`.

Standard input holds one JSON line (name, layout file and text, limits) and then the bytes of the export;
standard output gets the lines of `wire`. The process bounds its own memory, time and files before it looks
at a byte of the export.
"""

from __future__ import annotations

import gc
import json
import sys
from collections.abc import Iterator
from typing import Any

from qcreport.canonical import sha256_hex
from qcreport.errors import ConfigError, ExportRefusedError
from qcreport.workbook.layout import parse_layout
from qcreport.workbook.limits import Limits
from qcreport.workbook.reading import ExportReading
from qcreport.workbook.refusals import refused
from qcreport.workbook.wire import encode_end, encode_measurement, encode_notice, encode_refusal

_MAX_FILES = 32
EXIT_LAYOUT = 9
"""Exit code where the layout text is wrong: the parent checks it first, so this is a fault of the program."""


def limit_this_process(limits: Limits) -> None:
    """Bound memory, processor time, open files and core dumps of this process for good."""
    if sys.platform == "win32":
        return
    import resource

    bounds = {
        resource.RLIMIT_AS: limits.memory_bytes,
        resource.RLIMIT_CPU: limits.cpu_s,
        resource.RLIMIT_CORE: 0,
        resource.RLIMIT_NOFILE: _MAX_FILES,
        resource.RLIMIT_FSIZE: 0,
    }
    for kind, bound in bounds.items():
        _, hard = resource.getrlimit(kind)
        allowed = bound if hard == resource.RLIM_INFINITY else min(bound, hard)
        resource.setrlimit(kind, (allowed, allowed))


def read(header: dict[str, Any], data: bytes) -> Iterator[bytes]:
    """Yield the lines that answer one request, measurements as they are made: none is kept here."""
    limits = Limits(**header["limits"])
    try:
        layout = parse_layout(header["layout_text"].encode("utf-8"), header["layout_file"])
        reading = ExportReading(
            data,
            name=header["name"],
            layout=layout,
            limits=limits,
            second_look=header["second_look"] is True,
        )
        count = 0
        for measurement in reading.measurements():
            count += 1
            yield encode_measurement(measurement)
        yield from map(encode_notice, reading.notices())
        yield encode_end(sha256_hex(data), layout.name, count)
    except ExportRefusedError as refusal:
        yield encode_refusal(refusal)
    except (MemoryError, RecursionError):
        yield encode_refusal(refuse_for_memory(limits))


def refuse_for_memory(limits: Limits) -> ExportRefusedError:
    """Return the refusal of an export that needs more memory than one reading may take."""
    return refused(
        "too_large_unpacked",
        where="the file",
        found="Reading the export takes too much memory.",
        expected=f"The limit is {limits.memory_bytes // (1024 * 1024):,} MB of memory.",
        next_step="Export fewer rows at a time; clear cells far away from the table.",
    )


def main() -> int:
    """Answer the one request on standard input."""
    header = json.loads(sys.stdin.buffer.readline())
    limit_this_process(Limits(**header["limits"]))
    gc.disable()  # nothing here makes cycles, and millions of cells would be looked through again and again
    data = sys.stdin.buffer.read()
    try:
        for line in read(header, data):
            sys.stdout.buffer.write(line)
    except ConfigError:
        return EXIT_LAYOUT
    sys.stdout.buffer.flush()
    return 0


if __name__ == "__main__":
    sys.exit(main())
