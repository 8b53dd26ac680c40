"""Everything about one characteristic, from its groups to its frozen result."""

from __future__ import annotations

from qcreport.analysis.comparable import Comparable
from qcreport.analysis.contrasts import estimated_contrasts
from qcreport.analysis.description import letters, normality, overall_effect, pair_effects
from qcreport.analysis.design_rate import design_rate
from qcreport.analysis.flags import flag
from qcreport.analysis.known_scatter import known_scatter
from qcreport.analysis.left_out import groups_without, units_left_out, with_left_out
from qcreport.analysis.outcome import Outcome, Question, decide, sensitivity
from qcreport.analysis.ranks import overall_by_ranks
from qcreport.analysis.result import (
    CharacteristicResult,
    GroupResult,
    NotCompared,
    Overall,
    UnitValue,
)
from qcreport.analysis.screen import Group
from qcreport.errors import StatisticsError
from qcreport.measurements import MeasurementSet, Notice
from qcreport.plan.model import POOLED, RANKS
from qcreport.rules.facts import SIMILAR
from qcreport.stats.one_way import AnovaResult, anova, supported_digits, welch
from qcreport.stats.summary import GroupSummary, summarize


def characteristic_result(
    measurements: MeasurementSet, question: Question
) -> tuple[CharacteristicResult, tuple[Notice, ...]]:
    """Return the result of one characteristic and the notices its computation adds."""
    groups = groups_without(measurements, question.plan, question.characteristic, question.left_out)
    outcome = decide(groups, question)
    comparison, c = outcome.comparison, question.characteristic
    pairs = () if comparison is None else comparison.pairs
    known = known_scatter(c, question.history)
    table = _variance_table(outcome.ready)
    contrasts, missing = estimated_contrasts(outcome, question)
    result = CharacteristicResult(
        name=c.name,
        title=c.title,
        unit=c.unit,
        alpha=question.alpha,
        margin=(c.margin_below, c.margin_above),
        scale=question.plan.scale.value,
        direction=c.direction.value,
        lower_limit=c.lower_limit,
        upper_limit=c.upper_limit,
        known_scatter=None if known is None else known.sd,
        known_scatter_from=None if known is None else known.source,
        independent_unit=question.plan.independent_unit.value,
        reference=question.plan.reference,
        groups=tuple(
            _group_result(g, units_left_out(measurements, question, g.label)) for g in groups if g.n > 0
        ),
        not_compared=_not_compared(outcome),
        checks=(*outcome.gathered.checks, *normality(outcome.ready)),
        facts=outcome.gathered.evidence,
        rule=outcome.choice.rule,
        trace=outcome.choice.trace,
        overall=_overall(outcome, table),
        analysis_of_variance=table,
        procedure=outcome.procedure,
        critical_value=None if comparison is None else comparison.posthoc.critical_value,
        hsd=None if comparison is None else comparison.posthoc.hsd,
        all_within_margin=_all_within(outcome),
        pairs=pairs,
        sensitivity=sensitivity(outcome, question),
        law=None if comparison is None else comparison.posthoc.law,
        letters=letters(outcome.ready, pairs, outcome.procedure),
        pair_effects=pair_effects(outcome.ready, pairs, outcome.procedure),
        overall_effect=overall_effect(outcome.ready),
        contrasts=contrasts,
        flagged=flag(groups, outcome, question),
        answer=outcome.answer,
        error_rate=design_rate(outcome, question),
        left_out=with_left_out(outcome, measurements, question),
    )
    return result, missing if comparison is None else (*comparison.notices, *missing)


def _all_within(outcome: Outcome) -> bool | None:
    """Return whether every pair is within the margin; what was not compared was not shown to be."""
    if outcome.comparison is None or outcome.comparison.all_within_margin is None:
        return None
    return outcome.comparison.all_within_margin and not outcome.ready.not_compared


def _not_compared(outcome: Outcome) -> tuple[NotCompared, ...]:
    if outcome.comparison is not None:
        return outcome.ready.not_compared
    reason = outcome.choice.rule.reason if outcome.choice.procedure == "none" else outcome.why_none
    rest = tuple(NotCompared(label=g.label, n=g.n, reason=reason) for g in outcome.ready.groups)
    return (*outcome.ready.not_compared, *rest)


def _group_result(group: Group, left_out: tuple[UnitValue, ...]) -> GroupResult:
    summary = _described(group)
    return GroupResult(
        label=group.label,
        n=group.n,
        n_readings=group.n_readings,
        mean=None if summary is None else summary.mean,
        sd=None if summary is None or group.n < 2 else summary.variance**0.5,
        minimum=None if summary is None else summary.minimum,
        maximum=None if summary is None else summary.maximum,
        median=None if summary is None else summary.median,
        censored=group.censored,
        missing=group.missing,
        cells=tuple(cell for u in group.units for cell in u.cells),
        units=(*group.units, *left_out),
    )


def _described(group: Group) -> GroupSummary | None:
    """Return the summary of a group's numbers; None where a limit or double precision stands against it."""
    if group.censored:
        return None
    try:
        return summarize(group.label, group.values, allow_single=True)
    except StatisticsError:
        return None


def _variance_table(ready: Comparable) -> Overall | None:
    if len(ready.groups) < 2 or not ready.varies or ready.censored:
        return None
    try:
        return _as_overall(anova(ready.summaries), supported_digits(ready.summaries), pooled=True)
    except StatisticsError:
        return None


def _overall(outcome: Outcome, table: Overall | None) -> Overall | None:
    """Return the overall test that goes with the procedure and the spread fact; never a gate."""
    if outcome.procedure in RANKS:
        return overall_by_ranks(outcome.ready)
    if table is None:
        return None
    if outcome.procedure in POOLED or _similar(outcome):
        return table
    summaries = outcome.ready.summaries if outcome.comparison is None else outcome.comparison.summaries
    try:
        return _as_overall(welch(summaries), table.supported_digits, pooled=False)
    except StatisticsError:
        return None


def _similar(outcome: Outcome) -> bool:
    return outcome.gathered.facts.spread == SIMILAR


def _as_overall(result: AnovaResult, digits: int, *, pooled: bool) -> Overall:
    return Overall(
        name=result.procedure,
        statistic=result.statistic,
        df=(result.df_between, result.df_within),
        p=result.p,
        ms_within=result.ms_within if pooled else None,
        ms_between=result.ms_between if pooled else None,
        ss_within=result.ss_within if pooled else None,
        ss_between=result.ss_between if pooled else None,
        supported_digits=digits,
    )
