import math

import pytest
from scipy import integrate, stats

from qcreport.errors import DegenerateDataError
from qcreport.stats.detectable import detectable_difference, sample_size_for, scatter_limits
from qcreport.stats.pooled import tukey_hsd
from qcreport.stats.summary import summarize

PROCEDURES = (
    "tukey_hsd",
    "tukey_kramer",
    "games_howell",
    "dunnett_c",
    "dunnett_t3",
    "tamhane_t2",
    "dunnett",
    "dunnett_unequal",
    "dunnett_weighted",
)


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


@pytest.mark.parametrize("procedure", PROCEDURES)
def test_sample_size_is_the_smallest_that_settles(procedure: str) -> None:
    n = sample_size_for(procedure=procedure, n_groups=4, variance=1.0, margin=1.5)
    assert 4 <= n <= 60
    wider = sample_size_for(procedure=procedure, n_groups=4, variance=1.0, margin=3.0)
    assert wider < n


def test_sample_size_against_the_procedure_itself() -> None:
    n = sample_size_for(procedure="tukey_hsd", n_groups=3, variance=1.0, margin=1.0)
    for size, settled in ((n - 1, False), (n, True)):
        spread = math.sqrt((size - 1) / size) if size % 2 == 0 else 1.0
        values = (
            [spread * (-1) ** i for i in range(size)]
            if size % 2 == 0
            else [0.0, *[(-1.0) ** i for i in range(size - 1)]]
        )
        groups = [summarize(label, values) for label in "ABC"]
        assert groups[0].variance == pytest.approx(1.0)
        pair = tukey_hsd(groups, alpha=0.05).comparisons[0]
        assert (pair.upper < 1.0) == settled


def test_sample_size_at_its_edges() -> None:
    assert sample_size_for(procedure="tukey_hsd", n_groups=3, variance=0.0, margin=1.0) == 2
    assert sample_size_for(procedure="tukey_hsd", n_groups=3, variance=1.0, margin=1e-4, largest=1000) is None
    with pytest.raises(DegenerateDataError, match="margin"):
        sample_size_for(procedure="tukey_hsd", n_groups=3, variance=1.0, margin=0.0)
    with pytest.raises(DegenerateDataError, match="steel"):
        sample_size_for(procedure="steel", n_groups=3, variance=1.0, margin=1.0)
