"""The three laws against values from 30- and 40-digit arithmetic, scipy's mpmath file and printed tables."""

import importlib.resources
import json
import math

import numpy as np
import pytest
from outside_values import DATA, published, rows

from qcreport.stats.distributions import (
    many_to_one_isf,
    many_to_one_sf,
    maximum_modulus_isf,
    maximum_modulus_sf,
    studentized_range_isf,
    studentized_range_sf,
)


def columns(name: str, *names: str) -> list[np.ndarray]:
    table = rows(name)
    return [np.array([float(row[key]) for row in table]) for key in names]


def worst(found: np.ndarray, expected: np.ndarray) -> float:
    return float(np.max(np.abs(found / expected - 1.0)))


def test_studentized_range_tail_and_quantile_a1() -> None:
    q, k, df, sf = columns("studentized_range", "q", "k", "df", "sf")
    assert q.size == 480
    found = studentized_range_sf(q, k, df)
    assert worst(found, sf) < 1e-12
    assert float(np.max(np.abs(found - sf))) < 1e-12
    assert worst(studentized_range_isf(sf, k, df), q) < 1e-12


def test_studentized_range_against_the_file_in_the_scipy_wheel_a2() -> None:
    source = importlib.resources.files("scipy.stats.tests") / "data" / "studentized_range_mpmath_ref.json"
    table = json.loads(source.read_text())["cdf_data"]
    q, k, df, cdf = (
        np.array([float(row["src_case"][key] if key != "r" else row["mp_result"]) for row in table])
        for key in ("q", "k", "v", "r")
    )
    assert q.size == 72
    assert float(np.max(np.abs(1.0 - studentized_range_sf(q, k, df) - cdf))) < 1e-12


def test_maximum_modulus_tail_and_quantile_a3() -> None:
    m, k, df, sf = columns("maximum_modulus", "m", "k", "df", "sf")
    assert worst(maximum_modulus_sf(m, k, df), sf) < 1e-13
    assert worst(maximum_modulus_isf(sf, k, df), m) < 1e-12


def test_many_to_one_tail_and_quantile_a3() -> None:
    for row in rows("many_to_one"):
        design = (row["n0"], row["ni"], float(row["df"]), row["two"])
        assert abs(many_to_one_sf(row["q"], *design) / float(row["sf"]) - 1.0) < 1e-13, row
        assert abs(many_to_one_isf(float(row["sf"]), *design) / row["q"] - 1.0) < 1e-12, row


def test_quantile_and_tail_undo_each_other_a4() -> None:
    draw = np.random.default_rng(20261102)
    k = draw.integers(2, 51, 5000)
    df = draw.uniform(1.0, 2000.0, 5000)
    p = np.exp(draw.uniform(math.log(1e-12), math.log(0.95), 5000))
    assert worst(studentized_range_sf(studentized_range_isf(p, k, df), k, df), p) < 1e-11
    assert worst(maximum_modulus_sf(maximum_modulus_isf(p, k, df), k, df), p) < 1e-11


@pytest.mark.parametrize(("level", "key"), [(0.05, "q_05"), (0.01, "q_01")])
def test_printed_range_table(level: float, key: str) -> None:
    table = published("range_critical")
    for k, df, value in table[key]:
        found = studentized_range_isf(level, k, df if df else math.inf)
        assert abs(found - value) < table["tolerance"], (k, df)


@pytest.mark.parametrize(
    ("level", "key", "two_sided"),
    [(0.05, "two_sided_05", True), (0.05, "one_sided_05", False), (0.01, "two_sided_01", True)],
)
def test_printed_many_to_one_table(level: float, key: str, two_sided: bool) -> None:
    table = published("dunnett_critical")
    for m, df, value in table[key]:
        assert abs(many_to_one_isf(level, 5, [5] * m, df, two_sided) - value) < table["tolerance"], (m, df)


def test_fifteen_digit_tables_of_critical_values() -> None:
    tables = json.loads((DATA / "critical_values.json").read_text())
    for level in ("0.05", "0.01"):
        for df, by_k in tables["studentized_range"][level].items():
            k = np.array([int(key) for key in by_k])
            expected = np.array([float(value) for value in by_k.values()])
            assert worst(studentized_range_isf(float(level), k, float(df)), expected) < 1e-12
        for df, by_k in tables["studentized_maximum_modulus"][level].items():
            k = np.array([int(key) for key in by_k])
            expected = np.array([float(value) for value in by_k.values()])
            assert worst(maximum_modulus_isf(float(level), k, float(df)), expected) < 1e-12
        for df, by_k in tables["dunnett_two_sided_equal_n"][level].items():
            for k, value in by_k.items():
                assert (
                    abs(many_to_one_isf(float(level), 4, [4] * int(k), float(df)) / float(value) - 1) < 1e-12
                )
