"""Work on rows of unequal length so that a row's bits never depend on what else is in the batch."""

from __future__ import annotations

from collections.abc import Callable, Iterator

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Index = NDArray[np.intp]

LENGTH_UNIT = 16
"""Row lengths are rounded up to multiples of this."""
_ELEMENTS_AT_ONCE = 1 << 13


def distinct(codes: Index) -> list[int]:
    """Return the distinct codes, ascending."""
    return sorted(set(codes.tolist()))


def row_blocks(lengths: Index, kinds: Index) -> Iterator[tuple[Index, int, int]]:
    """Yield (row numbers, common length, common kind).

    Rows are put together whose kind is the same and whose length rounds up to the same multiple of
    `LENGTH_UNIT`. The length that a row is summed over follows from that row alone, so single calls and
    batches add the same numbers in the same order. Blocks are cut to bound memory.
    """
    units = -(-lengths // LENGTH_UNIT)
    codes = kinds * _CODES + units
    for code in distinct(codes):
        rows = np.flatnonzero(codes == code)
        length = (code % _CODES) * LENGTH_UNIT
        size = max(1, _ELEMENTS_AT_ONCE // length)
        for start in range(0, rows.size, size):
            yield rows[start : start + size], length, code // _CODES


_CODES = 1 << 20


def fill_by_rows(lengths: Index, one_block: Callable[[Index, int], Array]) -> Array:
    """Return one number per row, computed block by block with `one_block(rows, length)`."""
    result = np.empty(lengths.shape)
    for rows, length, _ in row_blocks(lengths, np.zeros_like(lengths)):
        result[rows] = one_block(rows, length)
    return result
