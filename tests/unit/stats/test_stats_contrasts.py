import math

import pytest
from scipy import stats

from qcreport.errors import DegenerateDataError
from qcreport.stats.contrasts import brown_forsythe_contrasts, scheffe
from qcreport.stats.summary import summarize
from qcreport.stats.unequal import welch_pair

A, B, C = (
    summarize("A", [6.9, 5.4, 5.8, 4.6, 4.0]),
    summarize("B", [8.3, 6.8, 7.8, 9.2]),
    summarize("C", [8.0, 10.5, 2.1, 6.9, 9.3, 7.7]),
)


def test_a_pair_has_the_error_and_df_of_welch() -> None:
    found = brown_forsythe_contrasts([A, B, C], [[0.0, 2.0, -2.0]], alpha=0.05)[0]
    pair = welch_pair(B, C)
    assert found.estimate == pytest.approx(2.0 * pair.difference)
    assert found.se == pytest.approx(2.0 * pair.se)
    assert found.df == pytest.approx(pair.df)
    critical = math.sqrt(2.0 * stats.f.isf(0.05, 2, pair.df))
    assert found.critical_value == pytest.approx(critical)
    assert (found.lower, found.upper) == pytest.approx(
        (found.estimate - critical * found.se, found.estimate + critical * found.se)
    )
    assert found.p == pytest.approx(stats.f.sf(pair.statistic**2 / 2.0, 2, pair.df))


def test_three_groups_by_the_formula() -> None:
    weights = [1.0, 1.0, -2.0]
    found = brown_forsythe_contrasts([A, B, C], [weights], alpha=0.01)[0]
    parts = [w * w * g.variance / g.n for w, g in zip(weights, (A, B, C), strict=True)]
    assert found.se**2 == pytest.approx(sum(parts))
    shares = sum(part**2 / (g.n - 1) for part, g in zip(parts, (A, B, C), strict=True))
    assert found.df == pytest.approx(sum(parts) ** 2 / shares)
    assert found.estimate == pytest.approx(A.mean + B.mean - 2.0 * C.mean)


def test_equal_variances_and_sizes_give_the_error_of_scheffe() -> None:
    groups = [
        summarize(x, [m + d for d in (-1.0, 0.0, 1.0)]) for x, m in (("A", 1.0), ("B", 2.5), ("C", 9.0))
    ]
    own = brown_forsythe_contrasts(groups, [[2.0, -1.0, -1.0]], alpha=0.05)[0]
    pooled = scheffe(groups, [[2.0, -1.0, -1.0]], alpha=0.05)[0]
    assert (own.estimate, own.se) == pytest.approx((pooled.estimate, pooled.se))
    assert own.df < pooled.df


@pytest.mark.parametrize(
    "rows", [[[1.0, -1.0]], [[1.0, 1.0, -1.0]], [[0.0, 0.0, 0.0]], [[math.inf, -1.0, 0.0]]]
)
def test_what_is_no_contrast(rows: list[list[float]]) -> None:
    for estimate in (scheffe, brown_forsythe_contrasts):
        with pytest.raises(DegenerateDataError, match="coefficients"):
            estimate([A, B, C], rows, alpha=0.05)


def test_a_group_without_scatter_needs_a_floor() -> None:
    flat = summarize("D", [1.0, 1.0])
    with pytest.raises(DegenerateDataError, match="floor"):
        brown_forsythe_contrasts([A, flat], [[1.0, -1.0]], alpha=0.05)
