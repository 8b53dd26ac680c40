"""The scatter known without this export: the plan's before the history's, and only enough of that."""

from __future__ import annotations

import dataclasses
import math

import pytest
from analysis_cases import CONTEXT, of_groups, plan, rules
from scipy import stats

from qcreport.analysis import Result, analyse
from qcreport.rules.history import BatchHistory, SpreadHistory

GROUPS = {"A": (24.1, 24.9, 23.6, 24.4, 25.0), "B": (24.3, 23.9, 24.8, 24.6, 23.7)}


def with_batches(count: int, *, variances: tuple[float, ...] = (1.0, 4.0), **asked: str) -> Result:
    """Return the analysis after so many earlier batches of five results."""
    batches = tuple(
        BatchHistory(label=f"P{i}", n=5, df=4.0, variance=variances[i % len(variances)]) for i in range(count)
    )
    history = SpreadHistory(characteristic="strength", batches=batches)
    context = dataclasses.replace(CONTEXT, history=(history,))
    return analyse(of_groups(GROUPS), plan(**asked), rules(), context)


def test_enough_history_gives_the_pooled_scatter() -> None:
    result = with_batches(10)
    (found,) = result.characteristics
    assert found.known_scatter == pytest.approx(math.sqrt(2.5))  # mean of 1 and 4, equal df
    assert found.known_scatter_from == "history"
    (pair,) = found.pairs
    assert pair.detectable_limits is None
    se = math.sqrt(2.5) * math.sqrt(2 / 5)
    assert pair.critical_value is not None
    assert pair.detectable is not None
    assert pair.df is not None
    assert stats.nct.sf(pair.critical_value, pair.df, pair.detectable / se) == pytest.approx(0.8)
    (notice,) = [n for n in result.notices if n.code == "known_scatter_used"]
    assert "earlier batches" in notice.text
    assert "40 degrees of freedom" in notice.text


def test_short_history_is_not_used() -> None:
    (found,) = with_batches(7).characteristics  # 28 degrees of freedom
    assert found.known_scatter is None
    assert found.known_scatter_from is None
    assert found.pairs[0].detectable_limits is not None


def test_history_without_scatter_is_not_used() -> None:
    (found,) = with_batches(10, variances=(0.0,)).characteristics
    assert found.known_scatter is None


def test_the_plan_comes_first() -> None:
    (found,) = with_batches(10, characteristic="scatter = 2.0").characteristics
    assert found.known_scatter == 2.0
    assert found.known_scatter_from == "plan"
