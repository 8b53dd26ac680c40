"""The error rate that each result carries: at its sizes, by its table, the same every time."""

from __future__ import annotations

import time

import pytest
from analysis_cases import TEXTBOOK, only, plan, rules

from qcreport.analysis.result import CharacteristicResult
from qcreport.rates.at_hand import ErrorRate, _rate

SHAPE = (0.1, -0.7, 1.1, -1.3, 0.4, 0.9, -0.2, 0.6, -0.9, 0.3)
DECLARED = '[spread]\nsimilar = true\nby = "A"\non = 2026-11-02\nreason = "B."\n'


def groups(*sizes: int) -> dict[str, list[float]]:
    return {f"B{i}": [10.0 + i + 0.01 * j + SHAPE[j % 10] for j in range(n)] for i, n in enumerate(sizes)}


def rate_of(result: CharacteristicResult) -> ErrorRate:
    assert result.error_rate is not None
    return result.error_rate


def test_it_keeps_the_level_where_the_table_does() -> None:
    found = rate_of(only(groups(5, 5, 5, 5)))
    assert found.replicates == 20_000
    assert found.reason == ""
    for rate in (found.equal, found.small_wide, found.large_wide):
        assert rate is not None
        assert 0.02 < rate < 0.062


def test_it_shows_what_a_declaration_risks() -> None:
    declared = plan(top=DECLARED + "accept_unequal_sizes = true")
    found = rate_of(only(groups(4, 8, 16), declared))
    assert found.equal == pytest.approx(0.05, abs=0.012)  # the conflict test costs nothing at equal spread
    assert found.small_wide is not None
    assert found.large_wide is not None
    assert found.small_wide > 0.08
    assert found.large_wide < 0.045


def test_the_common_habit_at_unequal_sizes() -> None:
    found = rate_of(only(groups(4, 8, 16), table=rules(TEXTBOOK)))
    assert found.small_wide is not None
    assert found.small_wide > 0.08


def test_a_procedure_that_the_plan_fixes_is_simulated_as_it_stands() -> None:
    fixed = plan(comparison='procedure = "tukey_kramer"')
    found = rate_of(only(groups(4, 8, 16), fixed))
    assert found.small_wide is not None
    assert found.small_wide > 0.15


def test_each_with_the_reference() -> None:
    found = rate_of(only(groups(10, 4, 4, 5), plan(comparison='reference = "B0"')))
    assert found.equal is not None
    assert 0.01 < found.equal < 0.055


def test_it_repeats_and_does_not_depend_on_the_values_or_the_order_of_calls() -> None:
    first = rate_of(only(groups(6, 7, 8)))
    only(groups(5, 5))
    _rate.cache_clear()
    shifted = {label: [3.0 * v for v in values] for label, values in groups(6, 7, 8).items()}
    assert rate_of(only(shifted)) == first


@pytest.mark.parametrize(
    ("data", "comparison", "reason"),
    [
        ({"A": ["<0.5", 1.0, 2.0], "B": [1.0, 2.0, 3.0]}, "", "Ranks"),
        (groups(5), "", "Nothing was compared"),
        (groups(6, 6), 'procedure = "steel_dwass"', "Ranks"),
    ],
)
def test_why_there_is_none(data: dict[str, list[float | str | None]], comparison: str, reason: str) -> None:
    found = rate_of(only(data, plan(comparison=comparison)))
    assert (found.replicates, found.equal) == (0, None)
    assert found.reason.startswith(reason)


def test_large_tables_are_simulated_less_often_so_that_nobody_waits() -> None:
    _rate.cache_clear()
    begin = time.process_time()
    found = rate_of(only(groups(*[3] * 60)))
    assert found.replicates == 1_000
    assert time.process_time() - begin < 5.0
