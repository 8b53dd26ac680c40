"""What the pinned fonts can draw, and how wide it is."""

from __future__ import annotations

import unicodedata
from collections.abc import Iterable
from functools import cache
from typing import Any

from qcreport.report.assets import font_bytes

_ALLOWED = frozenset("\t\n\r⁻")
"""Layout characters, and the raised minus that the pages set as a superscript."""
_HYPHENS = {"\u2011": "-", "\u00a0": " "}


@cache
def _font(name: str) -> Any:
    from io import BytesIO

    from fontTools.ttLib import TTFont  # type: ignore[import-untyped] # it ships no types

    return TTFont(BytesIO(font_bytes(name)), lazy=True)


@cache
def _drawn() -> frozenset[int]:
    sets = [
        frozenset(_font(name).getBestCmap()) for name in ("sans-400", "sans-600", "serif-400", "serif-600")
    ]
    return frozenset.intersection(*sets)


def _is_drawn(character: str) -> bool:
    if character in _ALLOWED:
        return True
    if unicodedata.category(character) in ("Cc", "Cf", "Co", "Cs", "Cn"):
        return False  # directions and other invisible marks would change how the rest reads
    return ord(character) in _drawn()


def printable(text: str, missing: set[str]) -> str:
    """Return `text` with what the fonts cannot draw as U+XXXX, and add those characters to `missing`."""
    if text.isascii() and text.isprintable():
        return text
    text = unicodedata.normalize("NFC", text)
    out = []
    for character in text:
        if _is_drawn(character):
            out.append(character)
        else:
            missing.add(character)
            out.append(f"[U+{ord(character):04X}]")
    return "".join(out)


@cache
def _advances(face: str) -> dict[str, float]:
    font = _font(face)
    metrics, scale = font["hmtx"], 1 / font["head"].unitsPerEm
    return {chr(code): metrics[glyph][0] * scale for code, glyph in font.getBestCmap().items()}


def width_of(text: str, size: float, face: str = "sans-400") -> float:
    """Return the width of `text` in one of the pinned faces at `size` points."""
    advances = _advances(face)
    return size * sum(advances.get(_HYPHENS.get(c, c), 0.6) for c in text)


def lines_of(text: str, size: float, width: float, most: int) -> tuple[str, ...]:
    """Return `text` broken into at most `most` lines of `width` points; what does not fit loses its middle.

    A break falls after a space or hyphen where one is near, else anywhere.
    """
    lines: list[str] = []
    rest = text
    while rest:
        count = _fitting(rest, size, width)
        if count >= len(rest):
            lines.append(rest)
            break
        if len(lines) == most - 1:
            lines.append(_shortened(rest, size, width))
            break
        cut = _break_before(rest, max(count, 1))
        lines.append(rest[:cut].rstrip())
        rest = rest[cut:].lstrip()
    return tuple(lines) or ("",)


def _shortened(text: str, size: float, width: float) -> str:
    """Return `text` without its middle: names of one kind differ at their ends as often as at their heads."""
    room = width - width_of("…", size)
    head = text[: max(_fitting(text, size, room * 0.6), 1)]
    tail = text[len(text) - max(_fitting(text[::-1], size, room * 0.4), 1) :]
    return f"{head.rstrip()}…{tail.lstrip()}"


def _fitting(text: str, size: float, width: float) -> int:
    used = 0.0
    for index, character in enumerate(text):
        used += width_of(character, size)
        if used > width:
            return index
    return len(text)


def _break_before(text: str, count: int) -> int:
    places: Iterable[int] = (i for i in range(count, count // 2, -1) if text[i - 1] in " -_/.,")
    return next(iter(places), count)
