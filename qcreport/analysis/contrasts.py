"""The plan's contrasts estimated from the compared groups."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.analysis.compare import back_from_scale
from qcreport.analysis.contrast_result import ContrastResult
from qcreport.analysis.outcome import Outcome, Question
from qcreport.errors import StatisticsError
from qcreport.measurements import Notice
from qcreport.plan.model import BY_RULES, POOLED, RANKS, ContrastPlan
from qcreport.rules.facts import SIMILAR
from qcreport.stats.contrasts import ContrastEstimate, brown_forsythe_contrasts, scheffe

Estimated = tuple[tuple[ContrastResult, ...], tuple[Notice, ...]]


def estimated_contrasts(outcome: Outcome, question: Question) -> Estimated:
    """Return the contrasts that can be estimated, and a notice on each that cannot.

    One pooled variance serves where spread counts as similar or the plan fixes a procedure that pools; else
    each group's own.
    """
    asked, title = question.plan.contrasts, question.characteristic.title
    if not asked or outcome.comparison is None:
        return (), ()
    if outcome.procedure in RANKS:
        return (), tuple(_notice(c, title, "ranks have no means to weigh") for c in asked)
    groups = outcome.comparison.summaries
    labels = [g.label for g in groups]
    found = [c for c in asked if all(label in labels for label, _ in c.weights)]
    notices = [_absent(c, title, labels) for c in asked if c not in found]
    pooled = _pools(outcome, question)
    rows = [[dict(c.weights).get(label, 0.0) for label in labels] for c in found]
    try:
        estimates = (scheffe if pooled else brown_forsythe_contrasts)(groups, rows, alpha=question.alpha)
    except StatisticsError as error:
        return (), (*notices, *(_notice(c, title, error.text) for c in found))
    results = [
        _result(c, estimate, question, "scheffe" if pooled else "brown_forsythe")
        for c, estimate in zip(found, estimates, strict=True)
    ]
    return tuple(results), tuple(notices)


def _pools(outcome: Outcome, question: Question) -> bool:
    if question.plan.procedure != BY_RULES:
        return outcome.procedure in POOLED
    return outcome.gathered.facts.spread == SIMILAR


def _result(
    contrast: ContrastPlan, estimate: ContrastEstimate, question: Question, procedure: str
) -> ContrastResult:
    scale = question.plan.scale
    return ContrastResult(
        name=contrast.name,
        procedure=procedure,
        weights=contrast.weights,
        estimate=back_from_scale(estimate.estimate, scale),
        se=estimate.se,
        statistic=estimate.statistic,
        df=estimate.df,
        critical_value=estimate.critical_value,
        p=estimate.p,
        lower=back_from_scale(estimate.lower, scale),
        upper=back_from_scale(estimate.upper, scale),
    )


def _absent(contrast: ContrastPlan, title: str, labels: Sequence[str]) -> Notice:
    absent = [label for label, _ in contrast.weights if label not in labels]
    return _notice(contrast, title, f"not among the compared groups: {', '.join(absent)}")


def _notice(contrast: ContrastPlan, title: str, why: str) -> Notice:
    text = f"{title}: the contrast {contrast.name} was not estimated ({why.rstrip('.')})."
    return Notice(code="contrast_not_estimated", cells=(), text=text)
