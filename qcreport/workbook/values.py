"""Turning value cells into numbers, a characteristic at a time.

Each stored number is converted once, from its stored text. What cannot be read in exactly one way refuses the
export; nothing is guessed from the size of a number.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from decimal import Decimal
from typing import NamedTuple

from qcreport.measurements import CellRef, Censoring
from qcreport.workbook.cells import Book, Cell, Kind
from qcreport.workbook.layout_model import NumberForms
from qcreport.workbook.notices import NoticeBook
from qcreport.workbook.readings import Reading
from qcreport.workbook.sheet_xml import is_stored_number
from qcreport.workbook.value_marks import TextValue, read_text_values, split_text_value
from qcreport.workbook.value_refusals import (
    refuse_errors,
    refuse_mixed_percent,
    refuse_percent_unit,
    refuse_uncalculated,
    refuse_unreadable,
)

_SHOWN_DIGITS = 15
"""Significant digits that spreadsheet programs show of a stored number."""
_MAX_KEPT_NUMBERS = 10_000


class Value(NamedTuple):
    """What a value cell says."""

    number: float | None
    """The value, or the limit; None where missing or not detected."""
    decimals: int
    """Decimals that the export shows."""
    censored: Censoring | None
    """How it is known only by a limit."""


MISSING = Value(None, 0, None)
NOT_DETECTED = Value(None, 0, Censoring.NOT_DETECTED)


class ValueReader:
    """Reads the values of one characteristic."""

    def __init__(self, book: Book, forms: NumberForms, unit: str, notices: NoticeBook) -> None:
        self._book, self._forms, self._unit, self._notices = book, forms, unit, notices
        self._missing = {text.casefold() for text in forms.missing}
        self._missing_numbers = {float(text) for text in forms.missing if is_stored_number(text)}
        self._not_detected = {text.casefold() for text in forms.not_detected}
        self._values: list[Value] = []
        self._numbers: dict[tuple[str, int], Value] = {}
        self._texts: dict[int, TextValue] = {}
        self._percent: list[Reading] = []
        self._plain: list[Reading] = []
        self._unreadable: list[tuple[CellRef, str]] = []
        self._errors: list[tuple[CellRef, str]] = []
        self._uncalculated: list[CellRef] = []
        self._formulas: list[tuple[CellRef, str]] = []

    def read(self, readings: Sequence[Reading]) -> list[Value]:
        """Return the values in the order of the readings."""
        self._values = [MISSING] * len(readings)
        for index, reading in enumerate(readings):
            self._take(index, reading)
        self._refuse()
        texts = {index: (readings[index].ref, text) for index, text in self._texts.items()}
        for index, value in self._read_texts(texts).items():
            self._values[index] = value
        for index, reading in enumerate(readings):
            self._note(reading, self._values[index])
        return self._values

    def _take(self, index: int, reading: Reading) -> None:
        cell = reading.cell
        if cell is None or (cell.blank and cell.cached):
            self._values[index] = MISSING
            return
        if cell.formula:
            self._formulas.append((reading.ref, cell.text))
        if not cell.cached:
            self._uncalculated.append(reading.ref)
            return
        if cell.kind is Kind.NUMBER:
            self._take_number(index, reading, cell)
        elif cell.kind is Kind.TEXT:
            self._take_text(index, reading, cell)
        elif cell.kind is Kind.ERROR:
            self._take_error(index, reading, cell)
        else:
            what = {"1": "TRUE", "0": "FALSE"}.get(cell.text, cell.text)
            self._unreadable.append((reading.ref, f"{what}, a date" if cell.kind is Kind.DATE else what))

    def _take_error(self, index: int, reading: Reading, cell: Cell) -> None:
        error = cell.text.strip().upper()
        if self._forms.errors_missing or error in self._forms.missing_errors:
            self._values[index] = MISSING
        else:
            self._errors.append((reading.ref, error))

    def _take_number(self, index: int, reading: Reading, cell: Cell) -> None:
        """Take a stored number; the same number in the same style is one object."""
        known = self._numbers.get((cell.text, cell.style))
        if known is not None:
            self._plain.append(reading)
            self._values[index] = known
            return
        number_format = self._book.number_format(cell)
        number = float(cell.text) if is_stored_number(cell.text) else math.nan
        if not math.isfinite(number):
            self._unreadable.append((reading.ref, cell.text))
        elif number in self._missing_numbers:
            self._values[index] = MISSING
        elif number_format.date:
            self._unreadable.append((reading.ref, f"{cell.text}, shown as a date or time"))
        elif number_format.divides:
            self._unreadable.append((reading.ref, f"{cell.text}, shown divided by a thousand or more"))
        elif number_format.percent:
            self._percent.append(reading)
            self._values[index] = _percent_value(number, number_format.decimals)
        else:
            self._plain.append(reading)
            fixed = number_format.decimals
            value = Value(number, _shown_decimals(number) if fixed is None else fixed, None)
            self._values[index] = value
            if len(self._numbers) < _MAX_KEPT_NUMBERS:
                self._numbers[cell.text, cell.style] = value

    def _take_text(self, index: int, reading: Reading, cell: Cell) -> None:
        text = cell.text.strip()
        if text.casefold() in self._missing:
            self._values[index] = MISSING
        elif text.casefold() in self._not_detected:
            self._values[index] = NOT_DETECTED
        elif (parts := split_text_value(text, self._forms, self._unit)) is not None:
            self._texts[index] = parts
        else:
            self._unreadable.append((reading.ref, text))

    def _refuse(self) -> None:
        if self._uncalculated:
            raise refuse_uncalculated(self._uncalculated)
        if self._book.recalculates and len(self._formulas) > 1 and all(t == "0" for _, t in self._formulas):
            raise refuse_uncalculated([ref for ref, _ in self._formulas])
        if self._errors:
            raise refuse_errors(self._errors)
        if self._unreadable:
            raise refuse_unreadable(self._unreadable)
        if self._percent and "%" not in self._unit:
            raise refuse_percent_unit([r.ref for r in self._percent], self._unit)
        if self._percent and self._plain:
            raise refuse_mixed_percent(self._percent[0].ref, self._plain[0].ref)

    def _read_texts(self, texts: dict[int, tuple[CellRef, TextValue]]) -> dict[int, Value]:
        found: dict[int, Value] = {}
        numbers = read_text_values([*texts.values()], self._forms, self._unit, n_plain=len(self._plain))
        for index, number in zip(texts, numbers, strict=True):
            ref, parts = texts[index]
            value = float(number.plain)
            if not math.isfinite(value):
                raise refuse_unreadable([(ref, number.plain)])
            if value in self._missing_numbers and parts.censored is None:
                found[index] = MISSING
                continue
            found[index] = Value(value, number.decimals, parts.censored)
            self._note_text(ref, parts, comma=number.comma, grouped=number.grouped)
        without_sign = [ref for ref, parts in texts.values() if not parts.unit]
        if self._percent and without_sign:
            raise refuse_mixed_percent(self._percent[0].ref, without_sign[0])
        return found

    def _note_text(self, ref: CellRef, parts: TextValue, *, comma: bool, grouped: bool) -> None:
        if not self._book.is_text and parts.censored is None:
            self._notices.add("text_numbers_converted", ref)
        if comma:
            self._notices.add("decimal_comma", ref)
        if grouped:
            self._notices.add("thousands_separator_removed", ref)
        if parts.unit:
            self._notices.add("unit_text_removed", ref)

    def _note(self, reading: Reading, value: Value) -> None:
        cell = reading.cell
        if value.censored is not None:
            self._notices.add("censored_values", reading.ref)
        elif value.number is None:
            self._notices.add("missing_values", reading.ref)
        if cell is None:
            return
        if cell.formula:
            self._notices.add("formula_results_used", reading.ref)
        if cell.kind is Kind.NUMBER and self._book.number_format(cell).percent and value.number is not None:
            shown = f"stored {cell.text}, taken as {value.number!r} in %"
            first = not self._notices.has("percent_cells_scaled")
            self._notices.add("percent_cells_scaled", reading.ref, detail=shown if first else "")


def _percent_value(number: float, decimals: int | None) -> Value:
    """Return a stored fraction in percent, scaled in decimal so that 0.0118 gives 1.18."""
    percent = float(Decimal(repr(number)).scaleb(2))
    return Value(percent, _shown_decimals(percent) if decimals is None else decimals, None)


def _shown_decimals(number: float) -> int:
    """Return the decimals of a number as a spreadsheet shows it at most, 15 significant digits."""
    shown = Decimal(f"{number:.{_SHOWN_DIGITS}g}").normalize()
    exponent = shown.as_tuple().exponent
    return max(0, -exponent) if isinstance(exponent, int) else 0
