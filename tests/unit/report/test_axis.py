from __future__ import annotations

import pytest

from qcreport.report.axis import Axis, padded, round_step


def axis(low: float, high: float, *, logarithmic: bool = False) -> Axis:
    return Axis(low=low, high=high, left=10.0, right=110.0, logarithmic=logarithmic)


def test_ends_stand_at_the_edges_and_the_rest_between() -> None:
    assert axis(0, 4).at(0) == 10.0
    assert axis(0, 4).at(1) == 35.0
    assert axis(0, 4).inside(9) == 110.0
    assert not axis(0, 4).covers(4.5)


def test_a_logarithmic_axis_gives_equal_ratios_equal_lengths() -> None:
    ratios = axis(0.5, 2, logarithmic=True)
    assert ratios.at(1) == pytest.approx(60.0)
    assert ratios.at(1.1) - 60.0 == pytest.approx(60.0 - ratios.at(1 / 1.1))


@pytest.mark.parametrize(
    ("low", "high", "texts"),
    [
        (17.8, 26.1, ("18", "20", "22", "24", "26")),
        (-0.9, 3.2, ("0", "1", "2", "3")),
        (0.0012, 0.0019, ("0.0012", "0.0014", "0.0016", "0.0018")),
    ],
)
def test_ticks_are_round_and_carry_the_digits_they_need(
    low: float, high: float, texts: tuple[str, ...]
) -> None:
    assert tuple(t for _, t in axis(low, high).ticks(5)) == texts


def test_wide_logarithmic_axes_count_in_ones_twos_and_fives() -> None:
    assert [t for _, t in axis(0.9, 60, logarithmic=True).ticks(8)] == ["1", "2", "5", "10", "20", "50"]
    assert [v for v, _ in axis(1, 1e6, logarithmic=True).ticks(8)] == [10.0**e for e in range(7)]


@pytest.mark.parametrize(
    ("raw", "step"), [(0.9, (1.0, 0)), (1.2, (2.0, 0)), (0.03, (0.05, -2)), (6.0, (10.0, 1))]
)
def test_steps_are_one_two_or_five(raw: float, step: tuple[float, int]) -> None:
    assert round_step(raw) == (pytest.approx(step[0]), step[1])


def test_a_single_value_gets_room_around_it() -> None:
    assert padded(0.0, 0.0, logarithmic=False) == (-1.0, 1.0)
    low, high = padded(24.0, 24.0, logarithmic=False)
    assert low < 24.0 < high
    low, high = padded(2.0, 2.0, logarithmic=True)
    assert low < 2.0 < high
