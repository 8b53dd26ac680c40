"""Letters as keys: for flagged values, and for groups between which no difference is shown."""

from __future__ import annotations

import re

from qcreport.analysis.result import CharacteristicResult

_LETTER = re.compile("[a-z][0-9]*")


def letters_of(result: CharacteristicResult) -> dict[str, str]:
    """Return the letters of every compared group; a group that is only described has none."""
    described = {g.label for g in result.not_compared}
    compared = [g.label for g in result.groups if g.label not in described]
    letters = dict(zip(compared, result.letters, strict=True))
    return {g.label: " ".join(_LETTER.findall(letters.get(g.label, ""))) for g in result.groups}


def letter_name(index: int) -> str:
    """Return the name of a count from 0: a, b, … z, aa, ab."""
    name = ""
    index += 1
    while index > 0:
        index, rest = divmod(index - 1, 26)
        name = chr(ord("a") + rest) + name
    return name
