"""Ranks, letters, contrasts, normality, effects and several outliers against outside values."""

import pytest
from outside_values import DATA_SETS, data_set, groups_of, lettered, published, relative

from qcreport.stats.contrasts import scheffe
from qcreport.stats.effects import hedges_g, omega_squared
from qcreport.stats.letters import compact_letters
from qcreport.stats.normality import shapiro_wilk
from qcreport.stats.one_way import anova
from qcreport.stats.outliers import generalized_esd
from qcreport.stats.pooled import tukey_kramer
from qcreport.stats.ranks import kruskal_wallis, steel_dwass


def ranked(data) -> tuple[list[str], list[list[float]]]:
    return [g["label"] for g in data["groups"]], [g["values"] for g in data["groups"]]


@pytest.mark.parametrize("name", DATA_SETS)
def test_ranks_of_data_sets(name: str) -> None:
    data = data_set(name)
    labels, values = ranked(data)
    result = steel_dwass(labels, values, alpha=0.05)
    for pair, row in zip(result.comparisons, data["highprec"]["dscf"]["rows"], strict=True):
        assert (pair.first, pair.second) == (row["g1"], row["g2"])
        assert -pair.statistic == pytest.approx(row["Z"], rel=1e-12, abs=1e-12)
        if result.law == "asymptotic":
            assert relative(pair.p, float(row["p_str"])) < 1e-11
    overall = kruskal_wallis(labels, values)
    assert overall.statistic == pytest.approx(data["results_R"]["kruskal"]["H"], rel=1e-12)
    if overall.law == "asymptotic":
        assert overall.p == pytest.approx(data["results_R"]["kruskal"]["p"], rel=1e-11)


def test_most_data_sets_are_beyond_enumeration() -> None:
    laws = [steel_dwass(*ranked(data_set(name)), alpha=0.05).law for name in DATA_SETS]
    assert laws.count("asymptotic") >= 6


def test_bottle_caps_where_exact_and_asymptotic_straddle_the_level() -> None:
    known = published("kruskal_wallis_1952")
    result = kruskal_wallis("ABC", known["groups"])
    assert result.statistic == pytest.approx(known["h"], abs=known["tolerance"])
    assert result.p == pytest.approx(known["exact_p"], abs=known["tolerance"])
    assert result.p == pytest.approx(known["exact_p_recomputed"], abs=5e-6)
    assert result.law == "exact"


@pytest.mark.parametrize("name", DATA_SETS)
def test_letters_keep_r_decisions(name: str) -> None:
    data = data_set(name)
    groups = groups_of(data)
    place = {g.label: i for i, g in enumerate(groups)}
    pairs = tukey_kramer(groups, alpha=0.05).comparisons
    letters = compact_letters(len(groups), [(place[p.first], place[p.second]) for p in pairs if p.p < 0.05])
    sharing = {
        frozenset((p.first, p.second))
        for p in pairs
        if set(letters[place[p.first]]) & set(letters[place[p.second]])
    }
    assert sharing == {frozenset(pair) for pair in data["results_R"]["letters_tukey_0.05"]["not_different"]}


def test_chickwts_letters() -> None:
    """R 4.2.2, documented letters of the chickwts data: c, a, ab, bc, b, c."""
    groups = groups_of(data_set("chickwts"))
    rising = sorted(range(6), key=lambda i: groups[i].mean)
    pairs = tukey_kramer([groups[i] for i in rising], alpha=0.05).comparisons
    place = {groups[i].label: position for position, i in enumerate(rising)}
    letters = compact_letters(6, [(place[p.first], place[p.second]) for p in pairs if p.p < 0.05])
    assert {groups[i].label: letters[place[groups[i].label]] for i in range(6)} == {
        "casein": "c",
        "horsebean": "a",
        "linseed": "ab",
        "meatmeal": "bc",
        "soybean": "b",
        "sunflower": "c",
    }


@pytest.mark.parametrize("name", DATA_SETS)
def test_scheffe_pairs_as_r_has_them(name: str) -> None:
    data = data_set(name)
    groups = groups_of(data)
    labels = [g.label for g in groups]
    for row in data["results_R"]["scheffe"]["rows"]:
        contrast = [0.0] * len(groups)
        contrast[labels.index(row["g2"])], contrast[labels.index(row["g1"])] = 1.0, -1.0
        found = scheffe(groups, [contrast], alpha=0.05)[0]
        assert found.estimate == pytest.approx(row["diff"], rel=1e-11, abs=1e-12)
        assert found.p == pytest.approx(row["p"], rel=1e-9)


def test_scheffe_example() -> None:
    known = published("nist_scheffe")
    groups = lettered(published("nist_7_4_7_1")["groups"])
    for found, estimate, ends in zip(
        scheffe(groups, known["contrasts"], alpha=0.05), known["estimates"], known["intervals"], strict=True
    ):
        assert found.estimate == pytest.approx(estimate, abs=1e-12)
        assert found.se == pytest.approx(known["se"], abs=5e-8)
        assert (found.lower, found.upper) == pytest.approx(ends, abs=known["tolerance"])


@pytest.mark.parametrize("name", DATA_SETS)
def test_effect_sizes_as_r_has_them(name: str) -> None:
    data = data_set(name)
    groups = {g.label: g for g in groups_of(data)}
    expected = data["results_R"]["effect_sizes"]
    assert omega_squared(anova(list(groups.values()))).value == pytest.approx(expected["omega2"], rel=1e-11)
    for row in expected["pairs"]:
        g = hedges_g(groups[row["g2"]], groups[row["g1"]])
        assert g.value == pytest.approx(row["hedges_g_exact"], rel=1e-11, abs=1e-13)
        assert g.lower < g.value < g.upper


@pytest.mark.parametrize("name", DATA_SETS)
def test_normality_of_residuals_as_r_has_it(name: str) -> None:
    data = data_set(name)
    residuals = [
        v - g.mean for g, group in zip(groups_of(data), data["groups"], strict=True) for v in group["values"]
    ]
    found, expected = shapiro_wilk(residuals), data["results_R"]["shapiro_residuals"]
    assert found.statistic == pytest.approx(expected["W"], abs=1e-9)
    assert found.p == pytest.approx(expected["p"], rel=1e-6)


def test_shapiro_wilk_1965_example() -> None:
    known = published("shapiro_wilk_1965")
    found = shapiro_wilk(known["values"])
    assert found.statistic == pytest.approx(known["w"], abs=known["tolerance"])
    assert found.p == pytest.approx(known["p"], abs=known["tolerance"])


def test_rosner_1983_example() -> None:
    known = published("rosner_1983")
    checks = generalized_esd("A", known["values"], most=10)
    assert [c.statistic for c in checks] == pytest.approx(known["statistic"], abs=known["tolerance"])
    assert [c.critical for c in checks] == pytest.approx(known["critical"], abs=known["tolerance"])
    assert sum(c.flagged for c in checks) == known["outliers"]
