"""Which single fact leads to another row: told completely, by the nearest value, and truly."""

from __future__ import annotations

import dataclasses
import functools

import pytest
from test_rules_table import PLAIN, shipped

from qcreport.rules import Facts, choose
from qcreport.rules.alternatives import Alternative, alternatives
from qcreport.rules.facts import NUMBERS, WORDS


@functools.cache
def found(facts: Facts) -> dict[tuple[str, str], str]:
    return {(a.fact, a.other): a.procedure for a in alternatives(shipped("default"), facts)}


def test_of_six_groups_of_ten_whose_spread_is_open() -> None:
    assert found(dataclasses.replace(PLAIN, groups=6)) == {
        ("comparison", "each with the reference"): "dunnett_unequal",
        ("variation", "none"): "none",
        ("censored", "some"): "steel_dwass",
        ("spread", "similar"): "tukey_hsd",
        ("groups", "7"): "dunnett_t3",
        ("groups", "1"): "none",
        ("smallest_n", "9"): "dunnett_t3",
        ("smallest_n", "4"): "dunnett_c",
    }


def test_of_two_similar_groups() -> None:
    facts = dataclasses.replace(PLAIN, groups=2, spread="similar")
    assert found(facts)[("sizes", "unequal")] == "tukey_kramer"
    assert found(facts)[("spread", "different")] == "games_howell"
    assert found(facts)[("spread", "conflict")] == "games_howell"
    assert ("smallest_n", "9") not in found(facts)


@pytest.mark.parametrize("table", ["default", "textbook"])
@pytest.mark.parametrize("groups", [1, 2, 6, 7, 11])
@pytest.mark.parametrize("smallest_n", [3, 5, 9, 10])
@pytest.mark.parametrize("spread", WORDS["spread"])
def test_each_is_true_and_none_nearer_is_missed(
    table: str, groups: int, smallest_n: int, spread: str
) -> None:
    rules = shipped(table)
    facts = dataclasses.replace(PLAIN, groups=groups, smallest_n=smallest_n, spread=spread)
    own = choose(rules, facts).rule.id
    told = alternatives(rules, facts)
    for a in told:
        value: str | int = int(a.other) if a.fact in NUMBERS else a.other
        choice = choose(rules, dataclasses.replace(facts, **{a.fact: value}))  # type: ignore[arg-type]
        assert (choice.rule.id, choice.procedure) == (a.row, a.procedure)
        assert a.row != own
        assert a.here == str(facts.value(a.fact))
    for fact in NUMBERS:
        nearest: dict[str, int] = {}
        here = int(facts.value(fact))
        for n in sorted(range(40), key=lambda n: (abs(n - here), n)):
            row = choose(rules, dataclasses.replace(facts, **{fact: n})).rule.id  # type: ignore[arg-type]
            nearest.setdefault(row, n)
        nearest.pop(own)
        assert {a.row: int(a.other) for a in told if a.fact == fact} == nearest


def test_its_json() -> None:
    (first, *_) = alternatives(shipped("default"), PLAIN)
    assert isinstance(first, Alternative)
    assert first.to_json() == {
        "fact": "comparison",
        "here": "every pair",
        "other": "each with the reference",
        "row": "reference_unequal_spread",
        "procedure": "dunnett_unequal",
    }
