"""Comparisons by ranks: Kruskal-Wallis, Steel-Dwass-Critchlow-Fligner and Steel, with Hodges-Lehmann shifts.

Results that are known only to lie below (above) all others enter as -inf (+inf), tied among themselves.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from qcreport.errors import DegenerateDataError, TooFewObservationsError
from qcreport.stats import arrangements
from qcreport.stats.comparison import PairwiseComparison, PosthocResult, all_pairs, require_alpha
from qcreport.stats.distributions import (
    many_to_one_isf,
    many_to_one_sf,
    studentized_range_isf,
    studentized_range_sf,
)
from qcreport.stats.distributions.rows import Array
from qcreport.stats.distributions.student import chi_squared_upper
from qcreport.stats.reference import Direction
from qcreport.stats.shift import shift_and_interval

_SQRT_2 = math.sqrt(2.0)


@dataclass(frozen=True, slots=True, kw_only=True)
class RankTestResult:
    """An overall test by ranks."""

    procedure: str
    """`kruskal_wallis`."""
    statistic: float
    """H, corrected for ties, dimensionless."""
    df: float
    """k - 1, for the asymptotic law."""
    p: float
    """P(H at least as large) if all groups come from one distribution."""
    law: str
    """`exact` (every arrangement counted) or `asymptotic` (chi-squared)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Design:
    """Groups as ranks need them."""

    labels: tuple[str, ...]
    values: tuple[tuple[float, ...], ...]
    sizes: tuple[int, ...]
    blocks: tuple[int, ...]
    dealt: arrangements.Labels

    @property
    def enumerable(self) -> bool:
        return arrangements.count(self.sizes) <= arrangements.MOST_ARRANGEMENTS


def kruskal_wallis(labels: Sequence[str], values: Sequence[Sequence[float]]) -> RankTestResult:
    """Test whether all groups come from one distribution, by ranks (Kruskal-Wallis).

    Parameters
    ----------
    labels : sequence of str, length k >= 2
        Names of the groups.
    values : sequence of k sequences of float, none empty
        Results in u; not NaN.

    Returns
    -------
    RankTestResult
        Exact where at most a million arrangements exist, else chi-squared on k - 1 df.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        k < 2 or an empty group; NaN, or all results equal.

    References
    ----------
    .. [1] Kruskal & Wallis (1952), J. Am. Stat. Assoc. 47, 583-621. doi:10.1080/01621459.1952.10483441
    """
    design = _design(labels, values)
    n = sum(design.sizes)
    ties = math.fsum(float(b**3 - b) for b in design.blocks)
    middle = np.cumsum(design.blocks) - (np.asarray(design.blocks) - 1) / 2.0
    ranks = np.repeat(middle, design.blocks)
    spread = math.fsum(
        math.fsum(ranks[design.dealt[0] == g].tolist()) ** 2 / size for g, size in enumerate(design.sizes)
    )
    statistic = (12.0 / (n * (n + 1)) * spread - 3.0 * (n + 1)) / (1.0 - ties / (n**3 - n))
    statistic = max(statistic, 0.0)
    df = len(design.sizes) - 1
    if design.enumerable:
        p = arrangements.chance_to_reach(arrangements.kruskal_law(design.sizes, design.blocks), spread)
    else:
        p = chi_squared_upper(statistic, df)
    law = "exact" if design.enumerable else "asymptotic"
    return RankTestResult(procedure="kruskal_wallis", statistic=statistic, df=float(df), p=p, law=law)


def steel_dwass(labels: Sequence[str], values: Sequence[Sequence[float]], *, alpha: float) -> PosthocResult:
    """Compare all pairs by ranks within each pair (Steel-Dwass-Critchlow-Fligner).

    Parameters
    ----------
    labels, values
        As for `kruskal_wallis`.
    alpha : float in (0, 1), dimensionless
        Family-wise error rate.

    Returns
    -------
    PosthocResult
        `difference` is the Hodges-Lehmann shift in u, `statistic` the tie-corrected standardised rank sum,
        `se` and `df` None; `law` says whether the joint permutation law of the largest statistic was
        enumerated (at most a million arrangements) or its limit, the range of k normals, was used;
        `reachable` whether any data of these sizes could give p < alpha. Open or missing interval ends are
        None, both where a result is not finite.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        As for `kruskal_wallis`, or alpha outside (0, 1).

    Notes
    -----
    Ranks are no cure for unequal spread: where sizes differ as well, the error rate can exceed alpha. With
    ties a shift of 0 can lie on the end of an interval whose p is below alpha.

    References
    ----------
    .. [1] Steel (1960), Technometrics 2(2), 197-207. doi:10.1080/00401706.1960.10489894
    .. [2] Dwass (1960), Some k-sample rank-order tests; in Contributions to Probability and Statistics,
    Stanford.
    .. [3] Critchlow & Fligner (1991), Commun. Stat. Theory Methods 20, 127-139. doi:10.1080/03610929108830487
    """
    require_alpha(alpha)
    design = _design(labels, values)
    k = len(design.sizes)
    return _compare(
        "steel_dwass",
        design,
        all_pairs(k),
        alpha,
        sign=0,
        tail=lambda z: np.asarray(studentized_range_sf(_SQRT_2 * z, k, math.inf)),
        quantile=lambda: float(studentized_range_isf(alpha, k, math.inf)) / _SQRT_2,
    )


def steel(
    labels: Sequence[str],
    values: Sequence[Sequence[float]],
    *,
    reference: int,
    alpha: float,
    direction: Direction = "both",
) -> PosthocResult:
    """Compare each group with a reference by ranks within each pair (Steel).

    Parameters
    ----------
    labels, values
        As for `kruskal_wallis`.
    reference : int
        Position of the reference, 0 to k - 1.
    alpha : float in (0, 1), dimensionless
        Family-wise error rate.
    direction : {"both", "lower", "higher"}
        Whether a group may differ, be lower or be higher than the reference.

    Returns
    -------
    PosthocResult
        As for `steel_dwass`, group minus reference; the limiting law is that of many normals against one
        with the exact correlations sqrt(n_i n_j / ((n_0 + n_i + 1)(n_0 + n_j + 1))).

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        As for `steel_dwass`; no such reference.

    References
    ----------
    .. [1] Steel (1959), Biometrics 15(4), 560-572. doi:10.2307/2527654
    """
    require_alpha(alpha)
    design = _design(labels, values)
    if not 0 <= reference < len(design.sizes):
        raise TooFewObservationsError(f"There is no group at position {reference} to serve as the reference.")
    pairs = tuple((i, reference) for i in range(len(design.sizes)) if i != reference)
    sizes = [design.sizes[i] for i, _ in pairs]
    base, two_sided = design.sizes[reference] + 1, direction == "both"
    return _compare(
        "steel",
        design,
        pairs,
        alpha,
        sign={"both": 0, "higher": 1, "lower": -1}[direction],
        tail=lambda z: np.asarray(many_to_one_sf(z, base, sizes, math.inf, two_sided)),
        quantile=lambda: float(many_to_one_isf(alpha, base, sizes, math.inf, two_sided)),
    )


def _design(labels: Sequence[str], values: Sequence[Sequence[float]]) -> _Design:
    if len(labels) < 2:
        raise TooFewObservationsError("At least two groups are needed.")
    groups = tuple(tuple(float(v) for v in group) for _, group in zip(labels, values, strict=True))
    for label, group in zip(labels, groups, strict=True):
        if not group:
            raise TooFewObservationsError(f"Group {label} has no result.")
        if any(math.isnan(v) for v in group):
            raise DegenerateDataError(f"Group {label} holds a value that is not a number.")
    ordered = sorted((value, g) for g, group in enumerate(groups) for value in group)
    blocks = arrangements.tie_blocks([value for value, _ in ordered])
    if len(blocks) == 1:
        raise DegenerateDataError("All results are equal; ranks cannot compare them.")
    return _Design(
        labels=tuple(labels),
        values=groups,
        sizes=tuple(len(group) for group in groups),
        blocks=blocks,
        dealt=np.array([[g for _, g in ordered]], dtype=np.int16),
    )


def _compare(
    procedure: str,
    design: _Design,
    pairs: arrangements.Comparisons,
    alpha: float,
    *,
    sign: int,
    tail: Callable[[Array], Array],
    quantile: Callable[[], float],
) -> PosthocResult:
    z = arrangements.pair_statistics(design.dealt, design.blocks, pairs)[0]
    size = np.abs(z) if sign == 0 else sign * z
    if design.enumerable:
        law = arrangements.largest_pair_law(design.sizes, design.blocks, pairs, sign)
        p = np.array([arrangements.chance_to_reach(law, value) for value in size])
        reachable = law[1][-1] < alpha
        critical = max(v for v, chance in zip(*law, strict=True) if chance >= alpha) if reachable else None
    else:
        different, place = np.unique(size, return_inverse=True)  # ranks repeat their statistics
        p = tail(different)[place]
        furthest = max(_largest_possible(design, pair) for pair in pairs)
        reachable = bool(tail(np.array([furthest]))[0] < alpha)
        critical = quantile()
    comparisons = tuple(
        _pair(design, pair, float(value), float(tail_area), critical, sign)
        for pair, value, tail_area in zip(pairs, z, p, strict=True)
    )
    return PosthocResult(
        procedure=procedure,
        alpha=alpha,
        comparisons=comparisons,
        critical_value=critical,
        hsd=None,
        law="exact" if design.enumerable else "asymptotic",
        reachable=reachable,
    )


def _largest_possible(design: _Design, pair: tuple[int, int]) -> float:
    """Return the statistic of a pair of which one group lies wholly above the other, without ties."""
    n, m = design.sizes[pair[0]], design.sizes[pair[1]]
    return math.sqrt(3.0 * n * m / (n + m + 1))


def _pair(
    design: _Design, pair: tuple[int, int], z: float, p: float, critical: float | None, sign: int
) -> PairwiseComparison:
    first, second = design.values[pair[0]], design.values[pair[1]]
    shift, lower, upper = shift_and_interval(first, second, critical)
    return PairwiseComparison(
        first=design.labels[pair[0]],
        second=design.labels[pair[1]],
        difference=shift,
        se=None,
        statistic=z,
        df=None,
        critical_value=critical,
        p=p,
        lower=lower if sign >= 0 else None,
        upper=upper if sign <= 0 else None,
    )
