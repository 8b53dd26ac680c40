import math

import numpy as np
import pytest
from scipy import special, stats

from qcreport.errors import DegenerateDataError, TooFewObservationsError
from qcreport.stats.distributions import (
    many_to_one_isf,
    many_to_one_sf,
    maximum_modulus_isf,
    maximum_modulus_sf,
    student,
    studentized_range_isf,
    studentized_range_sf,
)

K = [2, 3, 7, 12, 30, 60]
DF = [1.0, 2.0, 3.7, 11.0, 40.0, 800.0, 5000.0, 1e7, 1e15, math.inf]


def test_two_groups_are_students_t() -> None:
    t = np.array([0.01, 0.7, 2.0, 5.0, 30.0])
    for df in (1.0, 4.5, 33.0, 3000.0, 9000.0, math.inf):
        expected = [student.t_two_sided(x, df) for x in t]
        assert studentized_range_sf(t * math.sqrt(2.0), 2, df) == pytest.approx(expected, rel=1e-12)
        assert maximum_modulus_sf(t, 1, df) == pytest.approx(expected, rel=1e-12)
        assert many_to_one_sf(t, 4, [9], df) == pytest.approx(expected, rel=1e-12)
        one_sided = [student.t_upper(x, df) for x in [*t, *-t]]
        assert many_to_one_sf([*t, *-t], 4, [9], df, two_sided=False) == pytest.approx(one_sided, rel=1e-12)


def test_range_against_the_slow_general_library() -> None:
    for q, k, df in [(0.5, 3, 4.0), (3.5, 3, 10.0), (4.0, 8, 25.0), (2.0, 12, 6.0), (6.0, 5, 90.0)]:
        assert studentized_range_sf(q, k, df) == pytest.approx(stats.studentized_range.sf(q, k, df), abs=2e-9)


def test_independent_comparisons_bound_the_many_to_one_law() -> None:
    """With a huge reference the correlations vanish: the maximum modulus, or powers of one normal tail."""
    t = 2.3
    assert many_to_one_sf(t, 10**12, [3, 3, 3], math.inf) == pytest.approx(
        maximum_modulus_sf(t, 3, math.inf), rel=1e-10
    )
    one = 1.0 - special.ndtr(t) ** 3
    assert many_to_one_sf(t, 10**12, [3, 3, 3], math.inf, two_sided=False) == pytest.approx(one, rel=1e-10)


def test_signed_statistics_run_through_zero_smoothly() -> None:
    t = np.array([-3.0, -1.0, -1e-9, 0.0, 1e-9, 1.0, 3.0])
    tails = many_to_one_sf(t, 5, [5, 7], 9.0, two_sided=False)
    assert np.all(np.diff(tails) <= 0.0)
    assert tails[2] == pytest.approx(tails[4], abs=1e-8)
    assert tails[3] == pytest.approx(1.0 - float(_orthant(5, [5, 7])), abs=1e-12)
    for p in (1e-9, 0.05, 0.6, 0.99, 1.0 - 1e-6):
        assert many_to_one_sf(
            many_to_one_isf(p, 5, [5, 7], 9.0, False), 5, [5, 7], 9.0, False
        ) == pytest.approx(p, rel=1e-12)
    assert many_to_one_sf(-math.inf, 5, [5, 7], 9.0, two_sided=False) == 1.0
    assert many_to_one_sf(-0.5, 5, [5, 7], 9.0) == 1.0
    with pytest.raises(DegenerateDataError):
        many_to_one_isf(1.0, 5, [5, 7], 9.0, two_sided=False)


def _orthant(n0: int, ni: list[int]) -> float:
    """P(both normal deviates below 0) = 1/4 + asin(rho) / (2 pi)."""
    rho = math.sqrt(ni[0] / (n0 + ni[0])) * math.sqrt(ni[1] / (n0 + ni[1]))
    return 0.25 + math.asin(rho) / (2.0 * math.pi)


def test_tails_at_and_beyond_the_ends() -> None:
    for law in (studentized_range_sf, maximum_modulus_sf):
        assert law(0.0, 3, 5.0) == 1.0
        assert law(-1.0, 3, 5.0) == 1.0
        assert law(math.inf, 3, 5.0) == 0.0
        assert law(1e-300, 3, 5.0) == pytest.approx(1.0)
        assert law(1e5, 3, 100.0) == 0.0
        assert law(1e100, 3, math.inf) == 0.0
    for law in (studentized_range_isf, maximum_modulus_isf):
        assert law(0.0, 3, 5.0) == math.inf
        assert law(1e-301, 3, 5.0) == math.inf
        assert law(1.0, 3, 5.0) == 0.0
        assert law(1e-290, 3, 0.6) == math.inf


@pytest.mark.parametrize("df", DF)
@pytest.mark.parametrize("k", K)
def test_tail_falls_and_quantile_undoes_it(k: int, df: float) -> None:
    q = np.geomspace(1e-3, 200.0, 60)
    for tail, quantile in (
        (studentized_range_sf, studentized_range_isf),
        (maximum_modulus_sf, maximum_modulus_isf),
    ):
        p = tail(q, k, df)
        assert np.all(np.diff(p) <= 1e-13)
        inside = (p > 1e-290) & (p < 0.999)
        assert np.max(np.abs(quantile(p[inside], k, df) / q[inside] - 1.0)) < 1e-10


def test_tail_falls_with_df_and_grows_with_groups() -> None:
    df = np.array([2.0, 5.0, 22.0, 23.5, 90.0, 1000.0, 4095.0, 4097.0, 1e5, 1e9, math.inf])
    assert np.all(np.diff(studentized_range_sf(4.0, 5, df)) < 0.0)
    assert np.all(np.diff(studentized_range_sf(4.0, np.arange(2, 60), 12.0)) > 0.0)


def test_across_the_switch_to_local_nodes() -> None:
    below, above = studentized_range_sf(4.0, 5, [4096.0, np.nextafter(4096.0, 5000.0)])
    assert below == pytest.approx(above, rel=1e-12)


def test_single_and_batch_calls_give_equal_bits() -> None:
    draw = np.random.default_rng(7)
    k = draw.integers(2, 45, 300)
    df = np.concatenate([draw.uniform(1.0, 300.0, 280), draw.uniform(4000.0, 9000.0, 15), np.full(5, np.inf)])
    p = np.exp(draw.uniform(math.log(1e-10), 0.0, 300))
    for tail, quantile in (
        (studentized_range_sf, studentized_range_isf),
        (maximum_modulus_sf, maximum_modulus_isf),
    ):
        q = quantile(p, k, df)
        sf = tail(q, k, df)
        for i in [*range(0, 300, 9), 281, 290, 297]:
            assert quantile(p[i], k[i], df[i]) == q[i]
            assert tail(q[i], k[i], df[i]) == sf[i]


def test_arrays_broadcast_and_scalars_stay_scalars() -> None:
    assert isinstance(studentized_range_sf(3.0, 3, 10.0), float)
    assert studentized_range_sf([[3.0], [4.0]], 3, [5.0, 10.0, math.inf]).shape == (2, 3)
    assert studentized_range_isf(0.05, [2, 3], 10.0).shape == (2,)
    assert many_to_one_sf([[1.0], [2.0]], 4, [4, 4], [5.0, 6.0]).shape == (2, 2)
    assert studentized_range_sf(np.empty(0), 3, 10.0).shape == (0,)


def test_many_rows_are_cut_into_blocks_without_a_trace() -> None:
    q = np.linspace(1.0, 6.0, 20_000)
    whole = studentized_range_sf(q, 4, 3.0)
    assert np.array_equal(whole[12_345:12_350], studentized_range_sf(q[12_345:12_350], 4, 3.0))


@pytest.mark.parametrize(
    ("call", "error"),
    [
        (lambda: studentized_range_sf(3.0, 1, 10.0), TooFewObservationsError),
        (lambda: studentized_range_sf(3.0, 2.5, 10.0), DegenerateDataError),
        (lambda: studentized_range_sf(3.0, 3, 0.0), TooFewObservationsError),
        (lambda: studentized_range_sf(3.0, 3, math.nan), TooFewObservationsError),
        (lambda: studentized_range_sf(math.nan, 3, 10.0), DegenerateDataError),
        (lambda: studentized_range_isf(1.5, 3, 10.0), DegenerateDataError),
        (lambda: maximum_modulus_isf(math.nan, 3, 10.0), DegenerateDataError),
        (lambda: maximum_modulus_sf(1.0, 0, 10.0), TooFewObservationsError),
        (lambda: many_to_one_sf(1.0, 4, [], 10.0), TooFewObservationsError),
        (lambda: many_to_one_sf(1.0, 4, [4, 0], 10.0), TooFewObservationsError),
        (lambda: many_to_one_sf(-1.0, 4, [4], 0.1, False), TooFewObservationsError),
    ],
)
def test_questions_without_an_answer(call, error) -> None:
    with pytest.raises(error):
        call()


@pytest.mark.parametrize("df", [1.0, 2.5, 10.0, 1e4, math.inf])
def test_students_t_far_out_and_back(df: float) -> None:
    for t in (0.3, 1.0, 4.0, 20.0):
        expected = 2.0 * stats.t.sf(t, df) if math.isfinite(df) else 2.0 * stats.norm.sf(t)
        assert student.t_two_sided(-t, df) == pytest.approx(expected, rel=1e-12)
    for p in (1e-200, 1e-20, 1e-3, 0.05, 0.5, 0.99):
        assert student.t_two_sided(student.t_two_sided_quantile(p, df), df) == pytest.approx(p, rel=1e-12)
    assert student.t_upper_quantile(0.95, df) == pytest.approx(-student.t_upper_quantile(0.05, df), rel=1e-12)
    assert student.t_two_sided_quantile(1.0, df) == pytest.approx(0.0, abs=1e-12)
    assert student.t_two_sided(math.inf, df) == 0.0


def test_cauchy_tail_is_closed() -> None:
    """One degree of freedom: P(|T| > t) = 2 atan(1 / t) / pi."""
    for t in (1e-6, 0.5, 10.0, 1e8, 1e150):
        assert student.t_two_sided(t, 1.0) == pytest.approx(2.0 * math.atan(1.0 / t) / math.pi, rel=1e-13)


def test_f_and_chi_squared_tails() -> None:
    for f, a, b in [(0.3, 2, 12), (1.0, 4, 4), (9.6, 2, 12), (200.0, 7, 40)]:
        assert student.f_upper(f, a, b) == pytest.approx(stats.f.sf(f, a, b), rel=1e-11)
        assert student.f_upper_quantile(student.f_upper(f, a, b), a, b) == pytest.approx(f, rel=1e-10)
    assert student.f_upper(math.inf, 2, 3) == 0.0
    assert student.f_upper(3.0, 2, math.inf) == pytest.approx(stats.chi2.sf(6.0, 2), rel=1e-12)
    assert student.chi_squared_upper(5.0, 3) == pytest.approx(stats.chi2.sf(5.0, 3), rel=1e-12)
    assert student.chi_squared_upper_quantile(0.05, 3) == pytest.approx(7.814727903, abs=1e-8)
