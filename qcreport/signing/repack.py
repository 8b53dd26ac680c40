"""The form in which a PDF is sealed: rewritten once, in the same way every time."""

from __future__ import annotations

from io import BytesIO

from qcreport.signing.boundary import reading_pdf


def repack(pdf: bytes) -> bytes:
    """Return the same document with its objects in small object streams.

    One large object stream makes every later check of changes slow, because each look at an object unpacks
    the whole stream. The identifier follows from the content, so the same input gives the same bytes.
    Streams are left as they are: PDF/A wants the metadata stream readable without unpacking.
    """
    import pikepdf

    out = BytesIO()
    with reading_pdf(), pikepdf.open(BytesIO(pdf)) as document:
        document.save(
            out,
            deterministic_id=True,
            object_stream_mode=pikepdf.ObjectStreamMode.generate,
            compress_streams=True,
            stream_decode_level=pikepdf.StreamDecodeLevel.none,
            recompress_flate=False,
        )
    return out.getvalue()
