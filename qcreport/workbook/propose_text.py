"""Guessing how a text export is written; a person has to confirm the guess."""

from __future__ import annotations

import posixpath

from qcreport.workbook.layout_model import TextForm

_TEXT_ENDINGS = (".csv", ".txt", ".tsv", ".tab", ".asc", ".dat", ".prn")
_DELIMITERS = (";", "\t", ",")
_LOOKED_AT = 200


def guess_text_form(data: bytes, name: str) -> TextForm | None:
    """Return how a text export seems to be written; None for what is not named as a text export."""
    if posixpath.splitext(name)[1].lower() not in _TEXT_ENDINGS:
        return None
    encoding = _encoding(data)
    lines = data.decode(encoding, "replace").splitlines()[:_LOOKED_AT]
    return TextForm(delimiter=max(_DELIMITERS, key=lambda mark: _lines_with(lines, mark)), encoding=encoding)


def _encoding(data: bytes) -> str:
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        return "utf-16"
    try:
        data.decode("utf-8")
    except UnicodeDecodeError:
        return "cp1252"
    return "utf-8"


def _lines_with(lines: list[str], mark: str) -> int:
    """Return how many lines hold the most frequent number of marks, where that is not none."""
    counts = [line.count(mark) for line in lines if line.count(mark)]
    return max((counts.count(n) for n in set(counts)), default=0)
