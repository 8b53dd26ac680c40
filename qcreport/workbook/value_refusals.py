"""The refusals of value cells, in the words that people need to mend them."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.errors import ExportRefusedError
from qcreport.measurements import CellRef
from qcreport.workbook.refusals import cells_in_words, quoted, refused, run_ends

_IN_TEXT = 6


def _listed(found: Sequence[tuple[CellRef, str]]) -> str:
    words = [f"{ref} ({quoted(text)})" for ref, text in found[:_IN_TEXT]]
    rest = f" and {len(found) - _IN_TEXT} more" if len(found) > _IN_TEXT else ""
    return " and ".join(words) + rest if len(words) <= 2 else ", ".join(words) + rest


def refuse_uncalculated(cells: Sequence[CellRef]) -> ExportRefusedError:
    """Return the refusal of formulas that were never calculated."""
    return refused(
        "formulas_not_calculated",
        where=cells_in_words(cells),
        found=f"{len(cells)} cells hold formulas without saved results.",
        expected="Results saved by the spreadsheet program.",
        next_step="Open the file in the spreadsheet program, let it calculate, save it and drop it again.",
        cells=run_ends(cells),
    )


def refuse_errors(found: Sequence[tuple[CellRef, str]]) -> ExportRefusedError:
    """Return the refusal of error cells where measurements are expected."""
    words = [f"{ref} shows {error}" for ref, error in found[:_IN_TEXT]]
    rest = f" and {len(found) - _IN_TEXT} more cells show errors" if len(found) > _IN_TEXT else ""
    return refused(
        "error_cells",
        where=cells_in_words([ref for ref, _ in found]),
        found=" and ".join(words) + rest + ".",
        expected="A measurement.",
        next_step='Correct or clear these cells, or state errors = "missing" under [numbers] in the layout.',
        cells=[str(ref) for ref, _ in found],
    )


def refuse_unreadable(found: Sequence[tuple[CellRef, str]]) -> ExportRefusedError:
    """Return the refusal of texts that are no values."""
    return refused(
        "unreadable_values",
        where=cells_in_words([ref for ref, _ in found]),
        found=f"{_listed(found)}: no numbers, and no known marks for missing or below-limit values.",
        expected="A number, or a mark that the layout states under [numbers].",
        next_step="Correct these cells, or state their marks in the layout.",
        cells=[str(ref) for ref, _ in found],
    )


def refuse_ambiguous(cells: Sequence[CellRef], example: str) -> ExportRefusedError:
    """Return the refusal of numbers whose only mark may be either."""
    as_thousands = example.replace(".", "").replace(",", "")
    return refused(
        "ambiguous_decimal_mark",
        where=cells_in_words(cells),
        found=f"Numbers such as {quoted(example)} can be read as {as_thousands} or as "
        f"{example.replace(',', '.').rstrip('0').rstrip('.')}.",
        expected="Numbers that can be read in one way.",
        next_step='State the decimal mark in the layout ([numbers] decimal = "." or ",") and drop it again.',
        cells=run_ends(cells),
    )


def refuse_mixed_marks(
    found: Sequence[tuple[CellRef, str]], *, stated: str | None = None
) -> ExportRefusedError:
    """Return the refusal of numbers with different decimal marks."""
    expected = "One decimal mark in the whole column."
    if stated is not None:
        expected = f"The layout says that the decimal mark is {quoted(stated)}."
    return refused(
        "mixed_number_formats",
        where=cells_in_words([ref for ref, _ in found]),
        found=f"Numbers are written in different ways: {_listed(found)}.",
        expected=expected,
        next_step="Export the column with one decimal mark, or correct these cells.",
        cells=[str(ref) for ref, _ in found],
    )


def refuse_mixed_percent(percent: CellRef, plain: CellRef) -> ExportRefusedError:
    """Return the refusal of a column where percent cells stand beside plain numbers."""
    return refused(
        "mixed_number_formats",
        where=cells_in_words([percent, plain]),
        found=f"{percent} is a percent cell (stored as a fraction) and {plain} a plain number.",
        expected="One way of writing percent in the whole column.",
        next_step="Give all cells of the column the same format, with values that fit it, and drop it again.",
        cells=[str(percent), str(plain)],
    )


def refuse_percent_unit(percent: Sequence[CellRef], unit: str) -> ExportRefusedError:
    """Return the refusal of percent cells under another unit."""
    return refused(
        "unit_conflict",
        where=cells_in_words(percent),
        found=f"The cells are shown in percent, the unit is {quoted(unit)}.",
        expected=f"Values in {unit}.",
        next_step="Correct the number format of the cells, or the unit in the layout.",
        cells=run_ends(percent),
    )


def refuse_units_behind(
    other: Sequence[tuple[CellRef, str]], unit: str, *, all_values: bool
) -> ExportRefusedError:
    """Return the refusal of values that bear another unit than the characteristic."""
    return refused(
        "unit_conflict" if all_values else "mixed_units",
        where=cells_in_words([ref for ref, _ in other]),
        found=f"The unit behind the values is another: {_listed(other)}.",
        expected=f"Values in {unit}.",
        next_step="Export the characteristic in one unit, or correct the unit in the layout.",
        cells=[str(ref) for ref, _ in other],
    )
