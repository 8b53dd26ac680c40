"""Letters as keys: for flagged values, and for groups between which no difference is shown."""

from __future__ import annotations

import re
from collections.abc import Sequence

from qcreport.analysis.result import GroupResult
from qcreport.stats.letters import compact_letters

_LETTER = re.compile("[a-z][0-9]*")


def same_letters(groups: Sequence[GroupResult], apart: frozenset[frozenset[str]]) -> dict[str, str]:
    """Return each group's letters, rising as means fall; two groups share one where nothing is shown.

    Parameters
    ----------
    groups : sequence of GroupResult
        All groups.
    apart : frozenset
        Pairs of labels that are shown to differ.
    """
    ordered = sorted(groups, key=lambda g: -(g.mean or 0.0))
    place = {g.label: i for i, g in enumerate(ordered)}
    different = [(place[a], place[b]) for a, b in (sorted(pair) for pair in apart)]
    letters = compact_letters(len(ordered), different)
    return {g.label: " ".join(_LETTER.findall(text)) for g, text in zip(ordered, letters, strict=True)}


def letter_name(index: int) -> str:
    """Return the name of a count from 0: a, b, … z, aa, ab."""
    name = ""
    index += 1
    while index > 0:
        index, rest = divmod(index - 1, 26)
        name = chr(ord("a") + rest) + name
    return name
