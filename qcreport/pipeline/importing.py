"""Past exports into the store, without reports: read side by side, recorded one after the other."""

from __future__ import annotations

from collections import deque
from collections.abc import Iterator, Sequence
from concurrent.futures import Future, ThreadPoolExecutor
from dataclasses import dataclass
from enum import StrEnum
from pathlib import Path

from qcreport.canonical import sha256_hex
from qcreport.errors import ExportRefusedError
from qcreport.intake.matching import matching_plans
from qcreport.measurements import MeasurementSet
from qcreport.records.facade import Records
from qcreport.records.identity import content_digest
from qcreport.records.store import Survey
from qcreport.settings.plans import PlanSettings, SettingsFile
from qcreport.settings.site import Site
from qcreport.workbook.read_in_child import read_in_child


class ImportState(StrEnum):
    """What became of one file."""

    IMPORTED = "imported"
    KNOWN = "known"
    REFUSED = "refused"


@dataclass(frozen=True, slots=True, kw_only=True)
class Imported:
    """One file by one layout."""

    name: str
    """File name."""
    layout: str
    """The layout's file name; empty where none fits."""
    state: ImportState
    """What became of it."""
    survey: Survey | None
    """What it brought; None where nothing was read."""
    refusal: ExportRefusedError | None
    """Why it was refused."""


@dataclass(frozen=True, slots=True)
class _Task:
    path: Path
    layout: SettingsFile | None


def import_files(
    site: Site,
    records: Records,
    paths: Sequence[Path],
    plans: Sequence[PlanSettings],
    *,
    fixed: SettingsFile | None,
    actor: str,
    readers: int,
) -> Iterator[Imported]:
    """Take files into the store, in the order given, and yield what became of each.

    Exports are read in `readers` child processes at a time and recorded one by one, so that a later file's
    values are held against an earlier file's. Each file is one transaction: stopped at any instant and begun
    again, it goes on with what is not there yet.

    Parameters
    ----------
    plans
        The site's plans; a file is read by the layouts of those whose patterns fit its name.
    fixed
        A layout for all files, whatever their names; None: by the plans.
    """
    tasks = (task for path in paths for task in _tasks(path, plans, fixed))
    with ThreadPoolExecutor(readers) as pool:
        waiting: deque[tuple[_Task, bytes, Future[MeasurementSet] | None]] = deque()
        for task in tasks:
            data = _data(task.path, site)
            waiting.append((task, data, _begin(pool, site, records, task, data)))
            if len(waiting) > 2 * readers:
                yield _end(site, records, *waiting.popleft(), actor=actor)
        while waiting:
            yield _end(site, records, *waiting.popleft(), actor=actor)


def _tasks(path: Path, plans: Sequence[PlanSettings], fixed: SettingsFile | None) -> list[_Task]:
    if fixed is not None:
        return [_Task(path, fixed)]
    try:
        names = matching_plans(path.name, {p.plan.name: p.plan.exports for p in plans})
    except ExportRefusedError:
        return [_Task(path, None)]
    layouts = {p.layout_file.data: p.layout_file for p in plans if p.plan.name in names}
    return [_Task(path, layout) for layout in layouts.values()]


def _data(path: Path, site: Site) -> bytes:
    with path.open("rb") as stream:
        return stream.read(site.limits.max_file_bytes + 1)


def _begin(
    pool: ThreadPoolExecutor, site: Site, records: Records, task: _Task, data: bytes
) -> Future[MeasurementSet] | None:
    layout = task.layout
    if layout is None or records.imported(sha256_hex(data), sha256_hex(layout.data)):
        return None
    return pool.submit(
        read_in_child,
        data,
        name=task.path.name,
        layout_bytes=layout.data,
        layout_file=layout.name,
        limits=site.limits,
        second_look=site.intake.second_look,
    )


def _end(
    site: Site,
    records: Records,
    task: _Task,
    data: bytes,
    reading: Future[MeasurementSet] | None,
    *,
    actor: str,
) -> Imported:
    name = task.path.name
    if task.layout is None:
        return _refused(records, name, data, _no_plan(name), "", actor)
    if reading is None:
        return Imported(
            name=name, layout=task.layout.name, state=ImportState.KNOWN, survey=None, refusal=None
        )
    try:
        measurements = reading.result()
        if not measurements.measurements:
            raise _nothing(name, task.layout.name)
    except ExportRefusedError as error:
        whole = data if len(data) <= site.limits.max_file_bytes else None
        return _refused(records, name, whole, error, task.layout.name, actor)
    survey = records.import_export(
        data,
        name=name,
        layout=task.layout.data,
        measurements=measurements,
        content=content_digest(measurements),
        actor=actor,
    )
    return Imported(
        name=name, layout=task.layout.name, state=ImportState.IMPORTED, survey=survey, refusal=None
    )


def _refused(
    records: Records, name: str, data: bytes | None, error: ExportRefusedError, layout: str, actor: str
) -> Imported:
    """Record a refusal once for each file and layout; a file that is refused stays where it is."""
    digest = None if data is None else sha256_hex(data)
    claim = f"import-{digest or 'unread'}-{name}"
    records.refuse(claim, error, export_sha256=digest, folder="", actor=actor, plan_name="")
    return Imported(name=name, layout=layout, state=ImportState.REFUSED, survey=None, refusal=error)


def _no_plan(name: str) -> ExportRefusedError:
    return ExportRefusedError(
        "no_plan",
        file=name,
        where="the file's name",
        found="No plan of this site takes exports of this name.",
        expected="A name that fits the `exports` of a plan.",
        next_step="Name the layout: --layout NAME.",
    )


def _nothing(name: str, layout: str) -> ExportRefusedError:
    return ExportRefusedError(
        "no_data_rows",
        file=name,
        where=f"layout {layout}",
        found="No value was found.",
        expected="At least one value.",
        next_step="Check that the export is complete and that first_row in the layout fits.",
    )
