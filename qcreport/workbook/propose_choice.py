"""Choosing the batch column and the value columns of a table, with what speaks against the choice."""

from __future__ import annotations

from dataclasses import dataclass

from qcreport.measurements import column_letters
from qcreport.workbook import propose_words as known
from qcreport.workbook.cells import Book
from qcreport.workbook.propose_columns import (
    ColumnFacts,
    column_facts,
    group_score,
    together,
    value_score,
)
from qcreport.workbook.propose_tables import FoundTable, stated_beside

ENOUGH = 0.8
"""Score from which a choice of columns is proposed without asking."""
LEAD = 0.1
"""By so much the next choice must score less."""
_POSSIBLE = 0.5


@dataclass(frozen=True, slots=True, kw_only=True)
class Choice:
    """How one table may be read."""

    table: FoundTable
    """Where it stands."""
    facts: tuple[ColumnFacts, ...]
    """Its columns."""
    groups: tuple[tuple[ColumnFacts, float], ...]
    """Columns that may hold the batch, best first."""
    values: tuple[tuple[ColumnFacts, float], ...]
    """Columns that may hold the values, best first."""
    unit_cell: tuple[int, int, str] | None
    """Where a block above the table states the unit."""
    quantity: str | None
    """What a block above the table says was measured."""

    @property
    def score(self) -> float:
        """The best pair's."""
        return together(self.groups[0][1], self.values[0][1]) if self.groups and self.values else 0.0

    @property
    def lead(self) -> float:
        """By how much the next pair scores less."""
        if not self.groups or not self.values:
            return 0.0
        others = [together(g, self.values[0][1]) for _, g in self.groups[1:]]
        others += [together(self.groups[0][1], v) for _, v in self.values[1:]]
        return self.score - max(others, default=0.0)

    @property
    def sure(self) -> bool:
        """True where the columns need no question."""
        return self.score >= ENOUGH and self.lead >= LEAD

    def likely_groups(self) -> list[ColumnFacts]:
        """Return the columns that hold the batch about as likely as the best one does."""
        value = self.values[0][1] if self.values else 1.0
        return [f for f, score in self.groups if self.score - together(score, value) < LEAD]

    def likely_values(self) -> list[ColumnFacts]:
        """Return the columns that hold values about as likely as the best one does, left to right."""
        group = self.groups[0][1] if self.groups else 1.0
        best = together(group, self.values[0][1])
        likely = [f for f, score in self.values if self.table.across or best - together(group, score) < LEAD]
        return sorted(likely, key=lambda facts: facts.column)

    @property
    def groups_clear(self) -> bool:
        """True where a column clearly holds the batch."""
        return bool(self.groups) and self.groups[0][1] >= ENOUGH - LEAD

    def column_with(self, words: frozenset[str], *, taken: set[int]) -> ColumnFacts | None:
        """Return the one column whose heading holds such a word; None for none or several."""
        fitting = [f for f in self.facts if f.column not in taken and known.words(f.heading) & words]
        return fitting[0] if len(fitting) == 1 else None

    def times(self) -> ColumnFacts | None:
        """Return the one column of dates."""
        dates = [f for f in self.facts if f.n_dates > len(f.texts) / 2]
        named = [f for f in self.facts if f.texts and known.words(f.heading) & known.TIME and not f.n_values]
        fitting = dates or named
        return fitting[0] if len(fitting) == 1 else None


def choose(book: Book, table: FoundTable) -> Choice:
    """Return how a table may be read."""
    sheet = table.sheet
    unit_cell, quantity = stated_beside(sheet, table.header_rows[0])
    facts = []
    for column in table.columns:
        cells = [sheet.cell(row, column) for row in table.header_rows]
        heading = next((cell.text for cell in cells if cell is not None), "")
        below = sheet.cell(table.units_row, column) if table.units_row is not None else None
        unit = below.text.strip() if below is not None else None
        facts.append(column_facts(book, sheet, column, table.rows, heading=heading, unit=unit))
    values = [(f, value_score(f, unit_beside=unit_cell is not None)) for f in facts]
    groups = [(f, group_score(f, one_row_a_batch=table.across)) for f in facts]
    return Choice(
        table=table,
        facts=tuple(facts),
        groups=_ranked(groups),
        values=_ranked(values),
        unit_cell=unit_cell,
        quantity=quantity,
    )


def _ranked(scored: list[tuple[ColumnFacts, float]]) -> tuple[tuple[ColumnFacts, float], ...]:
    """Return the columns that are possible, best first."""
    ordered = sorted(scored, key=lambda pair: -pair[1])
    best = ordered[0][1] if ordered else 0.0
    return tuple(pair for pair in ordered if pair[1] > 0 and pair[1] >= min(_POSSIBLE, best))


def wide_columns(choice: Choice) -> tuple[int, int] | None:
    """Return (first, last) of the batches' columns where each batch has a column of its own."""
    numeric = [
        f for f in choice.facts
        if f.texts and f.n_values == len(f.texts) and not f.counter and f.unit is None
        and not known.words(f.heading) & (known.VALUE | known.RESULT | known.DECOY)
        and any(c.isdigit() for c in f.heading)
    ]  # fmt: skip
    columns = [f.column for f in numeric]
    if len(columns) < 2 or columns != list(range(columns[0], columns[-1] + 1)):
        return None
    return columns[0], columns[-1]


def letters(facts: ColumnFacts) -> str:
    """Return the name of a column."""
    return column_letters(facts.column)
