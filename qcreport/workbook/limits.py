"""How much of an export is looked at before it is refused."""

from __future__ import annotations

from dataclasses import dataclass

MEGABYTE = 1024 * 1024


@dataclass(frozen=True, slots=True, kw_only=True)
class Limits:
    """Bounds of one reading; each refusal states the limit and what was found."""

    max_file_bytes: int = 64 * MEGABYTE
    """Size of the export as dropped, bytes."""
    max_part_bytes: int = 256 * MEGABYTE
    """Size of one part of the archive once unpacked, bytes."""
    max_unpacked_bytes: int = 512 * MEGABYTE
    """Size of all parts once unpacked, bytes."""
    max_ratio: int = 300
    """Unpacked size over packed size of one part, above `ratio_from_bytes`."""
    ratio_from_bytes: int = 8 * MEGABYTE
    """Unpacked size from which `max_ratio` applies, bytes."""
    max_entries: int = 2_000
    """Entries in the archive."""
    max_sheets: int = 200
    """Sheets in the workbook."""
    max_cells: int = 3_000_000
    """Filled cells in the sheets that are read."""
    max_rows: int = 200_000
    """Filled rows in one sheet."""
    max_groups: int = 500
    """Different batches in the export."""
    max_name_characters: int = 255
    """Length of a batch, line or sample name."""
    memory_bytes: int = 2048 * MEGABYTE
    """Address space of the reader child, bytes."""
    cpu_s: int = 60
    """Processor time of the reader child, seconds."""
    wall_s: float = 120.0
    """Time that the parent waits for the reader child, seconds."""
    max_answer_bytes: int = 512 * MEGABYTE
    """Size of what the reader child may answer, bytes."""


def megabytes(count: int) -> str:
    """Return a byte count as people read it: `70.2 MB`; small ones in bytes."""
    if count < MEGABYTE // 10:
        return f"{count:,} bytes"
    return f"{count / MEGABYTE:.1f} MB".replace(".0 MB", " MB")
