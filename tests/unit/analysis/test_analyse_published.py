"""The analysis from outside against published values."""

from __future__ import annotations

import importlib.resources
import math
import re
from collections.abc import Mapping, Sequence
from typing import Any

import pytest
from analysis_cases import digits, of_groups, only, pair_of, plan, reference_data, values_of

from qcreport.analysis.result import CharacteristicResult

DATA = ["PlantGrowth", "InsectSprays", "chickwts", "morley", "warpbreaks_tension", "waste_temp"]
TIGHT = 1e-11
"""Relative; the data sets' high-precision results hold at least 13 digits."""


def fixed(name: str, procedure: str, more: str = "") -> CharacteristicResult:
    return only(values_of(reference_data(name)), plan(comparison=f'procedure = "{procedure}"\n{more}'))


def rows_of(name: str, procedure: str) -> Sequence[Mapping[str, Any]]:
    rows: Sequence[Mapping[str, Any]] = reference_data(name)["highprec"][procedure]["rows"]
    return rows


@pytest.mark.parametrize("name", DATA)
def test_summaries(name: str) -> None:
    result = only(values_of(reference_data(name)))
    expected = reference_data(name)["highprec"]["groups"]
    assert [g.label for g in result.groups] == [str(g["group"]) for g in expected]
    for group, row in zip(result.groups, expected, strict=True):
        assert group.mean == pytest.approx(row["mean"], rel=1e-14)
        assert group.sd == pytest.approx(row["sd"], rel=1e-14)


@pytest.mark.parametrize("name", DATA)
def test_analysis_of_variance_and_welch(name: str) -> None:
    expected = reference_data(name)["highprec"]
    result = only(values_of(reference_data(name)))
    table = result.analysis_of_variance
    assert table is not None
    assert table.name == "anova"
    assert table.statistic == pytest.approx(expected["anova"]["F"], rel=1e-13)
    assert table.p == pytest.approx(expected["anova"]["p"], rel=1e-12)
    assert table.ss_between == pytest.approx(expected["anova"]["SSb"], rel=1e-13)
    assert table.ss_within == pytest.approx(expected["anova"]["SSw"], rel=1e-13)
    assert table.df == (len(result.groups) - 1, sum(g.n for g in result.groups) - len(result.groups))
    overall = result.overall
    assert overall is not None
    assert overall.name == "welch"  # nothing is declared and these exports are too small to show it
    assert overall.statistic == pytest.approx(expected["welch"]["F"], rel=1e-13)
    assert overall.df[1] == pytest.approx(expected["welch"]["df2"], rel=1e-13)
    assert overall.p == pytest.approx(expected["welch"]["p"], rel=1e-12)
    assert overall.ms_within is None


@pytest.mark.parametrize("name", DATA)
def test_variance_checks(name: str) -> None:
    printed = reference_data(name)["results_R"]
    checks = {c.name: c for c in only(values_of(reference_data(name))).checks}
    levene, bartlett = printed["brown_forsythe_median"], printed["bartlett"]
    assert checks["brown_forsythe"].statistic == pytest.approx(levene["F"], rel=1e-12)
    assert checks["brown_forsythe"].p == pytest.approx(levene["p"], rel=1e-12)
    assert checks["brown_forsythe"].df == (levene["df1"], levene["df2"])
    assert checks["bartlett"].statistic == pytest.approx(bartlett["K2"], rel=1e-12)
    assert checks["bartlett"].p == pytest.approx(bartlett["p"], rel=1e-12)


@pytest.mark.parametrize("name", DATA)
def test_tukey(name: str) -> None:
    expected = reference_data(name)["highprec"]["tukey"]
    result = fixed(name, "tukey_kramer")
    assert result.overall == result.analysis_of_variance
    for row in expected["rows"]:  # the data files take second minus first
        pair = pair_of(result, str(row["g1"]), str(row["g2"]))
        assert pair.difference == pytest.approx(-row["diff"], rel=1e-12)
        assert pair.p == pytest.approx(row["p"], rel=TIGHT)
        assert pair.statistic is not None
        assert math.sqrt(2.0) * abs(pair.statistic) == pytest.approx(row["q"], rel=1e-12)
        assert (pair.lower, pair.upper) == pytest.approx((-row["ci95"][1], -row["ci95"][0]), rel=TIGHT)
        assert pair.df == expected["df"]
        assert pair.critical_value == result.critical_value
        assert pair.answer == ("different" if row["p"] < 0.05 else "not_shown")
    assert result.critical_value == pytest.approx(expected["qcrit"]["0.05"] / math.sqrt(2.0), rel=TIGHT)
    if len({g.n for g in result.groups}) == 1:
        assert result.hsd == pytest.approx(expected["HSD"]["0.05"], rel=TIGHT)
        same = fixed(name, "tukey_hsd")
        assert (same.pairs, same.hsd) == (result.pairs, result.hsd)
    else:
        assert result.hsd is None


@pytest.mark.parametrize("name", DATA)
def test_games_howell(name: str) -> None:
    result = fixed(name, "games_howell", "alpha = 0.01")
    for row in rows_of(name, "games_howell"):
        pair = pair_of(result, str(row["g1"]), str(row["g2"]))
        assert pair.p == pytest.approx(row["p"], rel=TIGHT)
        assert pair.df == pytest.approx(row["df"], rel=1e-12)
        assert pair.se == pytest.approx(row["se"], rel=1e-12)
        assert (pair.lower, pair.upper) == pytest.approx((-row["ci99"][1], -row["ci99"][0]), rel=TIGHT)
        assert pair.critical_value == pytest.approx(row["qcrit"]["0.01"] / math.sqrt(2.0), rel=TIGHT)
    assert result.critical_value is None


@pytest.mark.parametrize("name", DATA)
def test_dunnett(name: str) -> None:
    expected = reference_data(name)["highprec"]["dunnett"]
    result = fixed(name, "dunnett", f'reference = "{expected["control"]}"')
    assert [(p.first, p.second) for p in result.pairs] == [
        (str(row["group"]), str(expected["control"])) for row in expected["rows"]
    ]
    for pair, row in zip(result.pairs, expected["rows"], strict=True):
        assert pair.difference == pytest.approx(row["diff"], rel=1e-12)
        assert pair.statistic == pytest.approx(row["t"], rel=1e-12)
        assert pair.p == pytest.approx(row["p"], rel=TIGHT)
        assert (pair.lower, pair.upper) == pytest.approx(tuple(row["ci95"]), rel=TIGHT)
    assert result.critical_value == pytest.approx(expected["dcrit"]["0.05"], rel=TIGHT)


@pytest.mark.parametrize("name", DATA)
def test_two_one_sided_tests(name: str) -> None:
    for block in reference_data(name)["results_R"]["tost"]["by_margin"]:
        asked = plan(
            comparison='procedure = "tukey_kramer"', characteristic=f"margin = {float(block['margin'])}"
        )
        result = only(values_of(reference_data(name)), asked)
        expected = all(row["equivalent"]["0.05"] for row in block["pooled_all_groups"])
        assert result.all_within_margin is expected


@pytest.mark.parametrize("name", DATA)
def test_ranks(name: str) -> None:
    """Asymptotic law: these sizes have too many arrangements to count."""
    result = fixed(name, "steel_dwass")
    for row in rows_of(name, "dscf"):
        pair = pair_of(result, str(row["g1"]), str(row["g2"]))
        assert pair.statistic == pytest.approx(-row["Z"], rel=1e-12)
        assert pair.p == pytest.approx(row["p"], rel=TIGHT)
        assert (pair.se, pair.df, pair.detectable) == (None, None, None)
    printed = reference_data(name)["results_R"]["kruskal"]
    assert result.overall is not None
    assert result.overall.name == "kruskal_wallis"
    assert result.overall.statistic == pytest.approx(printed["H"], rel=1e-12)
    assert result.overall.df == (printed["df"],)
    assert result.overall.p == pytest.approx(printed["p"], rel=1e-12)


RULES_CHOICE = {
    "PlantGrowth": ("unequal_spread", "games_howell"),  # three groups of ten
    "InsectSprays": ("unequal_spread", "games_howell"),
    "chickwts": ("unequal_spread", "games_howell"),
    "morley": ("unequal_spread", "games_howell"),
    "inv_unequal_n": ("unequal_spread_tiny", "dunnett_c"),  # a group of three
}


@pytest.mark.parametrize("name", RULES_CHOICE)
def test_the_default_rules_choose(name: str) -> None:
    result = only(values_of(reference_data(name)))
    assert (result.rule.id, result.procedure) == RULES_CHOICE[name]
    assert result.trace[-1].id == result.rule.id
    assert result.trace[-1].applied


def test_tamhane_t3_and_c_on_plant_growth() -> None:
    """Computed in 40-digit arithmetic elsewhere; four digits are kept."""
    for procedure, expected in {
        "tamhane_t2": (0.5788, 0.1369, 0.0276),
        "dunnett_t3": (0.5638, 0.1323, 0.0268),
    }.items():
        assert [p.p for p in fixed("PlantGrowth", procedure).pairs] == pytest.approx(expected, abs=5e-5)
    pairs = fixed("PlantGrowth", "dunnett_c").pairs
    # with equal sizes the weighted mean of two equal quantiles is that quantile: q(.05; 3, 9) / sqrt 2
    assert [p.critical_value for p in pairs] == pytest.approx([2.79201] * 3, abs=5e-6)
    assert [p.df for p in pairs] == [None] * 3


HANDBOOK = {
    "1": [6.9, 5.4, 5.8, 4.6, 4.0],
    "2": [8.3, 6.8, 7.8, 9.2, 6.5],
    "3": [8.0, 10.5, 8.1, 6.9, 9.3],
}


def test_handbook_one_way() -> None:
    """NIST/SEMATECH e-Handbook 7.4.3.3."""
    table = only(HANDBOOK).analysis_of_variance
    assert table is not None
    assert (table.ss_between, table.ss_within) == pytest.approx((27.897, 17.452), abs=5e-4)
    assert (table.ms_between, table.ms_within) == pytest.approx((13.949, 1.454), abs=5e-4)
    assert table.df == (2, 12)
    assert table.statistic == pytest.approx(9.591107, abs=5e-7)
    assert table.p == pytest.approx(0.00324822, abs=5e-9)


def test_handbook_tukey() -> None:
    """NIST/SEMATECH e-Handbook 7.4.7.1, printed to two decimals."""
    groups = HANDBOOK | {"4": [5.8, 3.8, 6.1, 5.6, 6.2]}
    result = only(groups, plan(comparison='procedure = "tukey_hsd"'))
    assert [g.mean for g in result.groups] == pytest.approx([5.34, 7.72, 8.56, 5.50], abs=1e-12)
    assert result.overall is not None
    assert result.overall.ms_within == pytest.approx(1.33075, abs=1e-10)
    printed = {
        ("1", "2"): (-4.47, -0.29), ("1", "3"): (-5.31, -1.13), ("1", "4"): (-2.25, 1.93),
        ("2", "3"): (-2.93, 1.25), ("2", "4"): (0.13, 4.31), ("3", "4"): (0.97, 5.15),
    }  # fmt: skip
    for (first, second), (lower, upper) in printed.items():
        pair = pair_of(result, first, second)
        assert (pair.lower, pair.upper) == pytest.approx((lower, upper), abs=0.0051)
    open_pairs = {(p.first, p.second) for p in result.pairs if p.answer == "not_shown"}
    assert open_pairs == {("1", "4"), ("2", "3")}


BLOOD = {
    "control": [7.40, 8.50, 7.20, 8.24, 9.84, 8.32],
    "A": [9.76, 8.80, 7.68, 9.36],
    "B": [12.80, 9.68, 12.16, 9.20, 10.55],
}


def test_blood_counts_two_sided() -> None:
    """Dunnett (1955), J. Am. Stat. Assoc. 50, 1096-1121; exact values."""
    result = only(BLOOD, plan(comparison='procedure = "dunnett"\nreference = "control"'))
    a, b = result.pairs
    assert (a.statistic, b.statistic) == pytest.approx((0.8570321, 3.6937523), abs=5e-8)
    assert (a.p, b.p) == pytest.approx((0.62010198, 0.00582536), abs=5e-9)
    assert result.critical_value == pytest.approx(2.5134829, abs=5e-8)
    # the published interval comes from a stochastic integration, good to about three digits of the half-width
    assert (a.lower, a.upper, b.lower, b.upper) == pytest.approx(
        (-1.25641, 2.55641, 0.83963, 4.41637), abs=2e-4
    )
    assert [p.answer for p in result.pairs] == ["not_shown", "different"]


def test_blood_counts_one_sided() -> None:
    asked = plan(
        comparison='procedure = "dunnett"\nreference = "control"',
        characteristic='direction = "higher_matters"',
    )
    a, b = only(BLOOD, asked).pairs
    assert (a.p, b.p) == pytest.approx((0.32497761, 0.00291388), abs=5e-9)
    assert (a.upper, b.upper) == (None, None)
    assert a.lower is not None
    assert b.lower is not None
    assert a.lower < 0.0 < b.lower


def test_tukey_kramer_example() -> None:
    """Output of a commercial package, quoted in scipy's tests of tukey_hsd (BSD-3)."""
    groups = {
        "1": [24.5, 23.5, 26.28, 26.4, 27.1, 29.9, 30.1, 30.1],
        "2": [28.4, 34.2, 29.5, 32.2, 30.1],
        "3": [26.1, 28.3, 24.3, 26.2, 27.8],
    }
    result = only(groups, plan(comparison='procedure = "tukey_kramer"'))
    assert [p.p for p in result.pairs] == pytest.approx([0.03371498443, 0.85572267, 0.02259047], abs=5e-9)
    pair = pair_of(result, "1", "2")
    assert (pair.lower, pair.upper) == pytest.approx((-7.02207, -0.26793), abs=5e-5)


def test_games_howell_example() -> None:
    """The same source, unequal variances."""
    groups = {
        "0": [30, 23, 51],
        "1": [-81, 71, -27, 63],
        "2": [42, 11, 29, 19, 50],
        "3": [23, 22, 20, 18, 9],
    }
    result = only(groups, plan(comparison='procedure = "games_howell"'))
    expected = [0.8727542748, 0.9752628409, 0.4262506151, 0.9148950609, 0.9861432250, 0.4755344436]
    # the package prints ten digits of a tail that it computes to about 1e-8
    assert [p.p for p in result.pairs] == pytest.approx(expected, abs=1e-8)
    pair = pair_of(result, "2", "3")
    assert (pair.lower, pair.upper) == pytest.approx((-16.28949, 39.88949), abs=5e-5)


# -- NIST statistical reference data sets, one-way analysis of variance --------------------------------------

CERTIFIED_DIGITS = {
    "SiRstv": 12, "SmLs01": 12, "SmLs02": 12, "SmLs03": 12,
    "SmLs04": 9, "SmLs05": 9, "SmLs06": 9, "AtmWtAg": 9,
    "SmLs07": 4, "SmLs08": 4, "SmLs09": 4,
}  # fmt: skip
"""Digits of F; the last three sets have 13 constant leading digits, which doubles cannot hold in full."""


def nist(name: str) -> tuple[dict[str, list[float]], dict[str, float]]:
    """Return groups and certified values of a file that comes with scipy."""
    folder = importlib.resources.files("scipy") / "stats" / "tests" / "data" / "nist_anova"
    text = (folder / f"{name}.dat").read_text(encoding="ascii")
    number = r"(-?\d\.\d+E[+-]\d+)"
    between = re.search(rf"^Between .*?(\d+)\s+{number}\s+{number}\s+{number}", text, re.MULTILINE)
    within = re.search(rf"^Within .*?(\d+)\s+{number}\s+{number}", text, re.MULTILINE)
    residual = re.search(rf"Certified Residual\s+Standard Deviation\s+{number}", text)
    assert between is not None
    assert within is not None
    assert residual is not None
    certified = {
        "ms_between": float(between.group(3)),
        "f": float(between.group(4)),
        "ms_within": float(within.group(3)),
        "sd": float(residual.group(1)),
        "df_between": float(between.group(1)),
        "df_within": float(within.group(1)),
    }
    groups: dict[str, list[float]] = {}
    for label, value in re.findall(
        r"^\s+(\d+)\s+(\d+\.\d+)\s*$", text[text.index("\nData:") :], re.MULTILINE
    ):
        groups.setdefault(label, []).append(float(value))
    assert sum(map(len, groups.values())) == certified["df_between"] + certified["df_within"] + 1
    return groups, certified


@pytest.mark.parametrize("name", CERTIFIED_DIGITS)
def test_certified_one_way_values(name: str) -> None:
    groups, certified = nist(name)
    table = only(of_groups(groups), plan(comparison='procedure = "tukey_kramer"')).overall
    assert table is not None
    assert table.statistic is not None
    assert table.ms_within is not None
    assert table.ms_between is not None
    assert table.df == (certified["df_between"], certified["df_within"])
    reached = digits(table.statistic, certified["f"])
    least = CERTIFIED_DIGITS[name]
    assert reached >= least
    assert digits(table.ms_between, certified["ms_between"]) >= least - 0.5
    assert digits(table.ms_within, certified["ms_within"]) >= least - 0.5
    assert digits(math.sqrt(table.ms_within), certified["sd"]) >= least - 0.5
    assert table.supported_digits <= reached + 0.5, "no more digits are claimed than are right"
    assert table.supported_digits >= least - 2, "nor far fewer"
