"""Our own fonts, style and pages, found inside the installed packages; nothing else is ever fetched."""

from __future__ import annotations

from functools import cache
from importlib.resources import files
from importlib.util import find_spec
from pathlib import Path

from qcreport.errors import EnvironmentFailedError

SCHEME = "report-asset:"

FONT_FILES: dict[str, tuple[str, str, str]] = {
    "sans-400": ("font_source_sans_pro", "SourceSansPro-Regular.ttf", "Source Sans Pro"),
    "sans-600": ("font_source_sans_pro", "SourceSansPro-Semibold.ttf", "Source Sans Pro Semibold"),
    "serif-400": ("font_source_serif_pro", "SourceSerifPro-Regular.ttf", "Source Serif Pro"),
    "serif-600": ("font_source_serif_pro", "SourceSerifPro-Semibold.ttf", "Source Serif Pro Semibold"),
}
"""Asset name → (package, file, family name inside the file)."""


@cache
def font_bytes(name: str) -> bytes:
    """Return one of the pinned font files.

    Raises
    ------
    EnvironmentFailedError
        Where its package is not installed.
    """
    package, file_name, _ = FONT_FILES[name]
    spec = find_spec(package)
    if spec is None or spec.origin is None:
        raise EnvironmentFailedError(
            f"The font package {package.replace('_', '-')} is missing. Install the requirements again."
        )
    path = Path(spec.origin).parent / "files" / file_name
    try:
        return path.read_bytes()
    except OSError as error:
        raise EnvironmentFailedError(f"The font {file_name} cannot be read: {error}") from error


@cache
def page_text(name: str) -> str:
    """Return the text of a shipped evidence page or style."""
    return (files("qcreport.report") / "pages" / name).read_text(encoding="utf-8")


@cache
def page_names() -> tuple[str, ...]:
    """Return the names of all shipped evidence pages and styles, sorted."""
    folder = files("qcreport.report") / "pages"
    return tuple(sorted(p.name for p in folder.iterdir() if p.name.endswith((".html", ".css"))))


@cache
def shipped_templates() -> dict[str, bytes]:
    """Return what the laboratory may restyle, as shipped: in the installed package, else the checkout."""
    package = Path(str(files("qcreport")))
    for folder in (package / "_site" / "templates", package.parent / "templates"):
        if folder.is_dir():
            return {p.name: p.read_bytes() for p in sorted(folder.iterdir()) if p.suffix in (".html", ".css")}
    raise EnvironmentFailedError("The shipped templates are missing. Install the package again.")
