"""The numbers of result.json as a workbook: real numbers in full, and text that is never a formula."""

from __future__ import annotations

import json
from collections.abc import Iterable, Mapping, Sequence
from io import BytesIO
from typing import Any

Row = Sequence[str | float | int | bool | None]

_PAIR = (
    "first",
    "second",
    "difference",
    "lower",
    "upper",
    "p",
    "answer",
    "se",
    "df",
    "statistic",
    "critical_value",
    "detectable",
    "needed_n",
)
_GROUP = ("label", "n", "n_readings", "mean", "sd", "median", "minimum", "maximum", "censored", "missing")
_CHECK = ("name", "statistic", "p", "threshold", "met", "note")
_FLAGGED = ("group", "cell", "value", "test", "statistic", "p", "changes_answer")
_LISTS = (
    ("Pairs", "pairs", _PAIR),
    ("Groups", "groups", _GROUP),
    ("Not compared", "not_compared", ("label", "n", "reason")),
    ("Checks", "checks", _CHECK),
    ("Flagged", "flagged", _FLAGGED),
)
"""(sheet, key in a characteristic, columns)."""
_ANSWER = ("name", "title", "unit", "answer", "procedure", "alpha", "scale", "all_within_margin")


def results_workbook(result: bytes) -> bytes:
    """Return results.xlsx from the bytes of result.json.

    Parameters
    ----------
    result : bytes
        A document of schema `qcreport/result/1`.

    Notes
    -----
    Names come from an export and may begin with `=`: every text is stored as text and marked so, and a
    spreadsheet that opens the file runs none of it.
    """
    from openpyxl import Workbook  # type: ignore[import-untyped] # it ships no types

    document = json.loads(result)
    book = Workbook()
    book.remove(book.active)
    _fill(book, "Origin", ("what", "value"), _origin(document))
    characteristics = document["characteristics"]
    _fill(book, "Answers", _ANSWER, ([c.get(k) for k in _ANSWER] for c in characteristics))
    for title, key, columns in _LISTS:
        rows = ([c["name"], *(item.get(k) for k in columns)] for c in characteristics for item in c[key])
        _fill(book, title, ("characteristic", *columns), rows)
    notices = ([n["code"], n["text"], ", ".join(n["cells"])] for n in document["notices"])
    _fill(book, "Notices", ("code", "text", "cells"), notices)
    stream = BytesIO()
    book.save(stream)
    return stream.getvalue()


def _origin(document: Mapping[str, Any]) -> list[Row]:
    export, plan, run = document["export"], document["plan"], document["run"]
    rows: list[Row] = [
        ("export", export["name"]),
        ("export SHA-256", export["sha256"]),
        ("plan", plan["name"]),
        ("plan SHA-256", plan["sha256"]),
        ("run k", run["k"]),
        ("run n", run["n"]),
    ]
    return rows + [(f"version of {name}", version) for name, version in document["versions"].items()]


def _fill(book: Any, title: str, heads: Sequence[str], rows: Iterable[Row]) -> None:
    from openpyxl.styles import Font  # type: ignore[import-untyped] # it ships no types

    sheet = book.create_sheet(title)
    for number, row in enumerate([tuple(heads), *rows], start=1):
        for column, value in enumerate(row, start=1):
            _write(sheet.cell(number, column), value)
    for cell in sheet[1]:
        cell.font = Font(bold=True)
    sheet.freeze_panes = "A2"


def _write(cell: Any, value: str | float | bool | None) -> None:
    if not isinstance(value, str):
        cell.value = value
        return
    cell.value = "".join(c if c.isprintable() or c in "\n\t" else f"[U+{ord(c):04X}]" for c in value)[:32767]
    if value:
        cell.data_type = "s"  # a text that begins with = stays a text
        cell.quotePrefix = True
