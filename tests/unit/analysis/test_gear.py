"""Ten batches of ten gear diameters: which variance check is asked decides whether any two batches differ.

Bartlett's check objects (p = .0136), median-centred Levene does not (p = .099). The common habit of letting
one of them choose gives two opposite reports; the default table does not choose by either, and shows what the
other view of spread would change.
"""

from __future__ import annotations

import functools

import pytest
from analysis_cases import TEXTBOOK, only, pair_of, plan, reference_data, rules, values_of
from scipy import stats

from qcreport.analysis.result import CharacteristicResult

PUBLISHED = reference_data("gear")["published"]


@functools.cache
def found(table: str = "default", procedure: str = "by rules") -> CharacteristicResult:
    asked = plan(comparison=f'procedure = "{procedure}"')
    return only(values_of(reference_data("gear")), asked, rules(table))


def check(name: str) -> tuple[float, float]:
    (one,) = [c for c in found().checks if c.name == name]
    assert one.statistic is not None
    assert one.p is not None
    return one.statistic, one.p


def test_the_checks_are_the_published_ones() -> None:
    assert check("bartlett") == (
        pytest.approx(PUBLISHED["bartlett"], abs=2e-4),
        pytest.approx(0.0136, abs=5e-5),
    )
    assert check("brown_forsythe") == (
        pytest.approx(PUBLISHED["brown_forsythe"], abs=2e-5),
        pytest.approx(0.0991, abs=5e-5),
    )
    table = found().analysis_of_variance
    assert table is not None
    assert table.statistic == pytest.approx(PUBLISHED["anova_f"], abs=5e-5)
    assert table.p == pytest.approx(PUBLISHED["anova_p"], abs=5e-5)


def test_the_default_table_goes_by_its_size_rows_and_shows_the_other_view() -> None:
    result = found()
    assert (result.procedure, result.rule.id) == ("dunnett_t3", "unequal_spread_many")
    assert result.fact_values()["spread"] == "cannot be judged"
    assert {p.answer for p in result.pairs} == {"not_shown"}
    assert result.sensitivity is not None
    assert result.sensitivity.procedure == "tukey_hsd"
    (changed,) = result.sensitivity.changed
    assert (changed.first, changed.second, changed.answer) == ("5", "7", "different")


def test_the_common_habit_finds_what_its_alternative_does_not() -> None:
    result = found(TEXTBOOK)
    assert (result.procedure, result.rule.id) == ("tukey_hsd", "levene_passed_equal_sizes")
    assert pair_of(result, "5", "7").p == pytest.approx(0.0169, abs=5e-5)
    assert [p.answer for p in result.pairs].count("different") == 1
    assert result.sensitivity is not None
    assert result.sensitivity.procedure == "games_howell"
    (changed,) = result.sensitivity.changed
    assert (changed.first, changed.second, changed.answer) == ("5", "7", "not_shown")


def test_the_p_values_are_those_of_another_implementation() -> None:
    groups = list(values_of(reference_data("gear")).values())
    for procedure, equal in (("tukey_hsd", True), ("games_howell", False)):
        outside = stats.tukey_hsd(*groups, equal_var=equal).pvalue[4, 6]
        assert pair_of(found(procedure=procedure), "5", "7").p == pytest.approx(outside, rel=1e-5)


def test_a_procedure_fixed_in_the_plan_still_shows_checks_and_the_conflict_with_the_table() -> None:
    result = found(procedure="tukey_hsd")
    assert result.rule.id == "fixed_by_plan"
    assert result.rule.reason == (
        "The plan fixes this procedure in advance; the table default would choose dunnett_t3 by its row "
        "unequal_spread_many."
    )
    assert {c.name for c in result.checks} >= {
        "brown_forsythe",
        "bartlett",
        "cochran_c",
        "spread_ratio_limit",
    }
    assert result.sensitivity is not None
    assert result.sensitivity.procedure == "dunnett_t3"
