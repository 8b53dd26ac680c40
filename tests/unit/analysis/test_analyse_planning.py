"""What a design can detect: its limits, and a scatter that the plan knows."""

from __future__ import annotations

import math

import pytest
from analysis_cases import only, pair_of, plan, run
from scipy import stats

A = (24.1, 24.9, 23.6, 24.4, 25.0)
B = (24.3, 23.9, 24.8, 24.6, 23.7)
C = (21.0, 21.9, 20.6, 21.3, 21.8)
GROUPS = {"A": A, "B": B, "C": C}


@pytest.mark.parametrize("procedure", ["tukey_hsd", "games_howell", "dunnett_c"])
def test_the_limits_are_those_of_the_scatter(procedure: str) -> None:
    for pair in only(GROUPS, plan(comparison=f'procedure = "{procedure}"')).pairs:
        df = pair.df
        if df is None:  # C has none of its own: Welch-Satterthwaite's
            df = pair_of(
                only(GROUPS, plan(comparison='procedure = "games_howell"')), pair.first, pair.second
            ).df
        assert pair.detectable is not None
        assert pair.detectable_limits is not None
        low, high = pair.detectable_limits
        assert low == pytest.approx(pair.detectable * math.sqrt(df / stats.chi2.isf(0.05, df)))
        assert high == pytest.approx(pair.detectable * math.sqrt(df / stats.chi2.isf(0.95, df)))
        assert pair.to_json()["detectable_limits"] == [low, high]


def test_limits_are_ratios_on_the_log_scale() -> None:
    pair = only(GROUPS, plan(comparison='procedure = "tukey_hsd"\nscale = "log"')).pairs[0]
    assert pair.detectable is not None
    assert pair.detectable_limits is not None
    assert 1.0 < pair.detectable_limits[0] < pair.detectable < pair.detectable_limits[1]
    logs = [math.log(end) / math.log(pair.detectable) for end in pair.detectable_limits]
    assert logs == pytest.approx([math.sqrt(12 / stats.chi2.isf(tail, 12)) for tail in (0.05, 0.95)])


@pytest.mark.parametrize("procedure", ["tukey_kramer", "games_howell"])
def test_a_known_scatter_takes_the_place_of_the_one_seen(procedure: str) -> None:
    asked = plan(comparison=f'procedure = "{procedure}"', characteristic="scatter = 2.0")
    result = run(GROUPS | {"C": C[:4]}, asked)
    (found,) = result.characteristics
    assert found.known_scatter == 2.0
    for pair in found.pairs:
        n = 4 if "C" in (pair.first, pair.second) else 5
        se = 2.0 * math.sqrt(1 / 5 + 1 / n)
        assert pair.detectable is not None
        assert stats.nct.sf(pair.critical_value, pair.df, pair.detectable / se) == pytest.approx(0.8)
        assert pair.detectable_limits is None
    (notice,) = [n for n in result.notices if n.code == "known_scatter_used"]
    assert "standard deviation 2 u" in notice.text
    seen = only(GROUPS, plan())
    assert seen.known_scatter is None
    assert seen.to_json()["known_scatter"] is None


def test_a_known_scatter_of_logarithms() -> None:
    result = run(
        GROUPS, plan(comparison='scale = "log"\nprocedure = "tukey_hsd"', characteristic="scatter = 0.02")
    )
    pair = result.characteristics[0].pairs[0]
    assert pair.detectable is not None
    nc = math.log(pair.detectable) / (0.02 * math.sqrt(2 / 5))
    assert stats.nct.sf(pair.critical_value, pair.df, nc) == pytest.approx(0.8)
    assert any("standard deviation 0.02 natural logarithms" in n.text for n in result.notices)


def test_one_direction_needs_fewer_results() -> None:
    both, lower = (
        only(
            GROUPS,
            plan(
                comparison='reference = "A"\nprocedure = "dunnett"',
                characteristic=f'margin = 2.8\ndirection = "{direction}"',
            ),
        ).pairs[1]
        for direction in ("both", "lower_matters")
    )
    assert both.answer == lower.answer == "different"
    assert both.needed_n is not None
    assert lower.needed_n is not None
    assert lower.needed_n < both.needed_n


@pytest.mark.parametrize("procedure", ["tukey_kramer", "steel_dwass"])
def test_two_hundred_groups(procedure: str) -> None:
    """19,900 pairs; what nobody would read is not searched for."""
    groups = {
        f"L{i:03d}": tuple(round(20 + (7 * i + 3 * j * j) % 11 / 10, 1) for j in range(4)) for i in range(200)
    }
    found = only(groups, plan(comparison=f'procedure = "{procedure}"', characteristic="margin = 0.5"))
    assert len(found.pairs) == 19_900
    assert {p.needed_n for p in found.pairs} == {None}
    assert {p.answer for p in found.pairs} <= {"not_settled", "different", "equivalent", "within_margin"}
    assert all(0.0 < p.p <= 1.0 for p in found.pairs)
