"""From a procedure's name to its numbers."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Final, Literal

from qcreport.plan.model import Direction
from qcreport.stats.comparison import PosthocResult
from qcreport.stats.pooled import tukey_hsd, tukey_kramer
from qcreport.stats.reference import dunnett, dunnett_unequal, dunnett_weighted
from qcreport.stats.summary import GroupSummary
from qcreport.stats.unequal import dunnett_c, dunnett_t3, games_howell, tamhane_t2

_EVERY_PAIR: Final[dict[str, Callable[..., PosthocResult]]] = {
    "tukey_hsd": tukey_hsd,
    "tukey_kramer": tukey_kramer,
    "games_howell": games_howell,
    "dunnett_t3": dunnett_t3,
    "dunnett_c": dunnett_c,
    "tamhane_t2": tamhane_t2,
}
_WITH_REFERENCE: Final[dict[str, Callable[..., PosthocResult]]] = {
    "dunnett": dunnett,
    "dunnett_unequal": dunnett_unequal,
    "dunnett_weighted": dunnett_weighted,
}
DIRECTIONS: Final[dict[Direction, Literal["both", "lower", "higher"]]] = {
    Direction.BOTH: "both",
    Direction.LOWER_MATTERS: "lower",
    Direction.HIGHER_MATTERS: "higher",
}


def on_means(procedure: str) -> bool:
    """Return whether the procedure compares means from group summaries."""
    return procedure in _EVERY_PAIR or procedure in _WITH_REFERENCE


def run_procedure(
    procedure: str,
    groups: Sequence[GroupSummary],
    *,
    alpha: float,
    reference: int | None,
    direction: Direction,
) -> PosthocResult:
    """Return the comparisons of a procedure based on means.

    Raises
    ------
    StatisticsError
        Where the procedure cannot answer for these groups.
    """
    if procedure in _EVERY_PAIR:
        return _EVERY_PAIR[procedure](groups, alpha=alpha)
    return _WITH_REFERENCE[procedure](
        groups, reference=reference, alpha=alpha, direction=DIRECTIONS[direction]
    )
