"""Whatever one entry of a ledger suffers, the check finds it and names it."""

from __future__ import annotations

from dataclasses import replace

from hypothesis import given, settings
from hypothesis import strategies as st

from qcreport.canonical import to_json_bytes
from qcreport.records.chain import NO_ENTRY_HASH, ChainFault, Entry, check_chain, entry_hash

TEXTS = st.text(alphabet=st.characters(exclude_categories=["Cs"]), max_size=8)
FACTS = st.dictionaries(
    TEXTS, TEXTS | st.integers() | st.booleans() | st.none() | st.lists(TEXTS), max_size=3
)
FIELDS = ("sequence", "at", "actor", "kind", "facts", "previous_hash", "entry_hash")


def written(sequence: int, previous_hash: str, at: str, actor: str, facts: dict[str, object]) -> Entry:
    own = entry_hash(
        sequence=sequence, at=at, actor=actor, kind="read", facts=facts, previous_hash=previous_hash
    )
    return Entry(
        sequence=sequence,
        at=at,
        actor=actor,
        kind="read",
        facts=to_json_bytes(facts).decode("utf-8"),
        previous_hash=previous_hash,
        entry_hash=own,
    )


@st.composite
def ledgers(draw: st.DrawFn, least: int) -> list[Entry]:
    entries: list[Entry] = []
    for sequence in range(1, draw(st.integers(least, 8)) + 1):
        before = entries[-1].entry_hash if entries else NO_ENTRY_HASH
        entries.append(written(sequence, before, draw(TEXTS), draw(TEXTS), draw(FACTS)))
    return entries


@st.composite
def places(draw: st.DrawFn, entries: list[Entry]) -> int:
    return draw(st.integers(0, len(entries) - 1))


@given(ledgers(least=0))
@settings(max_examples=50, deadline=None)
def test_an_untouched_ledger_holds(entries: list[Entry]) -> None:
    assert check_chain(entries, [entry.head for entry in entries]) == ()


@given(st.data(), ledgers(least=1), st.sampled_from(FIELDS))
@settings(max_examples=120, deadline=None)
def test_any_flipped_character_is_found(data: st.DataObject, entries: list[Entry], field: str) -> None:
    place = data.draw(places(entries))
    entry = entries[place]
    old = getattr(entry, field)
    if isinstance(old, int):
        new: object = data.draw(st.integers(1, 20).filter(lambda n: n != old))
    else:
        at = data.draw(st.integers(0, max(len(old) - 1, 0)))
        new = old[:at] + data.draw(TEXTS.filter(lambda t: t != old[at : at + 1])) + old[at + 1 :]
    entries[place] = replace(entry, **{field: new})
    problems = check_chain(entries)
    assert problems
    named = {entry.sequence, entries[place].sequence}
    assert named & {problem.sequence for problem in problems}


@given(st.data(), ledgers(least=2))
@settings(max_examples=60, deadline=None)
def test_any_dropped_entry_is_found(data: st.DataObject, entries: list[Entry]) -> None:
    place = data.draw(st.integers(0, len(entries) - 2))
    dropped = entries.pop(place)
    assert [(p.fault, p.sequence) for p in check_chain(entries)] == [(ChainFault.DROPPED, dropped.sequence)]


@given(st.data(), ledgers(least=2))
@settings(max_examples=60, deadline=None)
def test_any_two_swapped_entries_are_found(data: st.DataObject, entries: list[Entry]) -> None:
    first = data.draw(st.integers(0, len(entries) - 2))
    second = data.draw(st.integers(first + 1, len(entries) - 1))
    entries[first], entries[second] = entries[second], entries[first]
    problems = check_chain(entries)
    assert {p.fault for p in problems} == {ChainFault.SWAPPED}
    assert first + 1 in {p.sequence for p in problems}


@given(st.data(), ledgers(least=1), st.booleans())
@settings(max_examples=120, deadline=None)
def test_any_inserted_entry_is_found(data: st.DataObject, entries: list[Entry], fitting: bool) -> None:
    place = data.draw(places(entries))
    before = entries[place - 1].entry_hash if place else NO_ENTRY_HASH
    hashes = st.text(alphabet="0123456789abcdef", min_size=64, max_size=64).filter(
        lambda h: h != NO_ENTRY_HASH
    )
    strange = written(
        data.draw(st.integers(1, 20)), before if fitting else data.draw(hashes), "then", "someone", {"": True}
    )
    entries.insert(place, strange)
    problems = check_chain(entries)
    assert (ChainFault.INSERTED, strange.sequence) in {(p.fault, p.sequence) for p in problems}


@given(st.data(), ledgers(least=1))
@settings(max_examples=60, deadline=None)
def test_any_cut_end_is_found_against_a_known_head(data: st.DataObject, entries: list[Entry]) -> None:
    head = entries[-1].head
    left = entries[: data.draw(places(entries))]
    assert [(p.fault, p.sequence) for p in check_chain(left, [head])] == [(ChainFault.CUT, len(left) + 1)]


@given(st.data(), ledgers(least=1))
@settings(max_examples=60, deadline=None)
def test_any_end_written_anew_is_found_against_a_known_head(
    data: st.DataObject, entries: list[Entry]
) -> None:
    """Somebody who computes all hashes anew still meets the head kept elsewhere."""
    head, place = entries[-1].head, data.draw(places(entries))
    anew = entries[:place]
    for old in entries[place:]:
        before = anew[-1].entry_hash if anew else NO_ENTRY_HASH
        anew.append(written(old.sequence, before, old.at, old.actor + "!", old.facts_object()))
    assert check_chain(anew) == ()
    assert [p.fault for p in check_chain(anew, [head])] == [ChainFault.CHANGED]
