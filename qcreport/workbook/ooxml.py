"""Opening .xlsx and .xlsm workbooks, transitional and strict."""

from __future__ import annotations

from collections.abc import Iterable

from qcreport.errors import ExportRefusedError
from qcreport.workbook.archive import Archive
from qcreport.workbook.cells import Book, CellStyle, Sheet, SheetInfo
from qcreport.workbook.limits import Limits
from qcreport.workbook.package import WorkbookPart, read_relations, read_workbook_part
from qcreport.workbook.places import Area, parse_area, parse_cell
from qcreport.workbook.refusals import refused
from qcreport.workbook.rich_text import TextCollector
from qcreport.workbook.rows import Rows
from qcreport.workbook.sheet_xml import scan_sheet
from qcreport.workbook.styles import read_styles
from qcreport.workbook.xml_stream import Attributes, main_tags, parse_xml, refuse_doctype

_STRING_TAGS = main_tags("si", "t", "r", "rPh", "strike")
_TABLE_TAGS = main_tags("autoFilter", "filterColumn")
_XML_ENDINGS = (".xml", ".rels", ".vml")
_COMMENT_KINDS = ("comments", "threadedComment")


def read_shared_strings(chunks: Iterable[bytes], *, part: str, limit: int) -> list[tuple[str, bool]]:
    """Return (text, struck) of the strings that cells point to."""
    strings: list[tuple[str, bool]] = []
    collector: TextCollector | None = None

    def start(name: str, attributes: Attributes) -> None:
        nonlocal collector
        tag = _STRING_TAGS.get(name)
        if tag == "si":
            collector = TextCollector()
        elif collector is not None:
            collector.start(tag, attributes)

    def end(name: str) -> None:
        nonlocal collector
        tag = _STRING_TAGS.get(name)
        if tag == "si" and collector is not None:
            strings.append((collector.finished(), collector.struck))
            collector = None
            if len(strings) > limit:
                raise too_many_cells(limit, "texts")
        elif collector is not None:
            collector.end(tag)

    def text(piece: str) -> None:
        if collector is not None:
            collector.text(piece)

    parse_xml(chunks, part=part, start=start, end=end, text=text)
    return strings


class _Workbook:
    """A workbook whose sheets are scanned when asked for."""

    def __init__(self, archive: Archive, part: WorkbookPart, limits: Limits) -> None:
        self._archive, self._limits = archive, limits
        self._n_cells = 0
        styles_part = part.target("styles")
        self.styles: tuple[CellStyle, ...] = (CellStyle(),)
        if styles_part is not None:
            self.styles = read_styles(archive.chunks(styles_part), part=styles_part)
        strings_part = part.target("sharedStrings")
        self._strings: list[tuple[str, bool]] = []
        if strings_part is not None:
            chunks = archive.chunks(strings_part)
            self._strings = read_shared_strings(chunks, part=strings_part, limit=limits.max_cells)

    def load(self, info: SheetInfo) -> Sheet:
        """Scan one sheet with its comments and filters."""
        if not info.has_cells:
            return Sheet(name=info.name, rows=Rows())
        scan = scan_sheet(
            self._archive.chunks(info.part),
            part=info.part,
            strings=self._strings,
            n_styles=len(self.styles),
            count=lambda rows, cells: self._count(info.name, rows, cells),
        )
        comments, table_filters = self._beside(info.part)
        return Sheet(
            name=info.name,
            rows=scan.rows.in_order(),
            hidden_rows=frozenset(scan.hidden_rows),
            hidden_columns=tuple(scan.hidden_columns),
            filters=(*scan.filters, *table_filters),
            merges=tuple(scan.merges),
            comments=frozenset(comments),
            extent=scan.extent(),
        )

    def _count(self, sheet: str, rows: int, cells: int) -> None:
        self._n_cells += cells
        if self._n_cells > self._limits.max_cells:
            raise too_many_cells(self._limits.max_cells, "filled cells")
        if rows > self._limits.max_rows:
            raise too_many_rows(sheet, self._limits.max_rows)

    def _beside(self, sheet_part: str) -> tuple[set[tuple[int, int]], list[Area]]:
        """Return the commented cells and the filtered tables of a sheet."""
        comments: set[tuple[int, int]] = set()
        filters: list[Area] = []
        for kind, target in read_relations(self._archive, sheet_part).values():
            if target not in self._archive:
                continue
            if kind in _COMMENT_KINDS:
                self._read_comments(target, comments)
            elif kind == "table":
                self._read_table(target, filters)
        return comments, filters

    def _read_comments(self, part: str, comments: set[tuple[int, int]]) -> None:
        def start(name: str, attributes: Attributes) -> None:
            if name.rsplit(" ", 1)[-1] in _COMMENT_KINDS or name.endswith(" comment"):
                place = parse_cell(attributes.get("ref", ""))
                if place is not None:
                    comments.add(place)

        parse_xml(self._archive.chunks(part), part=part, start=start)

    def _read_table(self, part: str, filters: list[Area]) -> None:
        area: Area | None = None

        def start(name: str, attributes: Attributes) -> None:
            nonlocal area
            tag = _TABLE_TAGS.get(name)
            if tag == "autoFilter":
                area = parse_area(attributes.get("ref", ""))
            elif tag == "filterColumn" and area is not None:
                filters.append(area)
                area = None

        parse_xml(self._archive.chunks(part), part=part, start=start)

    def check_rest(self) -> None:
        """Unpack what was not read: a damaged or dangerous part spoils the whole file."""
        for name in self._archive.unread():
            chunks = self._archive.chunks(name)
            if name.lower().endswith(_XML_ENDINGS):
                refuse_doctype(chunks, part=name)
            else:
                for _ in chunks:
                    pass


def open_ooxml(archive: Archive, part_name: str, limits: Limits) -> Book:
    """Return the workbook in an archive whose workbook part is known."""
    part = read_workbook_part(archive, part_name, limits)
    workbook = _Workbook(archive, part, limits)
    macros = any(name.lower().endswith("vbaproject.bin") for name in archive.names())
    macro_sheets = any("macrosheet" in relation.kind.lower() for relation in part.relations.values())
    return Book(
        sheets=part.sheets,
        load=workbook.load,
        check_rest=workbook.check_rest,
        styles=workbook.styles,
        date_1904=part.date_1904,
        recalculates=part.recalculates,
        has_macros=macros or macro_sheets,
        has_external_links=part.has_external_links,
    )


def too_many_rows(sheet: str | None, limit: int) -> ExportRefusedError:
    """Return the refusal of a sheet with too many filled rows."""
    return refused(
        "too_many_rows",
        where="the file" if sheet is None else f"sheet {sheet}",
        found=f"There are more than {limit:,} filled rows.",
        expected=f"The limit is {limit:,} rows in one sheet.",
        next_step="Export fewer rows at a time, or ask IT to raise the limit in site.toml.",
    )


def too_many_cells(limit: int, what: str) -> ExportRefusedError:
    """Return the refusal of a workbook with too many cells, texts or sheets."""
    return refused(
        "too_many_cells",
        where="the workbook",
        found=f"There are more than {limit:,} {what}.",
        expected=f"The limit is {limit:,} filled cells in the sheets that are read.",
        next_step="Export fewer rows or sheets at a time, or ask IT to raise the limit in site.toml.",
    )
