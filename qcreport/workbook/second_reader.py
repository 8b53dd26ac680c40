"""The independent reader of the second look: python-calamine for workbooks, pandas for text exports."""

from __future__ import annotations

import io
import os
from collections.abc import Callable, Iterator, Sequence
from typing import Any

from qcreport.workbook.layout_model import TextForm

Records = Iterator[tuple[int, Sequence[Any]]]
"""(columns before the first value, values) of row 1, 2 …"""
SecondReader = Callable[[str | None], Records | None]
"""Sheet name → its records, or None where they cannot be read."""


def read_workbook(data: bytes) -> SecondReader | None:
    """Return a reader of the sheets of a workbook, or None where it cannot be opened.

    It allocates the whole range between the first and the last cell: the caller makes sure that it is small.
    """
    import python_calamine

    try:
        workbook = python_calamine.CalamineWorkbook.from_filelike(io.BytesIO(data))
    except BaseException as error:  # noqa: BLE001 - the library's panics are no Exception
        _raise_unless_theirs(error)
        return None

    def records(name: str | None) -> Records | None:
        try:
            sheet = workbook.get_sheet_by_name(name or "")
        except BaseException as error:  # noqa: BLE001 - as above
            _raise_unless_theirs(error)
            return None
        shift = sheet.start[1] if sheet.start is not None else 0  # rows are padded, columns are not
        return ((shift, record) for record in sheet.iter_rows())

    return records


def _raise_unless_theirs(error: BaseException) -> None:
    if isinstance(error, (KeyboardInterrupt, SystemExit, MemoryError)):
        raise error


def read_text(data: bytes, form: TextForm) -> SecondReader | None:
    """Return a reader of the one nameless sheet of a text export, or None where it cannot be read."""
    os.environ.setdefault(
        "OPENBLAS_NUM_THREADS", "1"
    )  # each thread would reserve memory; nothing here uses one
    import pandas as pd

    try:
        text = data.decode(form.encoding).removeprefix("\ufeff")
        width = max((line.count(form.delimiter) for line in text.splitlines()), default=0) + 1
        table = pd.read_csv(
            io.StringIO(text, newline=""), sep=form.delimiter, header=None, names=range(width), dtype=str,
            keep_default_na=False, na_filter=False, skip_blank_lines=False, index_col=False, engine="c",
        )  # fmt: skip
    except (ValueError, UnicodeError, OverflowError):
        return None
    rows = table.fillna("").to_numpy(dtype=object)
    return lambda _name: ((0, list(record)) for record in rows)
