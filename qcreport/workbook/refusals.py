"""Building refusals: the code, and the four facts that tell a person how to mend the export.

The file name is added once, on the way out of `read_export`, so that the deep parts need not carry it.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final
from unicodedata import category

from qcreport.errors import ExportRefusedError
from qcreport.measurements import CellRef, column_letters

REFUSAL_CODES: Final = (
    "empty_file", "not_a_workbook", "encrypted", "damaged_or_incomplete", "too_large", "too_large_unpacked",
    "too_many_rows", "too_many_cells", "too_many_groups", "timed_out", "unsafe_content", "unsupported_format",
    "wrong_extension", "no_table_found", "no_data_rows", "layout_mismatch", "ambiguous_column",
    "ambiguous_decimal_mark", "mixed_units", "unit_conflict", "mixed_number_formats", "unreadable_values",
    "error_cells", "formulas_not_calculated", "group_cell_not_text", "group_missing", "lookalike_groups",
    "name_too_long", "duplicate_rows", "already_read", "same_measurements", "no_plan", "reference_missing",
    "readers_disagree",
)  # fmt: skip
"""Every code that a refusal may carry, as documented."""

MAX_LISTED_CELLS: Final = 1_000
"""Cells listed by one refusal or notice; the text always states how many there are."""

_RUNS_IN_TEXT = 6


def refused(
    code: str, *, where: str, found: str, expected: str, next_step: str, cells: Sequence[str] = ()
) -> ExportRefusedError:
    """Return the refusal of an export; `read_export` adds the file name."""
    return ExportRefusedError(
        code,
        file="",
        where=one_line(where),
        found=one_line(found),
        expected=one_line(expected),
        next_step=one_line(next_step),
        cells=tuple(cells[:MAX_LISTED_CELLS]),
    )


def one_line(text: str) -> str:
    """Return a text that may hold names from an export on one line; what does not print as U+XXXX."""
    if text.isprintable():
        return text
    return "".join(c if c.isprintable() or category(c) == "Zs" else f"U+{ord(c):04X}" for c in text)


def damaged(found: str, *, where: str = "the file") -> ExportRefusedError:
    """Return the refusal of a file whose inside does not hold together."""
    return refused(
        "damaged_or_incomplete",
        where=where,
        found=found,
        expected="A complete, undamaged file.",
        next_step="The copy was probably interrupted: copy or export it again.",
    )


def unsafe(found: str, *, where: str = "the file") -> ExportRefusedError:
    """Return the refusal of a file with content that no spreadsheet program writes."""
    return refused(
        "unsafe_content",
        where=where,
        found=f"{found} It was not opened.",
        expected="Only what spreadsheet programs write.",
        next_step="Export it again from the instrument's own software; tell IT if it came from elsewhere.",
    )


def runs(cells: Sequence[CellRef]) -> list[tuple[CellRef, CellRef]]:
    """Return the cells as (first, last) of each unbroken run down a column, in order."""
    found: list[tuple[CellRef, CellRef]] = []
    for cell in cells:
        if found:
            first, last = found[-1]
            if (cell.sheet, cell.column, cell.row) == (last.sheet, last.column, last.row + 1):
                found[-1] = (first, cell)
                continue
        found.append((cell, cell))
    return found


def run_ends(cells: Sequence[CellRef]) -> tuple[str, ...]:
    """Return the first and the last cell of each run: what `C2 to C19` names."""
    named: list[str] = []
    for first, last in runs(cells):
        named.append(str(first))
        if last != first:
            named.append(str(last))
    return tuple(named)


def cells_in_words(cells: Sequence[CellRef]) -> str:
    """Return cells as a sentence names them: `Data!C2 to C19, Data!C25 and 3 more`."""
    words: list[str] = []
    all_runs = runs(cells)
    for first, last in all_runs[:_RUNS_IN_TEXT]:
        if last == first:
            words.append(str(first))
        elif first.sheet is None:
            words.append(f"{first} to {last}")
        else:
            words.append(f"{first} to {column_letters(last.column)}{last.row}")
    if len(all_runs) > _RUNS_IN_TEXT:
        rest = sum(last.row - first.row + 1 for first, last in all_runs[_RUNS_IN_TEXT:])
        return f"{', '.join(words)} and {rest} more"
    return ", ".join(words)


def quoted(text: str, length: int = 60) -> str:
    """Return a text from the export in quotes, shortened, control characters shown as U+XXXX."""
    shown = "".join(c if c.isprintable() else f"U+{ord(c):04X}" for c in text[:length])
    return f'"{shown}…"' if len(text) > length else f'"{shown}"'
