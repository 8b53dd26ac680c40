"""The frame of a workbook: relations between its parts and its list of sheets."""

from __future__ import annotations

import posixpath
from dataclasses import dataclass
from typing import NamedTuple

from qcreport.errors import ExportRefusedError
from qcreport.workbook.archive import Archive
from qcreport.workbook.cells import SheetInfo, SheetState
from qcreport.workbook.limits import Limits
from qcreport.workbook.refusals import damaged, quoted, refused
from qcreport.workbook.xml_stream import Attributes, is_on, main_tags, parse_xml, relation_id

_RELATIONSHIP = "http://schemas.openxmlformats.org/package/2006/relationships Relationship"
_CONTENT_TYPES = "http://schemas.openxmlformats.org/package/2006/content-types"
_WORKBOOK_TAGS = main_tags("workbookPr", "sheet", "calcPr", "externalReference")
_MAX_SHEET_NAME = 255


class Relation(NamedTuple):
    """One relation of a part to another."""

    kind: str
    """Last word of its type: `worksheet`, `styles` …"""
    target: str
    """Name of the other part in the archive."""


def read_relations(archive: Archive, part: str) -> dict[str, Relation]:
    """Return the relations of a part by their id; those that lead outside the workbook are left out."""
    folder, name = posixpath.split(part)
    rels_part = posixpath.join(folder, "_rels", f"{name}.rels")
    relations: dict[str, Relation] = {}
    if rels_part not in archive:
        return relations

    def start(element: str, attributes: Attributes) -> None:
        if element != _RELATIONSHIP or attributes.get("TargetMode") == "External":
            return
        target = attributes.get("Target", "")
        path = posixpath.normpath(posixpath.join("/", folder, target)).lstrip("/")
        relation = Relation(attributes.get("Type", "").rsplit("/", 1)[-1], path)
        if relations.setdefault(attributes.get("Id", ""), relation) != relation:
            raise damaged(f"The part {quoted(rels_part)} uses one id twice.")

    parse_xml(archive.chunks(rels_part), part=rels_part, start=start)
    return relations


def read_content_types(archive: Archive) -> dict[str, str]:
    """Return part name (lower case, no leading slash) → content type, of the parts that state their own."""
    types: dict[str, str] = {}

    def start(element: str, attributes: Attributes) -> None:
        if element == f"{_CONTENT_TYPES} Override":
            types[attributes.get("PartName", "").lstrip("/").lower()] = attributes.get("ContentType", "")

    parse_xml(archive.chunks("[Content_Types].xml"), part="[Content_Types].xml", start=start)
    return types


@dataclass(frozen=True, slots=True, kw_only=True)
class WorkbookPart:
    """What the workbook part says."""

    sheets: tuple[SheetInfo, ...]
    """In the order of their tabs."""
    relations: dict[str, Relation]
    """Relations of the workbook part by id."""
    date_1904: bool
    """Dates count from 1904."""
    recalculates: bool
    """All formulas are to be calculated on opening."""
    has_external_links: bool
    """Other workbooks are referred to."""

    def target(self, kind: str) -> str | None:
        """Return the part of a kind (`styles`, `sharedStrings`), or None."""
        return next((relation.target for relation in self.relations.values() if relation.kind == kind), None)


class _WorkbookReader:
    """Collects sheets and settings from the parser's events."""

    def __init__(self, relations: dict[str, Relation], limits: Limits) -> None:
        self.relations = relations
        self.limits = limits
        self.sheets: list[SheetInfo] = []
        self.date_1904 = self.recalculates = self.links = False

    def start(self, name: str, attributes: Attributes) -> None:
        """Take note of the start of an element."""
        tag = _WORKBOOK_TAGS.get(name)
        if tag == "sheet":
            self._sheet(attributes)
        elif tag == "workbookPr":
            self.date_1904 = is_on(attributes.get("date1904"))
        elif tag == "calcPr":
            self.recalculates = is_on(attributes.get("fullCalcOnLoad"))
        elif tag == "externalReference":
            self.links = True

    def _sheet(self, attributes: Attributes) -> None:
        name = attributes.get("name", "")
        relation = self.relations.get(relation_id(attributes) or "")
        if not name or len(name) > _MAX_SHEET_NAME or relation is None:
            raise damaged(f"The sheet {quoted(name)} has no name or leads nowhere.")
        if any(name.casefold() == sheet.name.casefold() for sheet in self.sheets):
            raise damaged(f"Two sheets are named {quoted(name)}.")
        if len(self.sheets) >= self.limits.max_sheets:
            raise _too_many_sheets(self.limits)
        state = attributes.get("state", "visible")
        self.sheets.append(
            SheetInfo(
                name=name,
                state=SheetState(state) if state in tuple(SheetState) else SheetState.VISIBLE,
                has_cells=relation.kind == "worksheet",
                part=relation.target,
            )
        )


def read_workbook_part(archive: Archive, part: str, limits: Limits) -> WorkbookPart:
    """Return the sheets and settings of a workbook."""
    relations = read_relations(archive, part)
    reader = _WorkbookReader(relations, limits)
    parse_xml(archive.chunks(part), part=part, start=reader.start)
    if not reader.sheets:
        raise damaged("The workbook lists no sheets.")
    links = reader.links or any(name.lower().startswith("xl/externallinks/") for name in archive.names())
    return WorkbookPart(
        sheets=tuple(reader.sheets),
        relations=relations,
        date_1904=reader.date_1904,
        recalculates=reader.recalculates,
        has_external_links=links,
    )


def _too_many_sheets(limits: Limits) -> ExportRefusedError:
    return refused(
        "too_large_unpacked",
        where="the workbook",
        found=f"The workbook holds more than {limits.max_sheets} sheets.",
        expected=f"The limit is {limits.max_sheets} sheets.",
        next_step="Export fewer sheets at a time, or ask IT to raise the limit in site.toml.",
    )
