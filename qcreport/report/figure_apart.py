"""The panel *How far apart*: one flat bar a pair, read against no difference and the margin."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

from qcreport.analysis.result import CharacteristicResult, PairResult
from qcreport.report.axis import Axis, padded
from qcreport.report.glyphs import lines_of, width_of
from qcreport.report.pairs import (
    PairView,
    for_figure,
    is_log,
    most_serious_first,
    null_of,
    widest_of_each_group,
)
from qcreport.report.rounding import trimmed
from qcreport.report.shapes import Bar, Drawing, Label, Line, Shape
from qcreport.report.words_en_figure import FigureWords

WIDTH = 430.0
LABEL_SIZE = 8.5
LABEL_MOST = 118.0
PAIRS_SHOWN = 30
TOP = 14.0
BAR = 6.5


@dataclass(frozen=True, slots=True, kw_only=True)
class _Frame:
    axis: Axis
    margin: tuple[float | None, float | None]
    null: float
    row_height: float
    bottom: float
    words_at: float
    words: FigureWords


def shown_pairs(result: CharacteristicResult) -> tuple[PairResult, ...]:
    """Return the pairs drawn: all up to 30, else each group's most serious pair."""
    if len(result.pairs) <= PAIRS_SHOWN:
        return most_serious_first(result)
    return widest_of_each_group(result)


def apart_panel(result: CharacteristicResult, *, decimals: int, words: FigureWords) -> Drawing:
    """Return the panel *How far apart*."""
    views = [for_figure(p, result) for p in shown_pairs(result)]
    frame = _frame(result, views, words)
    shapes: list[Shape] = _ground(frame)
    for index, view in enumerate(views):
        y = TOP + (index + 0.5) * frame.row_height
        shapes += _row(result, view, y, frame)
    shapes += _axis(result, frame)
    return Drawing(
        width=WIDTH,
        height=frame.bottom + 15,
        title=words.apart_alt(result, views, decimals),
        shapes=tuple(shapes),
    )


def _lines(view: PairView, *, log: bool) -> tuple[str, ...]:
    sign = "÷" if log else "−"
    whole = f"{view.first} {sign} {view.second}"
    if width_of(whole, LABEL_SIZE) <= LABEL_MOST:
        return (whole,)
    return (
        lines_of(view.first, LABEL_SIZE, LABEL_MOST, 1)[0],
        lines_of(f"{sign} {view.second}", LABEL_SIZE, LABEL_MOST, 1)[0],
    )


def _frame(result: CharacteristicResult, views: Sequence[PairView], words: FigureWords) -> _Frame:
    log, null = is_log(result), null_of(result)
    margin = views[0].margin if views else result.margin
    low, high = _reach(views, margin, null, log=log)
    lines = [_lines(v, log=log) for v in views]
    labels = max((width_of(t, LABEL_SIZE) for pair in lines for t in pair), default=0.0)
    codes = max((width_of(words.in_short(v.answer, v.has_margin), LABEL_SIZE) for v in views), default=0.0)
    row_height = 13.0 if all(len(pair) == 1 for pair in lines) else 20.0
    return _Frame(
        axis=Axis(low=low, high=high, left=labels + 10, right=WIDTH - codes - 10, logarithmic=log),
        margin=margin,
        null=null,
        row_height=row_height,
        bottom=TOP + row_height * max(len(views), 1) + 2,
        words_at=WIDTH - codes,
        words=words,
    )


def _reach(
    views: Sequence[PairView], margin: tuple[float | None, float | None], null: float, *, log: bool
) -> tuple[float, float]:
    found = [x for v in views for x in (v.difference, v.low, v.high) if x is not None]
    ends = [null] + [x for x in found if math.isfinite(x) and (x > 0 or not log)]
    low, high = min(ends), max(ends)
    for edge in margin:
        if edge is None or (log and edge <= 0):
            continue
        reach = _distance(edge, null, log=log)
        seen = max(_distance(low, null, log=log), _distance(high, null, log=log))
        if seen == 0 or reach <= 4 * seen:
            low, high = min(low, edge), max(high, edge)
    return padded(low, high, logarithmic=log, share=0.06)


def _distance(value: float, null: float, *, log: bool) -> float:
    return abs(math.log(value / null)) if log else abs(value - null)


def _ground(frame: _Frame) -> list[Shape]:
    axis, (below, above) = frame.axis, frame.margin
    shapes: list[Shape] = []
    left = axis.left if below is None else axis.inside(below)
    right = axis.right if above is None else axis.inside(above)
    if below is not None or above is not None:
        shapes.append(Bar(x=left, y=TOP, width=right - left, height=frame.bottom - TOP, style="corridor"))
    zero = axis.at(frame.null)
    named = [(zero, frame.words.no_difference(), "zero")]
    for edge in frame.margin:
        if edge is not None and axis.covers(edge):
            text = frame.words.margin_edge(trimmed(edge, 6), signed=not axis.logarithmic and edge > 0)
            named.append((axis.at(edge), text, "corridor-edge"))
    for x, _, style in named:
        shapes.append(Line(x1=x, y1=TOP, x2=x, y2=frame.bottom, style=style))
    for x, text, anchor in _without_overlap(named, axis):
        shapes.append(Label(x=x, y=TOP - 4, text=text, anchor=anchor, style="note"))
    return shapes


def _without_overlap(named: list[tuple[float, str, str]], axis: Axis) -> list[tuple[float, str, str]]:
    """Turn the outer labels outwards where the three stand too close to be centred."""
    ordered = sorted((x, text) for x, text, _ in named)
    needed = sum(width_of(t, 8) for _, t in ordered) / 2 + 8 * len(ordered)
    close = len(ordered) > 1 and min(b[0] - a[0] for a, b in pairwise(ordered)) < needed / 2
    placed = []
    for index, (x, text) in enumerate(ordered):
        half = width_of(text, 8) / 2
        anchor = "middle"
        if (close and index == 0) or x + half > WIDTH:
            anchor = "end"
        if (close and index == len(ordered) - 1) or x - half < 0:
            anchor = "start"
        placed.append((x, text, anchor))
    return placed


def _row(result: CharacteristicResult, view: PairView, y: float, frame: _Frame) -> list[Shape]:
    lines = _lines(view, log=is_log(result))
    shapes: list[Shape] = []
    for index, text in enumerate(lines):
        shift = (index - (len(lines) - 1) / 2) * 8.6
        shapes.append(Label(x=0, y=y + shift + 3, text=text, anchor="start", style="label"))
    shapes += interval_bar(view, y, frame.axis, BAR)
    short = frame.words.in_short(view.answer, view.has_margin)
    shapes.append(Label(x=frame.words_at, y=y + 3, text=short, anchor="start", style="label"))
    return shapes


def interval_bar(view: PairView, y: float, axis: Axis, height: float) -> list[Shape]:
    """Return one interval as a flat bar without caps, with the estimate as a slit."""
    shapes: list[Shape] = []
    top = y - height / 2
    if view.has_interval:
        start = axis.left if view.low is None else axis.inside(view.low)
        end = axis.right if view.high is None else axis.inside(view.high)
        end = max(end, start + 0.8)
        if view.answer == "matters":
            shapes.append(Bar(x=start, y=top, width=end - start, height=height, style="beyond"))
        else:
            shapes.append(Bar(x=start, y=top, width=end - start, height=height, style="outside"))
            shapes += _inside_part(view, start, end, top, height, axis)
    if math.isfinite(view.difference) and (view.difference > 0 or not axis.logarithmic):
        x = axis.inside(view.difference)
        if view.has_interval:
            shapes.append(Line(x1=x, y1=top + 0.3, x2=x, y2=top + height - 0.3, style="slit"))
        shapes.append(Line(x1=x, y1=top - 1.8, x2=x, y2=top + height + 1.8, style="estimate"))
    return shapes


def _inside_part(
    view: PairView, start: float, end: float, top: float, height: float, axis: Axis
) -> list[Shape]:
    if not view.has_margin:
        return []
    below, above = view.margin
    left = start if below is None else max(start, axis.inside(below))
    right = end if above is None else min(end, axis.inside(above))
    if right <= left:
        return []
    return [Bar(x=left, y=top, width=right - left, height=height, style="inside")]


def _axis(result: CharacteristicResult, frame: _Frame) -> list[Shape]:
    axis, y = frame.axis, frame.bottom
    shapes: list[Shape] = [Line(x1=axis.left, y1=y, x2=axis.right, y2=y, style="axis")]
    for value, text in axis.ticks(8):
        x = axis.at(value)
        sign = "+" if value > 0 and not axis.logarithmic else ""
        shapes.append(Line(x1=x, y1=y, x2=x, y2=y + 3, style="axis"))
        shapes.append(Label(x=x, y=y + 12, text=sign + text, anchor="middle", style="number"))
    unit = frame.words.ratio_unit() if axis.logarithmic else lines_of(result.unit, 8, 90, 1)[0]
    shapes.append(Label(x=WIDTH, y=y + 12, text=unit, anchor="end", style="note"))
    return shapes
