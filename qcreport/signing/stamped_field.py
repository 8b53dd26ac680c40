"""What a signed field shows: the first page of a small PDF, with the fonts that it brings along."""

from __future__ import annotations

from dataclasses import dataclass, field
from io import BytesIO
from typing import Any

from pyhanko.pdf_utils import generic
from pyhanko.pdf_utils.reader import PdfFileReader
from pyhanko.stamp import BaseStampStyle


@dataclass(frozen=True, kw_only=True)
class PdfStamp(BaseStampStyle):
    """Show a page of a PDF as the appearance of a signature; its size is that of the field."""

    pdf: bytes = field(repr=False)
    """One page."""

    def create_stamp(self, writer: Any, box: Any, text_params: dict[str, Any]) -> Any:
        """Return the appearance, imported into the file that is signed."""
        page = writer.import_page_as_xobject(PdfFileReader(BytesIO(self.pdf)))
        return _Imported(page)


class _Imported:
    """One appearance that exists in the file already."""

    def __init__(self, reference: generic.IndirectObject) -> None:
        self._reference = reference

    def apply_appearance(self, widget: generic.DictionaryObject) -> None:
        """Enter it as the look of a field."""
        looks = {generic.pdf_name("/N"): self._reference}
        widget["/AP"] = generic.DictionaryObject(looks)  # type: ignore[no-untyped-call]
