"""What one run changed against another: settings by key, values by cell, decisions of people."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from qcreport.analysis.provenance import Change
from qcreport.errors import ConfigError, ExportRefusedError, LedgerError
from qcreport.measurements import Measurement, MeasurementSet
from qcreport.records.archive import Archive
from qcreport.records.facade import Records
from qcreport.records.identity import identified
from qcreport.records.run import Run, RunInputs
from qcreport.records.settings_diff import settings_changes
from qcreport.records.versions import shown
from qcreport.workbook.limits import Limits
from qcreport.workbook.read_in_child import read_in_child


def changes_against(
    run: Run, inputs: RunInputs, measurements: MeasurementSet, *, records: Records, limits: Limits
) -> tuple[Change, ...]:
    """Return what a run with these inputs changes against an earlier one."""
    return (
        *_settings(run.inputs, inputs, records.archive),
        *_templates(dict(run.inputs.templates), dict(inputs.templates)),
        *_left_out(run.inputs, inputs),
        *_values(run, inputs, measurements, records, limits),
    )


def _settings(old: RunInputs, new: RunInputs, archive: Archive) -> Iterator[Change]:
    for what in ("plan", "layout", "rules"):
        before, after = getattr(old, f"{what}_sha256"), getattr(new, f"{what}_sha256")
        if before != after:
            yield from settings_changes(what, archive.read(before), archive.read(after))


def _templates(old: Mapping[str, str], new: Mapping[str, str]) -> Iterator[Change]:
    for name in sorted({*old, *new}):
        before, after = old.get(name), new.get(name)
        if before != after:
            yield Change(what="template", key=name, before=_digest(before), after=_digest(after))


def _digest(sha256: str | None) -> str | None:
    return None if sha256 is None else f"SHA-256 {sha256[:16]}…"


def _left_out(old: RunInputs, new: RunInputs) -> Iterator[Change]:
    for cell in (*old.left_out, *(c for c in new.left_out if c not in old.left_out)):
        if (cell in old.left_out) != (cell in new.left_out):
            before, after = ("left out", "kept") if cell in old.left_out else ("kept", "left out")
            yield Change(what="left out", key=cell, before=before, after=after)
    if old.replaces != new.replaces:
        yield Change(what="replaces", key="report", before=old.replaces or None, after=new.replaces or None)


def _values(
    run: Run, inputs: RunInputs, measurements: MeasurementSet, records: Records, limits: Limits
) -> tuple[Change, ...]:
    """Read the other run's export by its own layout again, where it can have given other values."""
    old = run.inputs
    if (old.export_sha256, old.layout_sha256) == (inputs.export_sha256, inputs.layout_sha256):
        return ()
    content = records.content_of(inputs.export_sha256, inputs.layout_sha256)
    if content is not None and content == records.content_of(old.export_sha256, old.layout_sha256):
        return ()
    try:
        before = read_in_child(
            records.archive.read(old.export_sha256),
            name=run.export_name,
            layout_bytes=records.archive.read(old.layout_sha256),
            layout_file="layout.toml",
            limits=limits,
        )
    except (ExportRefusedError, ConfigError, LedgerError):
        return (Change(what="value", key="all", before="cannot be read again", after="as printed here"),)
    return value_changes(before, measurements)


def value_changes(before: MeasurementSet, after: MeasurementSet) -> tuple[Change, ...]:
    """Return the values that differ between two readings, by cell.

    Two readings of one export are compared cell by cell, two exports value by value of the same sample, or
    cell by cell where there are no sample ids.
    """
    old, new = _by_identity(before, after), _by_identity(after, before)
    keys = [*new, *(key for key in old if key not in new)]
    found = []
    for key in keys:
        here, there = new.get(key), old.get(key)
        if here is None or there is None or shown(here) != shown(there):
            place = here or there
            assert place is not None  # noqa: S101  one of the two has the key
            found.append(
                Change(
                    what="value",
                    key=f"{place.cell} ({place.characteristic})",
                    before=None if there is None else shown(there),
                    after=None if here is None else shown(here),
                )
            )
    return tuple(found)


def _by_identity(measurements: MeasurementSet, other: MeasurementSet) -> dict[str, Measurement]:
    joined = measurements.export_sha256 != other.export_sha256 and all(
        m.sample is not None for m in (*measurements.measurements, *other.measurements)
    )
    if joined and measurements.layout_name == other.layout_name:
        return {item.identity: item.measurement for item in identified(measurements)}
    return {f"{m.cell} {m.characteristic}": m for m in measurements.measurements}
