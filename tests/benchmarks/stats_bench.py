"""Measure the distributions and the comparisons: accuracy A1-A4, speed S1-S3 against scipy in one run.

    python tests/benchmarks/stats_bench.py [rounds]

Speed is a ratio of times inside one process, both sides in turn, the median over the rounds (3). The general
library does a sample of the work, scaled up: 100 values of S1, 5 tables of S2. Prints one line a goal and
marks what misses it; exits with 1 where a goal is missed by more than half. Some minutes.
"""

from __future__ import annotations

import importlib.resources
import json
import math
import statistics
import sys
import time
from collections.abc import Callable
from pathlib import Path

import numpy as np
from scipy import stats

from qcreport.stats.distributions import (
    many_to_one_isf,
    many_to_one_sf,
    maximum_modulus_isf,
    maximum_modulus_sf,
    studentized_range_isf,
    studentized_range_sf,
)
from qcreport.stats.distributions.tables import table
from qcreport.stats.pooled import critical_range, tukey_kramer
from qcreport.stats.reference import dunnett
from qcreport.stats.summary import summarize
from qcreport.stats.unequal import games_howell

DATA = Path(__file__).parent.parent / "reference" / "data"
Groups = list[list[float]]
SAMPLE = 100
"""Values that the general library computes of 10,000."""
SAMPLE_TABLES = 5
"""Tables that the general library computes of a night's 200."""


def rows(name: str) -> list[dict]:
    return json.loads((DATA / f"{name}.json").read_text())["rows"]


def column(table_rows: list[dict], key: str) -> np.ndarray:
    return np.array([float(row[key]) for row in table_rows])


def worst(found: np.ndarray, expected: np.ndarray) -> float:
    return float(np.max(np.abs(np.asarray(found) / expected - 1.0)))


def accuracy() -> list[tuple[str, float, float]]:
    """Return (goal, found, limit) for A1 to A4."""
    a1 = rows("studentized_range")
    q, k, df, sf = (column(a1, key) for key in ("q", "k", "df", "sf"))
    found = studentized_range_sf(q, k, df)
    mm = rows("maximum_modulus")
    m, mk, mdf, msf = (column(mm, key) for key in ("m", "k", "df", "sf"))
    many = rows("many_to_one")
    tails = [many_to_one_sf(r["q"], r["n0"], r["ni"], float(r["df"]), r["two"]) for r in many]
    backs = [many_to_one_isf(float(r["sf"]), r["n0"], r["ni"], float(r["df"]), r["two"]) for r in many]
    wheel = importlib.resources.files("scipy.stats.tests") / "data" / "studentized_range_mpmath_ref.json"
    a2 = json.loads(wheel.read_text())["cdf_data"]
    args = [np.array([float(r["src_case"][key]) for r in a2]) for key in ("q", "k", "v")]
    cdf = np.array([float(r["mp_result"]) for r in a2])
    draw = np.random.default_rng(20261102)
    rk, rdf = draw.integers(2, 51, 5000), draw.uniform(1.0, 2000.0, 5000)
    p = np.exp(draw.uniform(math.log(1e-12), math.log(0.95), 5000))
    return [
        ("A1 tail, relative", worst(found, sf), 1e-11),
        ("A1 tail, absolute", float(np.max(np.abs(found - sf))), 1e-12),
        ("A1 quantile, relative", worst(studentized_range_isf(sf, k, df), q), 1e-11),
        ("A2 absolute", float(np.max(np.abs(1.0 - studentized_range_sf(*args) - cdf))), 1e-12),
        ("A3 maximum modulus tail", worst(maximum_modulus_sf(m, mk, mdf), msf), 1e-11),
        ("A3 maximum modulus quantile", worst(maximum_modulus_isf(msf, mk, mdf), m), 1e-11),
        ("A3 many-to-one tail", worst(tails, column(many, "sf")), 1e-11),
        ("A3 many-to-one quantile", worst(backs, column(many, "q")), 1e-11),
        (
            "A4 there and back",
            worst(studentized_range_sf(studentized_range_isf(p, rk, rdf), rk, rdf), p),
            1e-10,
        ),
    ]


def seconds(work: Callable[[], object]) -> float:
    start = time.perf_counter()
    work()
    return time.perf_counter() - start


def ratio(ours: Callable[[], object], theirs: Callable[[], object], scale: float, rounds: int) -> float:
    """Return how many times longer the general library takes, median of alternating rounds."""
    found = []
    for _ in range(rounds):
        mine = seconds(ours)
        found.append(seconds(theirs) * scale / mine)
    return statistics.median(found)


def random_table(draw: np.random.Generator, k: int, low: int, high: int) -> Groups:
    return [draw.normal(0.3 * i, 1.0, int(draw.integers(low, high + 1))).tolist() for i in range(k)]


def cold(procedure: Callable[..., object], tables: list[Groups], **options: object) -> Callable[[], object]:
    """Return a run over tables of raw results with empty caches."""

    def run() -> None:
        table.cache_clear()
        critical_range.cache_clear()
        for groups in tables:
            procedure([summarize(str(i), group) for i, group in enumerate(groups)], alpha=0.05, **options)

    return run


def library_all_pairs(groups: Groups, equal_var: bool) -> Callable[[], object]:
    return lambda: stats.tukey_hsd(*groups, equal_var=equal_var).confidence_interval(0.95)


def library_dunnett(groups: Groups) -> Callable[[], object]:
    return lambda: stats.dunnett(*groups[1:], control=groups[0], rng=1).confidence_interval(0.95)


def single_values(rounds: int) -> list[tuple[str, float, float]]:
    """Return S1: 10,000 tail areas and quantiles."""
    draw = np.random.default_rng(1)
    k, df, q = draw.integers(3, 13, 10_000), draw.integers(5, 101, 10_000), draw.uniform(1.0, 8.0, 10_000)
    p = studentized_range_sf(q, k, df)
    law = stats.studentized_range
    return [
        (
            "S1 tail areas",
            ratio(
                lambda: studentized_range_sf(q, k, df),
                lambda: law.sf(q[:SAMPLE], k[:SAMPLE], df[:SAMPLE]),
                10_000 / SAMPLE,
                rounds,
            ),
            1000.0,
        ),
        (
            "S1 quantiles",
            ratio(
                lambda: studentized_range_isf(p, k, df),
                lambda: law.isf(p[:SAMPLE], k[:SAMPLE], df[:SAMPLE]),
                10_000 / SAMPLE,
                rounds,
            ),
            3000.0,
        ),
    ]


def night(rounds: int) -> list[tuple[str, float, float]]:
    """Return S2: 200 characteristics by 8 lines, all intervals; the general library does a sample."""
    draw = np.random.default_rng(2)
    tables = [random_table(draw, 8, 4, 12) for _ in range(200)]
    sample = tables[:SAMPLE_TABLES]
    share = len(tables) / len(sample)

    def library(one_table: Callable[[Groups], Callable[[], object]]) -> Callable[[], object]:
        return lambda: [one_table(groups)() for groups in sample]

    pooled = library(lambda groups: library_all_pairs(groups, True))
    unequal = library(lambda groups: library_all_pairs(groups, False))
    with_reference = library(library_dunnett)
    return [
        ("S2 Tukey-Kramer", ratio(cold(tukey_kramer, tables), pooled, share, rounds), 500.0),
        ("S2 Games-Howell", ratio(cold(games_howell, tables), unequal, share, rounds), 1000.0),
        ("S2 Dunnett", ratio(cold(dunnett, tables, reference=0), with_reference, share, rounds), 30.0),
    ]


def one_table(rounds: int) -> list[tuple[str, float, float]]:
    """Return S3: one table with cold caches."""
    draw = np.random.default_rng(3)
    results = []
    for k, goal in ((3, 20.0), (6, 50.0), (12, 100.0)):
        groups = random_table(draw, k, 10, 10)
        theirs = library_all_pairs(groups, True)
        results.append(
            (f"S3 Tukey, {k} groups", ratio(cold(tukey_kramer, [groups]), theirs, 1, rounds), goal)
        )
    for k in (3, 6):
        groups = random_table(draw, k, 10, 10)
        theirs = library_all_pairs(groups, False)
        results.append(
            (f"S3 Games-Howell, {k} groups", ratio(cold(games_howell, [groups]), theirs, 1, rounds), 50.0)
        )
    return results


def told(goal: str, found: str, limit: str, share: float) -> bool:
    """Print one goal with the share of it that is reached; return whether half of it is not reached."""
    print(f"{goal:32} {found:>10}  {limit}{'' if share >= 1.0 else '  MISSED'}", flush=True)
    return share < 0.5


def main() -> int:
    rounds = int(sys.argv[1]) if len(sys.argv) > 1 else 3
    missed = [
        told(goal, f"{found:.1e}", f"at most {limit:.0e}", limit / found) for goal, found, limit in accuracy()
    ]
    for part in (single_values, one_table, night):
        missed += [
            told(goal, f"{found:.0f}x", f"at least {limit:.0f}x", found / limit)
            for goal, found, limit in part(rounds)
        ]
    return 1 if any(missed) else 0


if __name__ == "__main__":
    sys.exit(main())
