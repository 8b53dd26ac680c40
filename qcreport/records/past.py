"""Earlier measurements of the same kind, for what may be learnt of spread from the batches before."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from sqlalchemy import Connection, Row, func, select

from qcreport.measurements import CellRef, Censoring, Measurement, MeasurementSet
from qcreport.records.facts import clean_text
from qcreport.records.tables import MEASUREMENT

MOST_BATCHES = 250
"""So many of the newest batches are looked at, of each line and in all where there are no lines."""
_AT_ONCE = 400

_Key = tuple[str | None, str]


def past_measurements(
    connection: Connection, measurements: MeasurementSet, characteristics: Sequence[str], *, by_line: bool
) -> tuple[Measurement, ...]:
    """Return the newest version of every recorded value of earlier batches, oldest first.

    Parameters
    ----------
    measurements
        The export in hand: values by the same layout count, and no batch that stands in it.
    characteristics
        Names of the characteristics wanted.
    by_line
        Whether lines are compared: then a batch is one of its line, and only the export's lines are wanted.
    """
    names = [clean_text(name) for name in characteristics]
    layout = clean_text(measurements.layout_name)
    batches = _earlier_batches(connection, measurements, names, by_line=by_line)
    c = MEASUREMENT.c
    rows: list[Row[tuple[object, ...]]] = []
    labels = sorted({batch for _, batch in batches})
    for start in range(0, len(labels), _AT_ONCE):
        query = select(MEASUREMENT).where(
            c.layout == layout,
            c.characteristic.in_(names),
            c.batch.in_(labels[start : start + _AT_ONCE]),
        )
        rows += [row for row in connection.execute(query) if (row.line, row.batch) in batches]
    rows.sort(key=lambda row: row.id)
    return tuple(_measurement(row) for row in _newest(rows))


def _earlier_batches(
    connection: Connection, measurements: MeasurementSet, names: Sequence[str], *, by_line: bool
) -> set[_Key]:
    """Return (line, batch) of the newest batches that are not in this export."""
    c = MEASUREMENT.c
    query = (
        select(c.line, c.batch, func.max(c.id).label("newest"))
        .where(c.layout == clean_text(measurements.layout_name), c.characteristic.in_(names))
        .group_by(c.line, c.batch)
        .order_by(func.max(c.id).desc())
    )
    here = {_key(m) for m in measurements.measurements}
    lines_here = {line for line, _ in here}
    batches_here = {batch for _, batch in here}
    found: set[_Key] = set()
    counts: dict[str | None, int] = {}
    for line, batch, _ in connection.execute(query):
        tonight = (line, batch) in here if by_line else batch in batches_here
        if tonight or (by_line and line not in lines_here):
            continue
        of = line if by_line else None
        counts[of] = counts.get(of, 0) + 1
        if counts[of] <= MOST_BATCHES:
            found.add((line, batch))
    return found


def _key(m: Measurement) -> _Key:
    return (None if m.line is None else clean_text(m.line), clean_text(m.batch))


def _newest(rows: Sequence[Row[tuple[object, ...]]]) -> Iterator[Row[tuple[object, ...]]]:
    """Yield the newest version of each value.

    Without a sample id a value is not recognised in another export; of such a batch only what the newest
    export brought counts, or a cumulative list would count twice.
    """
    last = {row.identity: row.version for row in sorted(rows, key=lambda row: row.version)}
    exports = {
        (row.line, row.batch, row.characteristic): row.export_sha256 for row in rows if row.sample is None
    }
    for row in rows:
        newest = exports.get((row.line, row.batch, row.characteristic), row.export_sha256)
        if row.version == last[row.identity] and (row.sample is not None or row.export_sha256 == newest):
            yield row


def _measurement(row: Row[tuple[object, ...]]) -> Measurement:
    return Measurement(
        characteristic=row.characteristic,
        batch=row.batch,
        line=row.line,
        sample=row.sample,
        reading=row.reading,
        value=row.value,
        text=row.text,
        decimals=row.decimals,
        unit=row.unit,
        censored=None if row.censored is None else Censoring(row.censored),
        status=row.status,
        time=row.time,
        cell=CellRef(sheet=None, row=row.id, column=1),
    )
