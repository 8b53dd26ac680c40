"""Texts of cells: rich-text runs, phonetic hints and escapes."""

from __future__ import annotations

import re

from qcreport.workbook.refusals import damaged
from qcreport.workbook.xml_stream import Attributes, is_on

MAX_TEXT = 32_767
"""Characters that a cell can hold."""

_ESCAPE = re.compile(r"_x([0-9A-Fa-f]{4})_")
_LONE_SURROGATE = re.compile("[\ud800-\udfff]")


def unescape(text: str) -> str:
    """Return a stored text with its `_x0020_` escapes replaced; half a surrogate pair becomes U+FFFD."""
    if "_x" not in text:
        return text
    plain = _ESCAPE.sub(lambda found: chr(int(found.group(1), 16)), text)
    if _LONE_SURROGATE.search(plain):
        plain = plain.encode("utf-16-le", "surrogatepass").decode("utf-16-le", "replace")
    return plain


class TextCollector:
    """Collects the text of one `si` or `is` element from the parser's events."""

    __slots__ = ("_length", "_phonetic", "_pieces", "_reading", "_run_struck", "struck")

    def __init__(self) -> None:
        self._pieces: list[str] = []
        self._length = 0
        self._phonetic = False
        self._reading = False
        self._run_struck = False
        self.struck = False

    def start(self, tag: str | None, attributes: Attributes) -> None:
        """Take note of an element inside; `tag` is None outside the main namespaces."""
        if tag == "t":
            self._reading = not self._phonetic
        elif tag == "rPh":
            self._phonetic = True
        elif tag == "r":
            self._run_struck = False
        elif tag == "strike":
            self._run_struck = "val" not in attributes or is_on(attributes["val"])

    def end(self, tag: str | None) -> None:
        """Take note of the end of an element inside."""
        if tag == "t":
            self._reading = False
        elif tag == "rPh":
            self._phonetic = False
        elif tag == "r":
            self._run_struck = False

    def text(self, piece: str) -> None:
        """Take a piece of character data."""
        if not self._reading:
            return
        self._length += len(piece)
        if self._length > 8 * MAX_TEXT:
            raise damaged(f"A cell holds a text of more than {MAX_TEXT:,} characters.")
        self._pieces.append(piece)
        if self._run_struck and not piece.isspace():
            self.struck = True

    def finished(self) -> str:
        """Return the whole text."""
        return checked_text("".join(self._pieces))


def checked_text(stored: str) -> str:
    """Return a stored text unescaped; refuse one that no cell can hold."""
    text = unescape(stored)
    if len(text) > MAX_TEXT:
        raise damaged(f"A cell holds a text of {len(text):,} characters; a cell holds at most {MAX_TEXT:,}.")
    return text
