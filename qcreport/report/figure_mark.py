"""The mark beside a sentence, and the triangular grid of small marks for many groups."""

from __future__ import annotations

import math
from collections.abc import Sequence

from qcreport.analysis.result import CharacteristicResult
from qcreport.report.axis import Axis, padded
from qcreport.report.figure_apart import interval_bar
from qcreport.report.glyphs import lines_of, width_of
from qcreport.report.pairs import PairView
from qcreport.report.shapes import Bar, Drawing, Label, Line, Shape
from qcreport.report.words_en_figure import FigureWords

MARK_WIDTH, MARK_HEIGHT = 51.0, 11.3  # 18 × 4 mm
GRID_WIDTH = 430.0
CELL_WIDTH, CELL_HEIGHT = 10.0, 11.5


def answer_mark(view: PairView | None, *, log: bool, title: str, beside: Sequence[PairView] = ()) -> Drawing:
    """Return the bar of one pair at 18 × 4 mm; an empty line where nothing was compared.

    Marks that stand `beside` each other share one scale, so that they can be compared.
    """
    shapes: list[Shape] = []
    middle = MARK_HEIGHT / 2
    if view is None or not view.has_interval:
        shapes.append(Line(x1=1, y1=middle, x2=MARK_WIDTH - 1, y2=middle, style="row"))
        return _mark(shapes, title)
    axis = _mark_axis((view, *beside), log=log)
    below, above = view.margin
    if view.has_margin:
        left = axis.left if below is None else axis.inside(below)
        right = axis.right if above is None else axis.inside(above)
        shapes.append(Bar(x=left, y=0, width=right - left, height=MARK_HEIGHT, style="corridor"))
        shapes += [
            Line(x1=axis.at(edge), y1=0, x2=axis.at(edge), y2=MARK_HEIGHT, style="corridor-edge")
            for edge in view.margin
            if edge is not None and axis.covers(edge)
        ]
    zero = axis.at(1.0 if log else 0.0)
    shapes.append(Line(x1=zero, y1=0, x2=zero, y2=MARK_HEIGHT, style="zero"))
    shapes += interval_bar(view, middle, axis, 5.0)
    return _mark(shapes, title)


def _mark(shapes: list[Shape], title: str) -> Drawing:
    return Drawing(width=MARK_WIDTH, height=MARK_HEIGHT, title=title, shapes=tuple(shapes))


def _mark_axis(views: Sequence[PairView], *, log: bool) -> Axis:
    known = [x for v in views for x in (v.low, v.high, v.difference, *v.margin) if x is not None]
    usable = [x for x in known if math.isfinite(x) and (x > 0 or not log)]
    ends = [1.0 if log else 0.0, *usable]
    low, high = padded(min(ends), max(ends), logarithmic=log)
    return Axis(low=low, high=high, left=1, right=MARK_WIDTH - 1, logarithmic=log)


def pair_grid(result: CharacteristicResult, words: FigureWords) -> Drawing:
    """Return every pair as a small mark in a triangle; each name stands level, where row and column meet."""
    labels = [g.label for g in result.groups]
    answers = {frozenset((p.first, p.second)): (p.answer, p) for p in result.pairs}
    cell = min(CELL_WIDTH, (GRID_WIDTH - 130) / max(len(labels), 1))
    shapes: list[Shape] = []
    for row, name in enumerate(labels):
        y = row * CELL_HEIGHT + 1
        for column in range(row):
            answer, _ = answers.get(frozenset((name, labels[column])), ("not_compared", None))
            shapes += _cell(answer, column * cell, y, cell - 1.5)
        text = lines_of(name, 8, 125, 1)[0]
        shapes.append(Label(x=row * cell + 2, y=y + 7.6, text=text, anchor="start", style="note"))
    height = len(labels) * CELL_HEIGHT + 4
    has_margin = any(m is not None for m in result.margin)
    shapes += _legend(height + 4, words.grid_legend(has_margin=has_margin))
    return Drawing(width=GRID_WIDTH, height=height + 20, title=words.grid_alt(result), shapes=tuple(shapes))


def _cell(answer: str, x: float, y: float, width: float) -> list[Shape]:
    height = 7.0
    if answer == "matters":
        return [Bar(x=x, y=y, width=width, height=height, style="beyond")]
    if answer in ("within_margin", "equivalent"):
        return [Bar(x=x, y=y, width=width, height=height, style="inside")]
    if answer == "different":
        return [
            Bar(x=x, y=y, width=width, height=height, style="outside"),
            Bar(x=x, y=y, width=width / 2, height=height, style="inside"),
        ]
    if answer in ("not_settled", "not_shown"):
        return [Bar(x=x, y=y, width=width, height=height, style="outside")]
    return [Line(x1=x, y1=y + height / 2, x2=x + width, y2=y + height / 2, style="row")]


def _legend(y: float, entries: Sequence[tuple[str, str]]) -> list[Shape]:
    shapes: list[Shape] = []
    x = 0.0
    for answer, text in entries:
        shapes += _cell(answer, x, y, CELL_WIDTH - 1.5)
        shapes.append(Label(x=x + 12, y=y + 6.8, text=text, anchor="start", style="note"))
        x += 12 + width_of(text, 8) + 14
    return shapes
