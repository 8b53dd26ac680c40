"""The one place where whatever a PDF library throws becomes a plain sentence."""

from __future__ import annotations

import logging
from collections.abc import Iterator
from contextlib import contextmanager

from qcreport.errors import NotOurReportError, QcReportError

NOT_READABLE = "This PDF cannot be read as a sealed report: it is damaged, cut off, or was changed."

# What these libraries log about a hostile file is the file's own text; what matters is in the status.
_SILENT = ("pyhanko", "pyhanko_certvalidator", "pikepdf")


@contextmanager
def reading_pdf(text: str = NOT_READABLE) -> Iterator[None]:
    """Turn any failure while a PDF is read into NotOurReportError; running out of memory stays what it is.

    A hostile file can make a parser raise anything, from KeyError to RecursionError.
    """
    for name in _SILENT:
        logging.getLogger(name).setLevel(logging.CRITICAL + 1)
    try:
        yield
    except (QcReportError, MemoryError):
        raise
    except Exception as error:
        raise NotOurReportError(text) from error
