"""The scatter of a result that is known without this export: from the plan, else from earlier batches."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Final

from qcreport.plan.model import CharacteristicPlan
from qcreport.rules.history import SpreadHistory

SMALLEST_DF: Final = 30.0
"""Degrees of freedom from which history stands for the scatter: its 90 % limits are then within a quarter."""


@dataclass(frozen=True, slots=True, kw_only=True)
class KnownScatter:
    """A standard deviation that does not come from this export."""

    sd: float
    """Standard deviation of a result, on the scale of the comparison."""
    source: str
    """`plan` or `history`."""
    words: str
    """Where it comes from, for the notice."""


def known_scatter(characteristic: CharacteristicPlan, history: SpreadHistory | None) -> KnownScatter | None:
    """Return the plan's scatter, else the history's, pooled over its lines or batches; None without both."""
    if characteristic.scatter is not None:
        return KnownScatter(sd=characteristic.scatter, source="plan", words="that the plan gives")
    parts = () if history is None else (history.lines or history.batches)
    df = math.fsum(part.df for part in parts)
    if df < SMALLEST_DF:
        return None
    sd = math.sqrt(math.fsum(part.df * part.variance for part in parts) / df)
    if sd == 0.0:
        return None
    words = f"of earlier batches in the records, {df:.0f} degrees of freedom"
    return KnownScatter(sd=sd, source="history", words=words)
