"""Which single fact would have to be otherwise for another row to apply."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Any

from qcreport.rules.choose import choose
from qcreport.rules.facts import NUMBERS, WORDS, Facts
from qcreport.rules.table import RulesTable, tried_numbers


@dataclass(frozen=True, slots=True, kw_only=True)
class Alternative:
    """One fact, the nearest other value of it that leads to another row, and that row."""

    fact: str
    """Name of the fact."""
    here: str
    """Its value here."""
    other: str
    """The value it would have to have."""
    row: str
    """Id of the row that would apply."""
    procedure: str
    """The procedure of that row."""

    def to_json(self) -> dict[str, Any]:
        """Return the form that `rules explain --json` prints."""
        return {
            "fact": self.fact,
            "here": self.here,
            "other": self.other,
            "row": self.row,
            "procedure": self.procedure,
        }


def alternatives(table: RulesTable, facts: Facts) -> tuple[Alternative, ...]:
    """Return every row that a change of one fact alone leads to, each by the nearest value of that fact."""
    own = choose(table, facts).rule.id
    found: list[Alternative] = []
    for fact in (*WORDS, *NUMBERS):
        seen = {own}
        for other in _nearest_first(table, fact, facts):
            choice = choose(table, replace(facts, **{fact: other}))  # type: ignore[arg-type]
            if choice.rule.id in seen:
                continue
            if fact in NUMBERS:  # of several words each is told, of numbers the nearest
                seen.add(choice.rule.id)
            found.append(
                Alternative(
                    fact=fact,
                    here=str(facts.value(fact)),
                    other=str(other),
                    row=choice.rule.id,
                    procedure=choice.procedure,
                )
            )
    return tuple(found)


def _nearest_first(table: RulesTable, fact: str, facts: Facts) -> Iterator[str | int]:
    here = facts.value(fact)
    if fact in WORDS:
        yield from (word for word in WORDS[fact] if word != here)
        return
    numbers = tried_numbers(table, fact)
    yield from sorted(numbers, key=lambda n: (abs(n - int(here)), n))
