"""Check values of USP General Notices 7.20 and ASTM E29, and how probabilities and ends are printed."""

from __future__ import annotations

import doctest

import pytest

from qcreport.report import rounding
from qcreport.report.rounding import (
    apart_from,
    fixed,
    probability,
    round_half_up,
    shortest,
    signed,
    significant,
    trimmed,
)


@pytest.mark.parametrize(
    ("value", "decimals", "printed"),
    [
        (97.96, 1, "98.0"),
        (97.95, 1, "98.0"),
        (97.92, 1, "97.9"),
        (101.55, 1, "101.6"),
        (101.45, 1, "101.5"),
        (0.025, 2, "0.03"),
        (0.015, 2, "0.02"),
        (-0.015, 2, "−0.02"),
        (24.174999999999997, 2, "24.18"),  # a mean of 24.17 and 24.18, spoilt in its 16th digit
        (100, 2, "100.00"),
        (-0.004, 2, "0.00"),
        (1e-9, 2, "0.00"),
    ],
)
def test_a_final_five_goes_up(value: float, decimals: int, printed: str) -> None:
    assert fixed(value, decimals) == printed


def test_text_is_rounded_as_written() -> None:
    assert str(round_half_up("0.145", 2)) == "0.15"


@pytest.mark.parametrize(
    ("value", "printed"), [(0.34, "+0.3"), (-0.34, "−0.3"), (0.0, "0.0"), (0.04, "0.0"), (-0.04, "0.0")]
)
def test_signs_are_written_out(value: float, printed: str) -> None:
    assert signed(value, 1) == printed


@pytest.mark.parametrize(
    ("value", "marks", "printed"),
    [
        (1.4996, (0.0, 1.5), "1.4996"),
        (1.5, (0.0, 1.5), "1.50"),
        (0.001, (0.0,), "0.001"),
        (-0.0004, (0.0, 1.5), "−0.0004"),
        (1.2345, (0.0, 1.5), "1.23"),
    ],
)
def test_an_end_never_reads_as_the_mark_it_does_not_reach(
    value: float, marks: tuple[float, ...], printed: str
) -> None:
    assert apart_from(value, 2, marks) == printed


@pytest.mark.parametrize(
    ("p", "near", "printed"),
    [
        (0.0142, None, "0.014"),
        (0.00086, None, "8.6\u00a0×\u00a010⁻⁴"),
        (0.0009996, None, "0.0010"),
        (3e-15, None, "below 10⁻¹²"),
        (0.0, None, "below 10⁻¹²"),
        (0.9949, None, "0.99"),
        (0.9951, None, "above 0.99"),
        (1.0, None, "above 0.99"),
        (0.0496, 0.05, "0.0496"),
        (0.05, 0.05, "0.050"),
        (0.0504, 0.05, "0.0504"),
    ],
)
def test_probabilities_have_two_digits_and_keep_off_the_error_rate(
    p: float, near: float | None, printed: str
) -> None:
    assert probability(p, near=near) == printed


def test_significant_digits_carry_over() -> None:
    assert significant(9.996, 3) == "10.0"
    assert significant(0.0000123, 2) == "1.2\u00a0×\u00a010⁻⁵"
    assert significant(-1234.5, 3) == "−1230"
    assert significant(1.5e12, 2) == "1.5\u00a0×\u00a010¹²"


def test_numbers_lose_only_the_digits_they_do_not_need() -> None:
    assert [shortest(v) for v in (1.5, 18.0, 0.05, -2.0, 1e6)] == ["1.5", "18", "0.05", "−2", "1000000"]
    assert [trimmed(v, 6) for v in (0.05, 1 / 0.93, 1.5, 1e-7, 100.0)] == [
        "0.05",
        "1.07527",
        "1.5",
        "1.00000\u00a0×\u00a010⁻⁷",
        "100",
    ]


def test_the_examples_in_the_docstrings_hold() -> None:
    found = doctest.testmod(rounding)
    assert found.attempted >= 4
    assert found.failed == 0
