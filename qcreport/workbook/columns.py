"""Finding the columns of a table and checking that they are the ones that the layout means."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from typing import NamedTuple

from qcreport.errors import ExportRefusedError
from qcreport.workbook.cells import Kind, Sheet
from qcreport.workbook.headings import (
    Headings,
    all_differences,
    check_heading,
    find_column,
    read_headings,
    refuse_ambiguous_column,
)
from qcreport.workbook.layout_model import Shape, Source, SourceKind, TableLayout, ValueLayout
from qcreport.workbook.refusals import quoted, refused


class TableColumns(NamedTuple):
    """Where the parts of one table stand in one sheet."""

    sheet: Sheet
    """The sheet."""
    layout: TableLayout
    """The layout of the table."""
    headings: Headings
    """Its headings."""
    sources: dict[str, int]
    """Columns of group, line, sample, replicate, time, status and of factors (by `factor:NAME`)."""
    values: tuple[tuple[ValueLayout, tuple[int, ...]], ...]
    """Columns of each characteristic."""
    last_row: int
    """Last row that can belong to the table: the next table begins below it."""


def named_sources(table: TableLayout) -> dict[str, Source]:
    """Return the sources of a table by name."""
    found = {
        "group": table.group,
        "line": table.line,
        "sample": table.sample,
        "replicate": table.replicate,
        "time": table.time,
        "status": table.status.source if table.status is not None else None,
        **{f"factor:{factor.name}": factor.source for factor in table.factors},
    }
    return {name: source for name, source in found.items() if source is not None}


def find_columns(sheet: Sheet, table: TableLayout, last_row: int) -> TableColumns:
    """Return where the parts of a table stand; refuse where a heading is not what the layout says."""
    headings = read_headings(sheet, table)
    sources: dict[str, int] = {}
    values: list[tuple[ValueLayout, tuple[int, ...]]] = []
    differences: list[ExportRefusedError] = []
    for name, source in named_sources(table).items():
        with _collected(differences):
            column = _source_column(headings, source)
            if column is not None:
                sources[name] = column
    for value in table.values:
        with _collected(differences):
            values.append((value, _value_columns(headings, table, value, last_row)))
    if differences:
        raise all_differences(differences)
    return TableColumns(sheet, table, headings, sources, tuple(values), last_row)


@contextmanager
def _collected(differences: list[ExportRefusedError]) -> Iterator[None]:
    """Collect a difference between layout and export, so that all are told at once."""
    try:
        yield
    except ExportRefusedError as refusal:
        if refusal.code != "layout_mismatch":
            raise
        differences.append(refusal)


def _source_column(headings: Headings, source: Source) -> int | None:
    if source.kind is SourceKind.HEADER and source.header is not None:
        return find_column(headings, source.header)
    if source.kind is not SourceKind.COLUMN or source.column is None:
        return None
    if source.header is not None:
        check_heading(headings, source.column, source.header)
    return source.column


def _value_columns(
    headings: Headings, table: TableLayout, value: ValueLayout, last_row: int
) -> tuple[int, ...]:
    if table.shape is Shape.WIDE:
        first, last = table.group.column or 1, table.group.last_column or 1
        return tuple(range(first, last + 1))
    if value.first_column is None or value.last_column is None:
        return (find_column(headings, value.header or ""),)
    columns = tuple(range(value.first_column, value.last_column + 1))
    if value.header is not None and table.header_rows:
        _check_values_heading(headings, columns, value, value.header)
        _check_unique(headings, table, columns, value.header, last_row)
    return columns


def _check_values_heading(
    headings: Headings, columns: tuple[int, ...], value: ValueLayout, wanted: str
) -> None:
    """Check the heading of the first column, and that it reaches over all columns and no further."""
    check_heading(headings, columns[0], wanted, unit=value.unit)
    if len(columns) == 1:
        return
    for row in headings.rows:
        area = headings.sheet.merged_area(row, columns[0])
        cell = headings.sheet.cell(area.first_row, area.first_column) if area is not None else None
        if area is None or cell is None or " ".join(cell.text.split()) != " ".join(wanted.split()):
            continue
        if (area.first_column, area.last_column) != (columns[0], columns[-1]):
            raise refused(
                "layout_mismatch",
                where=str(headings.sheet.ref(area.first_row, area.first_column)),
                found=f"The heading {quoted(wanted)} reaches over {area.last_column - area.first_column + 1} "
                "columns.",
                expected=f"The layout says {len(columns)} columns.",
                next_step="Change the layout to the columns of the export.",
                cells=[str(headings.sheet.ref(area.first_row, area.first_column))],
            )


def _check_unique(
    headings: Headings, table: TableLayout, columns: tuple[int, ...], wanted: str, last_row: int
) -> None:
    """Refuse a second column of numbers with the very same heading."""
    rows = [row for row in headings.sheet.rows if table.first_row <= row <= last_row]
    others = []
    for column in headings.columns_saying(wanted):
        if column in columns:
            continue
        numbers = (headings.sheet.cell(row, column) for row in rows)
        if any(cell is not None and cell.kind is Kind.NUMBER for cell in numbers):
            others.append(column)
    if others:
        raise refuse_ambiguous_column(headings, [columns[0], *others], wanted)
