import math
from typing import get_args

import pytest
from scipy import stats

from qcreport.errors import DegenerateDataError
from qcreport.stats.pooled import tukey_hsd
from qcreport.stats.reference import dunnett, dunnett_unequal, dunnett_weighted
from qcreport.stats.sizes import Design, Procedure, sample_size_for, sample_size_to_detect
from qcreport.stats.summary import summarize
from qcreport.stats.unequal import dunnett_c, dunnett_t3, games_howell, tamhane_t2

PROCEDURES = get_args(Procedure)


def two_sample_power(n: int, difference: float) -> float:
    """Return the power of the two-sided two-sample t test at 0.05, by scipy's noncentral t."""
    df, nc = 2 * (n - 1), difference * math.sqrt(n / 2.0)
    return float(stats.nct.sf(stats.t.isf(0.025, df), df, nc))


@pytest.mark.parametrize("procedure", ["tukey_hsd", "games_howell", "dunnett", "dunnett_t3", "tamhane_t2"])
@pytest.mark.parametrize("difference", [0.21, 0.5, 0.8, 1.2, 3.0])
def test_two_groups_need_what_the_two_sample_t_test_needs(procedure: Procedure, difference: float) -> None:
    n = sample_size_to_detect(Design(procedure=procedure, n_groups=2), sd=2.0, difference=2.0 * difference)
    assert n is not None
    assert two_sample_power(n - 1, difference) < 0.80 <= two_sample_power(n, difference)


@pytest.mark.parametrize(("difference", "n"), [(0.2, 394), (0.5, 64), (0.8, 26)])
def test_the_sizes_of_the_textbook(difference: float, n: int) -> None:
    """Small, medium and large difference of two groups, 0.05 two-sided, power 0.80.

    Cohen (1988), Statistical Power Analysis, 2nd ed., table 2.4.1 prints 393, 64 and 26 from rounded tables;
    statsmodels 0.15 TTestIndPower gives 393.41, 63.77 and 25.52.
    """
    assert (
        sample_size_to_detect(Design(procedure="tukey_hsd", n_groups=2), sd=1.0, difference=difference) == n
    )


@pytest.mark.parametrize(("power", "n"), [(0.90, 86), (0.95, 105)])
def test_more_power_needs_more(power: float, n: int) -> None:
    """By statsmodels 0.15 TTestIndPower: 85.03 and 104.93."""
    design = Design(procedure="tukey_kramer", n_groups=2)
    assert sample_size_to_detect(design, sd=1.0, difference=0.5, power=power) == n


def test_one_direction_needs_less() -> None:
    """Two groups, one-sided 0.05, power 0.80: statsmodels 0.15 gives 50.15."""
    for procedure in ("dunnett", "dunnett_unequal"):
        design = Design(procedure=procedure, n_groups=2, two_sided=False)
        assert sample_size_to_detect(design, sd=1.0, difference=0.5) == 51


@pytest.mark.parametrize("procedure", PROCEDURES)
@pytest.mark.parametrize("k", [3, 8])
def test_the_size_found_detects_and_one_less_does_not(procedure: Procedure, k: int) -> None:
    design = Design(procedure=procedure, n_groups=k, alpha=0.01)
    n = sample_size_to_detect(design, sd=1.5, difference=2.0, power=0.9)
    assert n is not None
    assert design.detectable(n, 1.5, 0.9) <= 2.0 < design.detectable(n - 1, 1.5, 0.9)


RUN = {
    "tukey_hsd": tukey_hsd,
    "games_howell": games_howell,
    "dunnett_c": dunnett_c,
    "dunnett_t3": dunnett_t3,
    "tamhane_t2": tamhane_t2,
}
RUN_WITH_REFERENCE = {
    "dunnett": dunnett,
    "dunnett_unequal": dunnett_unequal,
    "dunnett_weighted": dunnett_weighted,
}


def alike(n: int, k: int) -> list:
    """Return k groups of even size n whose standard deviations are 1."""
    spread = math.sqrt((n - 1) / n)
    return [summarize(str(i), [spread, -spread] * (n // 2)) for i in range(k)]


@pytest.mark.parametrize("procedure", RUN)
def test_a_design_has_the_critical_value_of_its_procedure(procedure: Procedure) -> None:
    result = RUN[procedure](alike(8, 4), alpha=0.1)
    design = Design(procedure=procedure, n_groups=4, alpha=0.1)
    for pair in result.comparisons:
        assert pair.critical_value == pytest.approx(design.critical_value(8), rel=1e-10)
        assert design.df(8) == pytest.approx(pair.df if pair.df is not None else 14.0)
        assert pair.upper == pytest.approx(design.half_width(8, 1.0), rel=1e-10)


@pytest.mark.parametrize("procedure", RUN_WITH_REFERENCE)
@pytest.mark.parametrize("direction", ["both", "lower"])
def test_a_design_with_a_reference(procedure: Procedure, direction: str) -> None:
    result = RUN_WITH_REFERENCE[procedure](alike(8, 4), reference=0, alpha=0.1, direction=direction)
    design = Design(procedure=procedure, n_groups=4, alpha=0.1, two_sided=direction == "both")
    for pair in result.comparisons:
        assert pair.critical_value == pytest.approx(design.critical_value(8), rel=1e-10)


def test_no_scatter_and_no_end() -> None:
    design = Design(procedure="tukey_hsd", n_groups=3)
    assert sample_size_to_detect(design, sd=0.0, difference=1.0) == 2
    assert sample_size_to_detect(design, sd=1.0, difference=1e-4, largest=1000) is None
    with pytest.raises(DegenerateDataError, match="difference"):
        sample_size_to_detect(design, sd=1.0, difference=0.0)
    with pytest.raises(DegenerateDataError, match="error rate"):
        sample_size_to_detect(design, sd=1.0, difference=1.0, power=1.0)


@pytest.mark.parametrize("procedure", PROCEDURES)
def test_sample_size_is_the_smallest_that_settles(procedure: str) -> None:
    n = sample_size_for(Design(procedure=procedure, n_groups=4), variance=1.0, margin=1.5)
    assert 4 <= n <= 60
    wider = sample_size_for(Design(procedure=procedure, n_groups=4), variance=1.0, margin=3.0)
    assert wider < n


def test_sample_size_against_the_procedure_itself() -> None:
    n = sample_size_for(Design(procedure="tukey_hsd", n_groups=3), variance=1.0, margin=1.0)
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
    assert sample_size_for(Design(procedure="tukey_hsd", n_groups=3), variance=0.0, margin=1.0) == 2
    assert (
        sample_size_for(Design(procedure="tukey_hsd", n_groups=3), variance=1.0, margin=1e-4, largest=1000)
        is None
    )
    with pytest.raises(DegenerateDataError, match="margin"):
        sample_size_for(Design(procedure="tukey_hsd", n_groups=3), variance=1.0, margin=0.0)
    with pytest.raises(DegenerateDataError, match="steel"):
        sample_size_for(Design(procedure="steel", n_groups=3), variance=1.0, margin=1.0)
