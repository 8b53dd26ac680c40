"""Exact joint permutation laws of rank statistics: every way to deal the results out to the groups, counted.

The results are sorted; `ends` marks the blocks of equal results. All rank sums are whole numbers (twice the
Mann-Whitney count), so the enumeration is exact and does not depend on the machine.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from functools import lru_cache
from itertools import combinations, pairwise

import numpy as np
from numpy.typing import NDArray

MOST_ARRANGEMENTS = 1_000_000
"""Up to here a law is enumerated."""
_ROWS_AT_ONCE = 1 << 15
_TOLERANCE = 1e-9

Labels = NDArray[np.int16]
"""Numbers of groups."""
Counts = NDArray[np.int32]
"""Numbers of results; twice a count must fit, too."""
Array = NDArray[np.float64]
Comparisons = tuple[tuple[int, int], ...]


def count(sizes: Sequence[int]) -> int:
    """Return the number of arrangements, n! / (n1! ... nk!)."""
    result = math.factorial(sum(sizes))
    for size in sizes:
        result //= math.factorial(size)
    return result


def tie_blocks(ordered: Sequence[float]) -> tuple[int, ...]:
    """Return the lengths of the blocks of equal values in an ascending sequence."""
    lengths = [1]
    for before, value in pairwise(ordered):
        if value == before:
            lengths[-1] += 1
        else:
            lengths.append(1)
    return tuple(lengths)


@lru_cache(maxsize=64)
def largest_pair_law(
    sizes: tuple[int, ...], blocks: tuple[int, ...], pairs: Comparisons, sign: int
) -> tuple[tuple[float, ...], tuple[float, ...]]:
    """Return the attainable values of the largest pair statistic, ascending, and the chance to reach each.

    Parameters
    ----------
    sizes : tuple of int, length k
        Group sizes.
    blocks : tuple of int
        Lengths of the tie blocks of all results, ascending.
    pairs : tuple of (int, int)
        The compared groups.
    sign : int
        0 for absolute statistics, +1 or -1 for signed ones.
    """

    def largest(labels: Labels) -> Array:
        z = pair_statistics(labels, blocks, pairs)
        return np.asarray((np.abs(z) if sign == 0 else sign * z).max(axis=-1))

    return _law(sizes, largest)


@lru_cache(maxsize=64)
def kruskal_law(
    sizes: tuple[int, ...], blocks: tuple[int, ...]
) -> tuple[tuple[float, ...], tuple[float, ...]]:
    """Return the attainable values of sum(R_i**2 / n_i), R rank sums, and the chance to reach each."""
    ranks = _midranks(blocks)

    def spread(labels: Labels) -> Array:
        sums = [np.where(labels == g, ranks, 0.0).sum(axis=-1) for g in range(len(sizes))]
        return np.asarray(
            np.stack([r * r / n for r, n in zip(sums, sizes, strict=True)], axis=-1).sum(axis=-1)
        )

    return _law(sizes, spread)


def chance_to_reach(law: tuple[tuple[float, ...], tuple[float, ...]], value: float) -> float:
    """Return P(statistic >= value), rounding aside."""
    values, chances = law
    position = int(np.searchsorted(values, value - _TOLERANCE * max(1.0, abs(value))))
    return chances[position] if position < len(values) else 0.0


def pair_statistics(labels: Labels, blocks: tuple[int, ...], pairs: Comparisons) -> Array:
    """Return the standardised rank sum of each pair, ranked within the pair, in each arrangement.

    Positive where the first group lies higher; the variance is corrected for ties; 0 where all of a pair
    are tied.

    Parameters
    ----------
    labels : (m, n) integers
        Group of each result, results ascending.
    blocks, pairs
        As for `largest_pair_law`.

    Returns
    -------
    (m, len(pairs)) floats
    """
    ends = np.cumsum(np.asarray(blocks, dtype=np.intp))
    starts = ends - np.asarray(blocks, dtype=np.intp)
    of_result = np.repeat(np.arange(len(blocks)), blocks)
    dealt = [_running_count(labels == group) for group in range(int(labels.max()) + 1)]
    columns = []
    for first, second in pairs:
        below = dealt[second]
        twice = below[:, ends[of_result]] + below[:, starts[of_result]]
        n, m = int(dealt[first][0, -1]), int(dealt[second][0, -1])
        excess = 0.5 * (np.where(labels == first, twice, 0).sum(axis=-1, dtype=np.int64) - n * m)
        variance = n * m / 12.0 * (n + m + 1 - _lost_to_ties(below + dealt[first], starts, ends))
        columns.append(
            np.where(variance > 0.0, excess / np.sqrt(np.where(variance > 0.0, variance, 1.0)), 0.0)
        )
    return np.stack(columns, axis=-1)


def _running_count(mine: NDArray[np.bool_]) -> Counts:
    """Return how many of a group lie before each place, one column more than places."""
    result = np.zeros((mine.shape[0], mine.shape[1] + 1), np.int32)
    np.cumsum(mine, axis=-1, out=result[:, 1:])
    return result


def _lost_to_ties(together: Counts, starts: NDArray[np.intp], ends: NDArray[np.intp]) -> Array | float:
    """Return sum(t**3 - t) / (N (N - 1)) over the tie blocks of a pair of N results."""
    tied = np.flatnonzero(ends - starts > 1)
    if tied.size == 0:
        return 0.0
    n = int(together[0, -1])
    t = (together[:, ends[tied]] - together[:, starts[tied]]).astype(float)
    return np.asarray((t * t * t - t).sum(axis=-1) / (n * (n - 1)))


def _midranks(blocks: tuple[int, ...]) -> Array:
    ends = np.cumsum(blocks)
    return np.repeat(ends - (np.asarray(blocks) - 1) / 2.0, blocks)


def _law(
    sizes: tuple[int, ...], statistic: Callable[[Labels], Array]
) -> tuple[tuple[float, ...], tuple[float, ...]]:
    """Enumerate, and join values that differ by rounding only."""
    values = np.sort(np.concatenate([statistic(labels) for labels in _arrangements(sizes)]))
    new = np.concatenate([[True], np.diff(values) > _TOLERANCE * np.maximum(1.0, np.abs(values[1:]))])
    starts = np.flatnonzero(new)
    return tuple(values[starts].tolist()), tuple(((values.size - starts) / values.size).tolist())


def _arrangements(sizes: tuple[int, ...]) -> Iterator[Labels]:
    """Yield all arrangements in blocks of rows."""
    n = sum(sizes)
    first, rest = _choices(n, sizes[0])
    rows = max(1, _ROWS_AT_ONCE * len(first) // count(sizes))
    for start in range(0, len(first), rows):
        free = rest[start : start + rows]
        labels = np.zeros((len(free), n), np.int16)
        for group, size in enumerate(sizes[1:], start=1):
            labels, free = _deal(labels, free, group, size)
        yield labels


def _deal(labels: Labels, free: NDArray[np.intp], group: int, size: int) -> tuple[Labels, NDArray[np.intp]]:
    """Return each arrangement with `group` dealt to every choice of its free places, and the places left."""
    taken, kept = _choices(free.shape[1], size)
    places = free[:, taken].reshape(-1, size)
    dealt = np.repeat(labels, len(taken), axis=0)
    np.put_along_axis(dealt, places, np.int16(group), axis=-1)
    return dealt, free[:, kept].reshape(len(places), kept.shape[1])


def _choices(width: int, size: int) -> tuple[NDArray[np.intp], NDArray[np.intp]]:
    """Return every choice of `size` out of `width` places, and the places that each leaves."""
    taken = np.array(list(combinations(range(width), size)), dtype=np.intp).reshape(-1, size)
    left = np.ones((len(taken), width), dtype=bool)
    np.put_along_axis(left, taken, False, axis=-1)
    return taken, np.nonzero(left)[1].reshape(len(taken), width - size)
