"""The chain of hashes, and what each way of touching it is called."""

from __future__ import annotations

import hashlib
import json
from dataclasses import replace

import pytest

from qcreport.records.chain import (
    EMPTY_HEAD,
    NO_ENTRY_HASH,
    ChainFault,
    ChainProblem,
    Entry,
    Head,
    check_chain,
    entry_hash,
)


def chain(length: int, actor: str = "service") -> list[Entry]:
    entries: list[Entry] = []
    for i in range(1, length + 1):
        entries.append(link(i, entries[-1].entry_hash if entries else NO_ENTRY_HASH, actor))
    return entries


def link(sequence: int, previous_hash: str, actor: str = "service") -> Entry:
    fields = {"at": "2026-11-02T06:12:00Z", "actor": actor, "kind": "read", "previous_hash": previous_hash}
    own = entry_hash(sequence=sequence, facts={"n": sequence}, **fields)
    return Entry(sequence=sequence, facts=f'{{"n":{sequence}}}', entry_hash=own, **fields)


def found(problems: tuple[ChainProblem, ...]) -> list[tuple[ChainFault, int]]:
    return [(problem.fault, problem.sequence) for problem in problems]


def test_an_untouched_ledger_has_no_problems() -> None:
    entries = chain(5)
    assert check_chain([]) == ()
    assert check_chain(entries, [EMPTY_HEAD, *(entry.head for entry in entries)]) == ()


def test_the_hash_can_be_redone_with_any_tool() -> None:
    entry = chain(1)[0]
    document = {
        "sequence": 1,
        "at": "2026-11-02T06:12:00Z",
        "actor": "service",
        "kind": "read",
        "facts": {"n": 1},
        "previous_hash": "0" * 64,
    }
    text = json.dumps(document, sort_keys=True, separators=(",", ":"))
    assert hashlib.sha256(b"qcreport/ledger-entry/1\n" + text.encode()).hexdigest() == entry.entry_hash


@pytest.mark.parametrize(
    "change",
    [
        {"at": "2026-11-02T06:12:01Z"},
        {"actor": "someone"},
        {"kind": "sealed"},
        {"facts": '{"n":4}'},
        {"facts": '{"n": 3}'},
        {"facts": "{"},
        {"facts": "[]"},
        {"facts": "[" * 100_000},
        {"facts": '{"n":NaN}'},
        {"previous_hash": "f" * 64},
        {"entry_hash": "f" * 64},
    ],
)
def test_a_changed_entry_is_named(change: dict[str, str]) -> None:
    entries = chain(5)
    entries[2] = replace(entries[2], **change)  # type: ignore[arg-type]
    problems = check_chain(entries)
    assert (ChainFault.CHANGED, 3) in found(problems)
    assert {p.sequence for p in problems} <= {2, 3}
    assert "Entry 3 no longer matches its own hash." in [p.text for p in problems]


def test_an_entry_written_anew_with_a_fitting_hash_is_named() -> None:
    entries = chain(5)
    entries[2] = link(3, entries[1].entry_hash, actor="someone")
    assert found(check_chain(entries)) == [(ChainFault.CHANGED, 3)]


@pytest.mark.parametrize("position", range(4))
def test_a_dropped_entry_is_named(position: int) -> None:
    entries = chain(5)
    del entries[position]
    assert found(check_chain(entries)) == [(ChainFault.DROPPED, position + 1)]


def test_a_dropped_stretch_is_told_as_one() -> None:
    entries = chain(9)
    del entries[2:6]
    assert [p.text for p in check_chain(entries)] == ["Entry 3 to 6 missing before entry 7."]


@pytest.mark.parametrize(("first", "second"), [(0, 1), (1, 2), (3, 4), (0, 4), (1, 3)])
def test_swapped_entries_are_named(first: int, second: int) -> None:
    entries = chain(5)
    entries[first], entries[second] = entries[second], entries[first]
    problems = found(check_chain(entries))
    assert {fault for fault, _ in problems} == {ChainFault.SWAPPED}
    assert first + 1 in {sequence for _, sequence in problems}


def test_entries_swapped_together_with_their_numbers_are_named() -> None:
    entries = chain(5)
    entries[1], entries[3] = replace(entries[3], sequence=2), replace(entries[1], sequence=4)
    texts = [p.text for p in check_chain(entries)]
    assert "Entry 2 holds what was written as entry 4." in texts
    assert "Entry 4 holds what was written as entry 2." in texts


def test_an_entry_dropped_and_the_rest_renumbered_is_found() -> None:
    entries = chain(5)
    del entries[1]
    entries = [replace(entry, sequence=i) for i, entry in enumerate(entries, start=1)]
    assert "Entry 2 holds what was written as entry 3." in [p.text for p in check_chain(entries)]


@pytest.mark.parametrize("position", range(4))
@pytest.mark.parametrize("sequence", [1, 3, 77])
def test_an_inserted_entry_is_named(position: int, sequence: int) -> None:
    entries = chain(4)
    before = entries[position - 1].entry_hash if position else NO_ENTRY_HASH
    entries.insert(position, link(sequence, before, actor="someone"))
    assert found(check_chain(entries)) == [(ChainFault.INSERTED, sequence)]


def test_an_entry_that_stands_there_twice_is_named() -> None:
    entries = chain(4)
    entries.append(entries[1])
    assert (ChainFault.INSERTED, 2) in found(check_chain(entries))


def test_a_cut_end_shows_against_a_known_head() -> None:
    entries = chain(5)
    head = entries[-1].head
    assert check_chain(entries[:3]) == ()
    (problem,) = check_chain(entries[:3], [head])
    assert (problem.fault, problem.sequence) == (ChainFault.CUT, 4)
    assert problem.text == "The ledger ends at entry 3; entry 5 is known to have been written."
    assert found(check_chain([], [head])) == [(ChainFault.CUT, 1)]


def test_an_end_written_anew_shows_against_a_known_head() -> None:
    entries = chain(5)
    known = Head(sequence=3, entry_hash=entries[2].entry_hash)
    anew = [*entries[:2], link(3, entries[1].entry_hash, actor="someone")]
    assert check_chain(anew) == ()
    assert found(check_chain(anew, [known])) == [(ChainFault.CHANGED, 3)]


def test_a_ledger_that_begins_in_the_middle_of_another_is_found() -> None:
    assert found(check_chain([link(1, "f" * 64)])) == [(ChainFault.CHANGED, 1)]


def test_a_number_beyond_all_bounds_is_no_trap() -> None:
    entries = chain(3)
    entries[2] = replace(entries[2], sequence=2**62)
    assert (ChainFault.DROPPED, 3) in found(check_chain(entries))
