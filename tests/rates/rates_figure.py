"""The figure of the published error rates: one dot a design, the two shipped tables one above the other."""

from __future__ import annotations

from collections.abc import Sequence
from html import escape

from rates_grid import ALPHA, LIMIT, NOTHING, Cell

AUBERGINE, DARK, MIDDLE, PALE = "#5B2A4E", "#333333", "#8A8A8A", "#DDDDDD"
WIDTH, LEFT, RIGHT, TOP, ROW = 820, 190, 30, 74, 46


def figure(cells: Sequence[Cell]) -> str:
    """Return the figure as SVG: normal results, nothing known of spread."""
    shown = [c for c in cells if c.block.shape == "normal" and c.known == NOTHING]
    families = list(dict.fromkeys(c.block.family for c in shown))
    highest = max(c.rate for c in shown)
    height = TOP + ROW * len(families) + 54

    def x(rate: float) -> float:
        return LEFT + (WIDTH - LEFT - RIGHT) * rate / (0.05 * (highest // 0.05 + 1))

    parts = [*_heading(height), *_axis(x, highest, TOP + ROW * len(families))]
    for index, family in enumerate(families):
        y = TOP + ROW * index
        parts.append(_text(LEFT - 14, y + 26, family, anchor="end", colour=DARK))
        parts.append(f'<line x1="{LEFT}" x2="{WIDTH - RIGHT}" y1="{y}" y2="{y}" stroke="{PALE}"/>')
        for cell in (c for c in shown if c.block.family == family):
            parts.append(_dot(x(cell.rate), y, cell))
    return "\n".join((*parts, "</svg>", ""))


def _heading(height: int) -> list[str]:
    title = "How often a difference is found where there is none"
    key = LEFT + 6
    return [
        f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 {WIDTH} {height}" role="img" '
        f'font-family="Source Sans Pro, sans-serif" font-size="14" aria-label="{title}">',
        f'<rect width="{WIDTH}" height="{height}" fill="#FFFFFF"/>',
        _text(LEFT, 24, title, colour=DARK, size=17),
        f'<circle cx="{key}" cy="46" r="4" fill="{AUBERGINE}"/>',
        _text(key + 12, 51, "table default", colour=DARK),
        f'<circle cx="{key + 130}" cy="46" r="4" fill="none" stroke="{MIDDLE}" stroke-width="1.6"/>',
        _text(key + 142, 51, "table textbook, the common habit", colour=DARK),
    ]


def _axis(x: object, highest: float, bottom: int) -> list[str]:
    place = x
    assert callable(place)
    parts = []
    for step in range(int(highest // 0.05) + 2):
        at = place(0.05 * step)
        parts.append(_text(at, bottom + 20, f"{5 * step} %", anchor="middle", colour=DARK))
        parts.append(f'<line x1="{at:.1f}" x2="{at:.1f}" y1="{TOP}" y2="{bottom}" stroke="{PALE}"/>')
    for rate, dashes in ((ALPHA, ""), (LIMIT, ' stroke-dasharray="4 3"')):
        at = place(rate)
        parts.append(
            f'<line x1="{at:.1f}" x2="{at:.1f}" y1="{TOP - 8}" y2="{bottom}" stroke="{DARK}"{dashes}/>'
        )
    words = "each dot one design of 3 to 12 groups and its true spreads; line 5 %, dashes 6.2 %"
    parts.append(_text(LEFT, bottom + 42, words, colour=MIDDLE))
    return parts


def _dot(at: float, y: int, cell: Cell) -> str:
    lift = 6.0 * (hash_of(cell) - 0.5)
    default = cell.table == "default"
    style = f'fill="{AUBERGINE}" fill-opacity=".7"' if default else f'fill="none" stroke="{MIDDLE}"'
    return f'<circle cx="{at:.1f}" cy="{y + (14 if default else 33) + lift:.1f}" r="3" {style}/>'


def hash_of(cell: Cell) -> float:
    """Return a number in [0, 1) that keeps equal rates apart, the same every time."""
    return sum(ord(c) * (i + 1) for i, c in enumerate(cell.block.name)) % 97 / 97


def _text(x: float, y: float, words: str, *, colour: str, anchor: str = "start", size: int = 14) -> str:
    return (
        f'<text x="{x:.1f}" y="{y:.1f}" fill="{colour}" text-anchor="{anchor}" font-size="{size}">'
        f"{escape(words)}</text>"
    )
