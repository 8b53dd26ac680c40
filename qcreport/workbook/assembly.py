"""Putting measurements together: names, values, units, times and marks of all readings of an export."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from operator import attrgetter

from qcreport.measurements import Measurement
from qcreport.workbook.cells import Book
from qcreport.workbook.duplicates import Key, check_duplicates
from qcreport.workbook.labels import Names, refuse_long_name, trimmed
from qcreport.workbook.layout_model import Layout
from qcreport.workbook.limits import Limits
from qcreport.workbook.marked_cells import MarkReader
from qcreport.workbook.notices import NoticeBook
from qcreport.workbook.readings import Reading
from qcreport.workbook.refusals import refused
from qcreport.workbook.stated_units import Stated, unit_of
from qcreport.workbook.status import without_excluded
from qcreport.workbook.times import read_times
from qcreport.workbook.values import MISSING, Value, ValueReader


def assemble(
    book: Book,
    layout: Layout,
    limits: Limits,
    notices: NoticeBook,
    *,
    readings: Sequence[Reading],
    stated: Mapping[str, Sequence[Stated]],
    sample_columns: Mapping[int, int],
) -> Iterator[Measurement]:
    """Check names, values and units of an export; return its measurements, in the order of the readings.

    All that can be refused or noted has been when this returns; each measurement is made when asked for.
    """
    marks = MarkReader(book, layout.marks, notices)
    readings = [r for r in without_excluded(readings, layout, notices) if marks.keeps(r)]
    different = layout.different_groups
    groups = Names(readings, attrgetter("group"), what="batch", different=different)
    lines = Names(readings, attrgetter("line"), what="line", different=different)
    for names in (groups, lines):
        names.check(limits)
        names.note(notices)
    samples = [_sample(reading, limits) for reading in readings]
    values, units = _values(book, layout, notices, readings, stated)
    check_duplicates(readings, _keys(readings, groups, samples), sample_columns, notices)
    times = read_times(book, readings, notices)
    return (
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


def _sample(reading: Reading, limits: Limits) -> str | None:
    label = reading.sample
    if label is None:
        return None
    if len(label.text) > limits.max_name_characters:
        raise refuse_long_name(reading.placed(label), limits)
    return trimmed(label.text) or None


def _keys(readings: Sequence[Reading], groups: Names, samples: Sequence[str | None]) -> list[Key]:
    return [
        (reading.layout.characteristic, groups.of(reading.group), sample, reading.number)
        for reading, sample in zip(readings, samples, strict=True)
    ]


def _values(
    book: Book,
    layout: Layout,
    notices: NoticeBook,
    readings: Sequence[Reading],
    stated: Mapping[str, Sequence[Stated]],
) -> tuple[list[Value], dict[str, str]]:
    """Return the values by position and the units by characteristic."""
    positions: dict[str, list[int]] = {}
    for index, reading in enumerate(readings):
        positions.setdefault(reading.layout.characteristic, []).append(index)
    values = [MISSING] * len(readings)
    units: dict[str, str] = {}
    for characteristic, indexes in positions.items():
        own = [readings[index] for index in indexes]
        unit = unit_of(book, characteristic, own[0].layout.unit, stated.get(characteristic, ()), own)
        found = ValueReader(book, layout.numbers, unit, notices).read(own)
        _refuse_hidden_percent(book, unit, found, own)
        for index, value in zip(indexes, found, strict=True):
            values[index] = value
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
