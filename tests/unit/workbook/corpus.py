"""The corpus of exports in tests/reference/intake."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

CORPUS = Path(__file__).parents[2] / "reference" / "intake"
ENTRIES: list[dict[str, Any]] = json.loads((CORPUS / "manifest.json").read_text("utf-8"))["files"]
BY_NAME = {entry["file"].removeprefix("files/"): entry for entry in ENTRIES}
SITE_ONLY = ("o24_same_bytes_again.xlsx",)
"""Needs a memory of what was read before, which a single reading has not."""


def export(name: str) -> bytes:
    """Return a file of the corpus."""
    return (CORPUS / "files" / name).read_bytes()


def layout_bytes(name: str) -> bytes:
    """Return the layout of a file; files without one must be judged before any layout is applied."""
    path = CORPUS / "layouts" / f"{name}.toml"
    return (path if path.exists() else CORPUS / "layouts" / "o01_plain_long.xlsx.toml").read_bytes()
