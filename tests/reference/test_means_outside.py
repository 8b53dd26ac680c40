"""Procedures based on means against exact arithmetic, certified sets and published examples."""

import math

import pytest
from outside_values import DATA_SETS, by_pair, data_set, groups_of, lettered, nist_anova, published, relative

from qcreport.stats.assumptions import bartlett, brown_forsythe, cochran_c
from qcreport.stats.equivalence import all_within_margin
from qcreport.stats.one_way import anova, supported_digits, welch
from qcreport.stats.outliers import grubbs
from qcreport.stats.pooled import tukey_hsd, tukey_kramer
from qcreport.stats.reference import dunnett
from qcreport.stats.summary import GroupSummary, summarize
from qcreport.stats.unequal import dunnett_c, dunnett_t3, games_howell, tamhane_t2

CERTIFIED = {
    # digits that the doubles of each set support: 15 for the lower, about 10 and 4 for the higher levels
    "SiRstv": 12.5,
    "AtmWtAg": 9.5,
    "SmLs01": 13.0,
    "SmLs02": 13.0,
    "SmLs03": 13.0,
    "SmLs04": 9.5,
    "SmLs05": 9.5,
    "SmLs06": 9.5,
    "SmLs07": 3.5,
    "SmLs08": 3.5,
    "SmLs09": 3.5,
}


@pytest.mark.parametrize("name", CERTIFIED)
def test_certified_sets(name: str) -> None:
    groups, certified = nist_anova(name)
    result = anova(groups)
    tolerance = 10.0 ** -CERTIFIED[name]
    assert relative(result.statistic, certified["f"]) < tolerance
    assert relative(result.ss_between, certified["ss_between"]) < tolerance
    assert relative(result.ss_within, certified["ss_within"]) < tolerance


@pytest.mark.parametrize("name", CERTIFIED)
def test_digits_said_to_be_supported_are_right(name: str) -> None:
    groups, certified = nist_anova(name)
    digits = supported_digits(groups)
    assert relative(anova(groups).statistic, certified["f"]) < 10.0**-digits
    assert digits > CERTIFIED[name] - 2.0  # nor are they thrown away


@pytest.mark.parametrize("name", DATA_SETS)
def test_overall_tests(name: str) -> None:
    data = data_set(name)
    groups, exact = groups_of(data), data["highprec"]
    f, w = anova(groups), welch(groups)
    assert relative(f.statistic, exact["anova"]["F"]) < 1e-13
    assert relative(f.p, exact["anova"]["p"]) < 1e-12
    assert relative(w.statistic, exact["welch"]["F"]) < 1e-13
    assert relative(w.df_within, exact["welch"]["df2"]) < 1e-13
    assert relative(w.p, exact["welch"]["p"]) < 1e-12


@pytest.mark.parametrize("name", DATA_SETS)
@pytest.mark.parametrize(("procedure", "key"), [(tukey_kramer, "tukey"), (games_howell, "games_howell")])
def test_all_pairs(name: str, procedure, key: str) -> None:
    data = data_set(name)
    groups, exact = groups_of(data), data["highprec"][key]
    for alpha, interval in ((0.05, "ci95"), (0.01, "ci99")):
        found = by_pair(procedure(groups, alpha=alpha))
        assert len(found) == len(exact["rows"])
        for row in exact["rows"]:
            pair = found[frozenset((row["g1"], row["g2"]))]
            assert pair.first == row["g1"]
            assert -pair.difference == pytest.approx(row["diff"], rel=1e-12)
            assert relative(pair.p, float(row["p_str"])) < 1e-11
            assert [-pair.upper, -pair.lower] == pytest.approx(row[interval], rel=1e-11, abs=1e-12)
            assert abs(pair.statistic) * math.sqrt(2.0) == pytest.approx(abs(row["q"]), rel=1e-12)


@pytest.mark.parametrize("name", [name for name in DATA_SETS if "control" in data_set(name)])
def test_each_with_the_reference(name: str) -> None:
    data = data_set(name)
    groups, exact = groups_of(data), data["highprec"]["dunnett"]
    reference = [g.label for g in groups].index(exact["control"])
    result = dunnett(groups, reference=reference, alpha=0.05)
    assert relative(result.critical_value, exact["dcrit"]["0.05"]) < 1e-12
    found = {c.first: c for c in result.comparisons}
    assert len(found) == len(exact["rows"]) >= 2
    for row in exact["rows"]:
        pair = found[row["group"]]
        assert relative(pair.p, float(row["p_str"])) < 1e-11
        assert [pair.lower, pair.upper] == pytest.approx(row["ci95"], rel=1e-11, abs=1e-12)


@pytest.mark.parametrize("name", DATA_SETS)
def test_spread_checks_as_r_has_them(name: str) -> None:
    data = data_set(name)
    groups, expected = groups_of(data), data["results_R"]
    found = brown_forsythe([g["label"] for g in data["groups"]], [g["values"] for g in data["groups"]])
    assert relative(found.statistic, expected["brown_forsythe_median"]["F"]) < 1e-12
    assert relative(found.p, expected["brown_forsythe_median"]["p"]) < 1e-12
    likelihood = bartlett(groups)
    assert relative(likelihood.statistic, expected["bartlett"]["K2"]) < 1e-11
    assert relative(likelihood.p, expected["bartlett"]["p"]) < 1e-11


@pytest.mark.parametrize("name", DATA_SETS)
def test_two_one_sided_tests_as_r_has_them(name: str) -> None:
    data = data_set(name)
    for procedure, key in ((tukey_kramer, "pooled_all_groups"), (games_howell, "welch")):
        pairs = procedure(groups_of(data), alpha=0.05).comparisons
        for block in data["results_R"]["tost"]["by_margin"]:
            margin = block["margin"]
            found = all_within_margin(pairs, alpha=0.05, margin_below=-margin, margin_above=margin)
            for interval, row in zip(found.intervals, block[key], strict=True):
                assert [-interval.upper, -interval.lower] == pytest.approx(row["ci90"], rel=1e-11, abs=1e-12)
                assert interval.within == row["equivalent"]["0.05"]
            assert found.all_within == all(row["equivalent"]["0.05"] for row in block[key])


def test_nist_one_way_example() -> None:
    known = published("nist_7_4_3")
    result = anova(lettered(known["groups"]))
    assert result.ss_between == pytest.approx(known["ss_between"], abs=known["tolerance"])
    assert result.ss_within == pytest.approx(known["ss_within"], abs=known["tolerance"])
    assert result.ms_between == pytest.approx(known["ms_between"], abs=known["tolerance"])
    assert result.ms_within == pytest.approx(known["ms_within"], abs=known["tolerance"])
    assert result.statistic == pytest.approx(known["f"], abs=known["tolerance"])
    assert result.statistic == pytest.approx(9.591107, abs=1e-6)
    assert result.p == pytest.approx(0.00324822, abs=5e-9)


def test_nist_tukey_example() -> None:
    known = published("nist_7_4_7_1")
    groups = lettered(known["groups"])
    result = tukey_hsd(groups, alpha=0.05)
    assert result.critical_value * math.sqrt(2.0) == pytest.approx(known["q"], abs=5e-5)
    found = by_pair(result)
    for i, j, lower, upper in known["intervals"]:
        pair = found[frozenset((groups[i].label, groups[j].label))]
        ends = (pair.lower, pair.upper) if pair.first == groups[j].label else (-pair.upper, -pair.lower)
        assert ends == pytest.approx((lower, upper), abs=known["tolerance"])
    silent = [{pair.first, pair.second} for pair in result.comparisons if pair.p >= 0.05]
    assert silent == [{groups[i].label, groups[j].label} for i, j in known["not_different"]]


def test_gear_diameters_where_the_variance_check_decides() -> None:
    known = published("gear")
    values = known["groups"]
    groups = lettered(values)
    near = {"abs": known["tolerance"]}
    b = bartlett(groups)
    assert b.statistic == pytest.approx(known["bartlett"], **near)
    assert b.threshold == pytest.approx(known["bartlett_critical"], **near)
    assert b.met is False
    f = brown_forsythe([g.label for g in groups], values)
    assert f.statistic == pytest.approx(known["brown_forsythe"], **near)
    assert f.threshold == pytest.approx(known["brown_forsythe_critical"], **near)
    assert f.met is True
    c = cochran_c(groups)
    assert c.statistic == pytest.approx(known["cochran_c"], **near)
    assert c.group == groups[known["cochran_group"]].label
    assert anova(groups).statistic == pytest.approx(known["anova_f"], **near)
    assert anova(groups).p == pytest.approx(known["anova_p"], **near)
    assert welch(groups).p == pytest.approx(known["welch_p"], **near)
    tukey, unequal = tukey_hsd(groups, alpha=0.05), games_howell(groups, alpha=0.05)
    pair = frozenset((groups[4].label, groups[6].label))
    assert by_pair(tukey)[pair].p == pytest.approx(known["tukey_4_6_p"], **near)
    assert by_pair(unequal)[pair].p == pytest.approx(known["games_howell_4_6_p"], **near)
    assert sum(c.p < 0.05 for c in tukey.comparisons) == 1
    assert sum(c.p < 0.05 for c in unequal.comparisons) == 0


@pytest.mark.parametrize("name", ["dunnett_1955_blood", "dunnett_1955_fabric", "thomson_short_1969"])
def test_published_examples_with_a_reference(name: str) -> None:
    known = published(name)
    groups = [summarize("reference", known["reference"]), *lettered(known["groups"])]
    result = dunnett(groups, reference=0, alpha=0.05)
    near = {"abs": known["tolerance"]}
    assert [c.statistic for c in result.comparisons] == pytest.approx(known["t"], **near)
    p_near = known.get("p_tolerance", known["tolerance"])
    assert [c.p for c in result.comparisons] == pytest.approx(known["p_two_sided"], abs=p_near)
    if "critical" in known:
        assert result.critical_value == pytest.approx(known["critical"], **near)
    if "intervals" in known:
        ends = [end for c in result.comparisons for end in (c.lower, c.upper)]
        assert ends == pytest.approx(
            [end for pair in known["intervals"] for end in pair], abs=known["interval_tolerance"]
        )
    if "p_higher" in known:
        higher = dunnett(groups, reference=0, alpha=0.05, direction="higher")
        assert [c.p for c in higher.comparisons] == pytest.approx(known["p_higher"], **near)


def test_tukey_kramer_example() -> None:
    known = published("tukey_kramer_example")
    result = tukey_kramer(lettered(known["groups"]), alpha=0.05)
    assert [c.p for c in result.comparisons] == pytest.approx(known["p"], abs=known["tolerance"])
    first = result.comparisons[0]
    assert [first.lower, first.upper] == pytest.approx(known["interval_first"], abs=known["tolerance"])


def test_games_howell_example() -> None:
    known = published("games_howell_example")
    result = games_howell(lettered(known["groups"]), alpha=0.05)
    assert [c.p for c in result.comparisons] == pytest.approx(known["p"], abs=1e-8)
    last = result.comparisons[-1]
    assert [last.lower, last.upper] == pytest.approx(known["interval_last"], abs=known["tolerance"])


def test_t2_t3_and_c_on_plant_growth() -> None:
    """Recomputed independently to four decimals from the definitions of the three procedures."""
    groups = groups_of(data_set("PlantGrowth"))
    t2, t3, c = (procedure(groups, alpha=0.05) for procedure in (tamhane_t2, dunnett_t3, dunnett_c))
    assert [pair.p for pair in t2.comparisons] == pytest.approx([0.5788, 0.1369, 0.0276], abs=5e-5)
    assert [pair.p for pair in t3.comparisons] == pytest.approx([0.5638, 0.1323, 0.0268], abs=5e-5)
    assert [pair.critical_value for pair in c.comparisons] == pytest.approx([2.79201] * 3, abs=5e-6)


def test_warpbreaks_tension() -> None:
    """R 4.2.2 documentation, example(TukeyHSD): tension alone."""
    result = tukey_hsd(groups_of(data_set("warpbreaks_tension")), alpha=0.05)
    assert [c.p for c in result.comparisons] == pytest.approx([0.0384598, 0.0014315, 0.4630831], abs=5e-8)


def test_welch_1951_example() -> None:
    known = published("welch_1951")
    groups = [
        GroupSummary(label=str(i), n=n, mean=m, variance=v, minimum=m, maximum=m, median=m)
        for i, (n, m, v) in enumerate(zip(known["n"], known["mean"], known["variance"], strict=True))
    ]
    result = welch(groups)
    assert result.statistic == pytest.approx(known["f"], abs=0.0051)
    assert result.df_within == pytest.approx(known["df"], abs=known["tolerance"])
    assert result.p == pytest.approx(0.05318, abs=5e-6)


def test_grubbs_example() -> None:
    known = published("grubbs")
    check = grubbs(["A"], [known["values"]], alpha=0.1)[0]  # two-sided at 0.1: the printed one-sided 0.05
    assert check.statistic == pytest.approx(known["g"], abs=known["tolerance"])
    assert check.critical == pytest.approx(known["one_sided_critical_05"], abs=known["tolerance"])
    assert check.flagged
    assert check.value == 245.57


def test_hardwood_example() -> None:
    known = published("hardwood")
    groups = lettered(known["groups"])
    assert anova(groups).statistic == pytest.approx(known["f"], abs=known["tolerance"])
    last = tukey_hsd(groups, alpha=0.05).comparisons[-1]
    assert [-last.upper, -last.lower] == pytest.approx(known["interval_last_two"], abs=known["tolerance"])
