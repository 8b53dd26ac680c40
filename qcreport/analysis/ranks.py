"""Comparison by ranks, also of results that are known only by a limit.

A limit never becomes a number. All results below the highest lower limit are tied at it, measured ones too,
since nothing is known of their order; how many measured values that coarsens is said.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from qcreport.analysis.comparable import Comparable
from qcreport.analysis.procedures import DIRECTIONS
from qcreport.analysis.result import Overall, PairResult, UnitValue
from qcreport.measurements import LIMITS_BELOW, Censoring, Notice
from qcreport.plan.model import CharacteristicPlan
from qcreport.stats.comparison import PairwiseComparison, PosthocResult
from qcreport.stats.equivalence import judge
from qcreport.stats.ranks import kruskal_wallis, steel, steel_dwass

_DIGITS = 15
"""Ranks are whole numbers: their statistics lose nothing to the rounding of the data."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Ranked:
    """The groups' values as ranks need them."""

    labels: tuple[str, ...]
    """Labels of the groups."""
    values: tuple[tuple[float, ...], ...]
    """Values on the scale of the comparison; those tied at a limit are infinite."""
    notices: tuple[Notice, ...]
    """What the limits coarsened."""


def ranked(ready: Comparable) -> Ranked:
    """Return the values with everything beyond the outermost limit tied there."""
    labels = tuple(g.label for g in ready.groups)
    if not ready.censored:
        return Ranked(labels=labels, values=ready.values, notices=())
    units = [
        (unit, value)
        for group, values in zip(ready.groups, ready.values, strict=True)
        for unit, value in zip(group.units, values, strict=True)
    ]
    below = any(unit.censored in LIMITS_BELOW for unit, _ in units)
    sign = -1.0 if below else 1.0
    limits = [value for unit, value in units if unit.censored not in (None, Censoring.NOT_DETECTED)]
    limit = max(limits, default=-math.inf) if below else min(limits)
    closed = any(unit.censored in (Censoring.AT_MOST, Censoring.AT_LEAST) for unit, _ in units)

    def tied(unit: UnitValue, value: float) -> bool:
        if unit.censored is not None:
            return True
        return -sign * value < -sign * limit or (closed and value == limit)

    values = tuple(
        tuple(sign * math.inf if tied(u, v) else v for u, v in zip(g.units, own, strict=True))
        for g, own in zip(ready.groups, ready.values, strict=True)
    )
    coarsened = [u.cells[0] for u, v in units if u.censored is None and tied(u, v)]
    return Ranked(labels=labels, values=values, notices=_tied_notice(ready, coarsened, below))


def _tied_notice(ready: Comparable, coarsened: list[str], below: bool) -> tuple[Notice, ...]:
    side, limit = ("below", "highest lower") if below else ("above", "lowest upper")
    censored = sum(g.censored for g in ready.groups)
    text = (
        f"{censored} results are known only by a limit. All results {side} the {limit} limit are tied at it; "
        f"{len(coarsened)} measured values lose their order by that."
    )
    return (Notice(code="censored_values_tied", cells=tuple(coarsened), text=text),)


@dataclass(frozen=True, slots=True, kw_only=True)
class RankComparison:
    """What a procedure on ranks says about every pair."""

    posthoc: PosthocResult
    """The procedure's own numbers."""
    pairs: tuple[PairResult, ...]
    """The pairs as reported."""
    notices: tuple[Notice, ...]
    """Which law was used, what cannot be reached, what was tied."""


def compare_by_ranks(
    procedure: str,
    ready: Comparable,
    characteristic: CharacteristicPlan,
    margin: tuple[float | None, float | None],
    *,
    alpha: float,
) -> RankComparison:
    """Return every pair compared by ranks, on the scale of the comparison.

    Raises
    ------
    StatisticsError
        Where all results are tied.
    """
    ranks = ranked(ready)
    if procedure == "steel" and ready.reference is not None:
        posthoc = steel(
            ranks.labels,
            ranks.values,
            reference=ready.reference,
            alpha=alpha,
            direction=DIRECTIONS[characteristic.direction],
        )
    else:
        posthoc = steel_dwass(ranks.labels, ranks.values, alpha=alpha)
    censored = ready.censored
    pairs = tuple(_pair(c, margin, alpha, censored=censored) for c in posthoc.comparisons)
    return RankComparison(
        posthoc=posthoc, pairs=pairs, notices=(*ranks.notices, *_law_notices(posthoc, ready))
    )


def overall_by_ranks(ready: Comparable) -> Overall:
    """Return the Kruskal–Wallis test of the groups."""
    ranks = ranked(ready)
    found = kruskal_wallis(ranks.labels, ranks.values)
    return Overall(
        name=found.procedure,
        statistic=found.statistic,
        df=(found.df,),
        p=found.p,
        ms_within=None,
        ms_between=None,
        ss_within=None,
        ss_between=None,
        supported_digits=_DIGITS,
    )


def _pair(
    comparison: PairwiseComparison,
    margin: tuple[float | None, float | None],
    alpha: float,
    *,
    censored: bool,
) -> PairResult:
    answer = judge(comparison.lower, comparison.upper, margin[0], margin[1])
    if censored and comparison.p < alpha:
        answer = "different"  # limits leave no interval, but the ranks differ
    return PairResult(
        first=comparison.first,
        second=comparison.second,
        difference=comparison.difference,
        se=None,
        statistic=comparison.statistic,
        df=None,
        critical_value=comparison.critical_value,
        p=comparison.p,
        lower=comparison.lower,
        upper=comparison.upper,
        detectable=None,
        detectable_limits=None,
        needed_n=None,
        answer=answer,
    )


def _law_notices(posthoc: PosthocResult, ready: Comparable) -> tuple[Notice, ...]:
    """Say which law gave the p-values, and where the sizes allow no significance at all."""
    said: list[tuple[str, str]] = []
    if posthoc.law == "asymptotic":
        said.append(
            (
                "ranks_asymptotic",
                "There are too many arrangements of these ranks to count, so p comes from the limiting law.",
            )
        )
    if not posthoc.reachable:
        said.append(
            (
                "ranks_unreachable",
                "Significance is unreachable at this size: even groups that do not overlap at all would not "
                f"be shown to differ at {posthoc.alpha:g}. Measure more of each group.",
            )
        )
    if len({g.n for g in ready.groups}) > 1:
        said.append(
            (
                "ranks_unequal_sizes",
                "The groups have different sizes. Ranks are no cure for unequal spread: where small groups "
                "scatter most the error rate exceeds the level.",
            )
        )
    return tuple(Notice(code=code, cells=(), text=text) for code, text in said)
