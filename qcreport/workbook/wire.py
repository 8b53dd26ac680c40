"""What the reader child answers: JSON lines, each checked strictly by the parent.

Lines are arrays `[kind, …]`: `measurement` and `notice` in any number, then one `end`; or, instead of the
end, one `refused`, after which nothing before it counts.
"""

from __future__ import annotations

import json
import math
from collections.abc import Iterator
from dataclasses import fields
from typing import Any, Final

from qcreport.errors import ExportRefusedError
from qcreport.measurements import CellRef, Censoring, Measurement, MeasurementSet, Notice
from qcreport.workbook.limits import Limits
from qcreport.workbook.notices import SENTENCES
from qcreport.workbook.places import MAX_COLUMN
from qcreport.workbook.refusals import MAX_LISTED_CELLS, REFUSAL_CODES

MAX_LINE: Final = 4 * 1024 * 1024
"""Bytes of one line."""

_MAX_TEXT = 40_000
_MAX_ROW = 64 * 1024 * 1024
_MARKS = frozenset(("struck", "commented", "hidden"))
_JSON = json.JSONEncoder(allow_nan=False, separators=(",", ":"))
_CENSORING = {member.value: member for member in Censoring}


class WireError(Exception):
    """A line that the reader child would not write."""


def encode(result: MeasurementSet) -> Iterator[bytes]:
    """Return the lines of a reading."""
    yield from map(encode_measurement, result.measurements)
    yield from map(encode_notice, result.notices)
    yield encode_end(result.export_sha256, result.layout_name, len(result.measurements))


def encode_measurement(m: Measurement) -> bytes:
    """Return the line of a measurement."""
    return _line(
        [
            "measurement", m.characteristic, m.batch, m.line, m.sample, m.reading, m.value, m.text,
            m.decimals, m.unit, m.censored, m.status, m.time, m.cell.sheet, m.cell.row, m.cell.column,
            m.marks, m.factors,
        ]
    )  # fmt: skip


def encode_notice(notice: Notice) -> bytes:
    """Return the line of a notice."""
    return _line(["notice", notice.code, notice.cells, notice.text])


def encode_end(sha256: str, layout_name: str, n_measurements: int) -> bytes:
    """Return the line that makes the answer whole."""
    return _line(["end", sha256, layout_name, n_measurements])


def encode_refusal(refusal: ExportRefusedError) -> bytes:
    """Return the line of a refusal."""
    return _line(
        [
            "refused", refusal.code, refusal.where, refusal.found, refusal.expected, refusal.next_step,
            list(refusal.cells),
        ]
    )  # fmt: skip


def _line(record: list[Any]) -> bytes:
    return _JSON.encode(record).encode("ascii") + b"\n"


class Decoder:
    """Builds a MeasurementSet from the lines of the child; anything unexpected is a WireError."""

    def __init__(self, *, name: str, sha256: str, limits: Limits) -> None:
        self._name, self._sha256 = name, sha256
        self._max_measurements = limits.max_cells
        self._notices: list[Notice] = []
        self._measurements: list[Measurement] = []
        self._result: MeasurementSet | None = None

    def take(self, line: bytes) -> None:
        """Take one line; raises ExportRefusedError where it is a refusal."""
        if self._result is not None:
            raise WireError("a line after the end")
        kind, *rest = decode_line(line)
        if kind == "measurement":
            self._measurement(rest)
        elif kind == "notice":
            self._notice(rest)
        elif kind == "end":
            self._end(rest)
        elif kind == "refused":
            raise decode_refusal(rest, name=self._name)
        else:
            raise WireError("an unknown record")

    def finished(self) -> MeasurementSet:
        """Return the whole; a WireError where the end is missing."""
        if self._result is None:
            raise WireError("no end")
        return self._result

    def _measurement(self, rest: list[Any]) -> None:
        if len(rest) != 17 or len(self._measurements) >= self._max_measurements:
            raise WireError("a measurement")
        value, text, decimals, unit, censored = rest[5:10]
        sheet, row, column, marks, factors = rest[12:]
        if value is not None and (type(value) is not float or not math.isfinite(value)):
            raise WireError("a value")
        if censored is not None and censored not in _CENSORING:
            raise WireError("a censoring")
        if censored is not None and (value is None) != (censored == Censoring.NOT_DETECTED):
            raise WireError("a value without its limit")
        if not isinstance(marks, list) or not _MARKS.issuperset(_texts(marks)):
            raise WireError("marks")
        self._measurements.append(
            Measurement(
                characteristic=_text(rest[0]),
                batch=_text(rest[1]),
                line=_optional(rest[2]),
                sample=_optional(rest[3]),
                reading=_optional(rest[4]),
                value=value,
                text=_text(text),
                decimals=_whole(decimals, 0, 400),
                unit=_text(unit),
                censored=_CENSORING[censored] if censored is not None else None,
                status=_optional(rest[10]),
                time=_optional(rest[11]),
                cell=CellRef(
                    sheet=_optional(sheet), row=_whole(row, 1, _MAX_ROW), column=_whole(column, 1, MAX_COLUMN)
                ),
                marks=tuple(marks),
                factors=_factors(factors),
            )
        )

    def _notice(self, rest: list[Any]) -> None:
        if len(rest) != 3 or rest[0] not in SENTENCES or len(self._notices) >= len(SENTENCES):
            raise WireError("a notice")
        self._notices.append(Notice(code=rest[0], cells=_cells(rest[1]), text=_text(rest[2])))

    def _end(self, rest: list[Any]) -> None:
        if len(rest) != 3 or rest[0] != self._sha256 or rest[2] != len(self._measurements):
            raise WireError("the end does not fit")
        self._result = MeasurementSet(
            export_name=self._name,
            export_sha256=self._sha256,
            layout_name=_text(rest[1]),
            measurements=tuple(self._measurements),
            notices=tuple(self._notices),
        )


def decode_line(line: bytes) -> list[Any]:
    """Return the record of a line: an array that is not empty."""
    try:
        record = json.loads(line, parse_constant=_no_constant)
    except (ValueError, RecursionError):
        raise WireError("no JSON") from None
    if not isinstance(record, list) or not record:
        raise WireError("no record")
    return record


def decode_refusal(record: list[Any], *, name: str) -> ExportRefusedError:
    """Return the refusal that a line holds after its kind."""
    if len(record) != 6 or record[0] not in REFUSAL_CODES:
        raise WireError("a refusal")
    return ExportRefusedError(
        record[0],
        file=name,
        where=_text(record[1]),
        found=_text(record[2]),
        expected=_text(record[3]),
        next_step=_text(record[4]),
        cells=_cells(record[5]),
    )


def _no_constant(name: str) -> float:
    raise WireError(name)


def _text(value: Any) -> str:
    if not isinstance(value, str) or len(value) > _MAX_TEXT or not _encodable(value):
        raise WireError("a text")
    return value


def _encodable(text: str) -> bool:
    """Return whether a text holds no half of a surrogate pair."""
    if text.isascii():
        return True
    try:
        text.encode("utf-8")
    except UnicodeEncodeError:
        return False
    return True


def _optional(value: Any) -> str | None:
    return None if value is None else _text(value)


def _texts(values: list[Any]) -> list[str]:
    return [_text(value) for value in values]


def _cells(value: Any) -> tuple[str, ...]:
    if not isinstance(value, list) or len(value) > MAX_LISTED_CELLS:
        raise WireError("cells")
    return tuple(_texts(value))


def _whole(value: Any, low: int, high: int) -> int:
    if type(value) is not int or not low <= value <= high:
        raise WireError("a whole number")
    return value


def _factors(value: Any) -> tuple[tuple[str, str], ...]:
    if not isinstance(value, list):
        raise WireError("factors")
    pairs = []
    for pair in value:
        if not isinstance(pair, list) or len(pair) != 2:
            raise WireError("a factor")
        pairs.append((_text(pair[0]), _text(pair[1])))
    return tuple(pairs)


def limits_as_json(limits: Limits) -> dict[str, float]:
    """Return limits for the child's header line."""
    return {field.name: getattr(limits, field.name) for field in fields(limits)}
