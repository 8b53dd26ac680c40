"""Reading the styles of a workbook: number formats and struck fonts."""

from __future__ import annotations

from collections.abc import Iterable

from qcreport.workbook.cells import CellStyle
from qcreport.workbook.number_format import BUILT_IN, parse_number_format
from qcreport.workbook.refusals import damaged
from qcreport.workbook.xml_stream import Attributes, is_on, main_tags, parse_xml

_TAGS = main_tags("numFmt", "fonts", "font", "strike", "cellXfs", "xf")
_MAX_STYLES = 65_536


class _StyleReader:
    """Collects fonts, formats and cell styles from the parser's events."""

    def __init__(self) -> None:
        self.formats: dict[int, str] = dict(BUILT_IN)
        self.fonts_struck: list[bool] = []
        self.cell_styles: list[tuple[int, int]] = []
        self._inside: str | None = None

    def start(self, name: str, attributes: Attributes) -> None:
        """Take note of the start of an element."""
        tag = _TAGS.get(name)
        if tag in ("fonts", "cellXfs"):
            self._inside = tag
        elif tag == "numFmt":
            self.formats.setdefault(_index(attributes.get("numFmtId")), attributes.get("formatCode", ""))
        elif tag == "font" and self._inside == "fonts":
            self.fonts_struck.append(False)
        elif tag == "strike" and self._inside == "fonts" and self.fonts_struck:
            self.fonts_struck[-1] = "val" not in attributes or is_on(attributes["val"])
        elif tag == "xf" and self._inside == "cellXfs":
            ids = (_index(attributes.get("numFmtId", "0")), _index(attributes.get("fontId", "0")))
            self.cell_styles.append(ids)
            if len(self.cell_styles) > _MAX_STYLES:
                raise damaged(f"The workbook has more than {_MAX_STYLES:,} cell styles.")

    def end(self, name: str) -> None:
        """Take note of the end of an element."""
        if _TAGS.get(name) == self._inside:
            self._inside = None


def _index(text: str | None) -> int:
    if text is None or not text.isascii() or not text.isdigit() or len(text) > 9:
        raise damaged(f"The styles hold the number {text!r}.")
    return int(text)


def read_styles(chunks: Iterable[bytes], *, part: str) -> tuple[CellStyle, ...]:
    """Return the cell styles of a workbook, in the order that cells point to them."""
    reader = _StyleReader()
    parse_xml(chunks, part=part, start=reader.start, end=reader.end)
    styles = []
    for format_id, font_id in reader.cell_styles:
        code = reader.formats.get(format_id)
        if code is None:
            raise damaged(f"A cell style points to the missing number format {format_id}.")
        struck = font_id < len(reader.fonts_struck) and reader.fonts_struck[font_id]
        styles.append(CellStyle(number_format=parse_number_format(code), struck=struck))
    return tuple(styles) or (CellStyle(),)
