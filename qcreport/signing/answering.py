"""The child's side of `limited.ask`: one order, one answer, under limits."""

from __future__ import annotations

import importlib
import json
import sys
from collections.abc import Callable, Iterable, Mapping
from typing import Any

from qcreport.errors import QcReportError
from qcreport.signing.limits import apply_limits


def answer_order(
    preload: Callable[[Mapping[str, Any]], Iterable[str]],
    respond: Callable[[Mapping[str, Any], bytes], Mapping[str, Any]],
) -> int:
    """Read the order and the bytes on standard input, print the answer, and return the exit status.

    Parameters
    ----------
    preload : callable
        Returns the names of our own libraries, imported before the limits count: only what the file needs may
        exceed them.
    respond : callable
        Returns the answer to an order about bytes.
    """
    order = json.loads(sys.stdin.buffer.readline())
    for name in preload(order):
        importlib.import_module(name)
    apply_limits(order["memory_bytes"], order["cpu_s"])
    told: dict[str, Any]
    try:
        told = {"answer": respond(order, sys.stdin.buffer.read())}
    except MemoryError:
        told = {"stopped": "memory"}
    except QcReportError as error:
        told = {"error": {"kind": error.kind, "text": error.text}}
    sys.stdout.write(json.dumps(told, allow_nan=False) + "\n")
    return 0
