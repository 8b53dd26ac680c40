"""Contrasts that a plan declares: which are estimated, how, and what is said of the others."""

from __future__ import annotations

import math
import tomllib
from pathlib import Path

import pytest
from analysis_cases import REFERENCE_DATA, only, plan, run

from qcreport.analysis.contrast_result import ContrastResult
from qcreport.analysis.result import CharacteristicResult

PUBLISHED = tomllib.loads(Path(REFERENCE_DATA / "published.toml").read_text("utf-8"))
GROUPS = dict(zip(("G1", "G2", "G3", "G4"), PUBLISHED["nist_7_4_7_1"]["groups"], strict=True))
TWO = """
[[contrast]]
name = "first two against last two"
weights = { G1 = 0.5, G2 = 0.5, G3 = -0.5, G4 = -0.5 }
[[contrast]]
name = "odd against even"
weights = { G1 = 0.5, G2 = -0.5, G3 = 0.5, G4 = -0.5 }
"""


def contrasts(comparison: str = "", more: str = TWO) -> CharacteristicResult:
    return only(GROUPS, plan(comparison=comparison, characteristic=more))


def test_the_handbook_example() -> None:
    """NIST/SEMATECH e-Handbook, 7.4.7.2."""
    known = PUBLISHED["nist_scheffe"]
    found = contrasts('procedure = "tukey_hsd"').contrasts
    assert [c.procedure for c in found] == ["scheffe", "scheffe"]
    assert [c.name for c in found] == ["first two against last two", "odd against even"]
    for contrast, estimate, ends in zip(found, known["estimates"], known["intervals"], strict=True):
        assert contrast.estimate == pytest.approx(estimate, abs=1e-12)
        assert contrast.se == pytest.approx(known["se"], abs=5e-8)
        assert (contrast.lower, contrast.upper) == pytest.approx(ends, abs=known["tolerance"])
        assert contrast.p > 0.05
        assert contrast.df == 16


def test_own_variances_unless_spread_is_declared_similar() -> None:
    by_rules = contrasts()
    assert {c.procedure for c in by_rules.contrasts} == {"brown_forsythe"}
    assert all(c.df < 16 for c in by_rules.contrasts)
    declared = plan(
        top='[spread]\nsimilar = true\nby = "Q"\non = 2026-01-01\nreason = "r"', characteristic=TWO
    )
    assert {c.procedure for c in only(GROUPS, declared).contrasts} == {"scheffe"}
    fixed = contrasts('procedure = "games_howell"')
    assert {c.procedure for c in fixed.contrasts} == {"brown_forsythe"}


def test_ratios_on_the_log_scale() -> None:
    found = contrasts('procedure = "tukey_hsd"\nscale = "log"').contrasts[0]
    means = [math.fsum(map(math.log, values)) / len(values) for values in GROUPS.values()]
    assert found.estimate == pytest.approx(math.exp(0.5 * (means[0] + means[1] - means[2] - means[3])))
    assert found.lower is not None
    assert found.upper is not None
    assert math.sqrt(found.lower * found.upper) == pytest.approx(found.estimate)


@pytest.mark.parametrize(
    ("comparison", "why"),
    [
        ("", "not among the compared groups: G9"),
        ('procedure = "steel_dwass"', "ranks have no means to weigh"),
    ],
)
def test_what_cannot_be_estimated_is_said(comparison: str, why: str) -> None:
    more = '[[contrast]]\nname = "with a stranger"\nweights = { G1 = 1, G9 = -1 }\n'
    result = run(GROUPS, plan(comparison=comparison, characteristic=more))
    assert result.characteristics[0].contrasts == ()
    (notice,) = [n for n in result.notices if n.code == "contrast_not_estimated"]
    assert "strength: the contrast with a stranger was not estimated" in notice.text
    assert why in notice.text


def test_a_stranger_does_not_take_the_others_with_it() -> None:
    more = TWO + '[[contrast]]\nname = "x"\nweights = { G1 = 1, G9 = -1 }\n'
    assert [c.name for c in contrasts(more=more).contrasts] == [
        "first two against last two",
        "odd against even",
    ]


def test_nothing_compared_nothing_estimated() -> None:
    few = plan(comparison="smallest_group = 9", characteristic=TWO)
    result = run(GROUPS, few)
    assert result.characteristics[0].contrasts == ()
    assert not [n for n in result.notices if n.code == "contrast_not_estimated"]


def test_the_form_in_the_result() -> None:
    contrast: ContrastResult = contrasts().contrasts[0]
    document = contrasts().to_json()["contrasts"][0]
    assert document == contrast.to_json()
    assert document["weights"] == {"G1": 0.5, "G2": 0.5, "G3": -0.5, "G4": -0.5}
