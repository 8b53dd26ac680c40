"""Whether a file that is being written is whole by now."""

from __future__ import annotations

from qcreport.errors import ExportRefusedError
from qcreport.workbook.archive import Archive
from qcreport.workbook.limits import Limits

_ZIP = b"PK\x03\x04"
_OLE = bytes.fromhex("d0cf11e0a1b11ae1")
_OLE_SECTOR = 512


def looks_complete(data: bytes, limits: Limits | None = None) -> bool:
    """Return whether a file can be taken for whole: the folder watcher waits for what is not.

    A zip archive is whole where its directory can be read and every checksum is right; an archive that is
    refused for another reason (too large, unsafe) is whole and will be refused by the reading. Other files
    are whole where they are not empty and do not end in a block of zeros, as a file does that was allocated
    first.
    """
    limits = limits if limits is not None else Limits()
    if not data:
        return False
    if len(data) > limits.max_file_bytes:
        return True
    if data.startswith(_ZIP):
        return _archive_is_whole(data, limits)
    if data.startswith(_OLE):
        return len(data) % _OLE_SECTOR == 0
    return any(data[-4096:])


def _archive_is_whole(data: bytes, limits: Limits) -> bool:
    try:
        archive = Archive(data, limits)
        for name in archive.names():
            for _ in archive.chunks(name):
                pass
    except ExportRefusedError as refusal:
        return refusal.code != "damaged_or_incomplete"
    return True
