"""A file that travels inside a report."""

from __future__ import annotations

from dataclasses import dataclass

EXPORT_TYPES = {
    "xlsx": "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet",
    "xlsm": "application/vnd.ms-excel.sheet.macroEnabled.12",
    "xls": "application/vnd.ms-excel",
    "xlsb": "application/vnd.ms-excel.sheet.binary.macroEnabled.12",
    "ods": "application/vnd.oasis.opendocument.spreadsheet",
    "csv": "text/csv",
}
"""Media type of an attached export by the extension it may keep."""


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


def export_attachment_name(export_name: str) -> str:
    """Return `export.EXT`, under which an export travels; an extension that is none of ours becomes `bin`."""
    extension = export_name.rsplit(".", 1)[-1].lower() if "." in export_name else ""
    return f"export.{extension}" if extension in EXPORT_TYPES else "export.bin"
