"""The chain of a long ledger checked entry by entry, in memory that does not grow with it."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass

from qcreport.records.chain import EMPTY_HEAD, ChainProblem, Entry, Head, check_chain


@dataclass(frozen=True, slots=True, kw_only=True)
class Walked:
    """What a walk along the ledger found."""

    n_entries: int
    """Entries."""
    head: Head
    """The newest one."""
    problems: tuple[ChainProblem, ...]
    """Empty where the chain holds."""


def walk_chain(entries: Callable[[], Iterator[Entry]], known: Iterable[Head] = ()) -> Walked:
    """Check a ledger that is read entry by entry.

    Parameters
    ----------
    entries : callable
        Begins to read the ledger; called again, for all entries at once, only where the chain does not hold,
        so that what was done to it can be named.
    known : iterable of Head
        Heads seen earlier and kept elsewhere.
    """
    wanted = set(known) - {EMPTY_HEAD}
    found: dict[int, str] = {}
    places = {head.sequence for head in wanted}
    count, last, holds = 0, EMPTY_HEAD, True
    for entry in entries():
        count += 1
        follows = entry.sequence == last.sequence + 1 and entry.previous_hash == last.entry_hash
        holds = holds and follows and entry.intact_as(entry.sequence)
        if entry.sequence in places:
            found[entry.sequence] = entry.entry_hash
        last = entry.head
    if holds and all(found.get(head.sequence) == head.entry_hash for head in wanted):
        return Walked(n_entries=count, head=last, problems=())
    return Walked(n_entries=count, head=last, problems=check_chain(tuple(entries()), wanted))
