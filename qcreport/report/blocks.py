"""What a section is made of. Every text is ready to print; the pages only set it."""

from __future__ import annotations

from dataclasses import dataclass

from qcreport.report.shapes import Drawing


@dataclass(frozen=True, slots=True, kw_only=True)
class Paragraph:
    """Sentences."""

    text: str
    note: bool = False
    """Smaller, for cautions and sources."""
    kind: str = "paragraph"


@dataclass(frozen=True, slots=True, kw_only=True)
class Subheading:
    """The title of a part of a section."""

    text: str
    anchor: str = ""
    """Where links from page 1 arrive."""
    kind: str = "subheading"


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """One column of a table."""

    title: str
    share: int
    """Width in percent."""
    numeric: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """A table; the first column heads its row."""

    columns: tuple[Column, ...]
    rows: tuple[tuple[str, ...], ...]
    kind: str = "table"


@dataclass(frozen=True, slots=True, kw_only=True)
class Formula:
    """A line of arithmetic that can be redone by hand."""

    text: str
    kind: str = "formula"


@dataclass(frozen=True, slots=True, kw_only=True)
class Figure:
    """A drawing."""

    drawing: Drawing
    caption: str = ""
    kind: str = "figure"


@dataclass(frozen=True, slots=True, kw_only=True)
class Facts:
    """Names with what is said of them."""

    rows: tuple[tuple[str, str], ...]
    digests: bool = False
    """Set in tabular figures, in groups."""
    kind: str = "facts"


@dataclass(frozen=True, slots=True, kw_only=True)
class Steps:
    """Steps in order; (what to do, what to type or empty)."""

    rows: tuple[tuple[str, str], ...]
    kind: str = "steps"


@dataclass(frozen=True, slots=True, kw_only=True)
class Cells:
    """The values of one group, each with its cell."""

    label: str
    text: str
    kind: str = "cells"


Block = Paragraph | Subheading | Table | Formula | Figure | Facts | Steps | Cells


@dataclass(frozen=True, slots=True, kw_only=True)
class Section:
    """One section of the report."""

    anchor: str
    heading: str
    blocks: tuple[Block, ...]
