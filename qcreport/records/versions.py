"""What the store held of one measurement before, and what that says of it met again."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from sqlalchemy import Connection, RowMapping, select

from qcreport.analysis.provenance import Retest, ValueChange
from qcreport.measurements import Measurement
from qcreport.records.facts import clean_text
from qcreport.records.identity import Identified
from qcreport.records.tables import MEASUREMENT

IMPORTED = "an imported export"
"""Named as the source of a value that no report recorded."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Version:
    """One recorded version of a measurement."""

    id: int
    """Order of recording."""
    number: int
    """1 for the first text, one more for each change."""
    shown: str
    """Text and unit."""
    time: str | None
    """Time of the measurement."""
    source: str
    """Report that recorded it, or `IMPORTED`."""
    export: str
    """Digest of the export it came in."""

    def same(self, measurement: Measurement) -> bool:
        """Return whether a measurement has this text, unit and, where both tell one, time."""
        return self.shown == shown(measurement) and not self.other_time(measurement)

    def other_time(self, measurement: Measurement) -> bool:
        """Return whether both tell a time and it is not the same."""
        return None not in (self.time, measurement.time) and self.time != clean_text(measurement.time or "")


@dataclass(frozen=True, slots=True, kw_only=True)
class Met:
    """A measurement held against its recorded versions."""

    version: int | None
    """Number of the version to write; None where this one is recorded already."""
    change: ValueChange | None
    """That another export gave it otherwise."""
    retest: Retest | None
    """That the sample was measured before."""
    first_seen: bool
    """True where no other export held it: more results of a known sample may then be a retest."""

    @property
    def changed_now(self) -> bool:
        """Whether this export brings another text."""
        return self.version is not None and self.change is not None and self.change.when == "now"


def shown(measurement: Measurement) -> str:
    """Return text and unit as they are compared and printed."""
    return _with_unit(clean_text(measurement.text), clean_text(measurement.unit))


def met(measurement: Measurement, versions: Sequence[Version], export: str) -> Met:
    """Return what the recorded versions say of a measurement of this export."""
    if not versions:
        return Met(version=1, change=None, retest=None, first_seen=True)
    own = next(
        (i for i, v in reversed([*enumerate(versions)]) if v.export == export and v.same(measurement)), None
    )
    if own is not None:
        return _met_again(measurement, versions, own)
    newest = versions[-1]
    if newest.same(measurement):
        before = next((v for v in reversed(versions) if v.shown != newest.shown), None)
        change = None if before is None else _change(measurement, before, "earlier")
        return Met(version=None, change=change, retest=None, first_seen=False)
    return Met(
        version=newest.number + 1,
        change=_change(measurement, newest, "now") if newest.shown != shown(measurement) else None,
        retest=_retest(measurement, newest) if newest.export != export else None,
        first_seen=False,
    )


def _met_again(measurement: Measurement, versions: Sequence[Version], own: int) -> Met:
    """Say of an export compared again what was said the first time, and what came after it."""
    before, newest = versions[own - 1] if own else None, versions[-1]
    change = retest = None
    if before is not None:
        change = _change(measurement, before, "now") if before.shown != shown(measurement) else None
        retest = _retest(measurement, before) if before.export != versions[own].export else None
    if newest.shown != shown(measurement):
        change = _change(measurement, newest, "later")
    return Met(version=None, change=change, retest=retest, first_seen=before is None)


def _change(measurement: Measurement, other: Version, when: str) -> ValueChange:
    return ValueChange(
        cell=clean_text(str(measurement.cell)),
        before=other.shown,
        after=shown(measurement),
        source=other.source,
        when=when,
    )


def _retest(measurement: Measurement, before: Version) -> Retest | None:
    if measurement.sample is None:
        return None
    other_text, other_time = before.shown != shown(measurement), before.other_time(measurement)
    if other_text and other_time:
        why = "another value at another time"
    elif other_time:
        why = "the same value at another time"
    elif None in (before.time, measurement.time):
        why = "another value, no time recorded"
    else:
        why = "another value at the same time"
    return retest_of(measurement, why, before.source)


def retest_of(measurement: Measurement, why: str, source: str) -> Retest:
    """Return the flag of a sample that was measured before."""
    return Retest(
        cell=clean_text(str(measurement.cell)),
        sample=clean_text(measurement.sample or ""),
        batch=clean_text(measurement.batch),
        why=why,
        source=source,
    )


def versions_of(connection: Connection, identities: Sequence[str]) -> dict[str, list[Version]]:
    """Return the recorded versions of each identity, oldest first."""
    c = MEASUREMENT.c
    query = select(c.id, c.identity, c.version, c.text, c.unit, c.time, c.number, c.export_sha256)
    query = query.where(c.identity.in_(identities)).order_by(c.identity, c.version)
    found: dict[str, list[Version]] = {}
    for row in connection.execute(query).mappings():
        found.setdefault(row["identity"], []).append(_version(row))
    return found


def known_samples(
    connection: Connection, layout: str, items: Sequence[Identified], export: str
) -> dict[tuple[str | None, ...], str]:
    """Return the samples of `items` that another export recorded, with the report that did so first.

    The key is that of `sample_key`.
    """
    wanted = [item.measurement for item in items if item.measurement.sample is not None]
    if not wanted:
        return {}
    c = MEASUREMENT.c
    query = select(c.line, c.batch, c.sample, c.characteristic, c.number).where(
        c.layout == clean_text(layout),
        c.batch.in_(sorted({clean_text(m.batch) for m in wanted})),
        c.sample.in_(sorted({clean_text(m.sample or "") for m in wanted})),
        c.export_sha256 != export,
        c.id < _first_id(connection, export),
    )
    found: dict[tuple[str | None, ...], str] = {}
    for row in connection.execute(query.order_by(c.id)):
        key = (row.line, row.batch, row.sample, row.characteristic)
        found.setdefault(key, row.number or IMPORTED)
    return found


def sample_key(m: Measurement) -> tuple[str | None, ...]:
    """Return what makes two readings readings of one sample and characteristic."""
    return tuple(None if p is None else clean_text(p) for p in (m.line, m.batch, m.sample, m.characteristic))


def _first_id(connection: Connection, export: str) -> int:
    """Return the id before which others recorded: that of the export's own first row, else any id."""
    return _NO_ID if (found := _own_first(connection, export)) is None else found


_NO_ID = 2**62


def _own_first(connection: Connection, export: str) -> int | None:
    c = MEASUREMENT.c
    query = select(c.id).where(c.export_sha256 == export).order_by(c.id).limit(1)
    return connection.execute(query).scalar_one_or_none()


def _version(row: RowMapping) -> Version:
    return Version(
        id=row["id"],
        number=row["version"],
        shown=_with_unit(row["text"], row["unit"]),
        time=row["time"],
        source=row["number"] or IMPORTED,
        export=row["export_sha256"],
    )


def _with_unit(text: str, unit: str) -> str:
    return f"{text} {unit}".rstrip()


def chunks(items: Sequence[Identified], size: int = 500) -> Iterable[Sequence[Identified]]:
    """Yield pieces that one query can ask for."""
    for start in range(0, len(items), size):
        yield items[start : start + size]
