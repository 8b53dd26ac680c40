import math

import pytest

from qcreport.errors import DegenerateDataError, TooFewObservationsError
from qcreport.stats.assumptions import (
    bartlett,
    brown_forsythe,
    cochran_c,
    spread_conflict,
    spread_ratio_upper_limit,
    spread_ratio_upper_limit_of,
)
from qcreport.stats.distributions.student import f_upper_quantile
from qcreport.stats.summary import GroupSummary, summarize

A = [1.0, 2.0, 3.0, 4.0, 6.0]
WIDE = [0.0, 30.0, -30.0, 10.0, 60.0]


def group(label: str, n: int, variance: float) -> GroupSummary:
    return GroupSummary(label=label, n=n, mean=0.0, variance=variance, minimum=0.0, maximum=0.0, median=0.0)


def test_brown_forsythe_sees_a_wide_group() -> None:
    check = brown_forsythe(["A", "B"], [A, WIDE])
    assert (check.name, check.df, check.met) == ("brown_forsythe", (1.0, 8.0), False)
    assert check.statistic > check.threshold
    assert brown_forsythe(["A", "B"], [A, A]).p == 1.0


def test_brown_forsythe_cannot_judge_pairs() -> None:
    with pytest.raises(DegenerateDataError):
        brown_forsythe(["A", "B"], [[1.0, 2.0], [1.0, 5.0]])


def test_bartlett_of_equal_variances_is_zero() -> None:
    check = bartlett([group("A", 5, 2.0), group("B", 9, 2.0)])
    assert (check.statistic, check.p, check.met) == (0.0, 1.0, True)
    with pytest.raises(DegenerateDataError):
        bartlett([group("A", 5, 2.0), group("B", 9, 0.0)])


def test_cochran_c_of_equal_sizes_is_the_share_of_the_largest_variance() -> None:
    check = cochran_c([group("A", 6, 1.0), group("B", 6, 5.0), group("C", 6, 2.0)])
    assert check.statistic == pytest.approx(5.0 / 8.0)
    assert check.group == "B"
    assert check.p == pytest.approx(3.0 * _f_tail(5.0 / 1.5, 5, 10))


def test_cochran_c_table_value() -> None:
    """ISO 5725-2, table of critical values: 5 %, 5 laboratories, n = 3: 0.684."""
    check = cochran_c([group(str(i), 3, 1.0) for i in range(5)])
    assert check.threshold == pytest.approx(0.684, abs=0.0006)
    assert check.met is True
    assert check.p == 1.0


def test_cochran_c_points_at_the_only_group_with_scatter() -> None:
    check = cochran_c([group("A", 4, 0.0), group("B", 4, 1.0), group("C", 4, 0.0)])
    assert (check.group, check.statistic, check.p) == ("B", 1.0, 0.0)


def test_conflict_names_the_group() -> None:
    found = spread_conflict([group("A", 10, 1.0), group("B", 10, 1.1), group("C", 10, 9.0)])
    assert found.conflict
    assert [g.exceeds for g in found.groups] == [False, False, True]
    wide = found.groups[2]
    assert wide.statistic == pytest.approx(9.0 / 1.05)
    assert (wide.df_group, wide.df_rest) == (9.0, 18.0)
    assert wide.p == pytest.approx(_f_tail(9.0 / 1.05, 9, 18))
    assert not spread_conflict([group("A", 10, 1.0), group("B", 10, 1.1)]).conflict


def test_conflict_is_one_sided_at_the_level_shared_by_the_groups() -> None:
    edge = f_upper_quantile(0.05 / 2, 9, 9)
    assert spread_conflict([group("A", 10, edge * 1.0001), group("B", 10, 1.0)]).conflict
    assert not spread_conflict([group("A", 10, edge * 0.9999), group("B", 10, 1.0)]).conflict


def test_conflict_without_any_scatter_is_refused() -> None:
    with pytest.raises(DegenerateDataError):
        spread_conflict([group("A", 3, 0.0), group("B", 3, 0.0)])
    with pytest.raises(TooFewObservationsError):
        spread_conflict([group("A", 1, 0.0), group("B", 3, 1.0)])


def test_ratio_limit_is_the_f_limit_of_the_widest_pair() -> None:
    groups = [group("A", 61, 1.0), group("B", 61, 1.21), group("C", 61, 1.0)]
    expected = 1.1 * math.sqrt(f_upper_quantile(0.05 / 6, 60, 60))
    assert spread_ratio_upper_limit(groups) == pytest.approx(expected)
    assert spread_ratio_upper_limit(groups, 0.5) < expected


def test_sixty_df_a_line_show_four_equal_lines_to_be_similar() -> None:
    assert spread_ratio_upper_limit_of([60.0] * 4, [1.0] * 4) < 1.5
    assert spread_ratio_upper_limit_of([30.0] * 4, [1.0] * 4) > 1.5


def test_ratio_limit_at_its_edges() -> None:
    assert spread_ratio_upper_limit_of([5.0, 5.0], [0.0, 1.0]) == math.inf
    with pytest.raises(TooFewObservationsError):
        spread_ratio_upper_limit_of([5.0], [1.0])
    with pytest.raises(TooFewObservationsError):
        spread_ratio_upper_limit_of([5.0, 0.0], [1.0, 1.0])
    with pytest.raises(DegenerateDataError):
        spread_ratio_upper_limit_of([5.0, 5.0], [math.nan, 1.0])
    with pytest.raises(DegenerateDataError):
        spread_ratio_upper_limit_of([5.0, 5.0], [1.0, 1.0], confidence=1.0)


def _f_tail(f: float, a: float, b: float) -> float:
    from scipy import stats

    return float(stats.f.sf(f, a, b))


def test_groups_of_summaries_are_accepted() -> None:
    assert spread_ratio_upper_limit([summarize("A", A), summarize("B", WIDE)]) > 10.0
