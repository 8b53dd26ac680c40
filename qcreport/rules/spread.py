"""Whether the groups scatter alike: shown, declared, contradicted, or open.

A variance check that fails to reject proves nothing, least of all at small n. So spread counts as similar
only where a person has declared it and the data do not contradict, or where it has been shown: by an upper
confidence limit of the largest ratio of standard deviations (with the lines' history where there is one), or
by many earlier batches whose spreads hardly vary. The alternative policy lets this export's own check decide.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass

from qcreport.plan.model import SpreadDeclaration
from qcreport.rules.evidence import Check
from qcreport.rules.facts import CANNOT_BE_JUDGED, CONFLICT, DIFFERENT, SIMILAR
from qcreport.rules.history import SpreadHistory
from qcreport.rules.policy import THIS_EXPORT, SpreadPolicy
from qcreport.rules.spread_checks import (
    Pooled,
    SpreadChecks,
    conflict_check,
    description,
    levene_check,
    limit_check,
    together_check,
    variation_check,
)
from qcreport.stats.summary import GroupSummary

LEVENE_SOURCE = "Median-centred Levene: Brown and Forsythe (1974), J. Am. Stat. Assoc. 69, 364-367"
LIMIT_SOURCE = "Simultaneous upper limit of the largest ratio of standard deviations, F limits, Bonferroni"
VARIATION_SOURCE = (
    "Variation of ln sigma beyond sampling: Bartlett and Kendall (1946), Suppl. J. R. Stat. Soc. 8, 128-138"
)
CONFLICT_SOURCE = "F of each group against the pooled rest, shared over the groups"


@dataclass(frozen=True, slots=True, kw_only=True)
class SpreadJudgement:
    """The fact `spread` with all that led to it."""

    value: str
    """similar, different, cannot be judged or conflict."""
    observed: str
    """What was declared or seen, one or two sentences."""
    source: str
    """What it rests on."""
    checks: tuple[Check, ...]
    """All variance checks as computed."""


def judge_spread(
    groups: Sequence[GroupSummary],
    values: Sequence[Sequence[float]],
    policy: SpreadPolicy,
    declaration: SpreadDeclaration | None,
    earliest: dt.date | None,
    history: SpreadHistory | None = None,
    within: Sequence[Pooled] = (),
) -> SpreadJudgement:
    """Judge the spread of two or more groups, at least one of which varies.

    Parameters
    ----------
    groups, values
        Summaries and values of the compared groups, same order.
    policy
        The decision table's policy.
    declaration
        The plan's, or None.
    earliest
        Date of the earliest measurement, or None where the export has no times.
    history
        Spread of earlier exports, or None.
    within
        This export's part of what is pooled with the lines' history, same order as `groups`.
    """
    by_this_export = policy.policy == THIS_EXPORT
    variation = None if by_this_export else variation_check(groups, history, policy)
    declared = declaration is not None and declaration.similar
    checks = SpreadChecks(
        levene=levene_check(groups, values, policy),
        limit=limit_check(groups, policy),
        together=None if by_this_export else together_check(groups, within, history, policy),
        variation=variation,
        conflict=conflict_check(groups, policy) if declared or variation is not None else None,
        description=description(groups),
    )
    if by_this_export:
        value, observed, source = _by_this_export(checks, policy)
    else:
        value, observed, source = _shown_or_declared(checks, groups, policy, declaration, earliest)
    return SpreadJudgement(value=value, observed=observed, source=source, checks=checks.all())


def _by_this_export(checks: SpreadChecks, policy: SpreadPolicy) -> tuple[str, str, str]:
    p = checks.levene.p
    if p is None:
        return CANNOT_BE_JUDGED, "The variance check is not defined for this export.", LEVENE_SOURCE
    value = DIFFERENT if p < policy.different_level else SIMILAR
    words = "objects" if value == DIFFERENT else "does not object"
    return (
        value,
        f"This export's own variance check {words} at level {policy.different_level:g}.",
        LEVENE_SOURCE,
    )


def _shown_or_declared(
    checks: SpreadChecks,
    groups: Sequence[GroupSummary],
    policy: SpreadPolicy,
    declaration: SpreadDeclaration | None,
    earliest: dt.date | None,
) -> tuple[str, str, str]:
    size_ratio = max(g.n for g in groups) / min(g.n for g in groups)
    set_aside = ""
    if declaration is not None:
        who = f"{declaration.by}, {declaration.on.isoformat()}"
        if not declaration.similar:
            return DIFFERENT, f"Declared different by {who}: {declaration.reason}", "Comparison plan"
        set_aside = _why_set_aside(checks, declaration, policy, size_ratio, earliest)
        if not set_aside:
            return SIMILAR, f"Declared similar by {who}: {declaration.reason}", "Comparison plan"
        if checks.conflict is not None and checks.conflict.met is False:
            return CONFLICT, set_aside, CONFLICT_SOURCE
    value, observed, source = _shown(checks, policy, size_ratio)
    return value, f"{set_aside} {observed}".strip(), source


def _why_set_aside(
    checks: SpreadChecks,
    declaration: SpreadDeclaration,
    policy: SpreadPolicy,
    size_ratio: float,
    earliest: dt.date | None,
) -> str:
    """Return why the declaration does not count; empty where it does."""
    who = f"{declaration.by}, {declaration.on.isoformat()}"
    if checks.conflict is not None and checks.conflict.met is False:
        return (
            f"Data and declaration conflict: declared similar by {who}, but {checks.conflict.note} "
            "scatters more than the other groups together. The declaration is set aside."
        )
    if earliest is not None and declaration.on > earliest:
        return (
            f"Declared similar by {who}, after the first measurement ({earliest.isoformat()}); "
            "a declaration counts only when made before the data."
        )
    if size_ratio > policy.declared_size_ratio and not declaration.accept_unequal_sizes:
        return (
            f"Declared similar by {who}, but the largest group is more than {policy.declared_size_ratio:g} "
            "times the smallest and the plan does not say accept_unequal_sizes."
        )
    return ""


def _shown(checks: SpreadChecks, policy: SpreadPolicy, size_ratio: float) -> tuple[str, str, str]:
    if size_ratio <= policy.shown_size_ratio and (shown := _shown_by_data(checks, policy)):
        return (SIMILAR, *shown)
    if checks.levene.met is False:
        return DIFFERENT, "Seen in this export: the groups scatter differently.", LEVENE_SOURCE
    return CANNOT_BE_JUDGED, _not_shown(checks, policy, size_ratio), LIMIT_SOURCE


def _shown_by_data(checks: SpreadChecks, policy: SpreadPolicy) -> tuple[str, str] | None:
    """Return what shows that spread is similar and what that rests on; None where nothing does.

    Where every line has a history, it decides together with this export; a second look at this export alone
    would be a second chance.
    """
    ratio = f"no standard deviation is more than {policy.ratio_limit:g} times another."
    if checks.together is not None:
        if checks.together.met:
            return f"Shown by the lines' history and this export together: {ratio}", LIMIT_SOURCE
        return None
    if checks.limit.met:
        return f"Shown by this export: {ratio}", LIMIT_SOURCE
    contradicted = checks.conflict is not None and checks.conflict.met is False
    if checks.variation is not None and checks.variation.met and not contradicted:
        words = (
            f"Shown by {checks.variation.note.split(',')[0]}: the standard deviation of ln sigma over "
            f"batches is at most {policy.history_sd_ln:g}, and no group of this export contradicts that."
        )
        return words, VARIATION_SOURCE
    return None


def _not_shown(checks: SpreadChecks, policy: SpreadPolicy, size_ratio: float) -> str:
    """Return why spread is not shown to be similar though nothing shows that it differs."""
    if size_ratio > policy.shown_size_ratio and any(
        check is not None and check.met for check in (checks.limit, checks.together, checks.variation)
    ):
        return (
            f"Not shown: the largest group is more than {policy.shown_size_ratio:g} times the smallest, and "
            "with such sizes even a small difference in spread would matter."
        )
    if checks.variation is not None and checks.variation.met and checks.conflict is not None:
        return (
            f"Not shown: earlier batches scatter alike, but {checks.conflict.note} scatters more than the "
            "other groups of this export together."
        )
    with_history = "" if checks.together is None else " with the lines' history"
    return (
        f"Not shown: this export{with_history} is too small to say that no group scatters more than "
        f"{policy.ratio_limit:g} times as much as another, and a check that fails to object proves nothing."
    )
