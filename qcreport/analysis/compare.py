"""The chosen procedure run on the comparable groups, its answers read off against 0 and the margin."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import cast

from qcreport.analysis.comparable import Comparable, all_equal
from qcreport.analysis.known_scatter import KnownScatter
from qcreport.analysis.planning import MOST_NEEDED, OPEN_ANSWERS, Margin, Planning, df_of
from qcreport.analysis.procedures import on_means, run_procedure
from qcreport.analysis.ranks import compare_by_ranks
from qcreport.analysis.result import PairResult
from qcreport.measurements import Notice
from qcreport.plan.model import POOLED, RANKS, CharacteristicPlan, Direction, Scale
from qcreport.stats.comparison import PairwiseComparison, PosthocResult
from qcreport.stats.equivalence import all_within_margin, judge
from qcreport.stats.sizes import Design, Procedure
from qcreport.stats.summary import GroupSummary, with_floored_variance

_LARGEST_LOGARITHM = 700.0
"""Its exponential is the last that is safely a number."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Comparison:
    """What a procedure says about every pair."""

    posthoc: PosthocResult
    """The procedure's own numbers, on the scale of the comparison."""
    summaries: tuple[GroupSummary, ...]
    """The groups as they entered it, a variance floored where there was none."""
    pairs: tuple[PairResult, ...]
    """The pairs as reported."""
    all_within_margin: bool | None
    """Two one-sided tests for every pair; None without a margin."""
    notices: tuple[Notice, ...]
    """What had to be assumed to compute."""


def compare(
    procedure: str,
    ready: Comparable,
    characteristic: CharacteristicPlan,
    *,
    alpha: float,
    scale: Scale,
    known: KnownScatter | None = None,
    sizes: bool = True,
) -> Comparison | None:
    """Return every pair's numbers and answer; None for a procedure of nested designs.

    `sizes` asks for what each pair's design can detect, for the number of results that would settle it, and
    whether every pair is within the margin: most of the time goes there.

    Raises
    ------
    StatisticsError
        Where the procedure cannot answer for these groups.
    """
    margin = margin_on_scale(characteristic, scale)
    if procedure in RANKS:
        return _by_ranks(procedure, ready, characteristic, margin, alpha, scale)
    if not on_means(procedure):
        return None
    summaries: tuple[GroupSummary, ...] = ready.summaries
    notices: tuple[Notice, ...] = ()
    if procedure not in POOLED:
        summaries, notices = _floored(ready, scale)
    posthoc = run_procedure(
        procedure,
        summaries,
        alpha=alpha,
        reference=ready.reference,
        direction=characteristic.direction,
    )
    by_label = {s.label: s for s in summaries}
    planning = Planning(
        design=Design(
            procedure=cast(Procedure, procedure),
            n_groups=len(summaries),
            alpha=alpha,
            two_sided=ready.reference is None or characteristic.direction is Direction.BOTH,
        ),
        margin=margin,
        groups=by_label,
        scatter=None if known is None else known.sd,
    )
    planned = sizes and len(posthoc.comparisons) <= MOST_NEEDED
    pairs = tuple(
        _pair(c, planning if sizes else None, margin, scale, needed=planned) for c in posthoc.comparisons
    )
    notices += _known_scatter(characteristic, scale, known)
    return Comparison(
        posthoc=posthoc,
        summaries=summaries,
        pairs=pairs,
        all_within_margin=_all_within(posthoc, by_label, margin, alpha) if sizes else None,
        notices=notices,
    )


def _by_ranks(
    procedure: str,
    ready: Comparable,
    characteristic: CharacteristicPlan,
    margin: Margin,
    alpha: float,
    scale: Scale,
) -> Comparison:
    found = compare_by_ranks(procedure, ready, characteristic, margin, alpha=alpha)
    pairs = tuple(
        replace(
            p,
            difference=_difference(p.difference, scale),
            lower=back_from_scale(p.lower, scale),
            upper=back_from_scale(p.upper, scale),
        )
        for p in found.pairs
    )
    return Comparison(
        posthoc=found.posthoc,
        summaries=ready.summaries,
        pairs=pairs,
        all_within_margin=None,
        notices=found.notices,
    )


def margin_on_scale(characteristic: CharacteristicPlan, scale: Scale) -> Margin:
    """Return the margin on the scale of the comparison: logarithms of the ratios on the log scale."""
    below, above = characteristic.margin_below, characteristic.margin_above
    if scale is Scale.LOG:
        return (
            None if below is None else math.log(below),
            None if above is None else math.log(above),
        )
    return below, above


def _floored(ready: Comparable, scale: Scale) -> tuple[tuple[GroupSummary, ...], tuple[Notice, ...]]:
    """Give groups without any scatter the variance of rounding, resolution²/12, and say so."""
    summaries: list[GroupSummary] = []
    notices: list[Notice] = []
    for group, summary, values in zip(ready.groups, ready.summaries, ready.values, strict=True):
        if not all_equal(values):
            summaries.append(summary)
            continue
        step = 10.0 ** -max(u.decimals for u in group.units)
        resolution = step / abs(group.units[0].value) if scale is Scale.LOG else step
        summaries.append(with_floored_variance((summary,), resolution * resolution / 12.0)[0])
        notices.append(
            Notice(
                code="spread_floored",
                cells=tuple(u.cells[0] for u in group.units),
                text=f"All values of {group.label} are equal. Its scatter is taken as that of rounding to "
                f"{step:g} (variance {step:g}²/12), since none at all cannot be true of a measurement.",
            )
        )
    return tuple(summaries), tuple(notices)


def _all_within(
    posthoc: PosthocResult, by_label: dict[str, GroupSummary], margin: Margin, alpha: float
) -> bool | None:
    """Return whether two one-sided tests put every pair within the margin; None where none is set."""
    if margin == (None, None):
        return None
    own_df = [df_of(c, by_label) for c in posthoc.comparisons]
    within = all_within_margin(
        posthoc.comparisons, alpha=alpha, margin_below=margin[0], margin_above=margin[1], own_df=own_df
    )
    return within.all_within


def _pair(
    comparison: PairwiseComparison, planning: Planning | None, margin: Margin, scale: Scale, *, needed: bool
) -> PairResult:
    answer = judge(comparison.lower, comparison.upper, margin[0], margin[1])
    detectable = limits = settled_by = None
    if planning is not None:
        detectable = planning.detectable(comparison)
        limits = None if detectable is None else planning.detectable_limits(comparison, detectable)
        if needed and answer in OPEN_ANSWERS:
            settled_by = planning.needed_n(comparison)
    return PairResult(
        first=comparison.first,
        second=comparison.second,
        difference=_difference(comparison.difference, scale),
        se=comparison.se,
        statistic=comparison.statistic,
        df=comparison.df,
        critical_value=comparison.critical_value,
        p=comparison.p,
        lower=back_from_scale(comparison.lower, scale),
        upper=back_from_scale(comparison.upper, scale),
        detectable=back_from_scale(detectable, scale),
        detectable_limits=None
        if limits is None
        else (back_from_scale(limits[0], scale), back_from_scale(limits[1], scale)),
        needed_n=settled_by,
        answer=answer,
    )


def _known_scatter(
    characteristic: CharacteristicPlan, scale: Scale, known: KnownScatter | None
) -> tuple[Notice, ...]:
    """Say that what can be detected rests on a scatter from elsewhere and not on this export's."""
    if known is None:
        return ()
    unit = "natural logarithms" if scale is Scale.LOG else characteristic.unit
    text = (
        f"{characteristic.title}: the detectable differences rest on the scatter {known.words} "
        f"(standard deviation {known.sd:g} {unit}), not on the scatter seen in this export."
    )
    return (Notice(code="known_scatter_used", cells=(), text=text),)


def _difference(value: float, scale: Scale) -> float:
    """Return a pair's difference as reported; not a number where no double holds it."""
    back = back_from_scale(value, scale)
    return math.nan if back is None else back


def back_from_scale(value: float | None, scale: Scale) -> float | None:
    """Return a difference as reported: a ratio of geometric means on the log scale.

    A ratio beyond double precision is None, as an open end is.
    """
    if value is None or scale is not Scale.LOG:
        return value
    return math.exp(value) if value < _LARGEST_LOGARITHM else None
