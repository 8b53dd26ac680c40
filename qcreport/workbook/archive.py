"""Opening a zip archive that may have been made to do harm.

Nothing that the archive says about itself is believed: names are checked before anything is opened, every
byte is counted while it is unpacked, and sizes and checksums are compared afterwards. Each entry is unpacked
once.
"""

from __future__ import annotations

import io
import struct
import zipfile
import zlib
from collections.abc import Iterator

from qcreport.errors import ExportRefusedError
from qcreport.workbook.limits import Limits, megabytes
from qcreport.workbook.refusals import damaged, quoted, refused, unsafe

_LOCAL_HEADER = struct.Struct("<4s5H3L2H")
_CHUNK = 1 << 17
_STORED, _DEFLATED = 0, 8
_BROKEN = (
    zipfile.BadZipFile, struct.error, ValueError, OverflowError, NotImplementedError, EOFError, OSError,
    IndexError, KeyError,
)  # fmt: skip


class Archive:
    """The entries of one archive, unpacked on demand within the limits."""

    def __init__(self, data: bytes, limits: Limits) -> None:
        self._data = memoryview(data)
        self._limits = limits
        self._unpacked = 0
        self._seen: set[str] = set()
        try:
            with zipfile.ZipFile(io.BytesIO(data)) as archive:
                entries = archive.infolist()
        except _BROKEN:
            raise damaged("The archive directory is missing or broken: the file ends early.") from None
        _check_entries(entries, limits)
        self._entries = {entry.filename.lower(): entry for entry in entries if not entry.is_dir()}
        _check_overlaps(entries, len(data))

    def names(self) -> tuple[str, ...]:
        """Return the entry names, in archive order."""
        return tuple(entry.filename for entry in self._entries.values())

    def __contains__(self, name: str) -> bool:
        """Return whether there is such an entry; part names do not depend on case."""
        return name.lower() in self._entries

    def chunks(self, name: str) -> Iterator[bytes]:
        """Unpack one entry piece by piece; its size and checksum are checked at the end."""
        entry = self._entries.get(name.lower())
        if entry is None:
            raise damaged(f"The part {quoted(name)} is missing.")
        self._seen.add(name.lower())
        packed = self._packed_bytes(entry)
        checksum = size = 0
        for chunk in _inflate(packed, entry):
            size += len(chunk)
            self._count(entry, len(chunk), size)
            checksum = zlib.crc32(chunk, checksum)
            yield chunk
        if size != entry.file_size or checksum != entry.CRC:
            raise damaged(f"The part {quoted(entry.filename)} does not match its checksum.")

    def read(self, name: str) -> bytes:
        """Unpack one entry."""
        return b"".join(self.chunks(name))

    def unread(self) -> tuple[str, ...]:
        """Return the entries that have not been unpacked so far."""
        return tuple(e.filename for key, e in self._entries.items() if key not in self._seen)

    def _packed_bytes(self, entry: zipfile.ZipInfo) -> memoryview:
        start = entry.header_offset
        header = bytes(self._data[start : start + _LOCAL_HEADER.size])
        if len(header) < _LOCAL_HEADER.size or not header.startswith(b"PK\x03\x04"):
            raise damaged(f"The part {quoted(entry.filename)} is not where the directory says.")
        fields = _LOCAL_HEADER.unpack(header)
        name_start = start + _LOCAL_HEADER.size
        name = bytes(self._data[name_start : name_start + fields[9]])
        if name != entry.orig_filename.encode("utf-8" if entry.flag_bits & 0x800 else "cp437", "replace"):
            raise damaged(f"The part {quoted(entry.filename)} bears two different names.")
        data_start = name_start + fields[9] + fields[10]
        packed = self._data[data_start : data_start + entry.compress_size]
        if len(packed) != entry.compress_size:
            raise damaged(f"The part {quoted(entry.filename)} ends early.")
        return packed

    def _count(self, entry: zipfile.ZipInfo, new: int, size: int) -> None:
        limits = self._limits
        self._unpacked += new
        if size > limits.max_part_bytes:
            raise too_large_unpacked(f"one part of at most {megabytes(limits.max_part_bytes)}", size)
        if self._unpacked > limits.max_unpacked_bytes:
            raise too_large_unpacked(f"at most {megabytes(limits.max_unpacked_bytes)}", self._unpacked)
        if size > limits.ratio_from_bytes and size > limits.max_ratio * max(entry.compress_size, 1):
            allowed = f"parts that grow at most {limits.max_ratio} times in unpacking"
            raise too_large_unpacked(allowed, size, more_than=True)


def too_large_unpacked(allowed: str, found: int, *, more_than: bool = False) -> ExportRefusedError:
    """Return the refusal of a workbook that unpacks to more than it may."""
    size = f"more than {megabytes(found)}" if more_than else megabytes(found)
    return refused(
        "too_large_unpacked",
        where="the file",
        found=f"The workbook unpacks to {size}. It was not opened.",
        expected=f"The limit is {allowed}.",
        next_step="Export fewer rows at a time, or ask IT to raise the limit in site.toml.",
    )


def _check_entries(entries: list[zipfile.ZipInfo], limits: Limits) -> None:
    """Refuse too many entries, unsafe or doubled names, encryption and declared sizes above the limits."""
    if len(entries) > limits.max_entries:
        raise refused(
            "too_large_unpacked",
            where="the file",
            found=f"The workbook archive holds {len(entries):,} entries. It was not opened.",
            expected=f"The limit is {limits.max_entries:,} entries.",
            next_step="Save the workbook without its pictures and attachments and drop that.",
        )
    names: set[str] = set()
    for entry in entries:
        _check_name(entry)
        name = entry.filename.lower()
        if name in names:
            raise unsafe(f"The workbook archive holds two entries named {quoted(entry.filename)}.")
        names.add(name)
    largest = max((entry.file_size for entry in entries), default=0)
    if largest > limits.max_part_bytes:
        raise too_large_unpacked(f"one part of at most {megabytes(limits.max_part_bytes)}", largest)
    total = sum(entry.file_size for entry in entries)
    if total > limits.max_unpacked_bytes:
        raise too_large_unpacked(f"at most {megabytes(limits.max_unpacked_bytes)}", total)


def _check_name(entry: zipfile.ZipInfo) -> None:
    name = entry.orig_filename
    parts = name.replace("\\", "/").split("/")
    outside = name.startswith(("/", "\\")) or ".." in parts or ":" in name or "\x00" in name
    if outside:
        raise unsafe(f"The workbook archive contains entries that point outside of it ({quoted(name)}).")
    if entry.flag_bits & 0x1:
        raise encrypted()
    if entry.compress_type not in (_STORED, _DEFLATED):
        raise refused(
            "unsupported_format",
            where="the file",
            found=f"The part {quoted(name)} is packed in a way that spreadsheet programs do not use.",
            expected="A workbook packed with the usual method (deflate).",
            next_step="Open it in the spreadsheet program, save it as .xlsx and drop that.",
        )


def encrypted() -> ExportRefusedError:
    """Return the refusal of a workbook with a password."""
    return refused(
        "encrypted",
        where="the file",
        found="The workbook is protected with a password and cannot be read.",
        expected="A workbook without a password to open.",
        next_step="Save a copy without a password and drop that.",
    )


def _check_overlaps(entries: list[zipfile.ZipInfo], end: int) -> None:
    """Refuse entries that share bytes: one small block must not be unpacked many times over."""
    spans = sorted((entry.header_offset, entry.compress_size) for entry in entries)
    for (start, size), (following, _) in zip(spans, [*spans[1:], (end, 0)], strict=True):
        if start < 0 or start + _LOCAL_HEADER.size + size > following:
            raise unsafe("Entries of the workbook archive overlap.")


def _inflate(packed: memoryview, entry: zipfile.ZipInfo) -> Iterator[bytes]:
    if entry.compress_type == _STORED:
        for start in range(0, len(packed), _CHUNK):
            yield bytes(packed[start : start + _CHUNK])
        return
    inflater = zlib.decompressobj(-15)
    waiting: bytes | memoryview = packed
    try:
        while waiting and not inflater.eof:
            chunk = inflater.decompress(waiting, _CHUNK)
            waiting = inflater.unconsumed_tail
            if chunk:
                yield chunk
            elif not waiting:
                break
        while not inflater.eof and (chunk := inflater.flush(_CHUNK)):
            yield chunk
    except zlib.error:
        raise damaged(f"The part {quoted(entry.filename)} cannot be unpacked.") from None
    if not inflater.eof:
        raise damaged(f"The part {quoted(entry.filename)} ends early.")
