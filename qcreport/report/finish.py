"""The last hand on a PDF before it is written: identification, attachments, signature fields.

The renderer claims one standard at a time, lists each attachment twice and guesses media types from the
operating system. Signature fields must exist, tagged, before the seal: a widget that a signer appends later
would break PDF/UA.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import pydyf

from qcreport.report.attachment import Attachment

FIELD_NAMES = ("Seal", "Reviewed", "Authorised")

_UA_PART = b"""<rdf:Description rdf:about="" xmlns:pdfuaid="http://www.aiim.org/pdfua/ns/id/">\
<pdfuaid:part>1</pdfuaid:part></rdf:Description>"""
_UA_SCHEMA = b"""<rdf:Description rdf:about="" xmlns:pdfaExtension="http://www.aiim.org/pdfa/ns/extension/" \
xmlns:pdfaSchema="http://www.aiim.org/pdfa/ns/schema#" xmlns:pdfaProperty="http://www.aiim.org/pdfa/ns/property#">\
<pdfaExtension:schemas><rdf:Bag><rdf:li rdf:parseType="Resource">\
<pdfaSchema:schema>PDF/UA Universal Accessibility Schema</pdfaSchema:schema>\
<pdfaSchema:namespaceURI>http://www.aiim.org/pdfua/ns/id/</pdfaSchema:namespaceURI>\
<pdfaSchema:prefix>pdfuaid</pdfaSchema:prefix>\
<pdfaSchema:property><rdf:Seq><rdf:li rdf:parseType="Resource">\
<pdfaProperty:name>part</pdfaProperty:name><pdfaProperty:valueType>Integer</pdfaProperty:valueType>\
<pdfaProperty:category>internal</pdfaProperty:category>\
<pdfaProperty:description>Indicates, which part of ISO 14289 standard is followed</pdfaProperty:description>\
</rdf:li></rdf:Seq></pdfaSchema:property></rdf:li></rdf:Bag></pdfaExtension:schemas></rdf:Description>"""


class Finisher:
    """Called with the finished document and its PDF objects, just before they are written."""

    def __init__(self, attachments: Sequence[Attachment]) -> None:
        self.attachments = {a.name: a for a in attachments}

    def __call__(self, document: Any, pdf: Any) -> None:
        """Finish `pdf` in place."""
        identify_as_ua(pdf)
        tidy_attachments(pdf, self.attachments)
        make_signature_fields(pdf)


def _object(pdf: Any, reference: bytes | str) -> Any:
    return pdf.objects[int(reference.split()[0])]


def identify_as_ua(pdf: Any) -> None:
    """Add the PDF/UA part, with the schema that PDF/A asks for, to metadata that stays readable as text."""
    metadata = _object(pdf, pdf.catalog["Metadata"])
    text = b"".join(part if isinstance(part, bytes) else str(part).encode() for part in metadata.stream)
    head, closing, tail = text.rpartition(b"</rdf:RDF>")
    if not closing:
        raise ValueError("the renderer wrote metadata of an unknown form")
    metadata.stream = [head + _UA_PART + _UA_SCHEMA + closing + tail]
    metadata.compress = False


def tidy_attachments(pdf: Any, attachments: dict[str, Attachment]) -> None:
    """Name each attached file once, with the relationship and media type that we give it."""
    if "AF" not in pdf.catalog:
        return
    once = list(dict.fromkeys(pdf.catalog["AF"]))
    pdf.catalog["AF"] = pydyf.Array(once)
    for reference in once:
        filespec = _object(pdf, reference)
        given = attachments[filespec["UF"].string]
        filespec["AFRelationship"] = f"/{given.relationship}"
        stream = _object(pdf, filespec["EF"]["F"])
        stream.extra["Subtype"] = "/" + given.mime.replace("/", "#2f")


def make_signature_fields(pdf: Any) -> None:
    """Turn the placeholders of page 1 into empty signature fields; they are tagged already."""
    form = pdf.catalog["AcroForm"]
    widgets = {_object(pdf, r)["T"].string: _object(pdf, r) for r in form["Fields"]}
    if tuple(sorted(widgets)) != tuple(sorted(FIELD_NAMES)):
        raise ValueError(f"expected the fields {FIELD_NAMES}, found {sorted(widgets)}")
    pdf.catalog["AcroForm"] = pydyf.Dictionary(
        {"Fields": pydyf.Array([widgets[name].reference for name in FIELD_NAMES])}
    )
    for name, widget in widgets.items():
        _make_signature_field(pdf, widget, seal=name == "Seal")


def _make_signature_field(pdf: Any, widget: Any, *, seal: bool) -> None:
    left, bottom, right, top = _upright(widget["Rect"])
    if seal:  # the seal's own box is printed text; the field itself shows nothing
        right, top = left, bottom
    widget["Rect"] = pydyf.Array((left, bottom, right, top))
    appearance = _object(pdf, next(iter(widget["AP"]["N"].values())))
    appearance.stream = []
    appearance.extra["BBox"] = pydyf.Array((0, 0, right - left, top - bottom))
    widget["AP"] = pydyf.Dictionary({"N": appearance.reference})
    widget["FT"] = "/Sig"
    for key in ("AS", "MK", "V", "Border"):
        widget.pop(key, None)
    widget["F"] = 132  # print, locked: the place cannot be moved


def _upright(rectangle: Sequence[float]) -> tuple[float, float, float, float]:
    x1, y1, x2, y2 = (float(v) for v in rectangle)
    return min(x1, x2), min(y1, y2), max(x1, x2), max(y1, y2)
