"""What the pages print: frozen, every text ready, every number rounded."""

from __future__ import annotations

from dataclasses import dataclass

from qcreport.report.blocks import Section
from qcreport.report.shapes import Drawing


@dataclass(frozen=True, slots=True, kw_only=True)
class AnswerLine:
    """One sentence with its mark."""

    mark: Drawing
    word: str
    """beyond, open, within or not compared."""
    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Answer:
    """The answer for one characteristic on page 1."""

    title: str
    """Title of the characteristic; empty where there is only one."""
    lines: tuple[AnswerLine, ...]
    rest: str
    """What is said of the other pairs; may be empty."""
    more: str
    """`12 more, page`; empty where everything is said here."""
    target: str
    """Anchor that `more` points to."""


@dataclass(frozen=True, slots=True, kw_only=True)
class FieldBox:
    """A box for a signature."""

    name: str
    """Field name in the PDF: Seal, Reviewed or Authorised."""
    role: str
    """What the field is for, as printed."""
    text: str
    """Printed in the box."""
    entries: tuple[str, ...]
    """Ruled entries: name, meaning, time with zone."""
    description: str
    """For readers who do not see the box."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Running:
    """What stands on every page."""

    identity: str
    """Report number and revision."""
    laboratory: str
    page: str
    of: str
    end_mark: str
    demonstration: str
    """Empty in a real site."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Letterhead:
    """Who issues the report."""

    laboratory: str
    address: tuple[str, ...]
    place_of_work: str
    """A whole line; empty where it is the address."""
    customer: str
    """A whole line; empty where none is named."""


@dataclass(frozen=True, slots=True, kw_only=True)
class FirstPage:
    """Page 1."""

    answer_heading: str
    answers: tuple[Answer, ...]
    answers_more: str
    """Characteristics answered on another page; may be empty."""
    answers_target: str
    counts: tuple[str, ...]
    """How many values; flagged or left out, and what that changes."""
    values_heading: str
    values: Drawing | None
    apart_heading: str
    apart: Drawing | None
    figure_title: str
    """Which characteristic the figure shows; empty where there is only one."""
    basis_heading: str
    basis: tuple[tuple[str, str], ...]
    """Export, product, dates, plan, rule, run."""
    signing_heading: str
    signing_rule: str
    fields: tuple[FieldBox, ...]
    cautions: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class ReportModel:
    """One report, ready to be set."""

    language: str
    page_size: str
    """A4 or Letter."""
    title: str
    subtitle: str
    made_at: str
    """UTC, ISO 8601, for the document's dates."""
    identity: tuple[tuple[str, str], ...]
    """Number, revision, date and time."""
    letterhead: Letterhead
    running: Running
    first: FirstPage
    sections: tuple[Section, ...]
    closing_heading: str
    closing: tuple[str, ...]
    """Cautions that hold for every report; the end mark stands below them."""
    unprintable: tuple[str, ...]
    """Characters that the fonts lack and that are printed as U+XXXX."""
