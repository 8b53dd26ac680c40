"""The ledger as a chain of hashes, and the check that nothing in it was touched.

Pure: entries come in, problems go out. An entry's hash covers its own fields and the hash of the entry before
it, so whoever changes one entry has to write all later ones anew; what even that cannot forge are the heads
that stand in sealed reports and outside this machine (`known`).
"""

from __future__ import annotations

import json
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from enum import StrEnum
from itertools import pairwise
from typing import Any

from qcreport.canonical import sha256_hex, to_json_bytes

NO_ENTRY_HASH = "0" * 64
"""What stands before the first entry."""

_DOMAIN = b"qcreport/ledger-entry/1\n"
_MANY = 100


class Kind(StrEnum):
    """What happened."""

    RECEIVED = "received"
    DUPLICATE = "duplicate"
    REFUSED = "refused"
    READ = "read"
    COMPARED = "compared"
    SEALED = "sealed"
    SIGNED = "signed"
    ISSUED = "issued"
    RETURNED = "returned"
    WITHDRAWN = "withdrawn"
    REPLACED = "replaced"
    LEFT_OUT = "left out"
    VERIFIED = "verified"
    SETTINGS_CHANGED = "settings changed"
    SERVICE_STARTED = "service started"
    SERVICE_STOPPED = "service stopped"
    SHARE_LOST = "share lost"
    SHARE_BACK = "share back"
    NIGHT_RUN = "night run"
    IMPORTED = "imported"
    """A past export taken into the store without a report."""
    APPROVED = "approved"
    """Plan, layout and rules approved by a person's key."""
    FAILED = "failed"
    """An export that met a fault of the program and was set aside: neither read nor refused."""


class ChainFault(StrEnum):
    """How an entry was tampered with."""

    CHANGED = "changed"
    DROPPED = "dropped"
    SWAPPED = "swapped"
    INSERTED = "inserted"
    CUT = "cut"


@dataclass(frozen=True, slots=True, kw_only=True)
class Head:
    """The newest entry at some moment."""

    sequence: int
    """Its sequence number; 0 for an empty ledger."""
    entry_hash: str
    """Its hash, hexadecimal; zeros for an empty ledger."""


EMPTY_HEAD = Head(sequence=0, entry_hash=NO_ENTRY_HASH)


@dataclass(frozen=True, slots=True, kw_only=True)
class Entry:
    """One entry as it stands in the ledger."""

    sequence: int
    """1-based, without gaps."""
    at: str
    """UTC time, ISO 8601 with Z."""
    actor: str
    """Who did it: a person's name or `service`."""
    kind: str
    """A value of `Kind`."""
    facts: str
    """Canonical JSON of an object without floats."""
    previous_hash: str
    """Hash of the entry before, zeros for the first."""
    entry_hash: str
    """SHA-256 of the other fields, hexadecimal."""

    @property
    def head(self) -> Head:
        """The ledger's head when this entry was its newest."""
        return Head(sequence=self.sequence, entry_hash=self.entry_hash)

    def facts_object(self) -> dict[str, Any]:
        """Return the facts as an object.

        Raises
        ------
        ValueError
            Where the text is not the JSON of an object.
        """
        value = json.loads(self.facts)
        if not isinstance(value, dict):
            raise ValueError("facts are not an object")
        return value

    def intact_as(self, sequence: int) -> bool:
        """Return whether the hash holds, were this entry the one numbered `sequence`."""
        try:
            facts = self.facts_object()
            if to_json_bytes(facts).decode("utf-8") != self.facts:
                return False
            computed = entry_hash(
                sequence=sequence,
                at=self.at,
                actor=self.actor,
                kind=self.kind,
                facts=facts,
                previous_hash=self.previous_hash,
            )
        except (ValueError, TypeError, RecursionError):
            return False
        return computed == self.entry_hash


@dataclass(frozen=True, slots=True, kw_only=True)
class ChainProblem:
    """One thing wrong with the chain."""

    fault: ChainFault
    """What was done."""
    sequence: int
    """The entry concerned (the first of a dropped or cut stretch)."""
    text: str
    """One sentence."""


def entry_hash(
    *, sequence: int, at: str, actor: str, kind: str, facts: Mapping[str, Any], previous_hash: str
) -> str:
    """Return the hash of an entry, hexadecimal.

    SHA-256 over the line `qcreport/ledger-entry/1` and the canonical JSON of the six fields, so that an
    auditor can redo it with any tool and no other document of ours can pass for an entry.
    """
    document = {
        "sequence": sequence,
        "at": at,
        "actor": actor,
        "kind": kind,
        "facts": facts,
        "previous_hash": previous_hash,
    }
    return sha256_hex(_DOMAIN + to_json_bytes(document))


def check_chain(entries: Sequence[Entry], known: Iterable[Head] = ()) -> tuple[ChainProblem, ...]:
    """Return what is wrong with a ledger, empty where it holds.

    Parameters
    ----------
    entries : sequence of Entry
        The whole ledger in the order in which it is kept.
    known : iterable of Head
        Heads seen earlier and kept elsewhere. A cut end, or an end written anew with fitting hashes, shows
        only against these.
    """
    kept, problems = _without_inserted(entries)
    problems += _changed(kept)
    problems += _out_of_order(kept)
    problems += _gaps(kept)
    problems += _broken_links(kept)
    problems += _against_known(kept, known)
    return tuple(sorted(problems, key=lambda p: (p.sequence, p.fault)))


def _without_inserted(entries: Sequence[Entry]) -> tuple[list[Entry], list[ChainProblem]]:
    """Set aside entries whose two neighbours continue each other and that are not merely out of place."""
    continued = {e.previous_hash for e in entries}
    hashes = {e.entry_hash for e in entries}
    kept: list[Entry] = []
    problems: list[ChainProblem] = []
    for i, entry in enumerate(entries):
        following = entries[i + 1] if i + 1 < len(entries) else None
        before = kept[-1].entry_hash if kept else NO_ENTRY_HASH
        belongs_elsewhere = entry.entry_hash in continued or (
            entry.previous_hash != before and entry.previous_hash in hashes
        )
        if following is not None and following.previous_hash == before and not belongs_elsewhere:
            problems.append(_problem(ChainFault.INSERTED, entry.sequence, "was inserted afterwards"))
        else:
            kept.append(entry)
    return kept, problems


def _changed(entries: Sequence[Entry]) -> list[ChainProblem]:
    """Find entries whose own hash does not hold, and among them those that were only renumbered."""
    broken = [e for e in entries if not e.intact_as(e.sequence)]
    places = {e.sequence for e in broken[:_MANY]}
    problems = []
    for entry in broken:
        candidates = sorted({entry.sequence - 1, entry.sequence + 1} | places)
        written_as = next((n for n in candidates if entry.intact_as(n)), None)
        if written_as is None:
            text = "no longer matches its own hash"
            problems.append(_problem(ChainFault.CHANGED, entry.sequence, text))
        else:
            text = f"holds what was written as entry {written_as}"
            problems.append(_problem(ChainFault.SWAPPED, entry.sequence, text))
    return problems


def _out_of_order(entries: Sequence[Entry]) -> list[ChainProblem]:
    problems = []
    seen: set[int] = set()
    highest = 0
    for entry in entries:
        if entry.sequence in seen:
            problems.append(_problem(ChainFault.INSERTED, entry.sequence, "stands there twice"))
        elif entry.sequence < highest:
            problems.append(_problem(ChainFault.SWAPPED, entry.sequence, f"stands behind entry {highest}"))
        seen.add(entry.sequence)
        highest = max(highest, entry.sequence)
    return problems


def _gaps(entries: Sequence[Entry]) -> list[ChainProblem]:
    problems = []
    expected = 1
    for number in sorted({e.sequence for e in entries}):
        if number > expected:
            last = f" to {number - 1}" if number - 1 > expected else ""
            text = f"{expected}{last} missing before entry {number}"
            problems.append(ChainProblem(fault=ChainFault.DROPPED, sequence=expected, text=f"Entry {text}."))
        expected = max(expected, number + 1)
    return problems


def _broken_links(entries: Sequence[Entry]) -> list[ChainProblem]:
    """Find entries that hold in themselves but are not what the next one was written upon."""
    problems = []
    if entries and entries[0].sequence == 1 and entries[0].previous_hash != NO_ENTRY_HASH:
        problems.append(_problem(ChainFault.CHANGED, 1, "does not begin a ledger"))
    for entry, following in pairwise(entries):
        adjacent = following.sequence == entry.sequence + 1
        if adjacent and following.previous_hash != entry.entry_hash and entry.intact_as(entry.sequence):
            text = f"is not the one that entry {following.sequence} was written upon"
            problems.append(_problem(ChainFault.CHANGED, entry.sequence, text))
    return problems


def _against_known(entries: Sequence[Entry], known: Iterable[Head]) -> list[ChainProblem]:
    hashes = {e.sequence: e.entry_hash for e in entries}
    last = max(hashes, default=0)
    problems = []
    for head in sorted(set(known) - {EMPTY_HEAD}, key=lambda h: h.sequence):
        if head.sequence > last:
            text = f"The ledger ends at entry {last}; entry {head.sequence} is known to have been written."
            problems.append(ChainProblem(fault=ChainFault.CUT, sequence=last + 1, text=text))
        elif hashes.get(head.sequence, head.entry_hash) != head.entry_hash:
            text = "is not the one known from elsewhere under this number"
            problems.append(_problem(ChainFault.CHANGED, head.sequence, text))
    return problems


def _problem(fault: ChainFault, sequence: int, text: str) -> ChainProblem:
    return ChainProblem(fault=fault, sequence=sequence, text=f"Entry {sequence} {text}.")
