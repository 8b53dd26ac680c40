"""The files attached to a report: only those with our fixed names, each of bounded size."""

from __future__ import annotations

import re
import zlib
from collections.abc import Iterator
from io import BytesIO
from typing import Any

from qcreport.errors import NotOurReportError
from qcreport.signing.boundary import reading_pdf

SETTINGS_NAMES = ("plan.toml", "layout.toml", "rules.toml")
CONTEXT_NAME = "context.json"
RESULT_NAME = "result.json"
FIXED_NAMES = (*SETTINGS_NAMES, CONTEXT_NAME, RESULT_NAME)
"""The names beside `export.EXT`."""
_EXPORT = re.compile(r"export\.[a-z0-9]{1,8}")
LARGEST_EXPORT = 64 << 20
LARGEST_OTHER = 16 << 20
_MOST_ENTRIES = 64
_DEEPEST = 8


def is_export(name: str) -> bool:
    """Return whether a name is that of an attached export: `export.xlsx`, `export.csv`."""
    return _EXPORT.fullmatch(name) is not None


def is_fixed_name(name: str) -> bool:
    """Return whether a name is one of those a report attaches; none of them can lead out of a folder."""
    return name in FIXED_NAMES or is_export(name)


def attachments_of(pdf_revision: bytes) -> dict[str, bytes]:
    """Return the attachments of one revision by their fixed names, sorted; any others are left out.

    Give it the sealed revision: an appended update can swap an attachment, and ordinary readers then show
    the swapped one.

    Raises
    ------
    NotOurReportError
        Not readable, a fixed name twice, two exports, or an attachment that is too large.
    """
    import pikepdf

    found: dict[str, bytes] = {}
    with reading_pdf(), pikepdf.open(BytesIO(pdf_revision), suppress_warnings=True) as document:
        names = document.Root.get("/Names", pikepdf.Dictionary())
        for specification in _specifications(names.get("/EmbeddedFiles"), _DEEPEST):
            name = str(specification.get("/UF", specification.get("/F", "")))
            if not is_fixed_name(name):
                continue
            if name in found:
                raise NotOurReportError(f"The report carries {name} twice.")
            found[name] = _content(specification.EF.F, name)
    if sum(map(is_export, found)) > 1:
        raise NotOurReportError("The report carries two exports.")
    return dict(sorted(found.items()))


def _specifications(node: Any, depth: int) -> Iterator[Any]:
    """Yield the file specifications of a name tree, within bounds of depth and number."""
    if node is None:
        return
    if depth == 0:
        raise NotOurReportError("The attachments of this report are nested too deep.")
    entries = list(node.get("/Names", []))
    kids = list(node.get("/Kids", []))
    if len(entries) > 2 * _MOST_ENTRIES or len(kids) > _MOST_ENTRIES:
        raise NotOurReportError(f"This PDF has more than {_MOST_ENTRIES} attachments; no report of ours has.")
    yield from entries[1::2]
    for kid in kids:
        yield from _specifications(kid, depth - 1)


def _content(stream: Any, name: str) -> bytes:
    """Return the bytes of an attachment, never unpacking more than its largest size."""
    largest = LARGEST_EXPORT if is_export(name) else LARGEST_OTHER
    raw: bytes = stream.read_raw_bytes()
    kinds = _filters(stream)
    if kinds == ("/FlateDecode",) and "/DecodeParms" not in stream:
        unpacker = zlib.decompressobj()
        raw = unpacker.decompress(raw, largest + 1)
        if len(raw) <= largest and not unpacker.eof:
            raise NotOurReportError(f"The attachment {name} is cut off.")
    elif kinds:
        raise NotOurReportError(f"The attachment {name} is packed in a way that no report of ours uses.")
    if len(raw) > largest:
        raise NotOurReportError(f"The attachment {name} is larger than {largest >> 20} MB.")
    return raw


def _filters(stream: Any) -> tuple[str, ...]:
    import pikepdf

    held = stream.get("/Filter")
    if held is None:
        return ()
    return tuple(map(str, held)) if isinstance(held, pikepdf.Array) else (str(held),)
