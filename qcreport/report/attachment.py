"""A file that travels inside a report."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class Attachment:
    """One attached file."""

    name: str
    """Fixed name, e.g. `export.xlsx`."""
    data: bytes
    """Its bytes."""
    relationship: str
    """Source, Data or Supplement."""
    description: str
    """One sentence for the reader's list of attachments."""
    mime: str
    """Media type."""
