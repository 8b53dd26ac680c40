"""The few shapes a figure is made of; units are points, the origin is the top left corner."""

from __future__ import annotations

from dataclasses import dataclass

ACCENT = "#5B2A4E"

STYLES: dict[str, str] = {
    "row": 'stroke="#cccccc" stroke-width="0.5"',
    "axis": 'stroke="#111111" stroke-width="0.6"',
    "value": 'stroke="#222222" stroke-width="1"',
    "left-out": 'stroke="#777777" stroke-width="0.8" stroke-dasharray="1.2 1"',
    "reference": 'stroke="#444444" stroke-width="0.7" stroke-dasharray="6 2 1.2 2"',
    "limit": 'stroke="#111111" stroke-width="1.1"',
    "hatch": 'stroke="#888888" stroke-width="0.4"',
    "corridor-edge": 'stroke="#555555" stroke-width="0.6"',
    "zero": 'stroke="#111111" stroke-width="0.9"',
    "scale-end": f'stroke="{ACCENT}" stroke-width="0.6"',
    "slit": 'stroke="#ffffff" stroke-width="2.4"',
    "estimate": 'stroke="#111111" stroke-width="0.9"',
    "corridor": 'fill="#ececec"',
    "scale": f'fill="{ACCENT}"',
    "inside": 'fill="#999999" stroke="#333333" stroke-width="0.7"',
    "outside": 'fill="#ffffff" stroke="#333333" stroke-width="0.7"',
    "beyond": f'fill="{ACCENT}" stroke="{ACCENT}" stroke-width="0.7"',
    "mean": 'fill="#111111"',
    "ring": 'fill="none" stroke="#111111" stroke-width="0.8"',
    "arrow": 'fill="none" stroke="#222222" stroke-width="1"',
    "edge-arrow": 'fill="none" stroke="#111111" stroke-width="0.9"',
}
"""Presentation attributes by style name; read by the drawing template only."""

BASELINE = 8.1
"""Points from the top of a label's line of 10 to its baseline, in the pinned sans face at 8 to 8.5 points."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Line:
    """A straight stroke."""

    x1: float
    y1: float
    x2: float
    y2: float
    style: str
    kind: str = "line"


@dataclass(frozen=True, slots=True, kw_only=True)
class Bar:
    """A rectangle."""

    x: float
    y: float
    width: float
    height: float
    style: str
    kind: str = "bar"


@dataclass(frozen=True, slots=True, kw_only=True)
class Ring:
    """A circle."""

    x: float
    y: float
    radius: float
    style: str
    kind: str = "ring"


@dataclass(frozen=True, slots=True, kw_only=True)
class Outline:
    """A polyline or polygon through points; closed where it is filled."""

    points: tuple[tuple[float, float], ...]
    closed: bool
    style: str
    kind: str = "outline"

    def path(self) -> str:
        """Return the path data."""
        steps = " L".join(f"{x:.2f} {y:.2f}" for x, y in self.points)
        return f"M{steps}{' Z' if self.closed else ''}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Label:
    """A piece of text; `anchor` is start, middle or end."""

    x: float
    y: float
    text: str
    anchor: str
    style: str
    kind: str = "label"


Shape = Line | Bar | Ring | Outline | Label


@dataclass(frozen=True, slots=True, kw_only=True)
class Drawing:
    """One figure, ready to print."""

    width: float
    """Points."""
    height: float
    """Points."""
    title: str
    """What the figure says, for readers who do not see it."""
    shapes: tuple[Shape, ...]
    """Painted in this order."""
