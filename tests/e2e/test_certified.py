"""Published data sets written as exports, through the real command, against certified and exact values."""

from __future__ import annotations

import importlib.resources
import json
import math
import re
import subprocess
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

import pytest
from openpyxl import Workbook
from rig import ROOT, Site, copied
from scipy.special import stdtr

DATA = ROOT / "tests/reference/data"
DIGITS = {
    "SiRstv": 12, "SmLs01": 12, "SmLs02": 12, "SmLs03": 12,
    "SmLs04": 9, "SmLs05": 9, "SmLs06": 9, "AtmWtAg": 9,
    "SmLs07": 3.5, "SmLs08": 3.5, "SmLs09": 3.5,
}  # fmt: skip
"""Digits of F that doubles can keep of each set: the higher levels have 7 and 13 constant leading digits."""
LARGE = {"SmLs03", "SmLs06", "SmLs09"}
LAYOUT = """
layout_version = 1
name = "plain"
[sheet]
name = "Data"
[[table]]
shape = "long"
header_rows = [1]
first_row = 2
end = "blank:1"
group = { col = "A" }
[[table.value]]
characteristic = "response"
col = "B"
unit = "1"
"""
PLAN = """
name = "all"
title = "All groups"
exports = ["*.xlsx"]
layout = "plain"
[comparison]
groups = "batch"
independent_unit = "reading"
smallest_group = 2
%s
[[characteristic]]
name = "response"
title = "Response"
unit = "1"
"""


@pytest.fixture(scope="module")
def plain(site_as_made: Path, tmp_path_factory: pytest.TempPathFactory) -> Site:
    """Return a site with one plain layout; only its plan is changed."""
    site = copied(site_as_made, tmp_path_factory.mktemp("plain") / "site")
    site.plan.unlink()
    site.layout.unlink()
    (site.root / "config/layouts/plain.toml").write_text(LAYOUT, "utf-8")
    (site.root / "config/plans/all.toml").write_text(PLAN % "", "utf-8")
    return site


def workbook(path: Path, groups: Mapping[str, Sequence[float]]) -> Path:
    book = Workbook(write_only=True)
    page = book.create_sheet("Data")
    page.append(["Group", "Response"])
    for label, values in groups.items():
        for value in values:
            page.append([label, value])
    book.save(path)
    book.close()
    return path


def plan(site: Site, folder: Path, comparison: str) -> Path:
    path = folder / "all.toml"
    path.write_text(
        (PLAN % comparison).replace('"plain"', f'"{site.root}/config/layouts/plain.toml"'), "utf-8"
    )
    return path


def compared(site: Site, path: Path, *more: str | Path) -> dict[str, Any]:
    ran = site.done("compare", path, "--no-report", "--json", *more)
    (found,) = ran.json["characteristics"]
    return dict(found)


def agree(found: float, expected: float, digits: float) -> bool:
    return abs(found / expected - 1.0) < 10.0**-digits


# -- NIST Statistical Reference Datasets, analysis of variance, https://www.itl.nist.gov/div898/strd/ -----


def certified(name: str) -> tuple[dict[str, list[float]], dict[str, float]]:
    """Read one set from the copy inside the scipy wheel."""
    folder = importlib.resources.files("scipy.stats.tests") / "data" / "nist_anova"
    lines = (folder / f"{name}.dat").read_text().splitlines()
    between = next(line for line in lines if line.startswith("Between") and "E+" in line).split()
    within = next(line for line in lines if line.startswith("Within") and "E-" in line).split()
    at = next(i for i, line in enumerate(lines) if line.strip() == "Certified Residual")
    values = {
        "df": float(between[-4]),
        "ms_between": float(between[-2]),
        "f": float(between[-1]),
        "df_within": float(within[-3]),
        "ms_within": float(within[-1]),
        "sd": float(lines[at + 1].split()[-1]),
    }
    start = max(i for i, line in enumerate(lines) if line.startswith("Data:"))
    groups: dict[str, list[float]] = {}
    for line in lines[start + 1 :]:
        if line.strip():
            group, value = line.split()
            groups.setdefault(f"T{group}", []).append(float(value))
    return groups, values


@pytest.mark.parametrize(
    "name", [pytest.param(n, marks=pytest.mark.slow) if n in LARGE else n for n in DIGITS]
)
def test_a_certified_set(name: str, plain: Site, tmp_path: Path) -> None:
    groups, expected = certified(name)
    found = compared(plain, workbook(tmp_path / f"{name}.xlsx", groups))
    assert [g["n"] for g in found["groups"]] == [len(values) for values in groups.values()]
    analysis = found["analysis_of_variance"]
    digits = DIGITS[name]
    assert analysis["df"] == [expected["df"], expected["df_within"]]
    assert agree(analysis["statistic"], expected["f"], digits)
    assert agree(analysis["ms_within"], expected["ms_within"], digits)
    assert agree(math.sqrt(analysis["ms_within"]), expected["sd"], digits)
    assert agree(analysis["statistic"] * analysis["ms_within"], expected["ms_between"], digits)


def test_a_report_prints_no_more_digits_than_the_data_support(plain: Site, tmp_path: Path) -> None:
    """SmLs07 has 13 constant leading digits: about four digits of F are real, and no more may be printed."""
    groups, expected = certified("SmLs07")
    site = copied(plain.root, tmp_path / "site")
    pooled = PLAN % 'procedure = "tukey_hsd"'
    (site.root / "config/plans/all.toml").write_text(pooled, "utf-8")
    site.done("compare", workbook(tmp_path / "SmLs07.xlsx", groups))
    (report,) = site.reports
    text = subprocess.run(
        ["pdftotext", "-layout", report, "-"], capture_output=True, text=True, check=True, timeout=60
    ).stdout
    (printed,) = re.findall(r"analysis of variance\): F\(8, 180\) = ([0-9.]+[0-9])", " ".join(text.split()))
    assert 2 <= len(printed.replace(".", "")) <= 4, printed
    last_place = 10.0 ** -len(printed.partition(".")[2])
    assert abs(float(printed) - expected["f"]) <= last_place


# -- data sets of R, recomputed in exact arithmetic (tests/reference/data says with what) ----------------


def data_set(name: str) -> dict[str, Any]:
    found: dict[str, Any] = json.loads((DATA / f"{name}.json").read_text("utf-8"))
    return found


def groups_of(data: dict[str, Any]) -> dict[str, list[float]]:
    return {group["label"]: group["values"] for group in data["groups"]}


def near(found: float, expected: float) -> bool:
    """Return whether two numbers agree to nine digits; differences and interval ends may be near nought."""
    return math.isclose(found, expected, rel_tol=1e-9, abs_tol=1e-12)


SETS = ("PlantGrowth", "morley", "chickwts", "InsectSprays")
BLOCKS = {
    "tukey_hsd": "tukey",
    "tukey_kramer": "tukey",
    "games_howell": "games_howell",
}


def fixed(name: str) -> list[str]:
    """Return the procedures of every pair that a plan may fix for a set: Tukey's HSD needs equal sizes."""
    sizes = {len(values) for values in groups_of(data_set(name)).values()}
    return [procedure for procedure in BLOCKS if procedure != "tukey_hsd" or len(sizes) == 1]


@pytest.mark.parametrize(("name", "procedure"), [(n, p) for n in SETS for p in fixed(n)])
def test_every_pair(name: str, procedure: str, plain: Site, tmp_path: Path) -> None:
    data = data_set(name)
    exact = data["highprec"][BLOCKS[procedure]]
    comparison = f'alpha = 0.05\nprocedure = "{procedure}"'
    path = workbook(tmp_path / f"{name}.xlsx", groups_of(data))
    found = compared(plain, path, "--plan", plan(plain, tmp_path, comparison))
    assert found["procedure"] == procedure
    assert found["rule"]["id"] == "fixed_by_plan"
    pairs = {(p["first"], p["second"]): p for p in found["pairs"]}
    assert len(pairs) == len(exact["rows"])
    checked = 0
    for row in exact["rows"]:
        pair = pairs[row["g1"], row["g2"]]
        assert near(-pair["difference"], row["diff"])
        assert near(-pair["upper"], row["ci95"][0])
        assert near(-pair["lower"], row["ci95"][1])
        p = float(row["p_str"])
        if p >= 1e-10:
            assert math.isclose(pair["p"], p, rel_tol=1e-9)
            checked += 1
        else:
            assert pair["p"] < 1.1e-10
    assert checked > 0


@pytest.mark.parametrize("procedure", ["tamhane_t2", "dunnett_t3", "dunnett_c"])
@pytest.mark.parametrize("name", SETS)
def test_other_procedures_for_unequal_spread(name: str, procedure: str, plain: Site, tmp_path: Path) -> None:
    """They share standard error and df with Games-Howell, whose exact block serves; T2 has a closed form."""
    data = data_set(name)
    rows = data["highprec"]["games_howell"]["rows"]
    comparison = f'alpha = 0.05\nprocedure = "{procedure}"'
    path = workbook(tmp_path / f"{name}.xlsx", groups_of(data))
    found = compared(plain, path, "--plan", plan(plain, tmp_path, comparison))
    assert found["procedure"] == procedure
    pairs = {(p["first"], p["second"]): p for p in found["pairs"]}
    assert len(pairs) == len(rows)
    for row in rows:
        pair = pairs[row["g1"], row["g2"]]
        assert near(-pair["difference"], row["diff"])
        assert near(pair["se"], row["se"])
        assert near(abs(pair["statistic"]) * math.sqrt(2.0), abs(row["q"]))
        half = pair["critical_value"] * pair["se"]
        assert near(pair["upper"], pair["difference"] + half)
        assert near(pair["lower"], pair["difference"] - half)
        assert (pair["p"] < 0.05) == (abs(pair["statistic"]) > pair["critical_value"])
        if procedure == "dunnett_c":
            assert pair["df"] is None
            continue
        assert near(pair["df"], row["df"])
        single = 2.0 * stdtr(row["df"], -abs(row["q"]) / math.sqrt(2.0))
        sidak = -math.expm1(len(rows) * math.log1p(-single))
        if procedure == "tamhane_t2" and sidak >= 1e-10:
            assert math.isclose(pair["p"], sidak, rel_tol=1e-9)
        if procedure == "dunnett_t3":
            assert pair["p"] <= sidak * (1.0 + 1e-9), "T3 is never more cautious than T2"


@pytest.mark.parametrize("name", SETS)
def test_each_with_the_reference(name: str, plain: Site, tmp_path: Path) -> None:
    data = data_set(name)
    exact = data["highprec"]["dunnett"]
    comparison = f'alpha = 0.05\nprocedure = "dunnett"\nreference = "{exact["control"]}"'
    path = workbook(tmp_path / f"{name}.xlsx", groups_of(data))
    found = compared(plain, path, "--plan", plan(plain, tmp_path, comparison))
    pairs = {p["first"]: p for p in found["pairs"]}
    assert {p["second"] for p in found["pairs"]} == {exact["control"]}
    assert len(pairs) == len(exact["rows"])
    assert near(found["critical_value"], exact["dcrit"]["0.05"])
    for row in exact["rows"]:
        pair = pairs[row["group"]]
        assert near(pair["lower"], row["ci95"][0])
        assert near(pair["upper"], row["ci95"][1])
        if float(row["p_str"]) >= 1e-10:
            assert math.isclose(pair["p"], float(row["p_str"]), rel_tol=1e-9)


def test_the_overall_tests(plain: Site, tmp_path: Path) -> None:
    data = data_set("PlantGrowth")
    path = workbook(tmp_path / "PlantGrowth.xlsx", groups_of(data))
    found = compared(plain, path)
    exact = data["highprec"]["anova"]
    assert near(found["analysis_of_variance"]["statistic"], exact["F"])
    assert near(found["analysis_of_variance"]["p"], exact["p"])
    (check,) = [c for c in found["checks"] if c["name"] == "brown_forsythe"]
    assert near(check["statistic"], data["results_R"]["brown_forsythe_median"]["F"])
    assert near(check["p"], data["results_R"]["brown_forsythe_median"]["p"])
