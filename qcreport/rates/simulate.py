"""How often a decision table, with its checks, finds a difference where there is none."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from qcreport.rates.design import Design
from qcreport.rates.draw import Array, Draws, Source
from qcreport.rates.rejections import PROCEDURES, Found, any_rejected
from qcreport.rates.spread import conflicts, levene_objects, ratio_within
from qcreport.rules import Facts, RulesTable, choose
from qcreport.rules.facts import CANNOT_BE_JUDGED, CONFLICT, DIFFERENT, SIMILAR
from qcreport.rules.policy import THIS_EXPORT

_VALUES = (SIMILAR, DIFFERENT, CANNOT_BE_JUDGED, CONFLICT)


@dataclass(frozen=True, slots=True, kw_only=True)
class Standing:
    """What is known of spread before the results: the plan's declaration, the history."""

    declared: str = "nothing"
    """`nothing`; `similar` (and it counts unless the data conflict); `set aside` (declared similar, but too
    late or for sizes it does not accept); `different`."""
    lines: tuple[float, ...] = ()
    """Degrees of freedom of each group's history; empty where not every line has one."""
    batches: bool = False
    """Whether earlier batches show that spread hardly varies."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Asked:
    """Whose error rate is asked for."""

    table: RulesTable
    """The decision table."""
    facts: Facts
    """Facts of the design; `spread` is judged anew in each replicate."""
    design: Design
    """Sizes, reference, level."""
    standing: Standing = Standing()
    """What is known of spread."""
    procedure: str | None = None
    """The procedure that a plan fixes; None where the table chooses."""

    def chosen(self) -> dict[str, str]:
        """Return the procedure for each value of the fact `spread`."""
        return _chosen(self.table, self.facts, self.procedure)

    def on_means(self) -> bool:
        """Return whether every procedure that may be chosen compares means, or nothing."""
        return set(self.chosen().values()) <= set(PROCEDURES)


@lru_cache(maxsize=256)
def _chosen(table: RulesTable, facts: Facts, procedure: str | None) -> dict[str, str]:
    if procedure is not None:
        return dict.fromkeys(_VALUES, procedure)
    return {value: choose(table, replace(facts, spread=value)).procedure for value in _VALUES}


def needs_values(asked: Asked) -> bool:
    """Return whether results must be drawn one by one, because Levene's check can change the procedure."""
    chosen = asked.chosen()
    if len(set(chosen.values())) == 1:
        return False
    return asked.table.spread.policy == THIS_EXPORT or chosen[DIFFERENT] != chosen[CANNOT_BE_JUDGED]


def alarms(asked: Asked, draws: Draws, sds: Sequence[float], source: Source) -> Found:
    """Return for each replicate whether the table's procedure finds any difference.

    `sds` are the true standard deviations; a line's history is drawn with them.
    """
    chosen = asked.chosen()
    if len(set(chosen.values())) == 1:
        return any_rejected(chosen[SIMILAR], asked.design, draws)
    judged = _judged(asked, draws, sds, source)
    found = np.zeros(draws.means.shape[1], dtype=bool)
    for procedure in sorted(set(chosen.values())):
        codes = [code for code, value in enumerate(_VALUES) if chosen[value] == procedure]
        rows = np.flatnonzero(np.isin(judged, codes))
        if rows.size:
            part = Draws(means=draws.means[:, rows], variances=draws.variances[:, rows], levene=None)
            found[rows] = any_rejected(procedure, asked.design, part)
    return found


def _judged(asked: Asked, draws: Draws, sds: Sequence[float], source: Source) -> NDArray[np.intp]:
    """Return the position in `_VALUES` of what each replicate's spread is judged to be."""
    policy, standing, dfs = asked.table.spread, asked.standing, asked.design.dfs
    similar, different, open_, conflict = range(len(_VALUES))
    objects = np.zeros(draws.means.shape[1], dtype=bool)
    if draws.levene is not None:
        objects = levene_objects(dfs, draws.levene, level=policy.different_level)
    if policy.policy == THIS_EXPORT:
        return np.where(objects, different, similar)
    if standing.declared == "different":
        return np.full(draws.means.shape[1], different)
    judged = np.where(objects, different, open_)
    contradicted = conflicts(dfs, draws.variances, level=policy.conflict_level)
    if asked.design.size_ratio <= policy.shown_size_ratio:
        judged[_shown(asked, draws.variances, sds, source, contradicted)] = similar
    if standing.declared == "similar":
        judged[:] = similar
    if standing.declared in ("similar", "set aside"):
        judged[contradicted] = conflict
    return judged


def _shown(
    asked: Asked, variances: Array, sds: Sequence[float], source: Source, contradicted: Found
) -> Found:
    """Return whether the data show that spread is similar."""
    policy, standing, dfs = asked.table.spread, asked.standing, np.array(asked.design.dfs)
    if standing.lines:
        earlier, true = np.array(standing.lines)[:, None], np.array(sds, dtype=float)[:, None] ** 2
        drawn = source.chisquare(earlier, variances.shape) * true
        own = dfs[:, None]
        variances, dfs = (drawn + own * variances) / (earlier + own), (earlier + own)[:, 0]
    shown = ratio_within(
        tuple(map(float, dfs)), variances, limit=policy.ratio_limit, confidence=policy.confidence
    )
    if standing.batches and len(dfs) <= policy.history_groups:
        shown |= ~contradicted
    return shown
