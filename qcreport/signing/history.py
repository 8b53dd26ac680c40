"""What earlier revisions of a sealed PDF held and the newest one no longer does."""

from __future__ import annotations

from typing import Any

from pyhanko.sign.fields import enumerate_sig_fields

from qcreport.signing.reading import OpenedPdf


def lost_signatures(opened: OpenedPdf) -> tuple[str, ...]:
    """Return the fields whose signature was taken out or replaced by a later revision, sorted.

    Each revision is otherwise judged against the seal alone, and beside the seal an emptied field looks like
    one that was never signed.
    """
    reader = opened.reader
    newest = _filled(reader)
    lost = set()
    for number in range(opened.seal.signed_revision, reader.xrefs.total_revisions - 1):
        held = _filled(reader.get_historical_resolver(number))
        lost |= {name for name, value in held.items() if newest.get(name) != value}
    return tuple(sorted(lost))


def _filled(handler: Any) -> dict[str, Any]:
    """Return the reference of the signature in each field that has one."""
    fields = enumerate_sig_fields(handler, filled_status=True)
    return {str(name): field.get_object().raw_get("/V").reference for name, _, field in fields}
