"""The measurement store: every value once, every change of it as a new version beside the old one."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass
from typing import Any

from sqlalchemy import ColumnElement, Connection, insert, select

from qcreport.analysis.provenance import Retest, ValueChange
from qcreport.canonical import finite_or_none, to_json_bytes
from qcreport.measurements import Measurement, MeasurementSet
from qcreport.records.facts import clean_text
from qcreport.records.identity import Identified, identified
from qcreport.records.tables import MEASUREMENT
from qcreport.records.versions import Met, chunks, known_samples, met, retest_of, sample_key, versions_of


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
    first_seen: int = 0
    """Measurements that no other export held; of an export compared again as many as the first time."""
    not_joined: int = 0
    """Measurements without a sample id."""
    history: tuple[ValueChange, ...] = ()
    """Every value that another export gave otherwise, export order."""
    retests: tuple[Retest, ...] = ()
    """Samples that were measured before, export order."""

    @property
    def nothing_new(self) -> bool:
        """True where the export holds measurements and all are known."""
        return self.known > 0 and self.new == 0 and not self.changed


def survey(connection: Connection, measurements: MeasurementSet) -> Survey:
    """Compare an export with the store; nothing is written."""
    found, _ = _compare(connection, measurements)
    return found


def record(connection: Connection, measurements: MeasurementSet, *, number: str | None, at: str) -> Survey:
    """Write what is new or changed in an export and return what it was; `number` is None for an import."""
    found, rows = _compare(connection, measurements)
    export = {"export_sha256": measurements.export_sha256, "number": number, "recorded_at": at}
    layout = clean_text(measurements.layout_name)
    values = [
        {"identity": item.identity, "version": version, "layout": layout, **_columns(item.measurement)}
        | export
        for item, version in rows
    ]
    if values:
        connection.execute(insert(MEASUREMENT), values)
    return found


def digest_of_run(connection: Connection, number: str) -> str:
    """Return the SHA-256 over everything that a run recorded, so that a later change of a row shows."""
    return _digest(connection, MEASUREMENT.c.number == number)


def digest_of_import(connection: Connection, export_sha256: str, layout: str) -> str:
    """Return the same over what an import of an export by a layout recorded."""
    c = MEASUREMENT.c
    where = (c.export_sha256 == export_sha256) & (c.layout == clean_text(layout)) & c.number.is_(None)
    return _digest(connection, where)


def _digest(connection: Connection, where: ColumnElement[bool]) -> str:
    digest = hashlib.sha256()
    for row in connection.execute(select(MEASUREMENT).where(where).order_by(MEASUREMENT.c.id)).mappings():
        columns = {name: value for name, value in row.items() if name != "id"}
        digest.update(to_json_bytes(columns) + b"\n")
    return digest.hexdigest()


def _compare(
    connection: Connection, measurements: MeasurementSet
) -> tuple[Survey, list[tuple[Identified, int]]]:
    """Return the survey, and what has to be written with its version number."""
    export = measurements.export_sha256
    judged: list[tuple[Identified, Met]] = []
    for chunk in chunks(identified(measurements)):
        versions = versions_of(connection, [item.identity for item in chunk])
        pairs = [(i, met(i.measurement, versions.get(i.identity, []), export)) for i in chunk]
        unseen = [item for item, found in pairs if found.first_seen]
        samples = known_samples(connection, measurements.layout_name, unseen, export)
        judged += [(item, _one_more(item, found, samples)) for item, found in pairs]
    changes = tuple(m.change for _, m in judged if m.change is not None)
    new = sum(m.version == 1 for _, m in judged)
    changed = tuple(_changed(m.change) for _, m in judged if m.changed_now and m.change is not None)
    return (
        Survey(
            new=new,
            known=len(judged) - new - len(changed),
            changed=changed,
            first_seen=sum(m.first_seen for _, m in judged),
            not_joined=sum(item.measurement.sample is None for item, _ in judged),
            history=changes,
            retests=tuple(m.retest for _, m in judged if m.retest is not None),
        ),
        [(item, m.version) for item, m in judged if m.version is not None],
    )


def _one_more(item: Identified, found: Met, samples: dict[tuple[str | None, ...], str]) -> Met:
    """Flag a value that no other export held, of a sample that one did hold."""
    source = samples.get(sample_key(item.measurement))
    if not found.first_seen or source is None:
        return found
    retest = retest_of(item.measurement, "one more result", source)
    return Met(version=found.version, change=found.change, retest=retest, first_seen=True)


def _changed(change: ValueChange) -> ChangedValue:
    return ChangedValue(
        cell=change.cell, old_text=change.before, new_text=change.after, old_number=change.source
    )


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
