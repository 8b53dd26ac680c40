"""Facts that can be kept, steps that are written once."""

from __future__ import annotations

import pytest

from qcreport.errors import LedgerError
from qcreport.records import ledger
from qcreport.records.chain import EMPTY_HEAD, Kind
from qcreport.records.facade import Records
from qcreport.records.facts import canonical_facts
from qcreport.records.ledger import Step


@pytest.mark.parametrize("facts", [{"p": 0.05}, {"a": [1, {"b": 2.0}]}, {1: "x"}, {"b": b"x"}, {"s": {1, 2}}])
def test_what_has_no_one_text_is_no_fact(records: Records, facts: dict[str, object]) -> None:
    with pytest.raises(LedgerError, match="facts"):
        records.note(Kind.READ, facts, actor="service")
    assert records.head() == EMPTY_HEAD


def test_facts_are_canonical() -> None:
    facts = {"b": (1, True, None), "a": {"z": "é", "y": "\udcff"}}
    assert canonical_facts(facts) == '{"a":{"y":"\\\\udcff","z":"é"},"b":[1,true,null]}'


def test_a_step_is_written_once_and_others_beside_it(records: Records) -> None:
    first = records.note(Kind.READ, {"n": 1}, actor="a", step=Step(claim="c", subject="p"))
    again = records.note(Kind.READ, {"n": 2}, actor="b", step=Step(claim="c", subject="p"))
    assert again == first
    for kind, step in (
        (Kind.READ, Step(claim="c", subject="q")),
        (Kind.READ, Step(claim="d", subject="p")),
        (Kind.COMPARED, Step(claim="c", subject="p")),
        (Kind.READ, None),
        (Kind.READ, None),
    ):
        records.note(kind, {}, actor="a", step=step)
    assert [e.sequence for e in records.entries()] == [1, 2, 3, 4, 5, 6]


def test_entries_after_a_number(records: Records) -> None:
    for _ in range(3):
        records.note(Kind.VERIFIED, {}, actor="a")
    with records.database.read() as connection:
        assert [e.sequence for e in ledger.entries(connection, after=1)] == [2, 3]


def test_names_of_actors_are_kept_readable(records: Records) -> None:
    assert records.note(Kind.SIGNED, {}, actor="A\udcff").actor == r"A\udcff"
