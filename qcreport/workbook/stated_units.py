"""The unit of a characteristic: what the layout says, checked against all that the export says."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.errors import ExportRefusedError
from qcreport.measurements import CellRef
from qcreport.workbook.cells import Book, Kind
from qcreport.workbook.columns import TableColumns
from qcreport.workbook.layout_model import Shape, UnitFrom, ValueLayout
from qcreport.workbook.readings import Reading, plain_text
from qcreport.workbook.refusals import quoted, refused
from qcreport.workbook.units import looks_like_unit, same_unit, unit_in_heading

Stated = tuple[CellRef, str]


def stated_in_table(table: TableColumns, value: ValueLayout, columns: Sequence[int]) -> list[Stated]:
    """Return the units that headings, units row and unit cell of a table state for a characteristic."""
    sheet = table.sheet
    stated: list[Stated] = []
    if value.unit_from is UnitFrom.CELL and value.unit_cell is not None:
        ref = sheet.ref(*value.unit_cell)
        stated.append((ref, _bare(plain_text(sheet.cell(*value.unit_cell)) or "")))
    if value.unit_from is UnitFrom.UNITS_ROW and table.layout.units_row is not None:
        row = table.layout.units_row
        texts = [(sheet.ref(row, c), plain_text(sheet.cell(row, c))) for c in columns]
        stated.extend((ref, _bare(text or "")) for ref, text in texts[:1] if text is None)
        stated.extend((ref, _bare(text)) for ref, text in texts if text is not None)
    if table.layout.shape is not Shape.WIDE:
        stated.extend(_stated_in_headings(table, value, columns))
    return stated


def _bare(text: str) -> str:
    return text.strip().strip("[]()").strip()


def _stated_in_headings(table: TableColumns, value: ValueLayout, columns: Sequence[int]) -> list[Stated]:
    """Return the unit in the heading: what the bracket holds, else its last word where that is the place."""
    found: list[Stated] = []
    for column in columns[:1]:
        for text in table.headings.texts.get(column, ()):
            inner = unit_in_heading(text)
            if inner is not None and (looks_like_unit(inner) or value.unit_from is UnitFrom.HEADER):
                found.append((table.headings.ref(column), inner))
        if not found and value.unit_from is UnitFrom.HEADER:
            shown = table.headings.shown(column)
            unit = value.unit or ""
            ends = bool(unit) and shown.endswith(unit)
            found.append((table.headings.ref(column), unit if ends else shown.rpartition(" ")[2]))
    return found


def unit_of(
    book: Book,
    characteristic: str,
    layout_unit: str | None,
    stated: Sequence[Stated],
    readings: Sequence[Reading],
) -> str:
    """Return the unit of a characteristic; refuse where the export says another, or more than one."""
    in_rows = [reading.unit for reading in readings if reading.unit is not None and reading.cell is not None]
    _refuse_two_units(characteristic, in_rows)
    everything = [*stated, *in_rows[:1], *_in_formats(book, readings)]
    unit = layout_unit if layout_unit is not None else next((text for _, text in everything if text), "")
    if not unit:
        raise _refuse_conflict([(ref, text) for ref, text in everything[:1]], f"a unit for {characteristic}")
    wrong = [(ref, text) for ref, text in everything if not same_unit(text, unit)]
    if wrong:
        raise _refuse_conflict(wrong, f"the unit {quoted(unit)}")
    return unit


def _in_formats(book: Book, readings: Sequence[Reading]) -> list[Stated]:
    """Return the units that number formats show behind the values."""
    found: dict[int, Stated] = {}
    for reading in readings:
        cell = reading.cell
        if cell is None or cell.kind is not Kind.NUMBER or cell.style in found:
            continue
        suffix = book.number_format(cell).suffix.strip()
        if suffix and looks_like_unit(suffix):
            found[cell.style] = (reading.ref, suffix)
    return list(found.values())


def _refuse_two_units(characteristic: str, in_rows: Sequence[Stated]) -> None:
    first: dict[str, CellRef] = {}
    for ref, text in in_rows:
        known = next((unit for unit in first if same_unit(unit, text)), None)
        if known is None:
            first[text] = ref
    if len(first) < 2:
        return
    words = " and ".join(f"{text or 'no unit'} ({ref})" for text, ref in first.items())
    raise refused(
        "mixed_units",
        where=", ".join(str(ref) for ref in first.values()),
        found=f"The column of {characteristic} holds {len(first)} units: {words}.",
        expected="One characteristic in one unit.",
        next_step="Export the characteristic in one unit, or correct the unit cells.",
        cells=[str(ref) for ref in first.values()],
    )


def _refuse_conflict(found: Sequence[Stated], wanted: str) -> ExportRefusedError:
    words = " and ".join(
        f"{ref} says {quoted(text)}" if text else f"{ref} is empty" for ref, text in found[:6]
    )
    return refused(
        "unit_conflict",
        where=", ".join(str(ref) for ref, _ in found[:6]) or "the export",
        found=f"{words}." if words else "The export states no unit.",
        expected=f"The layout expects {wanted}.",
        next_step="Export in the unit of the layout, or change unit and margins in layout and plan.",
        cells=[str(ref) for ref, _ in found],
    )
