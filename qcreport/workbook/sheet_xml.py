"""Reading one sheet as a stream: every filled cell with what its neighbours in the file say about it.

The range that the sheet declares is ignored; only cells that are there count.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Sequence

from qcreport.workbook.cells import Cell, Kind
from qcreport.workbook.places import MAX_COLUMN, MAX_ROW, Area, parse_area, parse_cell
from qcreport.workbook.refusals import damaged, quoted
from qcreport.workbook.rich_text import TextCollector, checked_text
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

Strings = Sequence[tuple[str, bool]]


class SheetScan:
    """Collects the cells of one sheet from the parser's events."""

    def __init__(self, strings: Strings, n_styles: int, count: Callable[[int, int], None]) -> None:
        self.rows: dict[int, dict[int, Cell]] = {}
        self.hidden_rows: set[int] = set()
        self.hidden_columns: list[tuple[int, int]] = []
        self.merges: list[Area] = []
        self.filters: list[Area] = []
        self._strings, self._n_styles, self._count = strings, n_styles, count
        self._in_data = False
        self._row = self._column = self._last_column = 0
        self._cells: dict[int, Cell] = {}
        self._in_cell = False
        self._type, self._style = "n", 0
        self._formula = self._has_value = self._reading = False
        self._pieces: list[str] = []
        self._inline: TextCollector | None = None
        self._filter: Area | None = None

    def start(self, name: str, attributes: Attributes) -> None:
        """Take note of the start of an element."""
        tag = _TAGS.get(name)
        if tag == "c":
            self._start_cell(attributes)
        elif self._in_cell:
            self._start_in_cell(tag, attributes)
        elif tag == "row":
            self._start_row(attributes)
        elif tag == "sheetData":
            self._in_data = True
        elif tag is not None:
            self._start_beside(tag, attributes)

    def _start_row(self, attributes: Attributes) -> None:
        if not self._in_data:
            return
        text = attributes.get("r")
        row = self._row + 1 if text is None else int(text) if text.isdigit() and text.isascii() else 0
        if not 1 <= row <= MAX_ROW:
            raise damaged(f"A row is numbered {text!r}.")
        self._row, self._last_column = row, 0
        self._cells = self.rows.get(row, {})
        if is_on(attributes.get("hidden")) or attributes.get("ht") == "0":
            self.hidden_rows.add(row)

    def _start_cell(self, attributes: Attributes) -> None:
        if not self._in_data or self._in_cell or self._row == 0:
            raise damaged("A cell stands outside a row.")
        text = attributes.get("r")
        if text is None:
            self._column = self._last_column + 1
        else:
            place = parse_cell(text)
            if place is None or place[0] != self._row:
                raise damaged(f"A cell in row {self._row} is named {quoted(text)}.")
            self._column = place[1]
        if self._column > MAX_COLUMN:
            raise damaged(f"Row {self._row} has more than {MAX_COLUMN:,} columns.")
        self._last_column = self._column
        self._in_cell = True
        self._type = attributes.get("t", "n")
        self._style = self._index(attributes.get("s", "0"), self._n_styles, "style")
        self._formula = self._has_value = False
        self._pieces = []
        self._inline = None

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
            self._end_cell()
        elif self._inline is not None:
            self._inline.end(tag)
        elif tag == "row" and self._in_data:
            if self._cells:
                self.rows[self._row] = self._cells
            self._cells = {}
        elif tag == "sheetData":
            self._in_data = False
            self._row = 0

    def _end_cell(self) -> None:
        cell = self._finished_cell()
        self._in_cell = False
        self._inline = None
        if cell is None:
            return
        if self._column in self._cells:
            raise damaged(f"Row {self._row} holds one cell twice.")
        self._cells[self._column] = cell
        self._count(len(self.rows) + 1, 1)

    def _finished_cell(self) -> Cell | None:
        kind = _KINDS.get(self._type)
        if kind is None:
            raise damaged(f"A cell in row {self._row} is of the unknown kind {quoted(self._type)}.")
        if self._inline is not None:
            text, struck = self._inline.finished(), self._inline.struck
            return Cell(kind, text, self._style, self._formula, True, struck) if text else None
        text = "".join(self._pieces)
        if self._type == "s":
            return self._shared(text)
        if kind is Kind.NUMBER:
            text = text.strip()
        cached = self._has_value and (bool(text) or kind is Kind.TEXT)
        if not text and not self._formula:
            return None
        return Cell(kind, checked_text(text), self._style, self._formula, cached)

    def _shared(self, text: str) -> Cell | None:
        if not self._has_value:
            return None
        string, struck = self._strings[self._index(text.strip(), len(self._strings), "text")]
        if not string and not self._formula:
            return None
        return Cell(Kind.TEXT, string, self._style, self._formula, True, struck)

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
    """Read one sheet; `count(rows so far, new cells)` is called for each filled cell and may refuse."""
    scan = SheetScan(strings, n_styles, count)
    parse_xml(chunks, part=part, start=scan.start, end=scan.end, text=scan.text)
    return scan


def in_order(rows: dict[int, dict[int, Cell]]) -> dict[int, dict[int, Cell]]:
    """Return rows and columns in ascending order; files may hold them in any."""
    ordered = {}
    for row in sorted(rows):
        columns = rows[row]
        keys = list(columns)
        ordered[row] = columns if keys == sorted(keys) else {c: columns[c] for c in sorted(keys)}
    return ordered
