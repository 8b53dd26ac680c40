"""Contrasts of a plan: weighted sums of group means, the weights summing to 0."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Final

from qcreport.plan.model import ContrastPlan
from qcreport.toml_source import TableReader

_ROUNDING: Final = 1e-12
"""What the sum of weights may miss 0 by, as a share of the largest weight."""


def parse_contrasts(readers: Sequence[TableReader]) -> tuple[ContrastPlan, ...]:
    """Return the contrasts of `[[contrast]]` tables; faults are noted in them."""
    contrasts = tuple(_contrast(reader) for reader in readers)
    for position, (contrast, reader) in enumerate(zip(contrasts, readers, strict=True)):
        if contrast.name and contrast.name in {c.name for c in contrasts[:position]}:
            reader.fault("name", f"{contrast.name!r} is named twice")
    return contrasts


def _contrast(reader: TableReader) -> ContrastPlan:
    name = reader.text("name")
    table = reader.table("weights", required=True)
    weights = tuple((label, float(table.number(label, 0.0) or 0.0)) for label in table.names())
    total = math.fsum(weight for _, weight in weights)
    largest = max((abs(weight) for _, weight in weights), default=0.0)
    given = reader.raw("weights", None)
    if not isinstance(given, dict) or dict(weights) != given:
        pass  # no table of numbers: that fault is noted
    elif not largest:
        reader.fault("weights", "name the groups with their weights, some of them other than 0")
    elif abs(total) > _ROUNDING * largest:
        words = f"must sum to 0, found a sum of {total:g}. Whole numbers sum exactly: 2, -1, -1 for thirds"
        reader.fault("weights", words)
    return ContrastPlan(name=name, weights=tuple((label, w) for label, w in weights if w))
