"""Reading XML as a stream, with the standard expat parser and without document-type definitions.

Spreadsheet programs never write a document-type definition; with one, a small file can grow without bound or
pull in files of this machine. The parser itself reports it, in whatever encoding it is written.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from typing import Final
from xml.parsers import expat

from qcreport.workbook.refusals import damaged, quoted, unsafe

Attributes = Mapping[str, str]
StartHandler = Callable[[str, Attributes], None]
EndHandler = Callable[[str], None]
TextHandler = Callable[[str], None]

MAIN_NAMESPACES: Final = (
    "http://schemas.openxmlformats.org/spreadsheetml/2006/main",
    "http://purl.oclc.org/ooxml/spreadsheetml/main",
)
"""Namespaces of sheets, strings and styles: transitional and strict."""

RELATION_NAMESPACES: Final = (
    "http://schemas.openxmlformats.org/officeDocument/2006/relationships",
    "http://purl.oclc.org/ooxml/officeDocument/relationships",
)
"""Namespaces of the attribute `r:id`."""


def main_tags(*names: str) -> dict[str, str]:
    """Return expat's full element names of the main namespaces → short name."""
    return {f"{space} {name}": name for space in MAIN_NAMESPACES for name in names}


def relation_id(attributes: Attributes) -> str | None:
    """Return the attribute `r:id`."""
    for space in RELATION_NAMESPACES:
        if (found := attributes.get(f"{space} id")) is not None:
            return found
    return None


def is_on(word: str | None) -> bool:
    """Return the truth of an XML boolean attribute; absent is false."""
    return word in ("1", "true", "on")


def _new_parser(part: str) -> expat.XMLParserType:
    def refuse_doctype(*_: object) -> None:
        raise unsafe(
            "The workbook contains an XML document-type definition, which spreadsheet programs never write.",
            where=f"part {part}",
        )

    parser = expat.ParserCreate(namespace_separator=" ")
    parser.buffer_text = True
    parser.buffer_size = 1 << 16
    parser.StartDoctypeDeclHandler = refuse_doctype
    parser.EntityDeclHandler = refuse_doctype
    return parser


def parse_xml(
    chunks: Iterable[bytes],
    *,
    part: str,
    start: StartHandler,
    end: EndHandler | None = None,
    text: TextHandler | None = None,
) -> None:
    """Feed one part to the handlers; refuse what is not well-formed or holds a document-type definition."""
    parser = _new_parser(part)
    parser.StartElementHandler = start
    parser.EndElementHandler = end
    parser.CharacterDataHandler = text
    try:
        for chunk in chunks:
            parser.Parse(chunk, False)
        parser.Parse(b"", True)
    except (expat.ExpatError, ValueError, LookupError) as error:
        raise damaged(f"The part {quoted(part)} is not well-formed XML ({error}).") from None


class _FirstElementReached(Exception):  # noqa: N818 - not an error: it ends the look
    """The root element has begun; a document-type definition can no longer come."""


def refuse_doctype(chunks: Iterable[bytes], *, part: str) -> None:
    """Look at a part that is not read otherwise; refuse it only for a document-type definition."""

    def reached(_name: str, _attributes: Attributes) -> None:
        raise _FirstElementReached

    parser = _new_parser(part)
    parser.StartElementHandler = reached
    looking = True
    for chunk in chunks:
        if not looking:
            continue
        try:
            parser.Parse(chunk, False)
        except (_FirstElementReached, expat.ExpatError, ValueError, LookupError):
            looking = False
