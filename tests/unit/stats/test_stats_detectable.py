import math

import numpy as np
import pytest
from scipy import integrate, stats

from qcreport.errors import DegenerateDataError
from qcreport.stats.detectable import detectable_difference, scatter_limits


def power_by_definition(nc: float, df: float, critical: float) -> float:
    """P((Z + nc) / s > critical), integrated over s."""
    chi = stats.chi(df)
    value, _ = integrate.quad(
        lambda x: chi.pdf(x) * stats.norm.sf(critical * x / math.sqrt(df) - nc),
        0.0,
        math.sqrt(df) + 12.0,
        limit=400,
    )
    return value


@pytest.mark.parametrize(("df", "critical"), [(2.0, 8.0), (3.4, 5.0), (10.0, 2.7), (27.0, 2.5), (200.0, 3.3)])
@pytest.mark.parametrize("power", [0.5, 0.8, 0.95])
def test_detectable_difference_has_the_power_it_says(df: float, critical: float, power: float) -> None:
    delta = detectable_difference(0.25, df, critical, power)
    assert power_by_definition(delta / 0.25, df, critical) == pytest.approx(power, abs=1e-7)


def test_detectable_difference_with_one_df_and_high_power() -> None:
    """One df: 1 / s is far from 1, and the difference lies beyond twice the critical value."""
    delta = detectable_difference(1.0, 1.0, 40.0, 0.99)
    assert delta > 2.0 * (40.0 + 2.33)
    assert power_by_definition(delta, 1.0, 40.0) == pytest.approx(0.99, abs=1e-6)


@pytest.mark.parametrize(("df", "critical"), [(1.0, 2e3), (2.0, 5e5), (40.0, 1e7)])
@pytest.mark.parametrize("power", [0.5, 0.8])
def test_detectable_difference_far_out(df: float, critical: float, power: float) -> None:
    """There the normal deviate hardly counts: the difference is critical times a quantile of the scatter."""
    delta = detectable_difference(1.0, df, critical, power)
    assert delta == pytest.approx(critical * math.sqrt(stats.chi2.ppf(power, df) / df), rel=1e-5)
    below = stats.chi(df, scale=critical / math.sqrt(df))
    grid = np.linspace(-9.0, 9.0, 20_001)  # P(critical S - Z < delta) by a fine sum over Z
    share = np.sum(below.cdf(delta + grid) * stats.norm.pdf(grid)) * (grid[1] - grid[0])
    assert share == pytest.approx(power, abs=1e-9)


@pytest.mark.parametrize("power", [0.06, 0.1, 0.2])
def test_detectable_difference_with_little_power(power: float) -> None:
    delta = detectable_difference(1.0, 3.0, 2.0, power)
    at_zero = float(stats.t.sf(2.0, 3))
    assert (delta == 0.0) == (power < at_zero)
    if delta:
        assert power_by_definition(delta, 3.0, 2.0) == pytest.approx(power, abs=1e-7)


def test_known_scatter_is_the_limit_of_many_df() -> None:
    known = detectable_difference(2.0, None, 2.5)
    assert known == pytest.approx(2.0 * (2.5 + 0.8416212335729143))
    assert detectable_difference(2.0, math.inf, 2.5) == known
    assert detectable_difference(2.0, 1e6, 2.5) == pytest.approx(known, rel=1e-5)
    assert detectable_difference(1.0, None, 0.5, power=0.05) == 0.0


@pytest.mark.parametrize("wrong", [(0.0, 2.0, 0.8), (1.0, 0.0, 0.8), (1.0, math.inf, 0.8), (1.0, 2.0, 1.0)])
def test_what_detectable_difference_refuses(wrong: tuple[float, float, float]) -> None:
    se, critical, power = wrong
    with pytest.raises(DegenerateDataError):
        detectable_difference(se, 10.0, critical, power)


def test_scatter_limits_are_the_chi_squared_ones() -> None:
    lower, upper = scatter_limits(2.0, 10.0)
    assert lower == pytest.approx(2.0 * math.sqrt(10.0 / stats.chi2.isf(0.05, 10)))
    assert upper == pytest.approx(2.0 * math.sqrt(10.0 / stats.chi2.isf(0.95, 10)))
    with pytest.raises(DegenerateDataError):
        scatter_limits(1.0, 0.0)
