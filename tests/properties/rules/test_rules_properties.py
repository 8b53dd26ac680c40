"""Whatever the facts, exactly one row decides, and the trace tells the truth about the others."""

from __future__ import annotations

import dataclasses

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from qcreport.plan.model import WITH_REFERENCE
from qcreport.rules import Facts, RulesTable, choose, parse_rules
from qcreport.rules.facts import WORDS
from qcreport.settings.shipped import shipped_files

TABLES = {
    name: parse_rules(data, name) for name, data in sorted(shipped_files("config/rules", "*.toml").items())
}
FACTS = st.builds(
    Facts,
    **{fact: st.sampled_from(words) for fact, words in WORDS.items()},  # type: ignore[arg-type]
    groups=st.one_of(st.integers(0, 30), st.integers(0, 10**6)),
    smallest_n=st.one_of(st.integers(0, 30), st.integers(0, 10**6)),
)
tables = pytest.mark.parametrize("table", TABLES.values(), ids=TABLES)


@tables
@settings(deadline=None)
@given(facts=FACTS)
def test_exactly_one_row_decides(table: RulesTable, facts: Facts) -> None:
    applies = [row.fails_on(facts) is None for row in table.rows]
    choice = choose(table, facts)
    first = applies.index(True)
    assert [step.id for step in choice.trace] == [row.id for row in table.rows[: first + 1]]
    assert [step.applied for step in choice.trace] == [False] * first + [True]
    assert choice.rule.id == table.rows[first].id
    assert choice.procedure == table.rows[first].procedure


@tables
@settings(deadline=None)
@given(facts=FACTS)
def test_the_procedure_fits_the_facts(table: RulesTable, facts: Facts) -> None:
    procedure = choose(table, facts).procedure
    if facts.groups < 2 or facts.variation == "none":
        assert procedure == "none"
        return
    if procedure == "none":  # only where nothing here would keep the error rate
        assert facts.comparison == "each with the reference"
        assert (facts.smallest_n <= 3, facts.groups > 10, facts.spread != "similar") == (True, True, True)
        return
    assert (procedure in WITH_REFERENCE) is (facts.comparison == "each with the reference")
    assert (procedure in ("steel", "steel_dwass")) is (facts.censored == "some")
    if facts.sizes == "unequal":
        assert procedure != "tukey_hsd"
    if facts.spread != "similar":
        assert procedure not in ("tukey_hsd", "tukey_kramer", "dunnett")


@tables
@settings(deadline=None)
@given(facts=FACTS)
def test_the_reason_of_a_row_passed_over_is_true(table: RulesTable, facts: Facts) -> None:
    for row, step in zip(table.rows, choose(table, facts).trace, strict=False):
        failed = row.fails_on(facts)
        if failed is not None:
            assert step.why == f"needs {failed}; here it is {facts.value(failed.fact)}"
            assert not failed.holds(facts.value(failed.fact))


@settings(deadline=None)
@given(facts=FACTS)
def test_the_scale_never_chooses_in_the_shipped_tables(facts: Facts) -> None:
    for table in TABLES.values():
        chosen = {choose(table, dataclasses.replace(facts, scale=s)).rule.id for s in WORDS["scale"]}
        assert len(chosen) == 1
