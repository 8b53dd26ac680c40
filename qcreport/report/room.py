"""Whether page 1 has room for the figure: estimated, so that most reports are laid out only once."""

from __future__ import annotations

import math

from qcreport.report.glyphs import width_of
from qcreport.report.model import FirstPage

_HEIGHTS = {"A4": 746.0, "Letter": 696.0}
_TEXT, _BESIDE_MARK, _BESIDE_NAME = 430.0, 371.0, 354.0
_AROUND = 200.0
"""Letterhead, title, signature boxes, cautions and the space between all parts, in points."""


def has_room(first: FirstPage, page_size: str) -> bool:
    """Return whether answers, figure, basis and signature boxes are likely to fit on page 1."""
    used = _AROUND
    for answer in first.answers:
        used += 15.0 if answer.title else 0.0
        for index, line in enumerate(answer.lines):
            large = index == 0 and len(first.answers) == 1
            face, size, leading = ("serif-600", 13.0, 17.0) if large else ("serif-400", 10.0, 14.0)
            used += _lines(line.text, size, _BESIDE_MARK, face) * leading + 3
        used += 17.0 if answer.rest or answer.more else 0.0
    used += sum(_lines(text, 8.5, _TEXT) * 11.5 + 3 for text in first.counts)
    used += sum(_lines(text, 8.5, _BESIDE_NAME) * 11.5 + 1 for _, text in first.basis)
    for drawing in (first.values, first.apart):
        used += 9.0 + drawing.height if drawing is not None else 0.0
    used += 12.0 if first.figure_title else 0.0
    return used <= _HEIGHTS.get(page_size, _HEIGHTS["A4"])


def _lines(text: str, size: float, width: float, face: str = "sans-400") -> int:
    return math.ceil(width_of(text, size, face) * 1.02 / width)  # broken lines lose some room at their ends
