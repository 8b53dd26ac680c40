"""A small report as the pages will be: tagged, three empty signature fields, attachments."""

from __future__ import annotations

import datetime as dt
import warnings
from collections.abc import Mapping
from io import BytesIO

import pikepdf
from pikepdf import Array, Dictionary, Name, String
from weasyprint import HTML, Attachment

FIELDS = ("Seal", "Reviewed", "Authorised")
_MADE = dt.datetime(2026, 1, 2, 3, 4, 5, tzinfo=dt.UTC)
_RELATIONS = {"export": "Source", "result": "Data"}
_PAGE = """<html lang="en"><head><title>Report 2026-0001</title></head><body>
<h1>Answer</h1><p>LD-2404 is lower than LC-2404 by 1.90 MPa.</p>
<p style="page-break-before: always">Data, cell by cell</p></body></html>"""


def rendered_report(attachments: Mapping[str, bytes]) -> bytes:
    """Return an unsealed report that carries `attachments`."""
    parts = [
        Attachment(
            file_obj=BytesIO(data),
            name=name,
            relationship=_RELATIONS.get(name.split(".")[0], "Supplement"),
            created=_MADE,
            modified=_MADE,
        )
        for name, data in sorted(attachments.items())
    ]
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", ResourceWarning)  # the layout library leaves its colour profile open
        pdf = HTML(string=_PAGE).write_pdf(attachments=parts, pdf_variant="pdf/a-3a", pdf_tags=True)
    assert pdf is not None
    return with_fields(pdf)


def with_fields(pdf: bytes) -> bytes:
    """Return the PDF with three empty, tagged signature fields on its first page."""
    with pikepdf.open(BytesIO(pdf)) as document:
        tree = document.Root.StructTreeRoot
        widgets = Array()
        page = document.pages[0].obj
        page.Tabs = Name.S
        for row, name in enumerate(FIELDS):
            widget = _widget(document, page, name, row)
            _tag(document, tree, page, widget, key=1000 + row)
            widgets.append(widget)
        page.Annots = document.make_indirect(widgets)
        document.Root.AcroForm = document.make_indirect(Dictionary(Fields=Array(list(widgets)), SigFlags=3))
        tree.ParentTreeNextKey = 1000 + len(FIELDS)
        out = BytesIO()
        document.save(out, object_stream_mode=pikepdf.ObjectStreamMode.generate)
    return out.getvalue()


def _widget(document: pikepdf.Pdf, page: pikepdf.Object, name: str, row: int) -> pikepdf.Object:
    look = document.make_stream(b"0.5 w 0 0 200 30 re S")
    look.Type, look.Subtype, look.BBox = Name.XObject, Name.Form, Array([0, 0, 200, 30])
    return document.make_indirect(
        Dictionary(
            Type=Name.Annot,
            Subtype=Name.Widget,
            FT=Name.Sig,
            T=String(name),
            TU=String(f"{name}: signature"),
            F=4,
            Rect=Array([60, 60 + 40 * row, 260, 90 + 40 * row]),
            P=page,
            StructParent=1000 + row,
            AP=Dictionary(N=look),
        )
    )


def _tag(
    document: pikepdf.Pdf, tree: pikepdf.Object, page: pikepdf.Object, widget: pikepdf.Object, key: int
) -> None:
    parent = tree.K[0] if isinstance(tree.K, Array) else tree.K
    form = document.make_indirect(Dictionary(Type=Name.StructElem, S=Name.Form, P=parent, Pg=page))
    form.K = Array([Dictionary(Type=Name.OBJR, Obj=widget, Pg=page)])
    if isinstance(parent.K, Array):
        parent.K.append(form)
    else:
        parent.K = Array([parent.K, form])
    tree.ParentTree.Nums.extend([key, form])
