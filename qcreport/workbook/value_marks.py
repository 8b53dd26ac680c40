"""Value cells that hold text: censoring marks, units behind the number, and the decimal mark in use."""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

from qcreport.measurements import CellRef, Censoring
from qcreport.workbook.layout_model import NumberForms
from qcreport.workbook.number_text import (
    TextNumber,
    evidence,
    like_a_number,
    read_text_number,
    split_unit,
    with_plain_minus,
)
from qcreport.workbook.units import looks_like_unit, same_unit
from qcreport.workbook.value_refusals import (
    refuse_ambiguous,
    refuse_mixed_marks,
    refuse_units_behind,
    refuse_unreadable,
)

_STANDARD_MARKS = (
    ("<=", Censoring.AT_MOST), ("=<", Censoring.AT_MOST), ("≤", Censoring.AT_MOST),
    (">=", Censoring.AT_LEAST), ("=>", Censoring.AT_LEAST), ("≥", Censoring.AT_LEAST),
    ("<", Censoring.BELOW), (">", Censoring.ABOVE),
)  # fmt: skip


class TextValue(NamedTuple):
    """The parts of a value that is written as text."""

    censored: Censoring | None
    """What the mark before it says."""
    number: str
    """Digits and marks."""
    unit: str
    """The unit behind it, or empty."""


def split_text_value(text: str, forms: NumberForms, unit: str) -> TextValue | None:
    """Return the parts of a text, or None where it is neither a number nor a limit.

    The unit behind a number may be the right one or another known unit; which one is judged later.
    """
    censored, rest = _split_mark(text, forms)
    rest = with_plain_minus(rest)
    if like_a_number(rest):
        return TextValue(censored, rest, "")
    number, behind = split_unit(rest)
    if not behind or not like_a_number(number):
        return None
    if same_unit(behind, unit) or looks_like_unit(behind):
        return TextValue(censored, number, behind)
    return None


def _split_mark(text: str, forms: NumberForms) -> tuple[Censoring | None, str]:
    for mark, censored in (
        *_STANDARD_MARKS,
        (forms.below, Censoring.BELOW),
        (forms.above, Censoring.ABOVE),
    ):
        if mark is not None and mark.strip() and text.startswith(mark.strip()):
            return censored, text[len(mark.strip()) :].strip()
    return None, text


def read_text_values(
    texts: Sequence[tuple[CellRef, TextValue]], forms: NumberForms, unit: str, *, n_plain: int
) -> list[TextNumber]:
    """Return the numbers of the text values of one characteristic.

    Parameters
    ----------
    texts : sequence of (CellRef, TextValue)
        In export order.
    forms : NumberForms
        The marks that the layout states.
    unit : str
        The unit of the characteristic.
    n_plain : int
        How many values of the characteristic are stored as numbers beside these.
    """
    other = [(ref, parts.unit) for ref, parts in texts if parts.unit and not same_unit(parts.unit, unit)]
    if other:
        raise refuse_units_behind(other, unit, all_values=len(other) == len(texts) + n_plain)
    decimal, thousands = _marks(texts, forms)
    numbers: list[TextNumber] = []
    wrong: list[tuple[CellRef, str]] = []
    for ref, parts in texts:
        number = read_text_number(parts.number, decimal=decimal, thousands=thousands)
        if number is None:
            wrong.append((ref, parts.number))
        else:
            numbers.append(number)
    if wrong:
        raise _refuse_wrong(wrong, texts, decimal, stated=forms.decimal is not None)
    return numbers


def _marks(texts: Sequence[tuple[CellRef, TextValue]], forms: NumberForms) -> tuple[str, str | None]:
    """Return (decimal mark, mark between thousands): as stated, else as the texts themselves decide."""
    if forms.decimal is not None:
        return forms.decimal, forms.thousands
    if forms.thousands in (".", ","):
        return ("," if forms.thousands == "." else "."), forms.thousands
    first: dict[str, CellRef] = {}
    examples: dict[str, str] = {}
    thousands: str | None = forms.thousands
    ambiguous: list[tuple[CellRef, str]] = []
    for ref, parts in texts:
        says = evidence(parts.number)
        if says.ambiguous:
            ambiguous.append((ref, parts.number))
        if says.decimal is not None:
            first.setdefault(says.decimal, ref)
            examples.setdefault(says.decimal, parts.number)
        thousands = says.thousands or thousands
    if len(first) > 1:
        raise refuse_mixed_marks([(first[mark], examples[mark]) for mark in first])
    if not first and ambiguous:
        raise refuse_ambiguous([ref for ref, _ in ambiguous], ambiguous[0][1])
    return next(iter(first), "."), thousands


def _refuse_wrong(
    wrong: list[tuple[CellRef, str]],
    texts: Sequence[tuple[CellRef, TextValue]],
    decimal: str,
    *,
    stated: bool,
) -> Exception:
    """Return why numbers do not fit the marks: mixed with others that do, or against the layout."""
    odd = [pair for pair in wrong if "," in pair[1] or "." in pair[1]]
    if not odd:
        return refuse_unreadable(wrong)
    wrong_cells = {ref for ref, _ in wrong}
    fitting = [
        (ref, parts.number) for ref, parts in texts if ref not in wrong_cells and decimal in parts.number
    ]
    return refuse_mixed_marks([*fitting[:1], *odd], stated=decimal if stated else None)
