"""Refusals of rows: no batch, an unnamed summary row, rows that occur twice."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.errors import ExportRefusedError
from qcreport.measurements import CellRef
from qcreport.workbook.refusals import cells_in_words, quoted, refused


def refuse_group_missing(cells: Sequence[CellRef]) -> ExportRefusedError:
    """Return the refusal of values that belong to no batch."""
    return refused(
        "group_missing",
        where=cells_in_words(cells),
        found=f"{len(cells)} values have no batch.",
        expected="A batch for every value.",
        next_step="Enter the batch, or state repeats_below = true in the layout if it stands only once.",
        cells=[str(cell) for cell in cells],
    )


def refuse_summary_row(found: Sequence[tuple[CellRef, str]]) -> ExportRefusedError:
    """Return the refusal of rows that look like means or totals and that the layout does not name."""
    words = ", ".join(f"{ref} ({quoted(text)})" for ref, text in found[:6])
    return refused(
        "layout_mismatch",
        where=cells_in_words([ref for ref, _ in found]),
        found=f"A batch or sample is expected, but this looks like a summary row: {words}.",
        expected="Rows of measurements only.",
        next_step="Name these rows under [leave_out_rows] in the layout, or export without them.",
        cells=[str(ref) for ref, _ in found],
    )


def refuse_duplicate_rows(pairs: Sequence[tuple[CellRef, CellRef]]) -> ExportRefusedError:
    """Return the refusal of rows that occur twice, value for value."""
    words = ", ".join(f"{again} repeats {first}" for first, again in pairs[:6])
    more = f" and {len(pairs) - 6} more" if len(pairs) > 6 else ""
    return refused(
        "duplicate_rows",
        where=cells_in_words([again for _, again in pairs]),
        found=f"Rows occur twice with the same batch, sample and value: {words}{more}.",
        expected="Each measurement once.",
        next_step="Remove the doubled rows; separate readings of a sample need a column that numbers them.",
        cells=[str(cell) for pair in pairs for cell in pair],
    )
