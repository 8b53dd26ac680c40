"""The defaults that ship with the package: config/, templates/ and inbox_example/."""

from __future__ import annotations

from pathlib import Path

import qcreport


def shipped_folder(name: str) -> Path:
    """Return a shipped folder: inside the installed package, else at the top of the source tree."""
    package = Path(qcreport.__file__).resolve().parent
    inside = package / "_site" / name
    return inside if inside.is_dir() else package.parent / name


def shipped_files(name: str, pattern: str) -> dict[str, bytes]:
    """Return the files of a shipped folder by name, sorted."""
    return {p.name: p.read_bytes() for p in sorted(shipped_folder(name).glob(pattern)) if p.is_file()}
