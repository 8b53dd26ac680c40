"""What the columns of a table look like, and how likely each holds the batch or the values."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

from qcreport.workbook import propose_words as known
from qcreport.workbook.cells import Book, Cell, Kind, Sheet
from qcreport.workbook.layout_model import NumberForms
from qcreport.workbook.sheet_xml import is_stored_number
from qcreport.workbook.units import looks_like_unit, unit_in_heading
from qcreport.workbook.value_marks import split_text_value

_ANY_FORM = NumberForms()
_SUMMARIES = frozenset(known.SUMMARY)


@dataclass(frozen=True, slots=True, kw_only=True)
class ColumnFacts:
    """What the cells of one column say."""

    column: int
    """1-based."""
    heading: str
    """What stands above it."""
    unit: str | None
    """The unit in its heading or below it."""
    texts: tuple[str, ...]
    """The filled cells as text."""
    n_values: int
    """Cells that may be values: numbers, numbers in text, marks for missing ones."""
    n_dates: int
    """Cells shown as dates."""
    n_words: int
    """Cells with a text that is no number."""

    @property
    def distinct(self) -> int:
        """How many different texts there are."""
        return len({text.strip().casefold() for text in self.texts})

    @property
    def constant(self) -> bool:
        """One and the same in every row."""
        return len(self.texts) > 1 and self.distinct == 1

    @property
    def counter(self) -> bool:
        """Whole numbers that count: each one more than the one above, or starting anew."""
        numbers = [text for text in self.texts if text.strip().isdigit() and len(text.strip()) < 10]
        if len(numbers) < max(2, len(self.texts)):
            return False
        steps = [int(b) - int(a) for a, b in pairwise(numbers)]
        return sum(step == 1 for step in steps) >= 0.5 * len(steps) and all(s == 1 or s <= 0 for s in steps)

    @property
    def units(self) -> bool:
        """All texts are units: the column states the unit of another."""
        return bool(self.texts) and all(looks_like_unit(t) for t in self.texts) and self.n_words > 0


def like_a_value(cell: Cell) -> bool:
    """Return whether a cell may be a measured value."""
    if cell.kind in (Kind.NUMBER, Kind.ERROR):
        return True
    if cell.kind is not Kind.TEXT:
        return False
    text = cell.text.strip()
    marks = known.MISSING | known.NOT_DETECTED
    return text.casefold() in marks or split_text_value(text, _ANY_FORM, "") is not None


def column_facts(
    book: Book, sheet: Sheet, column: int, rows: Sequence[int], *, heading: str, unit: str | None
) -> ColumnFacts:
    """Return what a column of a table looks like; rows of means and the like do not count."""
    cells = [cell for row in rows if (cell := sheet.cell(row, column)) is not None]
    cells = [cell for cell in cells if cell.text.strip().casefold() not in _SUMMARIES]
    dates = [
        c for c in cells if c.kind is Kind.DATE or (c.kind is Kind.NUMBER and book.number_format(c).date)
    ]
    values = [cell for cell in cells if like_a_value(cell) and cell not in dates]
    return ColumnFacts(
        column=column,
        heading=heading,
        unit=unit if unit is not None else heading_unit(heading),
        texts=tuple(cell.text for cell in cells),
        n_values=len(values),
        n_dates=len(dates),
        n_words=len(cells) - len(values) - len(dates),
    )


def heading_unit(heading: str) -> str | None:
    """Return the unit that ends a heading, in brackets or as its last word."""
    unit = unit_in_heading(heading)
    if unit is not None and looks_like_unit(unit):
        return unit
    stem, _, last = heading.strip().rpartition(" ")
    return (
        last if stem and looks_like_unit(last) and len(last) > 1 else ("%" if stem and last == "%" else None)
    )


def value_score(facts: ColumnFacts, *, unit_beside: bool) -> float:
    """Return 0 to 1: how likely the column holds measured values."""
    filled = len(facts.texts)
    if filled < 2 or facts.n_values < 0.6 * filled or facts.n_dates:
        return 0.0
    found = known.words(facts.heading)
    result_word = bool(found & known.RESULT)
    score = 0.35 + 0.15 * (facts.distinct > 0.4 * filled) + 0.05 * _has_decimals(facts)
    score += 0.25 * (facts.unit is not None or (unit_beside and result_word))
    score += 0.25 * (result_word or bool(found & known.VALUE))
    score -= 0.35 * bool(found & known.DECOY and not found & known.VALUE)
    score -= 0.6 * facts.counter + 0.4 * facts.constant
    score -= 0.5 * bool(
        found & (known.GROUP | known.SAMPLE | known.REPLICATE | known.LINE) and not result_word
    )
    return _bounded(score)


def group_score(facts: ColumnFacts, *, one_row_a_batch: bool) -> float:
    """Return 0 to 1: how likely the column holds the batch."""
    filled = len(facts.texts)
    if filled < 2 or facts.n_dates or facts.units:
        return 0.0
    found = known.words(facts.heading)
    repeats = 2 <= facts.distinct <= filled / 2 or (one_row_a_batch and facts.distinct == filled)
    score = 0.15 + 0.3 * repeats + 0.15 * (facts.n_words > filled / 2)
    score += 0.4 * bool(found & known.GROUP) + 0.15 * bool(found & known.WEAK_GROUP)
    others = known.LINE | known.SAMPLE | known.TIME | known.STATUS | known.REPLICATE | known.DECOY
    score -= 0.4 * bool(found & others and not found & known.GROUP)
    score -= 0.5 * facts.constant + 0.6 * (facts.counter and not found & known.GROUP)
    score -= 0.5 * (_has_decimals(facts) and facts.n_words == 0)
    return _bounded(score)


def together(group: float, value: float) -> float:
    """Return the score of a pair of columns."""
    return math.sqrt(group * value)


def _has_decimals(facts: ColumnFacts) -> bool:
    numbers = [text for text in facts.texts if is_stored_number(text.strip())]
    return any("." in text and not text.rstrip("0").endswith(".") for text in numbers)


def _bounded(score: float) -> float:
    return round(min(1.0, max(0.0, score)), 3)
