"""Reading an export by its layout: bytes and a layout in, measurements out."""

from __future__ import annotations

from collections.abc import Generator, Iterator, Sequence
from fnmatch import fnmatchcase

from qcreport.canonical import sha256_hex
from qcreport.errors import ExportRefusedError
from qcreport.measurements import Measurement, MeasurementSet, Notice
from qcreport.workbook.assembly import assemble
from qcreport.workbook.cells import Book, Sheet
from qcreport.workbook.columns import TableColumns, find_columns
from qcreport.workbook.labels import trimmed
from qcreport.workbook.layout_model import Layout, TableLayout
from qcreport.workbook.limits import Limits
from qcreport.workbook.notices import NoticeBook
from qcreport.workbook.opening import open_export
from qcreport.workbook.places import MAX_ROW
from qcreport.workbook.readings import Reading
from qcreport.workbook.refusals import quoted, refused
from qcreport.workbook.sheets import choose_sheets, no_table_found
from qcreport.workbook.stated_units import Stated, stated_in_table
from qcreport.workbook.stray import WalkedTable, note_stray_cells
from qcreport.workbook.walk import TableWalk

_Walked = list[tuple[Sheet, list[WalkedTable]]]
_Columns = list[tuple[Sheet, list[TableColumns]]]
_UNSEEN = "hidden rows, marks, number formats and formulas cannot be seen in this format"


def read_export(
    data: bytes, *, name: str, layout: Layout, limits: Limits | None = None, second_look: bool = False
) -> MeasurementSet:
    """Return all that an export holds, as its layout says.

    Parameters
    ----------
    data : bytes
        The file as dropped.
    name : str
        Its name, without folders.
    layout : Layout
        How it is laid out.
    limits : Limits or None
        Bounds of the reading; the shipped ones where None.
    second_look : bool
        Compare what was read, cell by cell, with an independent reader.

    Returns
    -------
    MeasurementSet
        Measurements in export order, with notices.

    Raises
    ------
    ExportRefusedError
        With one of the documented codes, where anything could be read wrongly.
    """
    reading = ExportReading(data, name=name, layout=layout, limits=limits, second_look=second_look)
    measurements = tuple(reading.measurements())
    return MeasurementSet(
        export_name=name,
        export_sha256=sha256_hex(data),
        layout_name=layout.name,
        measurements=measurements,
        notices=reading.notices(),
    )


class ExportReading:
    """One reading of an export that hands out each measurement as it is made and keeps none.

    The parameters are those of `read_export`.
    """

    def __init__(
        self, data: bytes, *, name: str, layout: Layout, limits: Limits | None = None, second_look: bool
    ) -> None:
        self._data, self._name, self._layout, self._second_look = data, name, layout, second_look
        self._limits = limits if limits is not None else Limits()
        self._notices = NoticeBook(name)

    def measurements(self) -> Iterator[Measurement]:
        """Yield the measurements in export order, once.

        Raises
        ------
        ExportRefusedError
            Also after the last measurement: they count only when all have been taken without it.
        """
        layout = self._layout
        try:
            book = open_export(self._data, name=self._name, text=layout.text, limits=self._limits)
            columns = yield from _read_book(book, self._name, layout, self._limits, self._notices)
            book.check_rest()
            if self._second_look:
                _look_again(self._data, book, columns, layout, self._notices)
        except ExportRefusedError as refusal:
            refusal.file = self._name
            raise

    def notices(self) -> tuple[Notice, ...]:
        """Return what was noted, once all measurements have been taken."""
        return self._notices.notices()


def _read_book(
    book: Book, name: str, layout: Layout, limits: Limits, notices: NoticeBook
) -> Generator[Measurement, None, _Columns]:
    """Yield the measurements; return where they stood, and nothing else that takes memory."""
    _note_book(book, notices)
    try:
        export = _Export(book, name, layout, notices)
        for sheet in choose_sheets(book, layout, notices):
            export.read_sheet(sheet)
        export.check_filled()
    except ExportRefusedError as refusal:
        if refusal.code in ("layout_mismatch", "no_data_rows"):
            _refuse_if_empty(book)
        raise
    batches: set[str] = set()
    for measurement in assemble(
        book, layout, limits, notices, readings=export.readings, stated=export.stated,
        sample_columns=export.sample_columns,
    ):  # fmt: skip
        batches.add(measurement.batch)
        yield measurement
    groups = frozenset(batch.casefold() for batch in batches)
    for sheet, tables in export.walked:
        note_stray_cells(sheet, tables, groups, notices)
    return [(sheet, [table.columns for table in tables]) for sheet, tables in export.walked]


def _look_again(data: bytes, book: Book, columns: _Columns, layout: Layout, notices: NoticeBook) -> None:
    from qcreport.workbook.second_look import take_second_look

    take_second_look(data, book, columns, layout.text, notices)


def _refuse_if_empty(book: Book) -> None:
    refusal = no_table_found(book)
    if refusal is not None:
        raise refusal


def _note_book(book: Book, notices: NoticeBook) -> None:
    if book.has_macros:
        notices.add("macros_ignored")
    if book.has_external_links:
        notices.add("external_links_not_followed")
    if book.limited:
        notices.add("limited_checks", detail=_UNSEEN)
    if book.date_1904:
        notices.add("date_system_1904")


class _Export:
    """Collects the readings of all sheets and tables."""

    def __init__(self, book: Book, file: str, layout: Layout, notices: NoticeBook) -> None:
        self._book, self._file, self._layout, self._notices = book, file, layout, notices
        self.readings: list[Reading] = []
        self.stated: dict[str, list[Stated]] = {}
        self.sample_columns: dict[int, int] = {}
        self.walked: _Walked = []

    def read_sheet(self, sheet: Sheet) -> None:
        """Walk down all tables of one sheet."""
        self._check_anchors(sheet)
        n_before = len(self.readings)
        walks = []
        for index, table in enumerate(self._layout.tables):
            columns = find_columns(sheet, table, self._last_row(table))
            for value, value_columns in columns.values:
                stated = stated_in_table(columns, value, value_columns)
                self.stated.setdefault(value.characteristic, []).extend(stated)
            if "sample" in columns.sources:
                self.sample_columns[index] = columns.sources["sample"]
            walk = TableWalk(self._book, self._layout, index, columns, self._file, self._notices)
            walk.run()
            walks.append((columns, walk))
        self._settle_lone_names(sheet, [walk for _, walk in walks])
        for _, walk in walks:
            self.readings.extend(sorted(walk.readings, key=lambda reading: reading.row))
        self.walked.append((sheet, [WalkedTable(c, w.end_row, w.used_rows) for c, w in walks]))
        if self._layout.sheet_pattern is not None and len(self.readings) == n_before:
            self._notices.add("sheet_without_data", detail=sheet.name or "")

    def _last_row(self, table: TableLayout) -> int:
        """Return the last row before the next table of the layout."""
        tops = [min((*other.header_rows, other.first_row)) for other in self._layout.tables]
        return min((top - 1 for top in tops if top > table.first_row), default=MAX_ROW)

    def _settle_lone_names(self, sheet: Sheet, walks: Sequence[TableWalk]) -> None:
        """Judge rows that hold a batch cell alone: a missing value of a known batch, or a remark."""
        for walk in walks:
            known = {trimmed(r.group.text).casefold() for r in walk.readings if r.cell is not None}
            for row, label in walk.lone_names:
                if trimmed(label.text).casefold() in known:
                    walk.add_missing(row, label)
                else:
                    walk.used_rows.discard(row)

    def _check_anchors(self, sheet: Sheet) -> None:
        for anchor in self._layout.anchors:
            cell = sheet.cell(anchor.row, anchor.column)
            text = " ".join(cell.text.split()) if cell is not None else ""
            if not fnmatchcase(text, anchor.text):
                ref = str(sheet.ref(anchor.row, anchor.column))
                raise refused(
                    "layout_mismatch",
                    where=ref,
                    found=f"The cell holds {quoted(text)}." if text else "The cell is empty.",
                    expected=f"The layout says {quoted(anchor.text)}.",
                    next_step="Check that the export comes from this instrument, or change the layout.",
                    cells=[ref],
                )

    def check_filled(self) -> None:
        """Refuse an export whose tables hold no values."""
        if any(reading.cell is not None for reading in self.readings):
            return
        raise refused(
            "no_data_rows",
            where=", ".join(sheet.name or "the file" for sheet, _ in self.walked[:5]) or "the export",
            found="The table holds no values.",
            expected="At least one row of measurements.",
            next_step="Check that the export is complete and the layout names the right rows.",
        )
