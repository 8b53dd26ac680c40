"""The measurement store: every value once, every change of it as a new version beside the old one."""

from __future__ import annotations

import hashlib
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any, TypeVar

from sqlalchemy import Connection, RowMapping, insert, select

from qcreport.canonical import finite_or_none, to_json_bytes
from qcreport.measurements import Measurement, MeasurementSet
from qcreport.records.facts import clean_text
from qcreport.records.identity import Identified, identified
from qcreport.records.tables import MEASUREMENT

_CHUNK = 500

T = TypeVar("T")


@dataclass(frozen=True, slots=True, kw_only=True)
class ChangedValue:
    """A measurement that an earlier export gave otherwise."""

    cell: str
    """Where the new text stands."""
    old_text: str
    """Text and unit as recorded before."""
    new_text: str
    """Text and unit as read now."""
    old_number: str
    """Report of the run that recorded the old text."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Survey:
    """What an export brings, against what the store holds."""

    new: int
    """Measurements never seen."""
    known: int
    """Measurements seen with the same text."""
    changed: tuple[ChangedValue, ...]
    """Measurements seen with another text, export order."""

    @property
    def nothing_new(self) -> bool:
        """True where the export holds measurements and all are known."""
        return self.known > 0 and self.new == 0 and not self.changed


@dataclass(frozen=True, slots=True, kw_only=True)
class _Version:
    number: int
    """1 for the first text, one more for each change."""
    shown: str
    """Text and unit of the newest version."""
    run: str
    """Report number of the run that recorded it."""
    exports: frozenset[tuple[str, str]]
    """(export digest, shown text) of every version."""


def survey(connection: Connection, measurements: MeasurementSet) -> Survey:
    """Compare an export with the store; nothing is written."""
    found, _ = _compare(connection, measurements)
    return found


def record(connection: Connection, measurements: MeasurementSet, *, number: str, at: str) -> Survey:
    """Write what is new or changed in an export and return what it was."""
    found, rows = _compare(connection, measurements)
    export = {"export_sha256": measurements.export_sha256, "number": number, "recorded_at": at}
    layout = clean_text(measurements.layout_name)
    for chunk in _chunks(rows):
        values = [
            {"identity": item.identity, "version": version, "layout": layout, **_columns(item.measurement)}
            | export
            for item, version in chunk
        ]
        connection.execute(insert(MEASUREMENT), values)
    return found


def digest_of_run(connection: Connection, number: str) -> str:
    """Return the SHA-256 over everything that a run recorded, so that a later change of a row shows."""
    query = select(MEASUREMENT).where(MEASUREMENT.c.number == number).order_by(MEASUREMENT.c.id)
    digest = hashlib.sha256()
    for row in connection.execute(query).mappings():
        columns = {name: value for name, value in row.items() if name != "id"}
        digest.update(to_json_bytes(columns) + b"\n")
    return digest.hexdigest()


def _compare(
    connection: Connection, measurements: MeasurementSet
) -> tuple[Survey, list[tuple[Identified, int]]]:
    """Return the survey, and what has to be written with its version number."""
    new = known = 0
    changed: list[ChangedValue] = []
    rows: list[tuple[Identified, int]] = []
    for chunk in _chunks(identified(measurements)):
        versions = _versions(connection, [item.identity for item in chunk])
        for item in chunk:
            shown = _shown(item.measurement)
            version = versions.get(item.identity)
            if version is None:
                new += 1
                rows.append((item, 1))
            elif shown == version.shown or (measurements.export_sha256, shown) in version.exports:
                known += 1  # an old export run again does not bring its old values back
            else:
                changed.append(_changed(item.measurement, version))
                rows.append((item, version.number + 1))
    return Survey(new=new, known=known, changed=tuple(changed)), rows


def _changed(measurement: Measurement, version: _Version) -> ChangedValue:
    return ChangedValue(
        cell=clean_text(str(measurement.cell)),
        old_text=version.shown,
        new_text=_shown(measurement),
        old_number=version.run,
    )


def _versions(connection: Connection, identities: Sequence[str]) -> dict[str, _Version]:
    c = MEASUREMENT.c
    query = select(c.identity, c.version, c.text, c.unit, c.number, c.export_sha256)
    query = query.where(c.identity.in_(identities)).order_by(c.identity, c.version)
    rows: dict[str, list[RowMapping]] = {}
    for row in connection.execute(query).mappings():
        rows.setdefault(row["identity"], []).append(row)
    return {identity: _version(found) for identity, found in rows.items()}


def _version(rows: Sequence[RowMapping]) -> _Version:
    newest = rows[-1]
    return _Version(
        number=newest["version"],
        shown=_with_unit(newest["text"], newest["unit"]),
        run=newest["number"],
        exports=frozenset((row["export_sha256"], _with_unit(row["text"], row["unit"])) for row in rows),
    )


def _shown(measurement: Measurement) -> str:
    return _with_unit(clean_text(measurement.text), clean_text(measurement.unit))


def _with_unit(text: str, unit: str) -> str:
    return f"{text} {unit}".rstrip()


def _columns(m: Measurement) -> dict[str, Any]:
    return {
        "line": _clean(m.line),
        "batch": clean_text(m.batch),
        "sample": _clean(m.sample),
        "reading": _clean(m.reading),
        "characteristic": clean_text(m.characteristic),
        "value": finite_or_none(m.value),
        "text": clean_text(m.text),
        "decimals": m.decimals,
        "unit": clean_text(m.unit),
        "censored": None if m.censored is None else m.censored.value,
        "status": _clean(m.status),
        "time": _clean(m.time),
        "cell": clean_text(str(m.cell)),
        "marks": _json([clean_text(mark) for mark in m.marks]),
        "factors": _json([[clean_text(part) for part in factor] for factor in m.factors]),
    }


def _clean(text: str | None) -> str | None:
    return None if text is None else clean_text(text)


def _json(value: list[Any]) -> str:
    return to_json_bytes(value).decode("utf-8")


def _chunks(items: Sequence[T]) -> Iterator[Sequence[T]]:
    for start in range(0, len(items), _CHUNK):
        yield items[start : start + _CHUNK]
