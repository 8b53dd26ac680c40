"""File names as they may be shown to people and written to other file systems; they are hostile data."""

from __future__ import annotations

import os
import unicodedata
from pathlib import Path

WHY = "why.txt"

_NAME_BYTES = 200
_ENDING_BYTES = 20


def one_line(text: str) -> str:
    """Return text that stays on its line and says what it holds: what cannot be seen is escaped.

    Line ends, control and direction characters, and bytes of a name that were no UTF-8 come out as escapes.
    """
    return "".join(c if _visible(c) else c.encode("unicode_escape").decode("ascii") for c in text)


def shortened(name: str, max_bytes: int = _NAME_BYTES) -> str:
    """Return a file name cut to what file systems take, with its ending kept.

    A name that would hide the file or stand for `why.txt` gets `export-` in front.
    """
    if name.startswith(".") or name.casefold() == WHY:
        name = f"export-{name}"
    if len(os.fsencode(name)) <= max_bytes:
        return name
    ending = Path(name).suffix
    if len(os.fsencode(ending)) > _ENDING_BYTES:
        ending = ""
    stem = name.removesuffix(ending)
    while len(os.fsencode(stem + ending)) > max_bytes:
        stem = stem[:-1]
    return stem + ending


def _visible(character: str) -> bool:
    return character.isprintable() or unicodedata.category(character) == "Zs"
