"""What is checked on the laid-out pages before they are painted."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from qcreport.errors import EnvironmentFailedError
from qcreport.report.assets import FONT_FILES

TOLERANCE = 0.75  # CSS pixels, 0.2 mm


def require_own_fonts(document: Any) -> None:
    """Refuse a document in which a character fell back to a font of the machine.

    Raises
    ------
    EnvironmentFailedError
        With the names of the fonts that came in.
    """
    own = {family for _, _, family in FONT_FILES.values()}
    found = {_text(font.family) for font in document.fonts.values()}
    strangers = sorted(found - own - {"Source Sans Pro", "Source Serif Pro", "Report Sans", "Report Serif"})
    if strangers:
        raise EnvironmentFailedError(
            f"The pages would be set with fonts that are not ours: {', '.join(strangers)}. "
            "Reports of two machines would differ. Check the font packages."
        )


def _text(value: Any) -> str:
    return value.decode() if isinstance(value, bytes) else str(value)


def require_inside_pages(document: Any) -> None:
    """Refuse a document in which a box runs off its page.

    Raises
    ------
    EnvironmentFailedError
        With page and text of the first such box.
    """
    for number, page in enumerate(document.pages, start=1):
        for box in _boxes(page._page_box):
            left, right = box.position_x, box.position_x + box.width
            bottom = box.position_y + box.height
            if left < -TOLERANCE or right > page.width + TOLERANCE or bottom > page.height + TOLERANCE:
                said = getattr(box, "text", "") or box.element_tag
                raise EnvironmentFailedError(
                    f"Page {number}: {said[:60]!r} would run off the page; the report is not made. "
                    "Shorten the name or the text in question."
                )


def _boxes(box: Any) -> Iterator[Any]:
    """Yield what is painted: pieces of text, and drawings."""
    from weasyprint.formatting_structure.boxes import ReplacedBox, TextBox

    waiting = [box]
    while waiting:
        found = waiting.pop()
        found = getattr(found, "_box", found)  # stands for a positioned box
        if isinstance(found, TextBox | ReplacedBox):
            yield found
        waiting.extend(reversed(getattr(found, "children", ())))


def page_of(document: Any, anchor: str) -> int | None:
    """Return the 0-based page on which an anchor stands."""
    for index, page in enumerate(document.pages):
        if anchor in page.anchors:
            return index
    return None


def page_with_fields(document: Any) -> int:
    """Return the 0-based page that holds the signature fields."""
    for index, page in enumerate(document.pages):
        if any(page.forms.values()):
            return index
    raise EnvironmentFailedError("The pages hold no signature fields; the templates were changed beyond use.")
