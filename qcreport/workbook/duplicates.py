"""Samples that occur more than once, and rows that were pasted twice."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from qcreport.measurements import CellRef
from qcreport.workbook.notices import NoticeBook
from qcreport.workbook.readings import Reading
from qcreport.workbook.row_refusals import refuse_duplicate_rows

Key = tuple[str | None, ...]


def check_duplicates(
    readings: Sequence[Reading], keys: Sequence[Key], sample_columns: Mapping[int, int], notices: NoticeBook
) -> None:
    """Refuse rows that repeat another one in every cell; note samples that occur with different values.

    Parameters
    ----------
    readings : sequence of Reading
        In export order.
    keys : sequence of tuple
        For each reading characteristic, batch, sample and number; a sample of None is not judged.
    sample_columns : mapping of int to int
        Table → column of its samples.
    notices : NoticeBook
        Takes `duplicate_sample_ids`.
    """
    judged = [key for key in keys if key[2] is not None]
    if len(set(judged)) == len(judged):
        return
    by_key: dict[Key, list[int]] = {}
    for index, key in enumerate(keys):
        if key[2] is not None:
            by_key.setdefault(key, []).append(index)
    repeated = {key: indexes for key, indexes in by_key.items() if len(indexes) > 1}
    doubled: list[tuple[CellRef, CellRef]] = []
    n_doubled = n_varied = 0
    for indexes in repeated.values():
        pairs = _doubled_pairs([readings[index] for index in indexes])
        doubled.extend(pairs)
        n_doubled += bool(pairs)
        n_varied += not pairs
    # Where most samples have several readings that differ, two equal ones among them are no pasted row.
    if doubled and n_varied <= 2 * n_doubled:
        raise refuse_duplicate_rows(doubled)
    for indexes in repeated.values():
        for index in indexes:
            reading = readings[index]
            column = sample_columns.get(reading.table)
            ref = reading.sheet.ref(reading.row, column) if column is not None else reading.ref
            notices.add("duplicate_sample_ids", ref)


def _doubled_pairs(readings: Sequence[Reading]) -> list[tuple[CellRef, CellRef]]:
    """Return (first, repetition) where every reading of a sample occurs at least twice, else nothing."""
    by_content: dict[tuple[tuple[int, str], ...], list[Reading]] = {}
    for reading in readings:
        cells = reading.sheet.rows[reading.row]
        content = tuple(
            (column, cell.text.strip()) for column, cell in cells.items() if not _counter(reading, column)
        )
        by_content.setdefault(content, []).append(reading)
    if any(len(same) < 2 for same in by_content.values()):
        return []
    return [
        (same[0].ref, again.ref)
        for same in by_content.values()
        for again in same[1:]
        if again.ref != same[0].ref and again.row != same[0].row
    ]


def _counter(reading: Reading, column: int) -> bool:
    """Return whether a cell is one more than the cell above it: a running number does not tell rows apart."""
    here = reading.sheet.cell(reading.row, column)
    above = reading.sheet.cell(reading.row - 1, column)
    if column == reading.column or here is None or above is None:
        return False
    texts = here.text.strip(), above.text.strip()
    return all(text.isascii() and text.isdigit() and len(text) < 10 for text in texts) and (
        int(texts[0]) == int(texts[1]) + 1
    )
