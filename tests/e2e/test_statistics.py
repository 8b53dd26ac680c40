"""The numbers of `compare --json`, from export to result, against results computed elsewhere.

The data sets of tests/reference/data were analysed in exact arithmetic (`highprec`); what they do not hold is
computed here from its definition with scipy's t.
"""

from __future__ import annotations

import functools
import json
import math
from collections.abc import Callable, Mapping, Sequence
from itertools import combinations
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from rig import ROOT, Site, conforms
from scipy import stats
from sheets import write_export, write_layout, write_plan

DATA = ROOT / "tests/reference/data"
NAMES = (
    "morley",
    "InsectSprays",
    "chickwts",
    "warpbreaks_tension",
    "inv_ties",
    "PlantGrowth",
    "inv_unequal_n",
)
NINE_DIGITS = 1e-9
Rows = Sequence[Mapping[str, Any]]


def known(name: str) -> dict[str, Any]:
    document: dict[str, Any] = json.loads((DATA / f"{name}.json").read_text("utf-8"))
    return document


def label(document: Mapping[str, Any], group: object) -> str:
    """Return a group's name in the export: the data sets' references all get one name."""
    return "REF" if str(group) == str(document["control"]) else str(group)


def values(name: str) -> dict[str, list[float]]:
    document = known(name)
    return {label(document, g["label"]): [float(v) for v in g["values"]] for g in document["groups"]}


Compared = Callable[..., dict[str, dict[str, Any]]]


@pytest.fixture
def compared(site: Site, tmp_path: Path) -> Compared:
    """Return a run of the whole pipeline over all data sets: characteristic by name."""
    export = write_export(tmp_path / "sheets-1.xlsx", {name: values(name) for name in NAMES})
    write_layout(site, NAMES)

    def run(comparison: str, characteristic: str = "") -> dict[str, dict[str, Any]]:
        write_plan(site, NAMES, comparison, characteristic)
        result = site.done("compare", export, "--no-report", "--json").json
        conforms(result, "result")
        found = {c["name"]: c for c in result["characteristics"]}
        for name, c in found.items():
            assert [g["n"] for g in c["groups"]] == [g["n"] for g in known(name)["groups"]]
        return found

    return run


def pairs(characteristic: Mapping[str, Any]) -> dict[tuple[str, str], Mapping[str, Any]]:
    return {(p["first"], p["second"]): p for p in characteristic["pairs"]}


def holds(found: float, expected: float) -> bool:
    """Return whether nine digits agree, in p from 1e-10 on."""
    return math.isclose(found, expected, rel_tol=NINE_DIGITS, abs_tol=1e-19)


@pytest.mark.parametrize(("alpha", "interval"), [(0.05, "ci95"), (0.01, "ci99")])
@pytest.mark.parametrize(("procedure", "key"), [("tukey_kramer", "tukey"), ("games_howell", "games_howell")])
def test_every_pair_of_means(
    compared: Compared, procedure: str, key: str, alpha: float, interval: str
) -> None:
    for name, found in compared(f'procedure = "{procedure}"\nalpha = {alpha}').items():
        assert found["procedure"] == procedure
        document = known(name)
        rows: Rows = document["highprec"][key]["rows"]
        assert len(rows) == len(found["pairs"])
        for row in rows:  # the data files take second minus first
            pair = pairs(found)[label(document, row["g1"]), label(document, row["g2"])]
            assert holds(pair["p"], row["p"]), (name, row)
            assert holds(pair["lower"], -row[interval][1]), (name, row)
            assert holds(pair["upper"], -row[interval][0]), (name, row)


def test_each_with_the_reference(compared: Compared) -> None:
    for name, found in compared('procedure = "dunnett"\nreference = "REF"').items():
        document = known(name)
        rows: Rows = document["highprec"]["dunnett"]["rows"]
        assert len(rows) == len(found["pairs"])
        for row in rows:
            pair = pairs(found)[str(row["group"]), "REF"]
            assert holds(pair["p"], row["p"]), (name, row)
            assert (holds(pair["lower"], row["ci95"][0]), holds(pair["upper"], row["ci95"][1])) == (
                True,
                True,
            )


def test_every_pair_by_ranks(compared: Compared) -> None:
    seen = 0
    for name, found in compared('procedure = "steel_dwass"\nalpha = 0.1').items():
        document = known(name)
        for row in document["highprec"]["dscf"]["rows"]:
            pair = pairs(found)[label(document, row["g1"]), label(document, row["g2"])]
            assert holds(pair["statistic"], -row["Z"])
            if found["law"] == "asymptotic":
                assert holds(pair["p"], row["p"]), (name, row)
                seen += 1
    assert seen > 50


def welch(a: Sequence[float], b: Sequence[float]) -> tuple[float, float, float]:
    """Return (difference, standard error, df)."""
    parts = [np.var(x, ddof=1) / len(x) for x in (a, b)]
    df = sum(parts) ** 2 / sum(p * p / (len(x) - 1) for p, x in zip(parts, (a, b), strict=True))
    return float(np.mean(a) - np.mean(b)), math.sqrt(sum(parts)), float(df)


def sidak(p: float, count: float) -> float:
    """Return 1 - (1 - p)**count."""
    return 1.0 if p >= 1.0 else -math.expm1(count * math.log1p(-p))


@pytest.mark.parametrize("procedure", ["tamhane_t2", "dunnett_unequal"])
def test_welch_at_sidaks_level(compared: Compared, procedure: str) -> None:
    with_reference = procedure == "dunnett_unequal"
    reference = '\nreference = "REF"' if with_reference else ""
    for name, found in compared(f'procedure = "{procedure}"\nalpha = 0.1{reference}').items():
        groups = values(name)
        asked = (
            [(g, "REF") for g in groups if g != "REF"] if with_reference else list(combinations(groups, 2))
        )
        assert list(pairs(found)) == asked
        for (first, second), pair in pairs(found).items():
            difference, se, df = welch(groups[first], groups[second])
            single = 2.0 * stats.t.sf(abs(difference) / se, df)
            assert holds(pair["p"], sidak(single, len(asked)))
            critical = stats.t.isf(sidak(0.1, 1 / len(asked)) / 2.0, df)
            assert holds(pair["upper"], difference + critical * se)
            assert holds(pair["lower"], difference - critical * se)


def modulus_tail(m: float, k: int, df: float) -> float:
    """Return P(maximum modulus of k > m) by a fine sum over log s."""
    u = np.linspace(-3.0, 2.5, 40_001)
    s = np.exp(u)
    density = stats.chi2.pdf(df * s * s, df) * 2.0 * df * s * s
    tail = -np.expm1(k * np.log1p(-np.minimum(2.0 * stats.norm.sf(m * s), 1.0 - 1e-16)))
    return float(np.sum(density * tail) * (u[1] - u[0]))


def test_t3_by_the_maximum_modulus(compared: Compared) -> None:
    for name, found in compared('procedure = "dunnett_t3"').items():
        groups = values(name)
        if name not in ("PlantGrowth", "warpbreaks_tension", "inv_ties"):
            continue
        count = len(found["pairs"])
        for (first, second), pair in pairs(found).items():
            difference, se, df = welch(groups[first], groups[second])
            assert holds(pair["p"], modulus_tail(abs(difference) / se, count, df))
            half = (pair["upper"] - pair["lower"]) / 2.0
            assert holds(modulus_tail(half / se, count, df), 0.05)


def weighted(a: Sequence[float], b: Sequence[float], quantile: Callable[[int], float]) -> float:
    """Return Cochran's mean of the groups' own quantiles, weighted by s² / n."""
    parts = [np.var(x, ddof=1) / len(x) for x in (a, b)]
    return float(sum(quantile(len(x) - 1) * p for p, x in zip(parts, (a, b), strict=True)) / sum(parts))


def test_weighted_quantiles_with_the_reference(compared: Compared) -> None:
    for name, found in compared('procedure = "dunnett_weighted"\nreference = "REF"').items():
        groups = values(name)
        count = len(found["pairs"])
        half_level = sidak(0.05, 1 / count) / 2.0
        for (first, second), pair in pairs(found).items():
            difference, se, _ = welch(groups[first], groups[second])
            at = [groups[first], groups[second]]
            critical = weighted(*at, functools.partial(stats.t.isf, half_level))
            assert holds(pair["upper"], difference + se * critical)
            assert pair["df"] is None
            single = sidak(pair["p"], 1 / count)
            if 1e-10 < single < 0.999:  # p is the level at which the statistic meets its critical value
                assert holds(
                    weighted(*at, functools.partial(stats.t.isf, single / 2.0)), abs(difference) / se
                )


def test_c_by_the_studentized_range(compared: Compared) -> None:
    """Scipy's quantile of the studentized range is good to about seven digits."""
    found = compared('procedure = "dunnett_c"')["PlantGrowth"]
    groups = values("PlantGrowth")
    critical = stats.studentized_range.isf(0.05, 3, 9) / math.sqrt(2.0)
    for (first, second), pair in pairs(found).items():
        difference, se, _ = welch(groups[first], groups[second])
        assert pair["upper"] == pytest.approx(difference + critical * se, rel=1e-6)
        assert pair["p"] == pytest.approx(
            stats.studentized_range.sf(math.sqrt(2.0) * abs(difference) / se, 3, 9), rel=1e-6
        )


@pytest.mark.parametrize(("direction", "sign"), [("higher_matters", 1.0), ("lower_matters", -1.0)])
def test_one_direction(site: Site, tmp_path: Path, direction: str, sign: float) -> None:
    """Dunnett (1955), blood counts: one-sided p by scipy's tests .32497761 and .00291388."""
    control = [7.40, 8.50, 7.20, 8.24, 9.84, 8.32]
    others = {"A": [9.76, 8.80, 7.68, 9.36], "B": [12.80, 9.68, 12.16, 9.20, 10.55]}
    turned = {k: [round(20.0 + sign * v, 2) for v in vs] for k, vs in {"REF": control, **others}.items()}
    export = write_export(tmp_path / "sheets-1.xlsx", {"count": turned})
    write_layout(site, ["count"])
    write_plan(site, ["count"], 'procedure = "dunnett"\nreference = "REF"', f'direction = "{direction}"')
    (found,) = site.done("compare", export, "--no-report", "--json").json["characteristics"]
    assert [p["p"] for p in found["pairs"]] == pytest.approx([0.32497761, 0.00291388], abs=5e-9)
    open_end = "upper" if sign > 0 else "lower"
    assert {p[open_end] for p in found["pairs"]} == {None}


def test_awkward_exports_end_in_an_answer_or_a_reason(site: Site, tmp_path: Path) -> None:
    """Values at 1e±300, limits, no scatter, ties: side by side in one export."""
    plain = [4.9, 5.1, 5.3, 4.8, 5.0]
    data = {
        "huge": {"A": [1e300, 1.1e300, 1.05e300], "B": plain, "C": [6.9, 7.1, 7.3]},
        "tiny": {"A": [1e-300, 1.1e-300, 1.05e-300], "B": [2e-300, 2.1e-300, 2.2e-300]},
        "limits": {"A": ["<0.5", "<0.5", 0.6, 0.7, 0.9], "B": ["<0.8", 0.6, 1.2, 1.4, 2.0], "C": plain},
        "half": {"A": ["<0.5", "<0.5", "<0.5", 0.7, 0.9], "B": plain, "C": [6.9, 7.1, 7.3]},
        "sides": {"A": ["<0.5", 0.6, 0.7, 0.9], "B": [">5", 0.8, 1.2, 1.4]},
        "flat": {"A": [5.0, 5.0, 5.0], "B": plain, "C": [6.9, 7.1, 7.3]},
        "dead": {"A": [5.0, 5.0, 5.0], "B": [6.0, 6.0, 6.0]},
        "ties": {"A": [1.0, 1.0, 1.0, 2.0], "B": [1.0, 2.0, 2.0, 2.0], "C": [1.0, 1.0, 1.0, 1.0]},
    }
    export = write_export(tmp_path / "sheets-1.xlsx", data)
    write_layout(site, list(data))
    write_plan(site, list(data), "")
    result = site.done("compare", export, "--no-report", "--json").json
    conforms(result, "result")
    found = {c["name"]: c for c in result["characteristics"]}
    assert {n: c["procedure"] for n, c in found.items() if c["procedure"] in ("none", "steel_dwass")} == {
        "tiny": "none",
        "limits": "steel_dwass",
        "sides": "none",
        "dead": "none",
    }
    assert [(g["label"], g["reason"][:25]) for g in found["huge"]["not_compared"]] == [
        ("A", "Its values are too large,")
    ]
    assert "more than half" in found["half"]["not_compared"][0]["reason"]
    assert "no order follows" in found["sides"]["not_compared"][0]["reason"]
    assert "no scatter" in found["dead"]["not_compared"][0]["reason"]
    codes = [n["code"] for n in result["notices"]]
    assert (codes.count("spread_floored"), codes.count("censored_values_tied")) == (2, 1)
    (tied,) = [n for n in result["notices"] if n["code"] == "censored_values_tied"]
    assert "3 measured values lose their order" in tied["text"]
    assert all(p["p"] is not None for c in found.values() for p in c["pairs"])
