"""How a decision table wants the fact `spread` to be judged."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

from qcreport.toml_source import TableReader

SHOWN_OR_DECLARED: Final = "shown or declared"
THIS_EXPORT: Final = "levene on this export"


@dataclass(frozen=True, slots=True, kw_only=True)
class SpreadPolicy:
    """How the fact `spread` is judged."""

    policy: str
    """`shown or declared`, or `levene on this export`."""
    confidence: float
    """Simultaneous confidence of the upper limit of the largest spread ratio."""
    ratio_limit: float
    """Largest ratio of standard deviations that counts as similar."""
    shown_size_ratio: float
    """Largest/smallest n up to which spread may be shown by data."""
    declared_size_ratio: float
    """Largest/smallest n above which a declaration must accept unequal sizes."""
    conflict_level: float
    """Level of the test that contradicts a declaration or earlier batches, shared over the groups."""
    different_level: float
    """Level of the median-centred Levene check."""
    history_batches: int
    """Fewest earlier batches that may show how much spread varies between batches."""
    history_df: int
    """Fewest degrees of freedom of each of them."""
    history_sd_ln: float
    """Largest upper limit of the standard deviation of ln sigma that counts as similar."""
    history_groups: int
    """Most groups for which earlier batches may speak."""


def parse_policy(table: TableReader) -> SpreadPolicy:
    """Return the policy of a `[spread]` table; its faults are noted there."""
    return SpreadPolicy(
        policy=table.text("policy", choices=(SHOWN_OR_DECLARED, THIS_EXPORT)),
        confidence=table.number("confidence", 0.95, above=0.5, below=1.0),
        ratio_limit=table.number("ratio_limit", 1.5, above=1.0),
        shown_size_ratio=table.number("shown_size_ratio", 1.25, minimum=1.0),
        declared_size_ratio=table.number("declared_size_ratio", 1.5, minimum=1.0),
        conflict_level=table.number("conflict_level", 0.05, above=0.0, below=1.0),
        different_level=table.number("different_level", 0.05, above=0.0, below=1.0),
        history_batches=table.integer("history_batches", 40, minimum=3),
        history_df=table.integer("history_df", 4, minimum=1),
        history_sd_ln=table.number("history_sd_ln", 0.3, above=0.0),
        history_groups=table.integer("history_groups", 6, minimum=2),
    )
