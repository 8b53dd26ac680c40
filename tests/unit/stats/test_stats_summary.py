import math
from fractions import Fraction

import pytest

from qcreport.errors import DegenerateDataError, TooFewObservationsError
from qcreport.stats.summary import mean_difference, require_groups, summarize, with_floored_variance


def test_summary_of_a_small_group() -> None:
    group = summarize("A", [3.0, 1.0, 2.0, 6.0])
    assert (group.label, group.n, group.mean, group.mean_residual) == ("A", 4, 3.0, 0.0)
    assert group.variance == pytest.approx(14.0 / 3.0, rel=1e-15)
    assert (group.minimum, group.median, group.maximum) == (1.0, 2.5, 6.0)
    assert summarize("A", [1, 5, 2]).median == 2.0


def test_mean_and_residual_hold_the_mean_to_thirty_digits() -> None:
    values = [1e12 + 0.4, 1e12 + 0.3, 1e12 + 0.3, 1e12 + 0.1, 1e12, 1e12, 1e12]
    group = summarize("A", values)
    exact = sum(Fraction(value) for value in values) / 7
    assert abs(Fraction(group.mean) + Fraction(group.mean_residual) - exact) < Fraction(1, 10**19)
    assert abs(Fraction(group.mean) - exact) > Fraction(1, 10**19)


def test_variance_survives_constant_leading_digits() -> None:
    shifted = summarize("A", [2.0**40 + value for value in (0.25, 0.5, 1.0)])
    assert shifted.variance == pytest.approx(summarize("A", [0.25, 0.5, 1.0]).variance, rel=1e-15)


@pytest.mark.parametrize("size", [1e-140, 1e150])
def test_far_scales_give_scaled_results(size: float) -> None:
    group = summarize("A", [size, 2.0 * size, 4.0 * size])
    assert group.mean == pytest.approx(7.0 / 3.0 * size, rel=1e-15)
    assert group.variance / size / size == pytest.approx(7.0 / 3.0, rel=1e-15)


@pytest.mark.parametrize("size", [1e300, 1e-300])
def test_a_scatter_beyond_double_precision_is_refused_not_taken_for_zero(size: float) -> None:
    with pytest.raises(DegenerateDataError, match="another unit"):
        summarize("A", [size, 2.0 * size, 4.0 * size])


def test_equal_huge_values_have_their_mean_and_no_scatter() -> None:
    group = summarize("A", [1.7e308] * 5)
    assert (group.mean, group.variance) == (1.7e308, 0.0)


def test_a_single_value_only_where_it_is_allowed() -> None:
    with pytest.raises(TooFewObservationsError, match="at least 2"):
        summarize("A", [1.5])
    single = summarize("A", [1.5], allow_single=True)
    assert (single.n, single.mean, single.variance, single.median) == (1, 1.5, 0.0, 1.5)


def test_no_value_is_refused() -> None:
    with pytest.raises(TooFewObservationsError, match="0 result"):
        summarize("A", [], allow_single=True)


@pytest.mark.parametrize("wrong", [math.nan, math.inf, -math.inf])
def test_values_that_are_not_finite_are_refused(wrong: float) -> None:
    with pytest.raises(DegenerateDataError, match="finite"):
        summarize("A", [1.0, wrong, 2.0])


def test_difference_uses_the_residuals() -> None:
    first = summarize("A", [1e15 + 1.0, 1e15 + 1.0, 1e15 + 2.0])
    second = summarize("B", [1e15 + 1.0, 1e15 + 1.0, 1e15 + 1.0])
    assert mean_difference(first, second) == pytest.approx(1.0 / 3.0, rel=1e-15)


def test_floor_raises_only_what_is_below() -> None:
    groups = [summarize("A", [1.0, 1.0, 1.0]), summarize("B", [1.0, 2.0, 3.0])]
    floored = with_floored_variance(groups, 0.01 / 12.0)
    assert [g.variance for g in floored] == [0.01 / 12.0, 1.0]
    assert [g.mean for g in floored] == [1.0, 2.0]


@pytest.mark.parametrize("floor", [0.0, -1.0, math.inf, math.nan])
def test_floor_must_be_positive(floor: float) -> None:
    with pytest.raises(DegenerateDataError):
        with_floored_variance([summarize("A", [1.0, 2.0])], floor)


def test_groups_that_are_not_finite_are_refused() -> None:
    good = summarize("A", [1.0, 2.0])
    bad = type(good)(label="B", n=2, mean=math.nan, variance=1.0, minimum=0.0, maximum=0.0, median=0.0)
    with pytest.raises(DegenerateDataError, match="Group B"):
        require_groups([good, bad], smallest_n=2, scatter=False)
