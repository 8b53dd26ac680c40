"""Walking down a table and collecting its readings, in the three shapes."""

from __future__ import annotations

from collections.abc import Iterator
from fnmatch import fnmatchcase

from qcreport.measurements import CellRef
from qcreport.workbook.cells import Book, Cell, Sheet
from qcreport.workbook.columns import TableColumns
from qcreport.workbook.group_cells import refuse_not_text
from qcreport.workbook.layout_model import Layout, Shape
from qcreport.workbook.notices import NoticeBook
from qcreport.workbook.readings import AnyLabel, Reading
from qcreport.workbook.row_labels import RowLabels
from qcreport.workbook.row_refusals import refuse_group_missing, refuse_summary_row

_SUMMARY_WORDS = frozenset(
    (
        "mean", "means", "average", "avg", "overall mean", "grand mean", "std dev", "stdev", "std", "st dev",
        "standard deviation", "sd", "rsd", "cv", "cv %", "min", "max", "minimum", "maximum", "median",
        "total", "sum", "range", "variance", "mittelwert", "standardabweichung", "mw", "stabw", "moyenne",
        "ecart type", "écart type", "media",
    )
)  # fmt: skip


class TableWalk:
    """One walk down one table of one sheet."""

    def __init__(
        self, book: Book, layout: Layout, index: int, table: TableColumns, file: str, notices: NoticeBook
    ) -> None:
        self._layout, self._index, self._table, self._notices = layout, index, table, notices
        self._sheet: Sheet = table.sheet
        self._labels = RowLabels(book, table, file, notices)
        self.readings: list[Reading] = []
        self.lone_names: list[tuple[int, AnyLabel]] = []
        self.used_rows: set[int] = set()
        self.end_row = table.layout.first_row - 1
        self._groupless: list[CellRef] = []
        self._summaries: list[tuple[CellRef, str]] = []

    def run(self) -> None:
        """Collect the readings; refuse rows without a batch and unnamed summary rows."""
        for row, cells in self._data_rows():
            self.end_row = row
            self.used_rows.add(row)
            if self._table.layout.shape is Shape.WIDE:
                self._wide_row(row, cells)
            else:
                self._row(row, cells)
        self._drop_trailing_blanks()
        if self._labels.not_text:
            raise refuse_not_text(self._labels.not_text)
        if self._summaries:
            raise refuse_summary_row(self._summaries)
        if self._groupless:
            raise refuse_group_missing(self._groupless)

    def _columns_of_interest(self) -> list[int]:
        sources = self._table.sources
        columns = [sources[name] for name in ("group", "sample", "replicate") if name in sources]
        return [*columns, *(c for _, value_columns in self._table.values for c in value_columns)]

    def _data_rows(self) -> Iterator[tuple[int, dict[int, Cell]]]:
        """Return the rows that hold something of the table, up to its end."""
        layout = self._table.layout
        interest = self._columns_of_interest()
        last = layout.first_row - 1
        for row, filled in self._sheet.rows.items():
            if row < layout.first_row:
                continue
            if row > self._table.last_row:
                return
            cells = {c: cell for c in interest if (cell := filled.get(c)) is not None and not cell.blank}
            if not cells:
                continue
            if layout.blank_rows_end is not None and row - last > layout.blank_rows_end:
                return
            last = row
            yield row, cells

    def _left_out(self, row: int, cells: dict[int, Cell]) -> bool:
        """Return whether a row is a summary row; note its values."""
        rules = self._layout.leave_out
        sources = self._table.sources
        names = (("group", rules.group_matches), ("sample", rules.sample_matches))
        if self._table.layout.shape is Shape.WIDE:
            both = (*rules.group_matches, *rules.sample_matches)
            names = (("replicate", both), ("sample", both))
        for source, patterns in names:
            cell = cells.get(sources.get(source, 0))
            if cell is None:
                continue
            text = " ".join(cell.text.split())
            if any(fnmatchcase(text.casefold(), pattern.strip().casefold()) for pattern in patterns):
                self._notices.add("summary_rows_skipped", *self._filled_values(row, cells))
                return True
            if text.casefold().strip(" .:=") in _SUMMARY_WORDS and self._filled_values(row, cells):
                self._summaries.append((self._sheet.ref(row, sources[source]), text))
                return True
        return False

    def _filled_values(self, row: int, cells: dict[int, Cell]) -> list[CellRef]:
        columns = [c for _, value_columns in self._table.values for c in value_columns]
        return [self._sheet.ref(row, column) for column in columns if column in cells]

    def _row(self, row: int, cells: dict[int, Cell]) -> None:
        """Collect the readings of a row of a long table, or of one with its replicates side by side."""
        if self._left_out(row, cells):
            return
        filled = self._filled_values(row, cells)
        group = self._labels.group(row)
        if group is None:
            self._groupless.extend(filled)
            return
        if not filled and len(self._sheet.rows[row]) == 1 and "group" in self._table.sources:
            self.lone_names.append((row, group))
            return
        across = self._table.layout.shape is Shape.REPLICATES_ACROSS
        for position, (_, columns) in enumerate(self._table.values):
            wanted = _up_to_last_filled(columns, cells) if across else columns
            for ordinal, column in enumerate(wanted, start=1):
                number = self._across_number(column, ordinal) if across else self._labels.number(row)
                self._add(row, column, cells.get(column), group, number, position)

    def add_missing(self, row: int, group: AnyLabel) -> None:
        """Add a row that names a known batch and holds nothing else: its values are missing."""
        for position, (_, columns) in enumerate(self._table.values):
            self._add(row, columns[0], None, group, self._labels.number(row), position)

    def _across_number(self, column: int, ordinal: int) -> str:
        texts = self._table.headings.texts.get(column, ())
        return texts[-1] if len(texts) > 1 else str(ordinal)

    def _wide_row(self, row: int, cells: dict[int, Cell]) -> None:
        if self._left_out(row, cells):
            return
        for column in self._table.values[0][1]:
            group = self._labels.wide_group(column)
            if group is None:
                if column in cells:
                    self._groupless.append(self._sheet.ref(row, column))
                continue
            self._add(row, column, cells.get(column), group, self._labels.number(row), 0)

    def _add(
        self, row: int, column: int, cell: Cell | None, group: AnyLabel, number: str | None, position: int
    ) -> None:
        labels = self._labels
        self.readings.append(
            Reading(
                table=self._index,
                layout=self._table.values[position][0],
                sheet=self._sheet,
                row=row,
                column=column,
                cell=cell,
                group=group,
                line=labels.line(row),
                sample=labels.sample(row),
                number=number,
                time=labels.time(row),
                status=labels.status(row),
                factors=labels.factors(row),
                unit=labels.unit(row, self._table.values[position][0]),
            )
        )

    def _drop_trailing_blanks(self) -> None:
        """Forget the empty cells below the last value of each column of a wide table."""
        if self._table.layout.shape is not Shape.WIDE:
            return
        last: dict[int, int] = {}
        for reading in self.readings:
            if reading.cell is not None:
                last[reading.column] = reading.row
        self.readings = [r for r in self.readings if r.row <= last.get(r.column, 0)]


def _up_to_last_filled(columns: tuple[int, ...], cells: dict[int, Cell]) -> tuple[int, ...]:
    """Return the columns up to the last filled one; the first where none is, so that its absence is told."""
    filled = [position for position, column in enumerate(columns) if column in cells]
    return columns[: filled[-1] + 1] if filled else columns[:1]
