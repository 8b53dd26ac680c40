"""What is checked on the laid-out pages before they are painted."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from qcreport.errors import EnvironmentFailedError

OWN_FAMILIES = ("Report Sans", "Report Serif", "Report-Sans", "Report-Serif")
TOLERANCE = 0.75  # CSS pixels, 0.2 mm


def require_own_fonts(document: Any) -> None:
    """Refuse a painted document in which a character fell back to a font of the machine, or to none.

    Names from an export are made printable before; this guards against the laboratory's own templates.

    Raises
    ------
    EnvironmentFailedError
        With the fonts or characters that came in.
    """
    strangers = set()
    for font in document.fonts.values():
        family = font.family.decode() if isinstance(font.family, bytes) else str(font.family)
        if not family.startswith(OWN_FAMILIES):
            strangers.add(family)
        if font.missing:
            strangers.update(f"U+{code:04X}" for code in font.missing)
    if strangers:
        raise EnvironmentFailedError(
            f"The pages would need what our fonts do not hold: {', '.join(sorted(strangers))}. "
            "Reports of two machines would differ. Write the templates with characters that the fonts have."
        )


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
