"""Numbers written as text: decimal marks, marks between thousands, and what cannot be decided."""

from __future__ import annotations

import re
from functools import lru_cache
from typing import NamedTuple

_SPACES = " \u00a0\u202f\u2009"
_APOSTROPHES = "'’"
_MINUS = str.maketrans({"−": "-", "–": "-"})
_LIKE_A_NUMBER = re.compile(rf"[+-]?[0-9.,{_SPACES}{_APOSTROPHES}]*[0-9](?:[eE][+-]?[0-9]+)?")
_LEADING = re.compile(r"[+-]?(?:[0-9]|[.,][0-9])")
_ONE_MARK = re.compile(r"[+-]?([0-9]*)([.,])([0-9]+)(?:[eE][+-]?[0-9]+)?")
_GROUPS_ONLY = re.compile(r"[+-]?[0-9]{1,3}(?:([.,])[0-9]{3})(?:\1[0-9]{3})+")
_BOTH = re.compile(r"[+-]?[0-9]{1,3}(?:([.,])[0-9]{3})(?:\1[0-9]{3})*(?!\1)([.,])[0-9]+")
_UNIT_BEHIND = re.compile(r"^([+-]?[0-9][0-9.,]*(?:[eE][+-]?[0-9]+)?)\s*([^\s0-9].*)$", re.DOTALL)


class TextNumber(NamedTuple):
    """A number that was written as text."""

    plain: str
    """With a decimal point and nothing between thousands."""
    decimals: int
    """Digits behind the decimal mark."""
    comma: bool
    """The decimal mark was a comma."""
    grouped: bool
    """Marks between thousands were removed."""


class Evidence(NamedTuple):
    """What one text says about the marks in use."""

    decimal: str | None = None
    """The decimal mark, where the text can only be read with it."""
    thousands: str | None = None
    """The mark between thousands, where the text can only be read with it."""
    ambiguous: bool = False
    """Its one mark may be either: `12.450`."""


def with_plain_minus(text: str) -> str:
    """Return the text with typographic minus signs as `-`."""
    return text.translate(_MINUS)


def like_a_number(text: str) -> bool:
    """Return whether a text holds digits and marks only."""
    return _LIKE_A_NUMBER.fullmatch(text) is not None and _LEADING.match(text) is not None


def split_unit(text: str) -> tuple[str, str]:
    """Return (number, what is written behind it); the latter is empty where there is nothing."""
    found = _UNIT_BEHIND.match(text)
    return (found.group(1), found.group(2).strip()) if found else (text, "")


@lru_cache(maxsize=64)
def _form(decimal: str, thousands: str | None) -> re.Pattern[str]:
    whole = "[0-9]+"
    if thousands is not None:
        marks = _SPACES if thousands in _SPACES else _APOSTROPHES if thousands in _APOSTROPHES else thousands
        whole = (
            rf"(?:[0-9]{{1,3}}(?:(?P<mark>[{re.escape(marks)}])[0-9]{{3}})(?:(?P=mark)[0-9]{{3}})*|[0-9]+)"
        )
    mark = re.escape(decimal)
    return re.compile(
        rf"(?P<sign>[+-]?)(?P<whole>{whole}|)(?:{mark}(?P<rest>[0-9]+))?(?P<exponent>[eE][+-]?[0-9]+)?"
    )


def read_text_number(text: str, *, decimal: str, thousands: str | None) -> TextNumber | None:
    """Return the number that a text is under the given marks, or None where it is none."""
    found = _form(decimal, thousands).fullmatch(text)
    if found is None or not (found["whole"] or found["rest"]):
        return None
    digits = re.sub(r"[^0-9]", "", found["whole"])
    rest = found["rest"] or ""
    plain = f"{found['sign']}{digits or '0'}{'.' + rest if rest else ''}{found['exponent'] or ''}"
    return TextNumber(plain, len(rest), bool(rest) and decimal == ",", digits != found["whole"])


def evidence(text: str) -> Evidence:
    """Return what a text that looks like a number says about its marks."""
    if found := _BOTH.fullmatch(text):
        return Evidence(decimal=found.group(2), thousands=found.group(1))
    if found := _GROUPS_ONLY.fullmatch(text):
        mark = found.group(1)
        return Evidence(decimal="," if mark == "." else ".", thousands=mark)
    found = _ONE_MARK.fullmatch(text)
    if found is None:
        return Evidence()
    whole, mark, rest = found.groups()
    may_be_thousands = len(rest) == 3 and 1 <= len(whole) <= 3 and not whole.startswith("0")
    if may_be_thousands and "e" not in text.lower():
        return Evidence(ambiguous=True)
    return Evidence(decimal=mark)
