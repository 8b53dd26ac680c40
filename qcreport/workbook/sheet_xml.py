"""Reading one sheet as a stream: every filled cell with what its neighbours in the file say about it.

The range that the sheet declares is ignored; only cells that are there count.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Sequence

from qcreport.workbook.cells import Cell, Kind
from qcreport.workbook.places import MAX_COLUMN, MAX_ROW, Area, parse_area, parse_column
from qcreport.workbook.refusals import damaged, quoted
from qcreport.workbook.rich_text import TextCollector, checked_text
from qcreport.workbook.rows import Rows
from qcreport.workbook.xml_stream import Attributes, is_on, main_tags, parse_xml

_TAGS = main_tags(
    "sheetData", "row", "c", "v", "f", "is", "t", "r", "rPh", "strike", "mergeCell", "autoFilter",
    "filterColumn", "col",
)  # fmt: skip
_KINDS = {
    "n": Kind.NUMBER, "s": Kind.TEXT, "str": Kind.TEXT, "inlineStr": Kind.TEXT, "b": Kind.BOOLEAN,
    "e": Kind.ERROR, "d": Kind.DATE,
}  # fmt: skip
_NUMBER = re.compile(r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")
_MAX_MERGES = 100_000
_MAX_KEPT_NUMBERS = 10_000

Strings = Sequence[tuple[str, bool]]


class SheetScan:
    """Collects the cells of one sheet from the parser's events.

    Three million cells may pass through `start` and `end`, so these two are written for speed.
    """

    __slots__ = (
        "_cells", "_column", "_columns", "_count", "_empty", "_filter", "_formula", "_has_value", "_in_cell",
        "_in_data", "_inline", "_n_styles", "_numbers", "_pieces", "_reading", "_row", "_row_text",
        "_shared_cells", "_strings", "_style", "_styles", "_type", "filters", "hidden_columns", "hidden_rows",
        "merges", "rows",
    )  # fmt: skip

    def __init__(self, strings: Strings, n_styles: int, count: Callable[[int, int], None]) -> None:
        self.rows = Rows()
        self.hidden_rows: set[int] = set()
        self.hidden_columns: list[tuple[int, int]] = []
        self.merges: list[Area] = []
        self.filters: list[Area] = []
        self._strings, self._n_styles, self._count = strings, n_styles, count
        self._columns: dict[str, int] = {}
        self._styles: dict[str, int] = {"0": 0}
        self._shared_cells: dict[tuple[str, int], Cell | None] = {}
        self._numbers: dict[tuple[str, int], Cell | None] = {}
        self._in_data = self._in_cell = False
        self._row = self._column = 0
        self._row_text = ""
        self._cells: dict[int, Cell] = {}
        self._type, self._style = "n", 0
        self._formula = self._has_value = self._reading = False
        self._pieces: list[str] = []
        self._inline: TextCollector | None = None
        self._filter: Area | None = None
        self._empty: Area | None = None

    def start(self, name: str, attributes: Attributes) -> None:
        """Take note of the start of an element."""
        tag = _TAGS.get(name)
        if tag == "c":
            if not self._in_data or self._in_cell or self._row == 0:
                raise damaged("A cell stands outside a row.")
            self._column = self._place(attributes.get("r"))
            self._in_cell = True
            self._type = attributes.get("t", "n")
            style = attributes.get("s", "0")
            self._style = self._styles[style] if style in self._styles else self._new_style(style)
            self._formula = self._has_value = False
            self._pieces.clear()
        elif self._in_cell:
            self._start_in_cell(tag, attributes)
        elif tag == "row":
            self._start_row(attributes)
        elif tag == "sheetData":
            self._in_data = True
        elif tag is not None:
            self._start_beside(tag, attributes)

    def _place(self, text: str | None) -> int:
        """Return the column of a cell; one without a name follows its neighbour."""
        if text is None:
            if self._column >= MAX_COLUMN:
                raise damaged(f"Row {self._row} has more than {MAX_COLUMN:,} columns.")
            return self._column + 1
        letters = text.removesuffix(self._row_text)
        column = self._columns.get(letters) or parse_column(letters)
        if column is None or len(letters) + len(self._row_text) != len(text):
            raise damaged(f"A cell in row {self._row} is named {quoted(text)}.")
        self._columns[letters] = column
        return column

    def _new_style(self, text: str) -> int:
        self._styles[text] = self._index(text, self._n_styles, "style")
        return self._styles[text]

    def _start_row(self, attributes: Attributes) -> None:
        if not self._in_data:
            return
        text = attributes.get("r")
        row = self._row + 1 if text is None else int(text) if text.isdigit() and text.isascii() else 0
        if not 1 <= row <= MAX_ROW:
            raise damaged(f"A row is numbered {text!r}.")
        self._row, self._column = row, 0
        self._row_text = str(row)
        self._cells = self.rows.filled(row)
        if is_on(attributes.get("hidden")) or attributes.get("ht") == "0":
            self.hidden_rows.add(row)

    def _start_in_cell(self, tag: str | None, attributes: Attributes) -> None:
        if self._reading:
            raise damaged(f"The value of a cell in row {self._row} holds other elements.")
        if self._inline is not None:
            self._inline.start(tag, attributes)
        elif tag == "v":
            if self._has_value:
                raise damaged(f"A cell in row {self._row} holds two values.")
            self._reading = self._has_value = True
        elif tag == "f":
            self._formula = True
        elif tag == "is":
            self._inline = TextCollector()

    def _start_beside(self, tag: str, attributes: Attributes) -> None:
        if tag == "mergeCell":
            self._merge(attributes.get("ref", ""))
        elif tag == "autoFilter":
            self._filter = parse_area(attributes.get("ref", ""))
        elif tag == "filterColumn" and self._filter is not None:
            self.filters.append(self._filter)
            self._filter = None
        elif tag == "col" and (is_on(attributes.get("hidden")) or attributes.get("width") == "0"):
            first, last = attributes.get("min", ""), attributes.get("max", "")
            if not (first.isdigit() and last.isdigit() and len(first) < 6 and len(last) < 6):
                raise damaged("The sheet describes a column without a number.")
            self.hidden_columns.append((int(first), int(last)))

    def _merge(self, text: str) -> None:
        area = parse_area(text)
        if area is None or len(self.merges) >= _MAX_MERGES:
            raise damaged(f"The sheet merges the area {quoted(text)}.")
        self.merges.append(area)

    def text(self, piece: str) -> None:
        """Take a piece of character data."""
        if self._reading:
            self._pieces.append(piece)
        elif self._inline is not None:
            self._inline.text(piece)

    def end(self, name: str) -> None:
        """Take note of the end of an element."""
        tag = _TAGS.get(name)
        if tag == "v":
            self._reading = False
        elif tag == "c":
            cell = self._finished_cell()
            holds = self._has_value or self._inline is not None
            self._in_cell = False
            self._inline = None
            if cell is not None:
                if self._column in self._cells:
                    raise damaged(f"Row {self._row} holds one cell twice.")
                self._cells[self._column] = cell
            elif holds:
                self._note_empty()
        elif self._inline is not None:
            self._inline.end(tag)
        elif tag == "row" and self._in_data:
            if self._cells:
                self.rows.put(self._row, self._cells)
                self._count(len(self.rows), len(self._cells))
            self._cells = {}
        elif tag == "sheetData":
            self._in_data = False
            self._row = 0

    def _note_empty(self) -> None:
        """Widen the range of cells that are there and hold an empty text."""
        row, column = self._row, self._column
        old = self._empty if self._empty is not None else Area(row, column, row, column)
        self._empty = Area(
            min(old.first_row, row), min(old.first_column, column), max(old.last_row, row),
            max(old.last_column, column),
        )  # fmt: skip

    def extent(self) -> tuple[int, int]:
        """Return the rows and columns of the range that holds all cells, those with an empty text too."""
        rows = [min(self.rows), max(self.rows)] if self.rows else []
        columns = set(self.rows.columns)
        if (empty := self._empty) is not None:
            rows += [empty.first_row, empty.last_row]
            columns.update((empty.first_column, empty.last_column))
        if not rows:
            return 0, 0
        return max(rows) - min(rows) + 1, max(columns) - min(columns) + 1

    def _finished_cell(self) -> Cell | None:
        if self._inline is not None:
            kind = self._kind()
            text, struck = self._inline.finished(), self._inline.struck
            return Cell(kind, text, self._style, self._formula, True, struck) if text else None
        text = "".join(self._pieces)
        if self._type == "n":
            if self._formula:
                text = text.strip()
                return Cell(Kind.NUMBER, checked_text(text), self._style, True, bool(text))
            return self._number(text)
        if self._type == "s":
            return self._shared(text) if self._has_value else None
        kind = self._kind()
        if not text and not self._formula:
            return None
        cached = self._has_value and (bool(text) or kind is Kind.TEXT)
        return Cell(kind, checked_text(text), self._style, self._formula, cached)

    def _number(self, text: str) -> Cell | None:
        """Return the cell of a number; the same number in the same style is one object."""
        key = (text, self._style)
        if key in self._numbers:
            return self._numbers[key]
        stored = text.strip()
        cell = Cell(Kind.NUMBER, checked_text(stored), self._style, False, True) if stored else None
        if len(self._numbers) < _MAX_KEPT_NUMBERS:
            self._numbers[key] = cell
        return cell

    def _kind(self) -> Kind:
        kind = _KINDS.get(self._type)
        if kind is None:
            raise damaged(f"A cell in row {self._row} is of the unknown kind {quoted(self._type)}.")
        return kind

    def _shared(self, text: str) -> Cell | None:
        """Return the cell of a shared text; the same text in the same style is one object."""
        key = (text, self._style)
        if key in self._shared_cells and not self._formula:
            return self._shared_cells[key]
        string, struck = self._strings[self._index(text.strip(), len(self._strings), "text")]
        if self._formula:
            return Cell(Kind.TEXT, string, self._style, True, True, struck)
        cell = Cell(Kind.TEXT, string, self._style, False, True, struck) if string else None
        self._shared_cells[key] = cell
        return cell

    def _index(self, text: str, length: int, what: str) -> int:
        index = int(text) if text.isdigit() and text.isascii() and len(text) < 10 else -1
        if not 0 <= index < length:
            raise damaged(f"A cell in row {self._row} points to the missing {what} {quoted(text)}.")
        return index


def is_stored_number(text: str) -> bool:
    """Return whether a stored text is a number as spreadsheets write it."""
    return _NUMBER.fullmatch(text) is not None


def scan_sheet(
    chunks: Iterable[bytes],
    *,
    part: str,
    strings: Strings,
    n_styles: int,
    count: Callable[[int, int], None],
) -> SheetScan:
    """Read one sheet; `count(rows so far, new cells)` is called for each filled row and may refuse."""
    scan = SheetScan(strings, n_styles, count)
    parse_xml(chunks, part=part, start=scan.start, end=scan.end, text=scan.text)
    return scan
