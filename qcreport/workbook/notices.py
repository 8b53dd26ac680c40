"""Collecting what a reader of the report should know about the export."""

from __future__ import annotations

from typing import Final

from qcreport.measurements import CellRef, Notice
from qcreport.workbook.refusals import MAX_LISTED_CELLS, cells_in_words, one_line

SENTENCES: Final = {
    "text_numbers_converted": "{n} values are stored as text and were read as numbers",
    "decimal_comma": "the decimal comma was read as decimal mark",
    "thousands_separator_removed": "marks between thousands were removed in {n} values",
    "unit_text_removed": "the unit written behind {n} values was removed",
    "missing_values": "{n} values are missing",
    "censored_values": "{n} values are known only by a limit or were not detected",
    "percent_cells_scaled": "{n} percent cells were taken as they are shown",
    "summary_rows_skipped": "{n} values of summary rows were left out, as the layout says",
    "merged_group_filled": "the batch of {n} cells was taken from the cell above or from a merged cell",
    "status_excluded": "{n} values were left out by their status",
    "struck_cells": "{n} values are struck through",
    "commented_cells": "{n} values have a comment",
    "hidden_rows_included": "{n} values stand in hidden rows",
    "filtered_rows_included": "{n} values stand in rows hidden by a filter",
    "hidden_columns": "{n} values stand in hidden columns",
    "hidden_sheet_ignored": "a hidden sheet was not read",
    "sheet_without_data": "a sheet that the layout asks for holds no data",
    "stray_cells": "{n} cells beside or below the tables were not read",
    "group_name_trimmed": "spaces around {n} batch names were removed",
    "group_case_merged": "{n} batch names differ only in capital letters and were merged",
    "number_read_as_shown": "{n} batch names are stored as numbers and were read as the cells show them",
    "duplicate_sample_ids": "sample names occur more than once in their batch, in {n} rows",
    "unusual_group_names": "{n} batch names hold unusual characters or are very long",
    "date_system_1904": "the workbook counts dates from 1904; times were read accordingly",
    "time_ambiguous": "{n} times can be read in more than one way, or not at all, and were left out",
    "formula_results_used": "the saved results of {n} formulas were used",
    "macros_ignored": "the workbook holds macros; they were not run",
    "external_links_not_followed": "the workbook refers to others; saved results were used",
    "limited_checks": "not everything could be checked",
}
"""Notice code → sentence; `{n}` is the number of cells."""


class NoticeBook:
    """The notices of one reading, one for each code, in order of first occurrence."""

    def __init__(self, file: str) -> None:
        self._file = file
        self._cells: dict[str, list[CellRef]] = {}
        self._details: dict[str, list[str]] = {}

    def add(self, code: str, *cells: CellRef, detail: str = "") -> None:
        """Note a fact with the cells it is about."""
        if code not in SENTENCES:
            raise KeyError(code)
        self._cells.setdefault(code, []).extend(cells)
        details = self._details.setdefault(code, [])
        if detail and detail not in details:
            details.append(detail)

    def has(self, code: str) -> bool:
        """Return whether a fact was noted."""
        return code in self._cells

    def notices(self) -> tuple[Notice, ...]:
        """Return what was noted."""
        return tuple(self._notice(code, cells) for code, cells in self._cells.items())

    def _notice(self, code: str, cells: list[CellRef]) -> Notice:
        unique = list(dict.fromkeys(cells))
        text = f"{self._file}: {SENTENCES[code].format(n=len(unique))}"
        if unique:
            text += f" ({cells_in_words(unique)})"
        if details := self._details[code]:
            text += f": {', '.join(details[:10])}"
        listed = tuple(str(cell) for cell in unique[:MAX_LISTED_CELLS])
        return Notice(code=code, cells=listed, text=one_line(text) + ".")
