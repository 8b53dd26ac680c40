import math
from itertools import combinations

import numpy as np
import pytest
from scipy import stats

from qcreport.errors import DegenerateDataError, TooFewObservationsError
from qcreport.stats import arrangements
from qcreport.stats.ranks import kruskal_wallis, steel, steel_dwass
from qcreport.stats.shift import shift_and_interval

SMALL = ([1.0, 4.0, 9.0], [2.0, 11.0], [20.0, 21.0, 22.0])
TIED = ([1.0, 1.0, 2.0], [2.0, 3.0], [3.0, 4.0, 2.0])
LABELS = "ABC"


def slow_pair_statistic(first, second) -> float:
    """Tie-corrected rank sum from the midranks of the pair."""
    ranks = stats.rankdata([*first, *second])
    n, m = len(first), len(second)
    ties = sum(t**3 - t for t in np.unique([*first, *second], return_counts=True)[1].tolist())
    variance = n * m / 12.0 * (n + m + 1 - ties / ((n + m) * (n + m - 1)))
    return float((ranks[:n].sum() - n * (n + m + 1) / 2.0) / math.sqrt(variance)) if variance > 0 else 0.0


def slow_law(values, pairs):
    """Deal the pooled results out in every way, one at a time."""
    pooled = [v for group in values for v in group]
    a, b, _ = (len(group) for group in values)
    everyone = set(range(len(pooled)))
    for one in combinations(sorted(everyone), a):
        for two in combinations(sorted(everyone - set(one)), b):
            three = everyone - set(one) - set(two)
            dealt = [[pooled[i] for i in places] for places in (one, two, sorted(three))]
            yield [slow_pair_statistic(dealt[i], dealt[j]) for i, j in pairs]


@pytest.mark.parametrize("values", [SMALL, TIED])
def test_steel_dwass_counts_every_arrangement(values) -> None:
    pairs = [(0, 1), (0, 2), (1, 2)]
    result = steel_dwass(LABELS, values, alpha=0.05)
    largest = np.array([max(map(abs, row)) for row in slow_law(values, pairs)])
    assert largest.size == arrangements.count([3, 2, 3]) == 560
    assert (result.law, result.reachable) == ("exact", bool((largest >= largest.max() - 1e-9).mean() < 0.05))
    for pair, (i, j) in zip(result.comparisons, pairs, strict=True):
        observed = slow_pair_statistic(values[i], values[j])
        assert pair.statistic == pytest.approx(observed, rel=1e-12, abs=1e-12)
        assert pair.p == pytest.approx((largest >= abs(observed) - 1e-9).mean(), rel=1e-12)
        assert (pair.se, pair.df) == (None, None)


@pytest.mark.parametrize(("direction", "turn"), [("both", abs), ("higher", float), ("lower", lambda z: -z)])
def test_steel_counts_every_arrangement(direction: str, turn) -> None:
    pairs = [(1, 0), (2, 0)]
    result = steel(LABELS, SMALL, reference=0, alpha=0.2, direction=direction)
    largest = np.array([max(map(turn, row)) for row in slow_law(SMALL, pairs)])
    for pair, (i, j) in zip(result.comparisons, pairs, strict=True):
        observed = turn(slow_pair_statistic(SMALL[i], SMALL[j]))
        assert pair.p == pytest.approx((largest >= observed - 1e-9).mean(), rel=1e-12)
        assert (turn(pair.statistic) > result.critical_value) == (pair.p < 0.2)
        assert (pair.first, pair.second) == (LABELS[i], LABELS[j])
    assert all(pair.lower is None for pair in result.comparisons) == (direction == "lower")
    assert all(pair.upper is None for pair in result.comparisons) == (direction == "higher")


def test_two_groups_are_the_exact_rank_sum_test() -> None:
    first, second = [1.0, 5.0, 7.0, 8.0], [2.0, 9.0, 10.0, 11.0, 12.0]
    expected = stats.mannwhitneyu(first, second, method="exact").pvalue
    assert steel_dwass("AB", [first, second], alpha=0.05).comparisons[0].p == pytest.approx(expected)
    one_sided = stats.mannwhitneyu(first, second, method="exact", alternative="less").pvalue
    found = steel("AB", [first, second], reference=1, alpha=0.05, direction="lower")
    assert found.comparisons[0].p == pytest.approx(one_sided)


def test_large_groups_use_the_limit() -> None:
    draw = np.random.default_rng(1)
    values = [draw.normal(shift, 1.0, 12).tolist() for shift in (0.0, 0.2, 1.5)]
    result = steel_dwass(LABELS, values, alpha=0.05)
    assert (result.law, result.reachable) == ("asymptotic", True)
    for pair in result.comparisons:
        assert (abs(pair.statistic) > result.critical_value) == (pair.p < 0.05)
        assert (pair.lower > 0.0 or pair.upper < 0.0) == (pair.p < 0.05)
    against = steel(LABELS, values, reference=0, alpha=0.05)
    assert against.law == "asymptotic"
    assert against.comparisons[1].p < result.comparisons[1].p
    assert kruskal_wallis(LABELS, values).p == pytest.approx(stats.kruskal(*values).pvalue)


def test_significance_that_no_data_could_reach() -> None:
    four = [[float(10 * g + i) for i in range(3)] for g in range(4)]
    result = steel_dwass("ABCD", four, alpha=0.05)
    assert (result.law, result.reachable, result.critical_value) == ("exact", False, None)
    assert all(pair.lower is None and pair.upper is None for pair in result.comparisons)
    six = [[float(10 * g + i) for i in range(4)] for g in range(6)]
    assert steel_dwass("ABCDEF", six, alpha=0.05).reachable is False
    assert steel_dwass("ABCDEF", six, alpha=0.05).law == "asymptotic"


def test_kruskal_wallis_counts_every_arrangement() -> None:
    result = kruskal_wallis(LABELS, TIED)
    pooled = np.array([v for group in TIED for v in group])
    count = total = 0
    for one in combinations(range(8), 3):
        for two in combinations(sorted(set(range(8)) - set(one)), 2):
            three = sorted(set(range(8)) - set(one) - set(two))
            total += 1
            count += (
                stats.kruskal(pooled[list(one)], pooled[list(two)], pooled[three]).statistic
                >= result.statistic - 1e-9
            )
    assert result.statistic == pytest.approx(stats.kruskal(*TIED).statistic)
    assert result.p == pytest.approx(count / total)


def test_censored_results_are_tied_and_leave_the_interval_open() -> None:
    values = [[-math.inf, -math.inf, 1.0, 2.0], [3.0, 4.0, 5.0, 6.0]]
    pair = steel_dwass("AB", values, alpha=0.05).comparisons[0]
    assert (pair.lower, pair.upper) == (None, None)
    assert pair.p == pytest.approx(2 / 70)
    assert pair.difference == -math.inf  # half of the differences are known only to be large
    both = steel_dwass("AB", [[-math.inf, 1.0, 2.0], [-math.inf, 1.5, 2.5]], alpha=0.05).comparisons[0]
    assert both.difference == pytest.approx(-0.5)


def test_a_pair_wholly_tied_among_others() -> None:
    result = steel_dwass(LABELS, [[1.0, 1.0, 1.0], [1.0, 1.0, 1.0], [2.0, 3.0, 4.0]], alpha=0.05)
    assert (result.comparisons[0].statistic, result.comparisons[0].p) == (0.0, 1.0)


@pytest.mark.parametrize("critical", [0.5, 1.2, 1.8, 2.1])
def test_the_interval_inverts_the_rank_sum_test(critical: float) -> None:
    first, second = [1.03, 4.1, 9.2, 5.55], [2.71, 3.3, 11.7, 0.4, 7.07]
    shift, lower, upper = shift_and_interval(first, second, critical)
    differences = [a - b for a in first for b in second]
    assert shift == pytest.approx(float(np.median(differences)))
    for delta in np.linspace(-15.0, 15.0, 301) + 0.0013:
        accepted = abs(slow_pair_statistic([v - delta for v in first], second)) <= critical
        assert accepted == (lower < delta < upper), delta


def test_an_interval_that_nothing_closes() -> None:
    assert shift_and_interval([1.0, 2.0], [0.0, 5.0], 3.0)[1:] == (None, None)
    assert shift_and_interval([1.0, 2.0], [0.0, 5.0], None)[1:] == (None, None)


@pytest.mark.parametrize(
    ("labels", "values", "error"),
    [
        ("A", [[1.0]], TooFewObservationsError),
        ("AB", [[1.0], []], TooFewObservationsError),
        ("AB", [[1.0], [math.nan]], DegenerateDataError),
        ("AB", [[1.0, 1.0], [1.0]], DegenerateDataError),
    ],
)
def test_what_ranks_cannot_answer(labels, values, error) -> None:
    with pytest.raises(error):
        kruskal_wallis(labels, values)
    with pytest.raises(error):
        steel_dwass(labels, values, alpha=0.05)


def test_a_reference_that_is_not_there() -> None:
    with pytest.raises(TooFewObservationsError, match="position"):
        steel(LABELS, SMALL, reference=3, alpha=0.05)


def test_a_value_beyond_the_law_is_never_reached() -> None:
    assert arrangements.chance_to_reach(((0.0, 1.0), (1.0, 0.5)), 2.0) == 0.0


def test_counts_of_many_thousands() -> None:
    """Twice a count of 20,000 does not fit into 16 bits."""
    n = 20_000
    labels = np.repeat(np.array([[0, 1]], dtype=np.int16), n, axis=1)
    z = arrangements.pair_statistics(labels, (1,) * (2 * n), ((1, 0),))
    assert z[0, 0] == pytest.approx(math.sqrt(3.0 * n * n / (2 * n + 1)))


def test_more_groups_than_a_byte_can_number() -> None:
    labels = [str(i) for i in range(130)]
    values = [[float((7 * i + 3 * j) % 11 + 20 * (i == 129)) for j in range(4)] for i in range(130)]
    result = steel_dwass(labels, values, alpha=0.05)
    assert len(result.comparisons) == 130 * 129 // 2
    last = result.comparisons[-1]
    assert (last.first, last.second) == ("128", "129")
    assert last.difference == pytest.approx(-20.0, abs=8.0)
    assert last.statistic == pytest.approx(-math.sqrt(3.0 * 16 / 9), rel=0.1)
