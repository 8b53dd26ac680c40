"""The text that the pages of a report show, read from the drawing instructions and the fonts inside."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from io import BytesIO
from typing import Any

from qcreport.signing.boundary import reading_pdf

_DEEPEST = 8
_CODE_BYTES = 2
_SHOWING = {"Tj", "TJ", "'", '"'}
_SECTION = re.compile(rb"begin(bfchar|bfrange)(.*?)end\1", re.DOTALL)
_HEX = re.compile(rb"<([0-9A-Fa-f\s]*)>|(\[)|(\])")
_UNKNOWN = "\ufffd"


def page_texts(pdf: bytes) -> tuple[str, ...]:
    """Return what each page shows, without blanks, in the order in which it is drawn.

    Blanks are left out because a line may break elsewhere on another machine. What lies over a page, as the
    look of a signature does, is not read.

    Raises
    ------
    NotOurReportError
        Where the file cannot be read.
    """
    import pikepdf

    with reading_pdf(), pikepdf.open(BytesIO(pdf), suppress_warnings=True) as document:
        fonts: dict[Any, dict[bytes, str]] = {}
        return tuple(
            "".join("".join(_drawn(page.obj, page.obj, fonts, _DEEPEST)).split()) for page in document.pages
        )


def _drawn(holder: Any, drawing: Any, fonts: dict[Any, dict[bytes, str]], depth: int) -> Iterator[str]:
    """Yield the texts that a page, or a form on it, shows."""
    import pikepdf

    if depth == 0:
        return
    resources = holder.get("/Resources", pikepdf.Dictionary())
    codes: Mapping[bytes, str] = {}
    for instruction in pikepdf.parse_content_stream(drawing):
        operator, operands = str(instruction.operator), instruction.operands
        if operator == "Tf":
            codes = _codes(resources.Font[str(operands[0])], fonts)
        elif operator in _SHOWING:
            yield from (_decoded(piece, codes) for piece in _strings(operands[-1]))
        elif operator == "Do":
            shown = resources.XObject[str(operands[0])]
            if shown.get("/Subtype") == "/Form":
                yield from _drawn(shown, shown, fonts, depth - 1)


def _strings(operand: Any) -> Iterator[bytes]:
    import pikepdf

    if isinstance(operand, pikepdf.Array):
        yield from (bytes(item) for item in operand if isinstance(item, pikepdf.String))
    elif isinstance(operand, pikepdf.String):
        yield bytes(operand)


def _decoded(codes_shown: bytes, codes: Mapping[bytes, str]) -> str:
    pieces = (codes_shown[i : i + _CODE_BYTES] for i in range(0, len(codes_shown), _CODE_BYTES))
    return "".join(codes.get(piece, _UNKNOWN) for piece in pieces)


def _codes(font: Any, known: dict[Any, dict[bytes, str]]) -> dict[bytes, str]:
    """Return what each code of a font stands for, by its own table."""
    name = font.objgen
    if name not in known or name == (0, 0):
        known[name] = to_unicode(font.ToUnicode.read_bytes()) if "/ToUnicode" in font else {}
    return known[name]


def to_unicode(table: bytes) -> dict[bytes, str]:
    """Return the entries of a font's table of characters, as far as it names two-byte codes."""
    found: dict[bytes, str] = {}
    for kind, body in _SECTION.findall(table):
        words = [_word(match) for match in _HEX.finditer(body)]
        found.update(_single(words) if kind == b"bfchar" else _ranges(words))
    return found


def _word(match: re.Match[bytes]) -> bytes | str:
    """Return the bytes of a hexadecimal word, or a bracket."""
    if match.group(1) is None:
        return match.group(0).decode("ascii")
    return bytes.fromhex(match.group(1).decode("ascii"))


def _single(words: list[bytes | str]) -> Iterator[tuple[bytes, str]]:
    for code, text in zip(words[::2], words[1::2], strict=False):
        if isinstance(code, bytes) and isinstance(text, bytes):
            yield code, text.decode("utf-16-be", "replace")


def _ranges(words: list[bytes | str]) -> Iterator[tuple[bytes, str]]:
    """Yield the entries of ranges: first code, last code, and one text that counts up or a list of texts."""
    at = 0
    while at + 2 < len(words):
        first, last, target = words[at : at + 3]
        if not isinstance(first, bytes) or not isinstance(last, bytes):
            return
        start, count = (
            int.from_bytes(first, "big"),
            1 + int.from_bytes(last, "big") - int.from_bytes(first, "big"),
        )
        if isinstance(target, bytes):
            base = int.from_bytes(target, "big")
            texts = [(base + step).to_bytes(len(target), "big") for step in range(min(count, 1 << 16))]
            at += 3
        else:
            texts = [word for word in words[at + 3 : at + 3 + count] if isinstance(word, bytes)]
            at += 5 + len(texts) - 1
        for step, text in enumerate(texts):
            yield (start + step).to_bytes(len(first), "big"), text.decode("utf-16-be", "replace")
