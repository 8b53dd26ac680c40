"""Letters for many groups: two groups share a letter exactly where no difference between them is shown."""

from __future__ import annotations

from collections.abc import Sequence


def same_letters(labels: Sequence[str], apart: frozenset[frozenset[str]]) -> dict[str, str]:
    """Return each label's letters (insert and absorb; lower case, in order of the labels).

    Parameters
    ----------
    labels : sequence of str
        All groups, in order.
    apart : frozenset
        Pairs that are shown to differ.

    References
    ----------
    .. [1] Piepho (2004), J. Comput. Graph. Stat. 13(2), 456-466. doi:10.1198/1061860043515
    """
    columns: list[frozenset[str]] = [frozenset(labels)]
    for first in range(len(labels)):
        for second in range(first + 1, len(labels)):
            pair = frozenset((labels[first], labels[second]))
            if pair in apart:
                columns = _absorbed(_split(columns, labels[first], labels[second]))
    order = {label: i for i, label in enumerate(labels)}
    columns.sort(key=lambda c: sorted(order[label] for label in c))
    names = {column: letter_name(i) for i, column in enumerate(columns)}
    return {label: " ".join(names[c] for c in columns if label in c) for label in labels}


def _split(columns: list[frozenset[str]], first: str, second: str) -> list[frozenset[str]]:
    out: list[frozenset[str]] = []
    for column in columns:
        if first in column and second in column:
            out += [column - {first}, column - {second}]
        else:
            out.append(column)
    return out


def _absorbed(columns: list[frozenset[str]]) -> list[frozenset[str]]:
    unique = list(dict.fromkeys(columns))
    return [c for c in unique if not any(c < other for other in unique)]


def letter_name(index: int) -> str:
    """Return the name of a count from 0: a, b, … z, aa, ab."""
    name = ""
    index += 1
    while index > 0:
        index, rest = divmod(index - 1, 26)
        name = chr(ord("a") + rest) + name
    return name
