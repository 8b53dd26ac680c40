import math

import pytest

from qcreport.errors import DegenerateDataError, TooFewObservationsError
from qcreport.stats.distributions import many_to_one_isf
from qcreport.stats.distributions.student import t_two_sided_quantile
from qcreport.stats.one_way import anova, supported_digits, welch
from qcreport.stats.pooled import tukey_hsd, tukey_kramer
from qcreport.stats.reference import dunnett, dunnett_unequal, dunnett_weighted
from qcreport.stats.summary import GroupSummary, summarize, with_floored_variance
from qcreport.stats.unequal import dunnett_c, dunnett_t3, games_howell, tamhane_t2, welch_pair

A = summarize("A", [10.1, 9.8, 10.4, 10.0])
B = summarize("B", [10.9, 11.6, 10.2, 11.9])
C = summarize("C", [10.3, 10.2, 10.5, 10.4, 10.6])
FLAT = summarize("F", [10.0, 10.0, 10.0])
UNEQUAL = (games_howell, dunnett_t3, dunnett_c, tamhane_t2)
REFERENCE = (dunnett, dunnett_unequal, dunnett_weighted)


@pytest.mark.parametrize("procedure", [anova, welch, supported_digits])
def test_overall_needs_two_groups(procedure) -> None:
    with pytest.raises(TooFewObservationsError):
        procedure([A])


def test_anova_without_scatter_is_refused() -> None:
    with pytest.raises(DegenerateDataError, match="no scatter"):
        anova([FLAT, FLAT])


def test_anova_of_single_results_is_refused() -> None:
    singles = [summarize(label, [1.0], allow_single=True) for label in "AB"]
    with pytest.raises(TooFewObservationsError, match="two results"):
        anova(singles)


def test_anova_lets_a_single_result_share_the_pooled_variance() -> None:
    result = anova([A, B, summarize("S", [10.7], allow_single=True)])
    assert result.df_within == 6.0
    assert result.ms_within == pytest.approx((3 * A.variance + 3 * B.variance) / 6)


def test_welch_refuses_a_group_without_scatter_unless_floored() -> None:
    with pytest.raises(DegenerateDataError, match="Group F"):
        welch([A, FLAT])
    assert 0.0 < welch(with_floored_variance([A, FLAT], 1e-4)).p < 1.0


def test_equal_means_give_f_of_zero() -> None:
    result = anova([A, A])
    assert (result.statistic, result.p) == (0.0, 1.0)


def test_all_digits_where_the_scatter_is_wide() -> None:
    assert supported_digits([summarize("A", [-1.0, 1.0]), summarize("B", [-1.5, 2.0])]) == 15
    assert supported_digits([summarize("A", [1e16, 1e16 + 2]), summarize("B", [1e16, 1e16 + 4])]) == 0


def test_hsd_needs_equal_sizes() -> None:
    with pytest.raises(DegenerateDataError, match="one size"):
        tukey_hsd([A, C], alpha=0.05)


def test_hsd_is_the_smallest_significant_difference() -> None:
    result = tukey_hsd([A, B, summarize("D", [1.0, 1.1, 1.4, 1.2])], alpha=0.05)
    for pair in result.comparisons:
        assert (abs(pair.difference) > result.hsd) == (pair.p < 0.05)
        assert pair.upper - pair.lower == pytest.approx(2.0 * result.hsd)
    assert tukey_kramer([A, B], alpha=0.05).hsd is not None
    assert tukey_kramer([A, C], alpha=0.05).hsd is None


@pytest.mark.parametrize("alpha", [0.0, 1.0, -0.1, math.nan])
@pytest.mark.parametrize("procedure", [tukey_hsd, tukey_kramer, *UNEQUAL])
def test_alpha_must_be_a_probability(procedure, alpha: float) -> None:
    with pytest.raises(DegenerateDataError, match="error rate"):
        procedure([A, B], alpha=alpha)


@pytest.mark.parametrize("procedure", UNEQUAL)
def test_unequal_refuses_what_it_cannot_answer(procedure) -> None:
    with pytest.raises(TooFewObservationsError):
        procedure([A], alpha=0.05)
    with pytest.raises(TooFewObservationsError):
        procedure([A, summarize("S", [1.0], allow_single=True)], alpha=0.05)
    with pytest.raises(DegenerateDataError, match="floor"):
        procedure([A, FLAT], alpha=0.05)
    assert len(procedure(with_floored_variance([A, FLAT, B], 1e-4), alpha=0.05).comparisons) == 3


def test_order_and_sign_of_pairs() -> None:
    for procedure in (tukey_kramer, *UNEQUAL):
        result = procedure([A, B, C], alpha=0.05)
        assert [(p.first, p.second) for p in result.comparisons] == [("A", "B"), ("A", "C"), ("B", "C")]
        first = result.comparisons[0]
        assert first.difference == pytest.approx(A.mean - B.mean)
        assert first.statistic == pytest.approx(first.difference / first.se)
        assert first.statistic < 0.0
        assert result.procedure == procedure.__name__


def test_c_has_no_df_and_its_p_meets_its_critical_value() -> None:
    result = dunnett_c([A, B, C], alpha=0.05)
    for pair in result.comparisons:
        assert pair.df is None
        met = dunnett_c([A, B, C], alpha=pair.p)
        critical = next(c for c in met.comparisons if (c.first, c.second) == (pair.first, pair.second))
        assert critical.critical_value == pytest.approx(abs(pair.statistic), rel=1e-11)


def test_c_of_equal_means_and_of_huge_differences() -> None:
    same = dunnett_c(
        [
            A,
            GroupSummary(
                label="A2",
                n=9,
                mean=A.mean,
                mean_residual=A.mean_residual,
                variance=4.0,
                minimum=0.0,
                maximum=0.0,
                median=0.0,
            ),
        ],
        alpha=0.05,
    )
    assert same.comparisons[0].p == 1.0
    far = [summarize("L", [0.0, 1e-9] * 200), summarize("H", [1e6, 1e6 + 1e-9] * 150)]
    assert dunnett_c(far, alpha=0.05).comparisons[0].p == 0.0


def test_strictness_falls_from_c_to_games_howell_in_small_equal_groups() -> None:
    groups = [A, B, summarize("D", [10.0, 10.9, 11.0, 9.0])]
    rows = [
        [pair.p for pair in procedure(groups, alpha=0.05).comparisons]
        for procedure in (games_howell, dunnett_t3, tamhane_t2)
    ]
    for gentle, middle, strict in zip(*rows, strict=True):
        assert gentle < middle < strict


def test_welch_df_lies_between_its_bounds() -> None:
    pair = welch_pair(A, C)
    assert 3.0 <= pair.df <= 7.0
    lopsided = welch_pair(with_floored_variance([FLAT], 1e-12)[0], C)
    assert lopsided.df == pytest.approx(4.0)


@pytest.mark.parametrize("procedure", REFERENCE)
def test_reference_order_and_sign(procedure) -> None:
    result = procedure([A, B, C], reference=1, alpha=0.05)
    assert [(p.first, p.second) for p in result.comparisons] == [("A", "B"), ("C", "B")]
    assert result.comparisons[0].difference == pytest.approx(A.mean - B.mean)
    assert result.procedure == procedure.__name__


@pytest.mark.parametrize("procedure", REFERENCE)
@pytest.mark.parametrize("reference", [-1, 3])
def test_a_reference_that_is_not_there_is_refused(procedure, reference: int) -> None:
    with pytest.raises(TooFewObservationsError, match="position"):
        procedure([A, B, C], reference=reference, alpha=0.05)


@pytest.mark.parametrize("procedure", REFERENCE)
def test_one_sided_intervals_are_open_and_turn_with_the_direction(procedure) -> None:
    lower = procedure([A, B, C], reference=0, alpha=0.05, direction="lower")
    higher = procedure([A, B, C], reference=0, alpha=0.05, direction="higher")
    for low, high in zip(lower.comparisons, higher.comparisons, strict=True):
        assert low.lower is None
        assert high.upper is None
        assert (low.upper < 0.0) == (low.p < 0.05)
        assert (high.lower > 0.0) == (high.p < 0.05)
        assert high.p < 0.5 < low.p


def test_weighted_lies_between_the_two_quantiles() -> None:
    result = dunnett_weighted([A, B, C], reference=0, alpha=0.05)
    level = 1.0 - 0.95**0.5
    wide, narrow = t_two_sided_quantile(level, 3), t_two_sided_quantile(level, 4)
    same_size, other = result.comparisons
    assert same_size.critical_value == pytest.approx(wide, rel=1e-13)
    assert narrow < other.critical_value < wide
    assert other.df is None
    assert dunnett_weighted([A, A, C], reference=0, alpha=0.05).comparisons[0].p == 1.0


def test_unequal_is_welch_t_at_sidaks_level() -> None:
    pair = dunnett_unequal([A, B, C], reference=0, alpha=0.05).comparisons[0]
    assert pair.critical_value == pytest.approx(t_two_sided_quantile(1.0 - 0.95**0.5, pair.df), rel=1e-13)


def test_dunnett_uses_the_exact_law_for_unequal_sizes() -> None:
    result = dunnett([A, B, C], reference=0, alpha=0.05)
    assert result.critical_value == many_to_one_isf(0.05, 4, [4, 5], 10.0)
