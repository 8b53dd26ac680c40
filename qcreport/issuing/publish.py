"""Put a sealed report where people find it: temp, fsync, rename, and never over another one."""

from __future__ import annotations

from pathlib import Path

from qcreport.durable import write_durably
from qcreport.errors import EnvironmentFailedError
from qcreport.signing.attachments import attachments_of
from qcreport.signing.reading import sealed_revision

LONGEST_STEM = 80
"""Characters of the export's name kept in a report's file name."""
LONGEST_STEM_BYTES = 160
"""Bytes of it at most: file systems count bytes, and a temporary name adds to them."""


def report_name(number: str, export_name: str) -> str:
    """Return `NUMBER STEM.pdf`; characters that a file name or a shell dislikes become `_`."""
    stem = export_name.rsplit(".", 1)[0]
    safe = "".join(c if c.isalnum() or c in " ._-" else "_" for c in stem).strip(" .")
    short = safe[:LONGEST_STEM].encode("utf-8")[:LONGEST_STEM_BYTES].decode("utf-8", "ignore")
    return f"{number} {short.strip() or 'export'}.pdf"


def publish(folder: Path, name: str, sealed: bytes) -> Path:
    """Write a sealed report into the reports folder.

    Raises
    ------
    EnvironmentFailedError
        Where another file of that name is there already, or the disk refuses.
    """
    path = folder / name
    if path.exists() and path.read_bytes() != sealed:
        raise EnvironmentFailedError(
            f"{path} is there already and is another file. Move it away; nothing was overwritten.",
            file=str(path),
        )
    write_durably(path, sealed)
    return path


def already_published(folder: Path, name: str, attached: dict[str, bytes]) -> bytes | None:
    """Return the report published under that name by an earlier try of the same run, or None.

    A process killed between publishing and recording leaves a good report behind. It is taken up as it is, so
    that nobody ever holds two different files of one number: it counts only if everything attached to it is
    what would be attached now.
    """
    path = folder / name
    if not path.is_file():
        return None
    published = path.read_bytes()
    return published if attachments_of(sealed_revision(published)) == attached else None
