"""The measurement store held against the archive: exports are read again and compared value by value."""

from __future__ import annotations

import random
from collections.abc import Callable, Iterator
from dataclasses import dataclass

from sqlalchemy import Connection, select

from qcreport.errors import QcReportError
from qcreport.measurements import MeasurementSet
from qcreport.records import ledger, runs
from qcreport.records.archive import Archive
from qcreport.records.chain import Kind
from qcreport.records.facts import clean_text
from qcreport.records.identity import identified
from qcreport.records.tables import MEASUREMENT
from qcreport.records.versions import chunks, shown, versions_of

Read = Callable[[bytes, str, bytes], MeasurementSet]
"""Reads (export, its name, layout) as it was read the first time."""


@dataclass(frozen=True, slots=True, kw_only=True, order=True)
class Reading:
    """One export as one layout read it."""

    export_sha256: str
    """The export."""
    layout_sha256: str
    """The layout."""
    name: str
    """The export's file name."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Reread:
    """How many exports are read again, and by what."""

    read: Read
    """Reads an export."""
    most: int | None
    """So many, drawn at random; None for all."""


def readings(connection: Connection) -> tuple[Reading, ...]:
    """Return every export that a report or an import was made from, once for each layout."""
    found = {
        (r.inputs.export_sha256, r.inputs.layout_sha256): r.export_name
        for r in runs.all_runs(connection)
        if r.sealing is not None
    }
    for entry in ledger.entries(connection, kind=Kind.IMPORTED):
        facts = entry.facts_object()
        found.setdefault((str(facts["export_sha256"]), str(facts["layout_sha256"])), str(facts["name"]))
    return tuple(
        sorted(
            Reading(export_sha256=export, layout_sha256=layout, name=name)
            for (export, layout), name in found.items()
        )
    )


def reread(connection: Connection, archive: Archive, asked: Reread) -> tuple[int, list[str]]:
    """Read exports again and return how many, and where the store holds something else."""
    every = readings(connection)
    chosen = every
    if asked.most is not None and asked.most < len(every):
        chosen = tuple(random.SystemRandom().sample(every, asked.most))
    problems: list[str] = []
    for reading in sorted(chosen):
        problems += _compared(connection, archive, reading, asked.read)
    return len(chosen), problems


def _compared(connection: Connection, archive: Archive, reading: Reading, read: Read) -> Iterator[str]:
    try:
        export, layout = archive.read(reading.export_sha256), archive.read(reading.layout_sha256)
        measurements = read(export, reading.name, layout)
    except QcReportError as error:
        yield f"{reading.name} cannot be read again: {error.text}"
        return
    items = identified(measurements)
    lacking = []
    for chunk in chunks(items):
        versions = versions_of(connection, [item.identity for item in chunk])
        for item in chunk:
            if not any(v.same(item.measurement) for v in versions.get(item.identity, ())):
                lacking.append(str(item.measurement.cell))
    if lacking:
        yield f"{reading.name} holds {len(lacking)} values that the store has not: {_some(lacking)}."
    held = {(item.identity, shown(item.measurement)) for item in items}
    c = MEASUREMENT.c
    recorded = select(c.identity, c.text, c.unit, c.cell).where(
        c.export_sha256 == reading.export_sha256, c.layout == clean_text(measurements.layout_name)
    )
    foreign = [
        row.cell
        for row in connection.execute(recorded)
        if (row.identity, f"{row.text} {row.unit}".rstrip()) not in held
    ]
    if foreign:
        yield (
            f"The store has {len(foreign)} values of {reading.name} that this export does not hold: "
            f"{_some(foreign)}."
        )


def _some(cells: list[str]) -> str:
    return ", ".join(cells[:5]) + (", …" if len(cells) > 5 else "")
