import math

import pytest

from qcreport.errors import DegenerateDataError, TooFewObservationsError
from qcreport.stats.comparison import PairwiseComparison
from qcreport.stats.equivalence import SERIOUSNESS, all_within_margin, judge, most_serious


@pytest.mark.parametrize(
    ("lower", "upper", "code"),
    [
        (1.6, 3.0, "matters"),
        (-3.0, -1.6, "matters"),
        (1.5, 3.0, "different"),  # an end on the margin is not beyond it
        (0.5, 1.6, "different"),
        (-1.6, -0.5, "different"),
        (-0.1, 1.6, "not_settled"),
        (-2.0, 2.0, "not_settled"),
        (0.0, 1.6, "not_settled"),  # an end on 0 does not exclude it
        (0.1, 1.5, "within_margin"),
        (-1.5, -0.1, "within_margin"),
        (-0.1, 0.1, "equivalent"),
        (-1.5, 1.5, "equivalent"),
        (0.0, 1.5, "equivalent"),
        (None, -1.6, "matters"),
        (None, 1.0, "not_settled"),
        (0.2, None, "different"),
        (None, None, "not_settled"),
    ],
)
def test_an_interval_against_a_margin_on_both_sides(lower, upper, code: str) -> None:
    assert judge(lower, upper, -1.5, 1.5) == code


@pytest.mark.parametrize(
    ("lower", "upper", "code"),
    [
        (0.1, 9.0, "within_margin"),
        (-1.0, None, "equivalent"),
        (-2.0, None, "not_settled"),
        (-9.0, -2.0, "matters"),
    ],
)
def test_where_only_lower_values_matter(lower, upper, code: str) -> None:
    assert judge(lower, upper, -1.5, None) == code


@pytest.mark.parametrize(
    ("lower", "upper", "code"), [(0.1, 0.2, "different"), (-0.1, 0.2, "not_shown"), (0.0, 0.2, "not_shown")]
)
def test_without_a_margin(lower, upper, code: str) -> None:
    assert judge(lower, upper, None, None) == code


@pytest.mark.parametrize(
    ("lower", "upper", "below", "above"),
    [(1.0, 0.0, -1.0, 1.0), (math.nan, 1.0, -1.0, 1.0), (0.0, 1.0, 1.0, 2.0), (0.0, 1.0, -1.0, 0.0)],
)
def test_what_cannot_be_judged(lower, upper, below, above) -> None:
    with pytest.raises(DegenerateDataError):
        judge(lower, upper, below, above)


def test_the_most_serious_pair_decides() -> None:
    assert most_serious(["equivalent", "within_margin"]) == "within_margin"
    assert most_serious(["equivalent", "matters", "different"]) == "matters"
    assert most_serious(["not_shown"]) == "not_shown"
    assert most_serious(list(reversed(SERIOUSNESS))) == "matters"


def test_a_group_left_out_keeps_the_answer_open() -> None:
    assert most_serious(["equivalent", "not_compared"]) == "not_settled"
    assert most_serious(["not_shown", "not_compared"]) == "not_settled"
    assert most_serious(["matters", "not_compared"]) == "matters"
    assert most_serious(["not_compared"]) == "not_compared"


def test_answers_that_are_none() -> None:
    with pytest.raises(TooFewObservationsError):
        most_serious([])
    with pytest.raises(DegenerateDataError, match="better"):
        most_serious(["better"])


def pair(difference: float, se: float | None, df: float | None) -> PairwiseComparison:
    return PairwiseComparison(
        first="A",
        second="B",
        difference=difference,
        se=se,
        statistic=0.0,
        df=df,
        critical_value=2.0,
        p=0.5,
        lower=None,
        upper=None,
    )


def test_two_one_sided_tests() -> None:
    """t(0.95; 10) = 1.8124611."""
    found = all_within_margin([pair(0.5, 1.0, 10.0)], alpha=0.05, margin_below=-2.0, margin_above=2.4)
    interval = found.intervals[0]
    assert (interval.lower, interval.upper) == pytest.approx((0.5 - 1.8124611, 0.5 + 1.8124611), abs=1e-7)
    assert found.all_within
    assert not all_within_margin(
        [pair(0.5, 1.0, 10.0), pair(0.0, 1.0, 10.0), pair(0.7, 1.0, 10.0)],
        alpha=0.05,
        margin_below=-2.0,
        margin_above=2.4,
    ).all_within


def test_one_sided_margin_and_pairs_without_df() -> None:
    """z(0.95) = 1.6448536, t(0.95; 5) = 2.0150484."""
    known = all_within_margin([pair(0.0, 1.0, None)], alpha=0.05, margin_below=-1.7, margin_above=None)
    assert known.all_within
    assert known.intervals[0].lower == pytest.approx(-1.6448536, abs=1e-7)
    given = all_within_margin(
        [pair(0.0, 1.0, None)], alpha=0.05, margin_below=-1.7, margin_above=None, own_df=[5.0]
    )
    assert not given.all_within
    assert given.intervals[0].lower == pytest.approx(-2.0150484, abs=1e-7)


def test_what_the_margin_tests_refuse() -> None:
    with pytest.raises(TooFewObservationsError):
        all_within_margin([], alpha=0.05, margin_below=-1.0, margin_above=1.0)
    with pytest.raises(TooFewObservationsError):
        all_within_margin([pair(0.0, None, None)], alpha=0.05, margin_below=-1.0, margin_above=1.0)
    with pytest.raises(DegenerateDataError, match="No margin"):
        all_within_margin([pair(0.0, 1.0, 5.0)], alpha=0.05, margin_below=None, margin_above=None)
    with pytest.raises(DegenerateDataError):
        all_within_margin([pair(0.0, 1.0, 5.0)], alpha=0.5, margin_below=-1.0, margin_above=1.0)
