"""Every settings file of a site as it is at this moment, for the watch over changes."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import Final

from qcreport.errors import EnvironmentFailedError
from qcreport.settings.site import Site

_PATTERNS: Final = (
    "config/*.toml",
    "config/plans/*.toml",
    "config/layouts/*.toml",
    "config/rules/*.toml",
    "config/nights/*.toml",
    "templates/*",
)


def settings_files(site: Site) -> dict[str, bytes]:
    """Return the settings files of a site by their name inside it, sorted.

    Raises
    ------
    EnvironmentFailedError
        Where one cannot be read.
    """
    return {path.relative_to(site.root).as_posix(): _read(path) for path in _paths(site.root)}


def _paths(root: Path) -> Iterator[Path]:
    for pattern in _PATTERNS:
        yield from (p for p in sorted(root.glob(pattern)) if p.is_file() and not p.name.startswith("."))


def _read(path: Path) -> bytes:
    try:
        return path.read_bytes()
    except OSError as error:
        raise EnvironmentFailedError(f"cannot read {path}: {error.strerror}", file=str(path)) from None
