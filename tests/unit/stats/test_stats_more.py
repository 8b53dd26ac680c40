"""Letters, contrasts, adjustment, effects, normality, several outliers, variation of spread."""

import math
from itertools import combinations

import numpy as np
import pytest
from scipy import stats

from qcreport.errors import DegenerateDataError, TooFewObservationsError
from qcreport.stats.contrasts import scheffe
from qcreport.stats.effects import hedges_g, omega_squared
from qcreport.stats.letters import compact_letters
from qcreport.stats.multiplicity import holm
from qcreport.stats.normality import scaled_residuals, shapiro_wilk
from qcreport.stats.one_way import anova
from qcreport.stats.outliers import generalized_esd
from qcreport.stats.spread_history import spread_variation
from qcreport.stats.summary import summarize

DRAW = np.random.default_rng(5)
GROUPS = [
    summarize(label, DRAW.normal(shift, 1.0, n).tolist())
    for label, shift, n in (("A", 0, 6), ("B", 0.4, 9), ("C", 2, 7))
]


def test_letters_keep_every_decision_for_all_patterns_of_four_groups() -> None:
    pairs = list(combinations(range(4), 2))
    for pattern in range(64):
        different = [pair for bit, pair in enumerate(pairs) if pattern >> bit & 1]
        letters = compact_letters(4, different)
        for i, j in pairs:
            assert (not set(letters[i]) & set(letters[j])) == ((i, j) in different), (different, letters)
        assert all(letters)


def test_letters_rise_with_the_order_of_groups() -> None:
    assert compact_letters(3, []) == ("a", "a", "a")
    assert compact_letters(3, [(0, 1), (0, 2), (1, 2)]) == ("a", "b", "c")
    assert compact_letters(4, [(3, 0), (0, 2)]) == ("a", "ab", "b", "b")
    assert compact_letters(30, list(combinations(range(30), 2)))[26:28] == ("a1", "b1")


@pytest.mark.parametrize("pair", [(0, 3), (1, 1), (-1, 0)])
def test_letters_of_pairs_that_are_none(pair) -> None:
    with pytest.raises(DegenerateDataError):
        compact_letters(3, [pair])


def test_letters_drop_what_the_others_hold() -> None:
    """Inserting and absorbing alone leaves a fifth letter here, whose pairs all share another one."""
    different = [(0, 1), (0, 3), (0, 5), (2, 5), (3, 4)]
    letters = compact_letters(6, different)
    assert letters == ("a", "bcd", "ab", "bc", "ad", "cd")
    for i, j in combinations(range(6), 2):
        assert (not set(letters[i]) & set(letters[j])) == ((i, j) in different)


def test_scheffe_of_two_groups_is_the_pooled_t_test() -> None:
    found = scheffe(GROUPS[:2], [[1.0, -1.0]], alpha=0.05)[0]
    f = anova(GROUPS[:2])
    assert found.p == pytest.approx(f.p, rel=1e-12)
    assert found.statistic**2 == pytest.approx(f.statistic, rel=1e-12)


def test_scheffe_holds_for_the_worst_contrast() -> None:
    """The largest statistic over all contrasts is sqrt((k - 1) F), reached by n (mean - grand mean)."""
    f = anova(GROUPS)
    grand = sum(g.n * g.mean for g in GROUPS) / sum(g.n for g in GROUPS)
    worst = scheffe(GROUPS, [[g.n * (g.mean - grand) for g in GROUPS]], alpha=0.05)[0]
    assert worst.statistic == pytest.approx(math.sqrt(2.0 * f.statistic), rel=1e-10)
    assert worst.p == pytest.approx(f.p, rel=1e-9)
    assert (worst.lower > 0.0) == (worst.p < 0.05)


@pytest.mark.parametrize("row", [[1.0, -1.0], [1.0, 1.0, -1.0], [0.0, 0.0, 0.0], [math.nan, 1.0, -1.0]])
def test_what_is_no_contrast(row) -> None:
    with pytest.raises(DegenerateDataError):
        scheffe(GROUPS, [row], alpha=0.05)


def test_holm_by_definition() -> None:
    p = [0.02, 0.5, 0.001, 0.04, 0.02]
    expected = [0.08, 0.5, 0.005, 0.08, 0.08]
    assert holm(p) == pytest.approx(expected)
    assert holm([]) == ()
    assert holm([0.9, 0.8]) == (1.0, 1.0)
    with pytest.raises(DegenerateDataError):
        holm([0.1, 1.1])


@pytest.mark.parametrize("n", [10, 11, 12, 25, 60, 300])
def test_shapiro_wilk_against_the_general_library(n: int) -> None:
    for sample in (DRAW.normal(5.0, 2.0, n), DRAW.exponential(1.0, n), DRAW.uniform(-1.0, 1.0, n)):
        found, expected = shapiro_wilk(sample.tolist()), stats.shapiro(sample)
        assert found.statistic == pytest.approx(
            expected.statistic, abs=2e-7
        )  # it holds its weights in single precision
        assert found.p == pytest.approx(expected.pvalue, rel=2e-4)
        assert found.met == (found.p >= 0.05)


def test_shapiro_wilk_far_from_normal() -> None:
    assert shapiro_wilk([0.0] * 9 + [1.0]).p < 1e-6
    assert shapiro_wilk([-1.0] * 5 + [1.0] * 5 + [1e9]).p < 1e-6
    lopsided = [0.0] * 10 + [1.0]
    assert shapiro_wilk(lopsided).p == pytest.approx(stats.shapiro(lopsided).pvalue, rel=1e-3, abs=1e-12)


def test_shapiro_wilk_of_perfect_scores() -> None:
    scores = [float(stats.norm.ppf((i - 0.375) / 20.25)) for i in range(1, 21)]
    assert shapiro_wilk(scores).p > 0.999


def test_what_shapiro_wilk_refuses() -> None:
    with pytest.raises(TooFewObservationsError):
        shapiro_wilk([1.0, 2.0, 4.0] * 3)
    with pytest.raises(TooFewObservationsError):
        shapiro_wilk([float(i) for i in range(5001)])
    with pytest.raises(DegenerateDataError):
        shapiro_wilk([1.0] * 12)


def test_residuals_are_scaled_by_their_own_group() -> None:
    residuals = scaled_residuals("ABCD", [[1.0, 2.0, 3.0], [100.0, 200.0, 300.0], [5.0], [4.0, 4.0]])
    assert residuals == pytest.approx((-1.0, 0.0, 1.0, -1.0, 0.0, 1.0))


def test_esd_finds_values_that_hide_each_other() -> None:
    values = [*DRAW.normal(10.0, 0.1, 18).tolist(), 12.0, 12.1]
    checks = generalized_esd("A", values)
    assert [check.index for check in checks if check.flagged] == [19, 18]
    assert all(check.test == "generalized_esd" for check in checks)
    assert not any(check.flagged for check in generalized_esd("A", DRAW.uniform(0.0, 1.0, 20).tolist()))


def test_esd_stops_where_no_scatter_is_left() -> None:
    checks = generalized_esd("A", [1.0] * 19 + [2.0], most=3)
    assert [(check.index, check.flagged) for check in checks] == [(19, True)]


@pytest.mark.parametrize(("n", "most"), [(14, None), (20, 0), (20, 18)])
def test_what_esd_refuses(n: int, most) -> None:
    with pytest.raises(TooFewObservationsError):
        generalized_esd("A", [float(i) for i in range(n)], most=most)


def test_hedges_g_limits_invert_the_noncentral_t() -> None:
    a, b = GROUPS[0], GROUPS[2]
    g = hedges_g(a, b)
    df, size = a.n + b.n - 2, math.sqrt(a.n * b.n / (a.n + b.n))
    correction = math.gamma(df / 2) / math.gamma((df - 1) / 2) * math.sqrt(2.0 / df)
    t = g.value / correction * size
    assert t == pytest.approx(-math.sqrt(anova([a, b]).statistic), rel=1e-12)
    assert stats.nct.sf(t, df, g.lower / correction * size) == pytest.approx(0.025, abs=1e-8)
    assert stats.nct.cdf(t, df, g.upper / correction * size) == pytest.approx(0.025, abs=1e-8)
    mirrored = hedges_g(b, a)
    assert (mirrored.lower, mirrored.upper) == pytest.approx((-g.upper, -g.lower), rel=1e-9)


def test_effects_of_groups_that_lie_far_apart() -> None:
    """A million standard deviations: the limits are those of the scatter alone."""
    a, b = summarize("A", [1.0, 2.0, 3.0, 4.0]), summarize("B", [1e6 + x for x in (1.0, 2.0, 3.0, 4.0)])
    g = hedges_g(b, a)
    for end, tail in ((g.lower, 0.975), (g.upper, 0.025)):
        assert end / g.value == pytest.approx(math.sqrt(stats.chi2.isf(tail, 6) / 6), rel=1e-9)
    mirrored = hedges_g(a, b)
    assert (mirrored.lower, mirrored.upper) == pytest.approx((-g.upper, -g.lower), rel=1e-12)
    share = omega_squared(anova([a, b]))
    assert share.lower < share.value < share.upper < 1.0
    noncentrality = share.upper / (1.0 - share.upper) * 8.0
    assert noncentrality == pytest.approx(anova([a, b]).statistic * stats.chi2.isf(0.05, 6) / 6, rel=1e-3)


def test_limits_of_an_effect_from_two_results_a_group() -> None:
    """With 2 df the limit below lies far beyond the estimate: nearly that of the scatter alone."""
    g = hedges_g(summarize("A", [0.0, 1.0]), summarize("B", [400.0, 401.0]))
    assert g.lower / g.value == pytest.approx(math.sqrt(stats.chi2.isf(0.025, 2) / 2), rel=1e-4)
    assert g.upper / g.value == pytest.approx(math.sqrt(stats.chi2.isf(0.975, 2) / 2), rel=1e-3)


def test_hedges_g_needs_scatter() -> None:
    flat = summarize("F", [1.0, 1.0])
    with pytest.raises(DegenerateDataError):
        hedges_g(flat, flat)
    single = summarize("S", [1.0], allow_single=True)
    with pytest.raises(DegenerateDataError):
        hedges_g(single, single)
    assert hedges_g(single, summarize("B", [1.0, 3.0])).value == 0.0


def test_omega_squared_limits_invert_the_noncentral_f() -> None:
    f = anova(GROUPS)
    effect = omega_squared(f)
    n = sum(g.n for g in GROUPS)
    for limit, tail in ((effect.lower, 0.95), (effect.upper, 0.05)):
        nc = limit * n / (1.0 - limit)
        assert stats.ncf.cdf(f.statistic, f.df_between, f.df_within, nc) == pytest.approx(tail, abs=1e-8)
    assert (effect.lower > 0.0) == (f.p < 0.05)
    nothing = omega_squared(anova([GROUPS[0], GROUPS[0]]))
    assert nothing.value < 0.0
    assert (nothing.lower, nothing.upper) == (0.0, 0.0)


def test_omega_squared_of_a_huge_effect() -> None:
    far = [summarize("A", [0.0, 0.1, 0.2]), summarize("B", [100.0, 100.1, 100.2])]
    effect = omega_squared(anova(far), confidence=0.999999)
    assert 0.99 < effect.lower < effect.value < effect.upper < 1.0
    assert hedges_g(*far, confidence=0.999999).upper < 0.0


def test_equal_batches_show_a_spread_that_does_not_vary() -> None:
    draw = np.random.default_rng(2)
    steady = draw.chisquare(8, 200) / 8
    found = spread_variation([8.0] * 200, steady.tolist())
    assert (found.n_batches, found.smallest_df) == (200, 8.0)
    assert found.sd_log_sigma < found.upper_limit < 0.3
    wild = steady * np.exp(2.0 * draw.normal(0.0, 0.5, 200))
    varied = spread_variation([8.0] * 200, wild.tolist())
    assert varied.sd_log_sigma == pytest.approx(0.5, abs=0.1)
    assert varied.upper_limit > 0.5


def test_upper_limit_of_the_variation_covers() -> None:
    """Coverage of at least 0.95 within simulation error: 400 histories, sd of ln sigma 0.3."""
    draw = np.random.default_rng(11)
    sigma = np.exp(draw.normal(0.0, 0.3, (400, 40)))
    variances = sigma**2 * draw.chisquare(4, (400, 40)) / 4
    limits = [spread_variation([4.0] * 40, row.tolist()).upper_limit for row in variances]
    assert 0.94 < float(np.mean([limit >= 0.3 for limit in limits])) < 0.995


def test_what_spread_variation_refuses() -> None:
    with pytest.raises(TooFewObservationsError):
        spread_variation([4.0, 4.0], [1.0, 1.0])
    with pytest.raises(TooFewObservationsError):
        spread_variation([4.0, 4.0, 0.5], [1.0, 1.0, 1.0])
    with pytest.raises(DegenerateDataError):
        spread_variation([4.0, 4.0, 4.0], [1.0, 0.0, 1.0])
