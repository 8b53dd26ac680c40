"""Number formats: how a spreadsheet shows a stored number."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from decimal import ROUND_HALF_UP, Decimal
from functools import lru_cache
from typing import Final

BUILT_IN: Final = {
    0: "General", 1: "0", 2: "0.00", 3: "#,##0", 4: "#,##0.00", 5: "#,##0", 6: "#,##0", 7: "#,##0.00",
    8: "#,##0.00", 9: "0%", 10: "0.00%", 11: "0.00E+00", 12: "# ?/?", 13: "# ??/??", 14: "mm-dd-yy",
    15: "d-mmm-yy", 16: "d-mmm", 17: "mmm-yy", 18: "h:mm AM/PM", 19: "h:mm:ss AM/PM", 20: "h:mm",
    21: "h:mm:ss", 22: "m/d/yy h:mm", 37: "#,##0", 38: "#,##0", 39: "#,##0.00", 40: "#,##0.00",
    41: "#,##0", 42: "#,##0", 43: "#,##0.00", 44: "#,##0.00", 45: "mm:ss", 46: "[h]:mm:ss", 47: "mm:ss.0",
    48: "##0.0E+0", 49: "@", 59: "0", 60: "0.00", 61: "#,##0", 62: "#,##0.00", 67: "0%", 68: "0.00%",
    69: "# ?/?", 70: "# ??/??",
    **dict.fromkeys(range(23, 27), "General"),
    **dict.fromkeys((*range(27, 37), *range(50, 59), *range(71, 82)), "yyyy/m/d"),
}  # fmt: skip
"""Formats that files name by number only."""

_BRACKETS = re.compile(r"\[([^\]]*)\]")
_ELAPSED = re.compile(r"^(h+|m+|s+)$", re.IGNORECASE)
_TOKEN = re.compile(r'"([^"]*)"|\\(.)|_.|\*.|(.)', re.DOTALL)
_DATE_WORDS = re.compile(r"AM/PM|A/P|General", re.IGNORECASE)
_SHOWN_AS_THEY_ARE = frozenset(" -+()$€£")
_PLACEHOLDERS = frozenset("0#?")
_PLAIN = re.compile(r"^(#*0*)(?:\.(0+))?$")


@dataclass(frozen=True, slots=True, kw_only=True)
class NumberFormat:
    """What matters of one number format (its section for positive numbers)."""

    code: str
    """As written in the file."""
    general: bool = False
    """No format of its own."""
    decimals: int | None = None
    """Fixed decimals shown; None where they vary."""
    percent: bool = False
    """Shown times 100 with a % sign."""
    date: bool = False
    """Shows a date or a time."""
    exponent: bool = False
    """Scientific notation."""
    fraction: bool = False
    """Shown as a common fraction."""
    divides: bool = False
    """Shown divided by a thousand or more."""
    text: bool = False
    """Shown as text (`@`)."""
    prefix: str = ""
    """Literal text before the digits."""
    digits: str = ""
    """The digit placeholders; `|` where literal text stands between them."""
    suffix: str = ""
    """Literal text behind the digits."""

    def shown(self, stored: str) -> str | None:
        """Return a stored number as the cell shows it; None where that is no plain run of digits.

        Only formats of zeros, with literal text around them, give codes back as they were meant.
        """
        if not math.isfinite(float(stored)):
            return None
        number = Decimal(repr(float(stored)))
        if self.general or self.text:
            plain = f"{number:f}".removesuffix(".0")
            return plain if len(plain.lstrip("-")) <= 11 else None
        found = _PLAIN.match(self.digits)
        varies = self.percent or self.date or self.exponent or self.fraction or self.divides
        if found is None or not self.digits or varies or number < 0:
            return None
        decimals = len(found.group(2) or "")
        rounded = number.quantize(Decimal(1).scaleb(-decimals), rounding=ROUND_HALF_UP)
        whole, point, rest = f"{rounded:f}".partition(".")
        return self.prefix + whole.rjust(found.group(1).count("0"), "0") + point + rest + self.suffix


GENERAL: Final = NumberFormat(code="General", general=True)


@lru_cache(maxsize=4096)
def parse_number_format(code: str) -> NumberFormat:
    """Return what a format code shows."""
    if code.strip().lower() in ("", "general"):
        return GENERAL
    section = _first_section(code)
    elapsed = any(_ELAPSED.match(inner) for inner in _BRACKETS.findall(section))
    section = _BRACKETS.sub("", section)
    literals, bare = _split_literals(section)
    words = _DATE_WORDS.sub("", bare)
    placeholders = "".join(c for c in bare if c in "0#?.,|")
    exponent = re.search(r"[eE][+-]", bare) is not None
    date = elapsed or (not exponent and re.search(r"[ymdhsYMDHS]", words) is not None)
    mantissa = re.split(r"[eE][+-]", bare)[0]
    fixed = re.search(r"\.(0*)(?![0#?])", mantissa)
    varying = re.search(r"\.[0#?]*[#?]", mantissa) is not None
    has_digits = re.search(r"[0#?]", bare) is not None
    decimals = (len(fixed.group(1)) if fixed else 0) if has_digits and not varying else None
    prefix, suffix = literals
    general = not date and "general" in bare.lower() and not has_digits
    return NumberFormat(
        code=code,
        general=general and not prefix and not suffix,
        decimals=None if date or exponent or general else decimals,
        percent="%" in bare,
        date=date and not general,
        exponent=exponent,
        fraction="/" in bare and not date,
        divides=re.search(r"[0#?],+(?![0#?,])", mantissa) is not None,
        text=bare.strip() == "@",
        prefix=prefix,
        digits=placeholders,
        suffix=suffix,
    )


def _first_section(code: str) -> str:
    """Return the section for positive numbers: up to the first `;` outside quotes."""
    quoted = escaped = False
    for index, letter in enumerate(code):
        if escaped:
            escaped = False
        elif letter == "\\":
            escaped = True
        elif letter == '"':
            quoted = not quoted
        elif letter == ";" and not quoted:
            return code[:index]
    return code


def _split_literals(section: str) -> tuple[tuple[str, str], str]:
    """Return ((literal text before, behind the digits), the section without its literal text).

    Literal text between two placeholders leaves a `|` in the section.
    """
    before, behind, bare = "", "", ""
    digits_seen = False
    for literal, escaped, plain in _TOKEN.findall(section):
        exponent_sign = plain in ("+", "-") and bare[-1:] in ("E", "e")
        shown = bool(plain) and plain in _SHOWN_AS_THEY_ARE and not exponent_sign
        text = literal or escaped or (plain if shown else "")
        if text:
            before, behind = (before, behind + text) if digits_seen else (before + text, behind)
        elif plain in _PLACEHOLDERS:
            bare += "|" + plain if behind else plain
            digits_seen = True
        else:
            bare += plain
    return (before, behind), bare
