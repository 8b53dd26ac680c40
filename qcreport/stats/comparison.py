"""What a comparison of groups gives: frozen values shared by every procedure."""

from __future__ import annotations

import math
from dataclasses import dataclass

from qcreport.errors import DegenerateDataError


@dataclass(frozen=True, slots=True, kw_only=True)
class PairwiseComparison:
    """One pair, results in the unit u; `difference` is first minus second."""

    first: str
    """Label of the first group; with a reference, the group that is compared with it."""
    second: str
    """Label of the second group; with a reference, the reference."""
    difference: float
    """Difference of means (for ranks the Hodges-Lehmann shift), first minus second, in u."""
    se: float | None
    """Standard error of the difference, in u; None for ranks."""
    statistic: float
    """difference / se, signed, dimensionless; for ranks the standardised rank sum."""
    df: float | None
    """Degrees of freedom; None where the procedure has none of its own, or an infinite number."""
    critical_value: float | None
    """What |statistic| must exceed, dimensionless; None where nothing of this size can be significant."""
    p: float
    """P value adjusted for all comparisons of the family."""
    lower: float | None
    """Lower end of the simultaneous interval, in u; None where it is open."""
    upper: float | None
    """Upper end of the simultaneous interval, in u; None where it is open."""


@dataclass(frozen=True, slots=True, kw_only=True)
class PosthocResult:
    """All pairs of one procedure."""

    procedure: str
    """Published name, e.g. `tukey_kramer`."""
    alpha: float
    """Family-wise error rate, dimensionless."""
    comparisons: tuple[PairwiseComparison, ...]
    """Pairs i < j in input order, or each group with the reference."""
    critical_value: float | None
    """Common critical value on the scale of |statistic|; None where pairs have their own."""
    hsd: float | None
    """Honestly significant difference, in u; None unless every pair shares it."""
    law: str | None = None
    """For ranks, `exact` or `asymptotic`: the reference law of the p values; None otherwise."""
    reachable: bool = True
    """Whether any data of these sizes could give p < alpha."""


def require_alpha(alpha: float) -> None:
    """Refuse a level outside (0, 1)."""
    if not 0.0 < alpha < 1.0:
        raise DegenerateDataError(f"An error rate must lie between 0 and 1; found {alpha}.")


def all_pairs(k: int) -> tuple[tuple[int, int], ...]:
    """Return the pairs (i, j), i < j < k, in order."""
    return tuple((i, j) for i in range(k) for j in range(i + 1, k))


def sidak(p: float, m: int) -> float:
    """Return the family-wise p of one of m comparisons, 1 - (1 - p)**m, without cancellation."""
    return 1.0 if p >= 1.0 else -math.expm1(m * math.log1p(-p))


def sidak_level(alpha: float, m: int) -> float:
    """Return the level of one of m comparisons, 1 - (1 - alpha)**(1/m)."""
    return -math.expm1(math.log1p(-alpha) / m)
