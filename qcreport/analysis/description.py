"""What is computed beside the answers: it informs a reader and never chooses or answers."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

from qcreport.analysis.comparable import Comparable
from qcreport.analysis.result import EffectSize, PairResult
from qcreport.errors import StatisticsError
from qcreport.plan.model import RANKS
from qcreport.rules.evidence import Check
from qcreport.stats.effects import EffectSize as ComputedEffect
from qcreport.stats.effects import hedges_g, omega_squared
from qcreport.stats.letters import compact_letters
from qcreport.stats.normality import scaled_residuals, shapiro_wilk
from qcreport.stats.one_way import anova

SMALLEST_RESIDUALS: Final = 10
"""Residuals from which normality is looked at."""
MOST_RESIDUALS: Final = 5000
"""Residuals up to which the approximation of the Shapiro–Wilk law was made."""
MOST_EFFECTS: Final = 300
"""Pairs up to which effect sizes are given; beyond it nobody reads them and they take the time."""


def normality(ready: Comparable) -> tuple[Check, ...]:
    """Return Shapiro–Wilk on residuals scaled by their own group's spread; empty where there are too few."""
    if ready.censored or not ready.groups:
        return ()
    residuals = scaled_residuals([g.label for g in ready.groups], ready.values)
    if not SMALLEST_RESIDUALS <= len(residuals) <= MOST_RESIDUALS:
        return ()
    try:
        found = shapiro_wilk(residuals)
    except StatisticsError:
        return ()
    note = f"{len(residuals)} residuals, each scaled by the spread of its own group"
    return (
        Check(
            name=found.name,
            statistic=found.statistic,
            df=found.df,
            p=found.p,
            threshold=None,
            met=None,
            note=note,
        ),
    )


def letters(ready: Comparable, pairs: Sequence[PairResult], procedure: str) -> tuple[str, ...]:
    """Return the compact letters of the compared groups, group order; empty with a reference.

    Two groups share a letter exactly where their pair was not shown to differ (Piepho 2004).
    """
    if ready.reference is not None or not pairs or procedure == "none":
        return ()
    index = {g.label: i for i, g in enumerate(ready.groups)}
    shown = {"matters", "different", "within_margin"}
    different = [(index[p.first], index[p.second]) for p in pairs if p.answer in shown]
    return compact_letters(len(ready.groups), different)


def pair_effects(
    ready: Comparable, pairs: Sequence[PairResult], procedure: str
) -> tuple[EffectSize | None, ...]:
    """Return Hedges' g of every pair, pair order; empty for ranks, limits, or very many pairs."""
    if ready.censored or procedure in RANKS or len(pairs) > MOST_EFFECTS:
        return ()
    by_label = {s.label: s for s in ready.summaries}

    def effect(pair: PairResult) -> EffectSize | None:
        try:
            return _frozen(hedges_g(by_label[pair.first], by_label[pair.second]))
        except StatisticsError:
            return None

    return tuple(effect(pair) for pair in pairs)


def overall_effect(ready: Comparable) -> EffectSize | None:
    """Return omega squared of the one-way analysis of variance; None where there is none."""
    if len(ready.groups) < 2 or ready.censored or not ready.varies:
        return None
    try:
        return _frozen(omega_squared(anova(ready.summaries)))
    except StatisticsError:
        return None


def _frozen(computed: ComputedEffect) -> EffectSize:
    return EffectSize(
        name=computed.name,
        value=computed.value,
        lower=computed.lower,
        upper=computed.upper,
        confidence=computed.confidence,
    )
