import pytest

from qcreport.errors import DegenerateDataError, TooFewObservationsError
from qcreport.stats.outliers import grubbs, grubbs_critical, grubbs_p


def test_the_far_value_is_flagged_in_its_group() -> None:
    checks = grubbs(["A", "B"], [[1.0, 1.1, 0.9, 1.05, 0.95], [1.0, 1.1, 0.9, 1.05, 9.0]])
    assert [(c.label, c.flagged) for c in checks] == [("A", False), ("B", True)]
    assert (checks[1].index, checks[1].value, checks[1].test) == (4, 9.0, "grubbs")
    assert checks[1].p < 0.025


@pytest.mark.parametrize(("n", "value"), [(3, 1.1543), (10, 2.2900), (20, 2.7082), (100, 3.3841)])
def test_critical_values_of_the_two_sided_table(n: int, value: float) -> None:
    """Grubbs & Beck (1972), Technometrics 14, 847-854, two-sided 5 %."""
    assert grubbs_critical(0.05, n) == pytest.approx(value, abs=6e-5)


def test_p_and_critical_value_agree() -> None:
    for n in (3, 5, 30):
        assert grubbs_p(grubbs_critical(0.01, n), n) == pytest.approx(0.01, rel=1e-9)


def test_groups_that_cannot_be_checked_are_left_out() -> None:
    assert grubbs(["A", "B", "C"], [[1.0], [1.0, 2.0], [3.0, 3.0, 3.0]]) == ()
    far = grubbs(["A"], [[0.0, 0.0, 1.0]])[0]  # the largest statistic that three values can have
    assert far.p == 0.0
    assert far.flagged


def test_the_level_is_shared_by_the_groups() -> None:
    values = [10.0, 10.2, 9.9, 10.1, 11.2]
    alone = grubbs(["A"], [values])[0]
    among = grubbs(["A"] * 50, [values] * 50)[0]
    assert alone.p == among.p
    assert among.critical > alone.critical
    assert (alone.flagged, among.flagged) == (True, False)


def test_what_is_refused() -> None:
    with pytest.raises(TooFewObservationsError):
        grubbs([], [])
    with pytest.raises(DegenerateDataError):
        grubbs(["A"], [[1.0, 2.0, 3.0]], alpha=0.0)
