"""What must hold for any data: order, unit and labels change only what they should."""

import math
from fractions import Fraction

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy import stats

from qcreport.stats.equivalence import SERIOUSNESS, judge
from qcreport.stats.one_way import anova, welch
from qcreport.stats.pooled import tukey_kramer
from qcreport.stats.reference import dunnett, dunnett_unequal, dunnett_weighted
from qcreport.stats.summary import summarize
from qcreport.stats.unequal import dunnett_c, dunnett_t3, games_howell, tamhane_t2

ALL_PAIRS = (tukey_kramer, games_howell, dunnett_t3, dunnett_c, tamhane_t2)
WITH_REFERENCE = (dunnett, dunnett_unequal, dunnett_weighted)
few = settings(max_examples=25, deadline=None)

number = st.integers(-3000, 3000).map(lambda n: n / 100.0)
values = st.lists(number, min_size=3, max_size=8).filter(lambda v: len(set(v)) > 1)
tables = st.lists(values, min_size=2, max_size=5)


def summaries(table):
    return [summarize(f"G{i}", group) for i, group in enumerate(table)]


def pairs_of(result):
    return {(c.first, c.second): c for c in result.comparisons}


@pytest.mark.parametrize("procedure", ALL_PAIRS)
@few
@given(table=tables, data=st.data())
def test_order_of_groups_and_values_changes_only_the_order(procedure, table, data) -> None:
    order = data.draw(st.permutations(range(len(table))))
    straight = pairs_of(procedure(summaries(table), alpha=0.05))
    groups = summaries([sorted(group) for group in table])
    turned = pairs_of(procedure([groups[i] for i in order], alpha=0.05))
    for (first, second), pair in straight.items():
        if (first, second) in turned:
            other, sign = turned[first, second], 1.0
        else:
            other, sign = turned[second, first], -1.0
        assert other.difference == pytest.approx(sign * pair.difference, rel=1e-12, abs=1e-12)
        assert other.se == pytest.approx(pair.se, rel=1e-12)
        assert other.p == pytest.approx(pair.p, rel=1e-9, abs=1e-300)


@pytest.mark.parametrize("procedure", ALL_PAIRS)
@few
@given(table=tables, shift=st.integers(-1000, 1000), scale=st.sampled_from([2.0**-20, 0.5, 4.0, 2.0**30]))
def test_shift_and_unit_change_only_what_carries_the_unit(procedure, table, shift, scale) -> None:
    straight = procedure(summaries(table), alpha=0.05)
    moved = procedure(summaries([[(v + shift) * scale for v in group] for group in table]), alpha=0.05)
    for pair, other in zip(straight.comparisons, moved.comparisons, strict=True):
        assert other.difference == pytest.approx(pair.difference * scale, rel=1e-9, abs=1e-9 * scale)
        assert other.se == pytest.approx(pair.se * scale, rel=1e-9)
        assert other.lower == pytest.approx(pair.lower * scale, rel=1e-8, abs=1e-9 * scale)
        assert other.p == pytest.approx(pair.p, rel=1e-6, abs=1e-300)


@pytest.mark.parametrize("procedure", ALL_PAIRS)
@few
@given(table=tables, alpha=st.sampled_from([0.01, 0.05, 0.2]))
def test_interval_excludes_zero_exactly_when_p_is_below_alpha(procedure, table, alpha) -> None:
    for pair in procedure(summaries(table), alpha=alpha).comparisons:
        assume(abs(pair.p / alpha - 1.0) > 1e-9)
        assert (pair.lower > 0.0 or pair.upper < 0.0) == (pair.p < alpha)
        assert (abs(pair.statistic) > pair.critical_value) == (pair.p < alpha)
        assert pair.lower <= pair.difference <= pair.upper
        assert 0.0 <= pair.p <= 1.0


@pytest.mark.parametrize("procedure", WITH_REFERENCE)
@pytest.mark.parametrize("direction", ["both", "lower", "higher"])
@few
@given(table=tables)
def test_reference_intervals_agree_with_p(procedure, direction, table) -> None:
    result = procedure(summaries(table), reference=len(table) - 1, alpha=0.05, direction=direction)
    for pair in result.comparisons:
        assume(abs(pair.p / 0.05 - 1.0) > 1e-9)
        above = pair.lower is not None and pair.lower > 0.0
        below = pair.upper is not None and pair.upper < 0.0
        assert (above or below) == (pair.p < 0.05)


@few
@given(first=values, second=values)
def test_two_groups_are_the_t_tests(first, second) -> None:
    groups = [summarize("A", first), summarize("B", second)]
    pooled = stats.ttest_ind(first, second)
    separate = stats.ttest_ind(first, second, equal_var=False)
    assert anova(groups).p == pytest.approx(pooled.pvalue, rel=1e-9)
    assert welch(groups).p == pytest.approx(separate.pvalue, rel=1e-9)
    for procedure in (tukey_kramer,):
        assert procedure(groups, alpha=0.05).comparisons[0].p == pytest.approx(pooled.pvalue, rel=1e-9)
    assert dunnett(groups, reference=1, alpha=0.05).comparisons[0].p == pytest.approx(pooled.pvalue, rel=1e-9)
    for procedure in (games_howell, dunnett_t3, tamhane_t2):
        pair = procedure(groups, alpha=0.05).comparisons[0]
        assert pair.p == pytest.approx(separate.pvalue, rel=1e-9)
        assert pair.statistic == pytest.approx(separate.statistic, rel=1e-9, abs=1e-12)
        interval = separate.confidence_interval(0.95)
        assert (pair.lower, pair.upper) == pytest.approx((interval.low, interval.high), rel=1e-8, abs=1e-9)
    unequal = dunnett_unequal(groups, reference=1, alpha=0.05).comparisons[0]
    assert unequal.p == pytest.approx(separate.pvalue, rel=1e-9)


@few
@given(table=tables)
def test_one_sided_p_values_mirror_when_the_data_are_mirrored(table) -> None:
    mirrored = [[-v for v in group] for group in table]
    for procedure in WITH_REFERENCE:
        up = procedure(summaries(table), reference=0, alpha=0.05, direction="higher")
        down = procedure(summaries(mirrored), reference=0, alpha=0.05, direction="lower")
        for one, other in zip(up.comparisons, down.comparisons, strict=True):
            assert other.p == pytest.approx(one.p, rel=1e-12)
            assert other.upper == pytest.approx(-one.lower, rel=1e-12, abs=1e-12)


end = st.one_of(st.none(), st.floats(-5.0, 5.0))


@settings(max_examples=300, deadline=None)
@given(a=st.floats(-5.0, 5.0), b=st.floats(-5.0, 5.0), margin=st.floats(0.1, 4.0))
def test_every_interval_has_one_answer_and_mirrors(a, b, margin) -> None:
    low, high = min(a, b), max(a, b)
    code = judge(low, high, -margin, margin)
    assert code in SERIOUSNESS
    assert judge(-high, -low, -margin, margin) == code
    inside = -margin <= low and high <= margin
    assert (code in ("within_margin", "equivalent")) == inside
    excludes = low > 0.0 or high < 0.0
    assert (code in ("matters", "different", "within_margin")) == excludes
    assert (judge(low, high, None, None) == "different") == excludes


@settings(max_examples=60, deadline=None)
@given(group=st.lists(st.floats(-1e6, 1e6), min_size=2, max_size=40))
def test_summary_agrees_with_exact_arithmetic(group) -> None:
    exact = [Fraction(v) for v in group]
    mean = sum(exact) / len(exact)
    variance = sum((v - mean) ** 2 for v in exact) / (len(exact) - 1)
    assume(variance == 0 or variance > Fraction(1, 10**200))
    found = summarize("A", group)
    assert abs(Fraction(found.mean) - mean) <= Fraction(math.ulp(found.mean))
    assert abs(Fraction(found.mean) + Fraction(found.mean_residual) - mean) <= abs(mean) * Fraction(
        1, 10**29
    ) + Fraction(1, 10**300)
    if variance == 0:
        assert found.variance == 0.0
    else:
        assert abs(Fraction(found.variance) / variance - 1) < Fraction(1, 10**14)
