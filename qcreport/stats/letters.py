"""Compact letters: groups that share a letter were not shown to differ."""

from __future__ import annotations

from collections.abc import Sequence
from string import ascii_lowercase

from qcreport.errors import DegenerateDataError


def compact_letters(n_groups: int, different: Sequence[tuple[int, int]]) -> tuple[str, ...]:
    """Return letters for groups such that two groups share one exactly when they are not in `different`.

    Every pair decision is kept, also where standard errors differ. A shared letter does not mean equal.

    Parameters
    ----------
    n_groups : int >= 1
        Number of groups, in the order in which letters are to rise, usually of falling means.
    different : sequence of (int, int)
        Pairs declared different, 0-based, either order.

    Returns
    -------
    tuple of str
        One text for each group; beyond z the letters go on as a1, b1, ...

    Raises
    ------
    DegenerateDataError
        A pair outside the groups or of a group with itself.

    Notes
    -----
    Insert-and-absorb [1]_, then letters without which every pair still shares one are swept out.

    References
    ----------
    .. [1] Piepho (2004), J. Comput. Graph. Stat. 13(2), 456-466. doi:10.1198/1061860043515

    Examples
    --------
    >>> compact_letters(3, [(0, 2)])
    ('a', 'ab', 'b')
    """
    apart = {frozenset(pair) for pair in different}
    if any(len(pair) != 2 or not all(0 <= i < n_groups for i in pair) for pair in apart):
        raise DegenerateDataError("A pair for letters must name two of the groups.")
    columns: list[frozenset[int]] = [frozenset(range(n_groups))]
    for pair in sorted(apart, key=sorted):
        columns = _absorbed(_inserted(columns, pair))
    columns = sorted(_swept(columns), key=sorted)
    return tuple(
        "".join(_letter(position) for position, column in enumerate(columns) if group in column)
        for group in range(n_groups)
    )


def _inserted(columns: Sequence[frozenset[int]], pair: frozenset[int]) -> list[frozenset[int]]:
    """Split every column that holds both of a different pair."""
    result: list[frozenset[int]] = []
    for column in columns:
        result.extend([column - {group} for group in sorted(pair)] if pair <= column else [column])
    return result


def _absorbed(columns: Sequence[frozenset[int]]) -> list[frozenset[int]]:
    """Drop columns that lie within another."""
    kept: list[frozenset[int]] = []
    for column in sorted(columns, key=len, reverse=True):
        if not any(column <= other for other in kept):
            kept.append(column)
    return kept


def _swept(columns: Sequence[frozenset[int]]) -> list[frozenset[int]]:
    """Drop columns whose pairs, and single groups, are all held by the others."""
    kept = list(columns)
    for column in sorted(columns, key=lambda c: (len(c), sorted(c))):
        others = [other for other in kept if other is not column]
        held = [frozenset((i, j)) for i in column for j in column]
        if all(any(pair <= other for other in others) for pair in held):
            kept = others
    return kept


def _letter(position: int) -> str:
    round_, place = divmod(position, len(ascii_lowercase))
    return ascii_lowercase[place] + (str(round_) if round_ else "")
