"""Spread of earlier exports, in a few numbers a line or batch, as `context.json` carries it."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import asdict, dataclass
from typing import Any

Json = dict[str, Any]


@dataclass(frozen=True, slots=True, kw_only=True)
class LineHistory:
    """What earlier exports say of one line's scatter."""

    label: str
    """Line."""
    batches: int
    """Earlier batches behind it, those of this export excluded."""
    n: int
    """Independent results in them."""
    df: float
    """Degrees of freedom: within batches and pooled, or of the batch means where batches are compared."""
    variance: float
    """Variance on the scale of the comparison, in the unit squared."""


@dataclass(frozen=True, slots=True, kw_only=True)
class BatchHistory:
    """The scatter inside one earlier batch."""

    label: str
    """Batch."""
    n: int
    """Independent results in it."""
    df: float
    """n - 1."""
    variance: float
    """Variance on the scale of the comparison, that of rounding where all values are equal."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SpreadHistory:
    """Earlier scatter of one characteristic; lines where lines are compared, else batches."""

    characteristic: str
    """As the layout calls it."""
    lines: tuple[LineHistory, ...] = ()
    """In the order of this export."""
    batches: tuple[BatchHistory, ...] = ()
    """Oldest first."""

    def to_json(self) -> Json:
        """Return the form that stands in `context.json`."""
        return {
            "characteristic": self.characteristic,
            "lines": [asdict(line) for line in self.lines],
            "batches": [asdict(batch) for batch in self.batches],
        }

    def line(self, label: str) -> LineHistory | None:
        """Return the history of one line."""
        return next((line for line in self.lines if line.label == label), None)


def spread_history_from_json(data: Mapping[str, Any]) -> SpreadHistory:
    """Return what `SpreadHistory.to_json` wrote; keys of later versions are passed over.

    Raises
    ------
    KeyError, TypeError, ValueError
        Where a part is missing or of another kind, or a number is no variance or no degrees of freedom.
    """
    return SpreadHistory(
        characteristic=str(data["characteristic"]),
        lines=tuple(
            LineHistory(
                label=str(item["label"]),
                batches=int(item["batches"]),
                n=int(item["n"]),
                df=_positive(item["df"]),
                variance=_not_negative(item["variance"]),
            )
            for item in data["lines"]
        ),
        batches=tuple(
            BatchHistory(
                label=str(item["label"]),
                n=int(item["n"]),
                df=_positive(item["df"]),
                variance=_positive(item["variance"]),
            )
            for item in data["batches"]
        ),
    )


def _not_negative(value: Any) -> float:
    number = float(value)
    if not (math.isfinite(number) and number >= 0.0):
        raise ValueError(f"{value!r} is no variance")
    return number


def _positive(value: Any) -> float:
    if _not_negative(value) == 0.0:
        raise ValueError(f"{value!r} is not above 0")
    return float(value)
