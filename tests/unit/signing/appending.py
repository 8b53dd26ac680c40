"""What others append to a sealed report: signatures, and things that are not."""

from __future__ import annotations

from io import BytesIO

from pyhanko.pdf_utils import generic
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter
from pyhanko.sign.fields import SigSeedSubFilter
from pyhanko.sign.signers import PdfSignatureMetadata

from qcreport.signing.keys import SigningKey
from qcreport.signing.stamping import QuietWriter, add_signature

from .keys_fixture import NOW


def countersigned(pdf: bytes, key: SigningKey, field: str, meaning: str = "Review") -> bytes:
    """Return the report with a person's signature in one of its fields."""
    metadata = PdfSignatureMetadata(
        field_name=field, md_algorithm="sha256", reason=meaning, subfilter=SigSeedSubFilter.PADES
    )
    return add_signature(pdf, key, metadata, NOW)


def written(writer: IncrementalPdfFileWriter) -> bytes:
    out = BytesIO()
    writer.write(out)
    return out.getvalue()


def with_swapped_attachment(pdf: bytes, name: str, content: bytes) -> bytes:
    """Return the report with the content of one attachment replaced by an appended update."""
    writer = QuietWriter(BytesIO(pdf))
    tree = writer.root["/Names"]["/EmbeddedFiles"]["/Names"]
    entries = [entry.get_object() for entry in tree]
    specification = next(entry for entry in entries[1::2] if entry["/UF"] == name)
    stream = generic.StreamObject(stream_data=content)
    stream["/Type"] = generic.pdf_name("/EmbeddedFile")
    specification["/EF"]["/F"] = writer.add_object(stream)
    writer.update_container(specification["/EF"])
    return written(writer)


def with_changed_page(pdf: bytes) -> bytes:
    """Return the report with other content on its first page."""
    writer = QuietWriter(BytesIO(pdf))
    page = writer.root["/Pages"]["/Kids"][0]
    page["/Contents"] = writer.add_object(generic.StreamObject(stream_data=b"0 0 100 100 re f"))
    writer.update_container(page)
    return written(writer)


def _field(writer: IncrementalPdfFileWriter, name: str) -> generic.DictionaryObject:
    fields = [field.get_object() for field in writer.root["/AcroForm"]["/Fields"]]
    return next(field for field in fields if field["/T"] == name)


def with_moved_field(pdf: bytes, field: str) -> bytes:
    """Return the report with one of its signature fields moved and made larger."""
    writer = QuietWriter(BytesIO(pdf))
    widget = _field(writer, field)
    widget["/Rect"] = generic.ArrayObject(map(generic.NumberObject, (0, 0, 600, 800)))
    writer.update_container(widget)
    return written(writer)


def without_signature(pdf: bytes, field: str) -> bytes:
    """Return the report with a signature taken out of its field by an appended update."""
    writer = QuietWriter(BytesIO(pdf))
    widget = _field(writer, field)
    del widget["/V"]
    writer.update_container(widget)
    return written(writer)
