"""The panel *Every value*: each result as an upright stroke on its group's line."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from qcreport.analysis.result import CharacteristicResult, GroupResult, UnitValue
from qcreport.measurements import Censoring
from qcreport.report.axis import Axis, padded
from qcreport.report.glyphs import lines_of, width_of
from qcreport.report.pairs import is_log
from qcreport.report.rounding import fixed, shortest
from qcreport.report.shapes import Bar, Drawing, Label, Line, Outline, Ring, Shape
from qcreport.report.words_en_figure import FigureWords

WIDTH = 430.0
LABEL_SIZE = 8.5
LABEL_MOST = 112.0
TOP = 19.0
MANY_GROUPS = 8
LEFT_OUT = "left out"
"""Mark of a value that a person left out: drawn, but counted nowhere."""
READABLE = 6.0
"""Height of one stroke in a stack, with the space to the next."""
STACKS_MOST = 190.0
"""Points that the stacks of all rows may take together."""
_LEFTWARDS = frozenset({Censoring.BELOW, Censoring.AT_MOST, Censoring.NOT_DETECTED})


@dataclass(frozen=True, slots=True, kw_only=True)
class _Frame:
    axis: Axis
    row_height: float
    above: float
    """Part of a row above its line."""
    bottom: float
    decimals: int
    words: FigureWords


def values_panel(
    result: CharacteristicResult,
    *,
    decimals: int,
    keys: Mapping[str, str],
    margin_text: str,
    words: FigureWords,
) -> Drawing:
    """Return the panel *Every value*.

    Parameters
    ----------
    result : CharacteristicResult
        Groups with their values.
    decimals : int
        Decimals of the export.
    keys : mapping
        Cell of a flagged value → its key letter.
    margin_text : str
        What the scale bar says, empty where no margin is set.
    words : FigureWords
        The texts of the language.
    """
    groups = ordered_groups(result)
    frame = _frame(result, groups, decimals, words)
    shapes: list[Shape] = [*_limits(result, frame), *_reference_line(result, frame)]
    for index, group in enumerate(groups):
        shapes += _row(group, TOP + index * frame.row_height + frame.above, frame, keys)
    shapes.append(Label(x=WIDTH, y=10, text=words.mean_heading(), anchor="end", style="note"))
    shapes += _axis(result, frame)
    shapes += _scale_bar(result, frame, margin_text)
    return Drawing(
        width=WIDTH,
        height=frame.bottom + (31 if margin_text else 15),
        title=words.values_alt(result, groups, decimals),
        shapes=tuple(shapes),
    )


def ordered_groups(result: CharacteristicResult) -> tuple[GroupResult, ...]:
    """Return the groups as drawn: the reference first, then in export order."""
    return tuple(sorted(result.groups, key=lambda g: g.label != result.reference))


def _drawn_values(groups: tuple[GroupResult, ...], *, log: bool) -> list[float]:
    values = [u.value for g in groups for u in g.units] + [g.mean for g in groups if g.mean is not None]
    return [v for v in values if math.isfinite(v) and (v > 0 or not log)]


def _frame(
    result: CharacteristicResult, groups: tuple[GroupResult, ...], decimals: int, words: FigureWords
) -> _Frame:
    log = is_log(result)
    drawn = _drawn_values(groups, log=log) or [1.0, 2.0]
    low, high = min(drawn), max(drawn)
    reach = 1.5 * (high - low)
    near = [
        v
        for v in (result.lower_limit, result.upper_limit)
        if v is not None and low - reach <= v <= high + reach and (v > 0 or not log)
    ]
    low, high = padded(min([low, *near]), max([high, *near]), logarithmic=log)
    labels = max((width_of(line, LABEL_SIZE) for g in groups for line in _label(g)), default=0.0)
    means = [fixed(g.mean, decimals + 1) for g in groups if g.mean is not None]
    numbers = max((width_of(m, LABEL_SIZE) for m in means), default=0.0)
    above, below = _row_parts(groups)
    row_height = above + below
    return _Frame(
        axis=Axis(low=low, high=high, left=labels + 10, right=WIDTH - max(numbers, 18) - 12, logarithmic=log),
        row_height=row_height,
        above=above,
        bottom=TOP + row_height * max(len(groups), 1) + 3,
        decimals=decimals,
        words=words,
    )


def _row_parts(groups: Sequence[GroupResult]) -> tuple[float, float]:
    """Return the heights of a row above and below its line; a stack of equal values asks for more above."""
    height = 22.0 if len(groups) <= MANY_GROUPS else 17.0
    stacks = [max(Counter(u.value for u in g.units).values(), default=1) for g in groups]
    wanted = 1 + READABLE * max(stacks, default=1)
    most = max(height * 0.62, STACKS_MOST / max(len(groups), 1))
    return min(max(height * 0.62, wanted), most), height * 0.38


def _label(group: GroupResult) -> tuple[str, ...]:
    return lines_of(group.label, LABEL_SIZE, LABEL_MOST, 2)


def _row(group: GroupResult, y: float, frame: _Frame, keys: Mapping[str, str]) -> list[Shape]:
    axis = frame.axis
    shapes: list[Shape] = [Line(x1=axis.left, y1=y, x2=axis.right, y2=y, style="row")]
    lines = _label(group)
    for index, text in enumerate(lines):
        shift = (index - (len(lines) - 1) / 2) * 8.6
        shapes.append(Label(x=axis.left - 8, y=y + shift + 1, text=text, anchor="end", style="label"))
    seen: Counter[float] = Counter()
    ties = Counter(u.value for u in group.units)
    for unit in group.units:
        if not math.isfinite(unit.value) or (axis.logarithmic and unit.value <= 0):
            continue
        stroke = min(8.0, (frame.above - 1) / ties[unit.value] - 1)
        foot = y - 1 - seen[unit.value] * (stroke + 1)
        seen[unit.value] += 1
        shapes += _value(unit, axis.inside(unit.value), foot, stroke, keys)
    if group.mean is not None and not (axis.logarithmic and group.mean <= 0):
        x = axis.inside(group.mean)
        wedge = ((x, y + 1.2), (x - 3.1, y + 6.6), (x + 3.1, y + 6.6))
        shapes.append(Outline(points=wedge, closed=True, style="mean"))
        mean = fixed(group.mean, frame.decimals + 1)
        shapes.append(Label(x=WIDTH, y=y + 1, text=mean, anchor="end", style="number"))
    return shapes


def _value(unit: UnitValue, x: float, foot: float, stroke: float, keys: Mapping[str, str]) -> list[Shape]:
    if unit.censored is not None:
        way = -1 if unit.censored in _LEFTWARDS else 1
        middle = foot - stroke / 2
        barb = ((x + way * 4.5, middle - 2.4), (x + way * 8, middle), (x, middle))
        return [
            Line(x1=x, y1=foot - stroke, x2=x, y2=foot, style="value"),
            Outline(points=barb, closed=False, style="arrow"),
        ]
    style = "left-out" if LEFT_OUT in unit.marks else "value"
    shapes: list[Shape] = [Line(x1=x, y1=foot - stroke, x2=x, y2=foot, style=style)]
    key = next((keys[c] for c in unit.cells if c in keys), None)
    if key is not None:
        shapes.append(Ring(x=x, y=foot - stroke / 2, radius=stroke / 2 + 2.2, style="ring"))
        shapes.append(
            Label(x=x + stroke / 2 + 3.6, y=foot - stroke + 1.5, text=key, anchor="start", style="note")
        )
    return shapes


def _reference_line(result: CharacteristicResult, frame: _Frame) -> list[Shape]:
    mean = next((g.mean for g in result.groups if g.label == result.reference), None)
    if mean is None or not frame.axis.covers(mean):
        return []
    x = frame.axis.at(mean)
    return [Line(x1=x, y1=TOP - 4, x2=x, y2=frame.bottom, style="reference")]


def _limits(result: CharacteristicResult, frame: _Frame) -> list[Shape]:
    shapes: list[Shape] = []
    for limit, way, name in (
        (result.lower_limit, -1, frame.words.lower_limit),
        (result.upper_limit, 1, frame.words.upper_limit),
    ):
        if limit is None:
            continue
        text = name(shortest(limit))
        if frame.axis.covers(limit):
            shapes += _limit_line(frame, frame.axis.at(limit), way, text)
        else:
            shapes += _limit_arrow(frame, way, text)
    return shapes


def _limit_line(frame: _Frame, x: float, way: int, text: str) -> list[Shape]:
    far = x + way * 14
    shapes: list[Shape] = []
    y = TOP - 10
    while y < frame.bottom - 3:
        shapes.append(Line(x1=min(x, far), y1=y + 14, x2=max(x, far), y2=y, style="hatch"))
        y += 5
    shapes.append(Line(x1=x, y1=TOP - 10, x2=x, y2=frame.bottom, style="limit"))
    inner = "start" if way < 0 else "end"
    shapes.append(Label(x=x - way * 3, y=TOP - 3, text=text, anchor=inner, style="note"))
    return shapes


def _limit_arrow(frame: _Frame, way: int, text: str) -> list[Shape]:
    edge = frame.axis.left if way < 0 else frame.axis.right
    tip, y = edge + way * 0.0, TOP - 6
    arrow = ((tip - way * 4, y - 3), (tip, y), (tip - way * 4, y + 3))
    return [
        Line(x1=tip - way * 12, y1=y, x2=tip, y2=y, style="axis"),
        Outline(points=arrow, closed=False, style="edge-arrow"),
        Label(x=tip - way * 15, y=y + 3, text=text, anchor="start" if way < 0 else "end", style="note"),
    ]


def _axis(result: CharacteristicResult, frame: _Frame) -> list[Shape]:
    axis, y = frame.axis, frame.bottom
    shapes: list[Shape] = [Line(x1=axis.left, y1=y, x2=axis.right, y2=y, style="axis")]
    for value, text in axis.ticks(8):
        x = axis.at(value)
        shapes.append(Line(x1=x, y1=y, x2=x, y2=y + 3, style="axis"))
        shapes.append(Label(x=x, y=y + 12, text=text, anchor="middle", style="number"))
    unit = lines_of(result.unit, 8, 70, 1)[0]
    shapes.append(Label(x=WIDTH, y=y + 12, text=unit, anchor="end", style="note"))
    return shapes


def _scale_bar(result: CharacteristicResult, frame: _Frame, text: str) -> list[Shape]:
    if not text:
        return []
    axis, y = frame.axis, frame.bottom + 23
    length = _margin_length(result, axis)
    if length is None or length > (axis.right - axis.left) * 0.7:
        return [
            Label(
                x=axis.left, y=y + 3, text=frame.words.margin_off_scale(text), anchor="start", style="number"
            )
        ]
    end = axis.left + length
    return [
        Bar(x=axis.left, y=y - 1.3, width=length, height=2.6, style="scale"),
        Line(x1=axis.left, y1=y - 4, x2=axis.left, y2=y + 4, style="scale-end"),
        Line(x1=end, y1=y - 4, x2=end, y2=y + 4, style="scale-end"),
        Label(x=end + 5, y=y + 3, text=frame.words.margin_bar(text), anchor="start", style="number"),
    ]


def _margin_length(result: CharacteristicResult, axis: Axis) -> float | None:
    below, above = result.margin
    value = above if above is not None else below
    if value is None or (axis.logarithmic and value <= 0):
        return None
    start = 1.0 if axis.logarithmic else 0.0
    return abs(axis.at(value) - axis.at(start))
