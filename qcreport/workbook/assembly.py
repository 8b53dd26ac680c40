"""Putting measurements together: names, values, units, times and marks of all readings of an export."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from qcreport.measurements import Measurement
from qcreport.workbook.cells import Book
from qcreport.workbook.duplicates import check_duplicates
from qcreport.workbook.labels import Names, refuse_long_name, trimmed
from qcreport.workbook.layout_model import Layout
from qcreport.workbook.limits import Limits
from qcreport.workbook.marked_cells import MarkReader
from qcreport.workbook.notices import NoticeBook
from qcreport.workbook.readings import Label, Reading
from qcreport.workbook.refusals import refused
from qcreport.workbook.stated_units import Stated, unit_of
from qcreport.workbook.status import without_excluded
from qcreport.workbook.times import read_times
from qcreport.workbook.values import Value, ValueReader


def assemble(
    book: Book,
    layout: Layout,
    limits: Limits,
    notices: NoticeBook,
    *,
    readings: Sequence[Reading],
    stated: Mapping[str, Sequence[Stated]],
    sample_columns: Mapping[int, int],
) -> tuple[Measurement, ...]:
    """Return the measurements of an export, in the order of the readings."""
    marks = MarkReader(book, layout.marks, notices)
    readings = [r for r in without_excluded(readings, layout, notices) if marks.keeps(r)]
    different = layout.different_groups
    groups = Names((r.group for r in readings), what="batch", different=different)
    lines = Names((r.line for r in readings if r.line is not None), what="line", different=different)
    for names in (groups, lines):
        names.check(limits)
        names.note(notices)
    samples = [_sample(reading.sample, limits) for reading in readings]
    values, units = _values(book, layout, notices, readings, stated)
    keys = [
        (r.layout.characteristic, groups.of(r.group), sample, r.number)
        for r, sample in zip(readings, samples, strict=True)
    ]
    check_duplicates(readings, keys, sample_columns, notices)
    times = read_times(book, readings, notices)
    return tuple(
        Measurement(
            characteristic=reading.layout.characteristic,
            batch=groups.of(reading.group),
            line=lines.of(reading.line) if reading.line is not None else None,
            sample=samples[index],
            reading=reading.number,
            value=values[index].number,
            text=reading.cell.text if reading.cell is not None else "",
            decimals=values[index].decimals,
            unit=units[reading.layout.characteristic],
            censored=values[index].censored,
            status=reading.status,
            time=times[index],
            cell=reading.ref,
            marks=marks.marks(reading),
            factors=reading.factors,
        )
        for index, reading in enumerate(readings)
    )


def _sample(label: Label | None, limits: Limits) -> str | None:
    if label is None:
        return None
    if len(label.text) > limits.max_name_characters:
        raise refuse_long_name(label, limits)
    return trimmed(label.text) or None


def _values(
    book: Book,
    layout: Layout,
    notices: NoticeBook,
    readings: Sequence[Reading],
    stated: Mapping[str, Sequence[Stated]],
) -> tuple[dict[int, Value], dict[str, str]]:
    """Return the values by position and the units by characteristic."""
    positions: dict[str, list[int]] = {}
    for index, reading in enumerate(readings):
        positions.setdefault(reading.layout.characteristic, []).append(index)
    values: dict[int, Value] = {}
    units: dict[str, str] = {}
    for characteristic, indexes in positions.items():
        own = [readings[index] for index in indexes]
        unit = unit_of(book, characteristic, own[0].layout.unit, stated.get(characteristic, ()), own)
        found = ValueReader(book, layout.numbers, unit, notices).read(own)
        _refuse_hidden_percent(book, unit, found, own)
        values.update(zip(indexes, found, strict=True))
        units[characteristic] = unit
    return values, units


def _refuse_hidden_percent(
    book: Book, unit: str, values: Sequence[Value], readings: Sequence[Reading]
) -> None:
    """Refuse fractions under a % heading in a format that does not tell whether they are shown in percent."""
    numbers = [abs(v.number) for v in values if v.number is not None]
    if not book.limited or book.is_text or "%" not in unit or not numbers or max(numbers) > 1:
        return
    raise refused(
        "unsupported_format",
        where=str(readings[0].ref),
        found="All values in % are at most 1; this format does not tell whether they are shown in percent.",
        expected="A format that shows it.",
        next_step="Open it in the spreadsheet program, save it as .xlsx and drop that.",
        cells=[str(readings[0].ref)],
    )
