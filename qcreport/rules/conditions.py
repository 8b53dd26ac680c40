"""Conditions on single facts, as a decision table writes them: `"similar"`, `">=10"`."""

from __future__ import annotations

import operator
import re
from collections.abc import Callable
from dataclasses import dataclass
from typing import Final

_COMPARISONS: Final[dict[str, Callable[[int, int], bool]]] = {
    "<": operator.lt,
    "<=": operator.le,
    ">": operator.gt,
    ">=": operator.ge,
    "=": operator.eq,
}
_NUMBER_CONDITION: Final = re.compile(r"\s*(<=|>=|<|>|=)\s*([0-9]{1,6})\s*")


@dataclass(frozen=True, slots=True, kw_only=True)
class WordCondition:
    """A fact must be this word."""

    fact: str
    """Name of the fact."""
    word: str
    """The word it must be."""

    def holds(self, value: str | int) -> bool:
        """Return whether the fact's value meets the condition."""
        return value == self.word

    def __str__(self) -> str:
        """Return the condition as a sentence part."""
        return f"{self.fact} is {self.word}"


@dataclass(frozen=True, slots=True, kw_only=True)
class NumberCondition:
    """A fact must stand in this relation to a whole number."""

    fact: str
    """Name of the fact."""
    relation: str
    """<, <=, >, >= or =."""
    bound: int
    """The number."""

    def holds(self, value: str | int) -> bool:
        """Return whether the fact's value meets the condition."""
        return _COMPARISONS[self.relation](int(value), self.bound)

    def __str__(self) -> str:
        """Return the condition as a sentence part."""
        return f"{self.fact} {self.relation} {self.bound}"


Condition = WordCondition | NumberCondition


def parse_number_condition(fact: str, text: str) -> NumberCondition | None:
    """Return the condition written as `>=10`, or None where the text is none."""
    found = _NUMBER_CONDITION.fullmatch(text)
    if found is None:
        return None
    return NumberCondition(fact=fact, relation=found.group(1), bound=int(found.group(2)))
