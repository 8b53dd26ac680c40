"""The service's events as entries of the ledger."""

from __future__ import annotations

import os

from qcreport.records.chain import Kind
from qcreport.records.facade import Records
from qcreport.records.ledger import Step
from qcreport.service.model import Event, EventKind

ACTOR = "service"

_PLAIN = {
    EventKind.STARTED: Kind.SERVICE_STARTED,
    EventKind.STOPPED: Kind.SERVICE_STOPPED,
    EventKind.SHARE_LOST: Kind.SHARE_LOST,
    EventKind.SHARE_BACK: Kind.SHARE_BACK,
}


def record_event(records: Records, event: Event) -> None:
    """Write an event into the ledger, if it is of those that belong there; repeated, it is written once.

    An export that is refused is archived and received first, where it could be read at all, whether or not
    the work came so far.
    """
    if event.kind in _PLAIN:
        facts = {"text": event.text, "process": os.getpid()}
        records.note(_PLAIN[event.kind], facts, actor=ACTOR)
    elif event.kind is EventKind.REFUSED:
        _refused(records, event)
    elif event.kind is EventKind.FAILED and event.claim is not None:
        facts = {"claim": event.claim.id, "name": event.claim.name, "text": event.text}
        records.note(Kind.FAILED, facts, actor=ACTOR, step=Step(claim=event.claim.id))


def _refused(records: Records, event: Event) -> None:
    export, error, folder = event.export, event.refusal, event.folder
    if export is None or error is None or folder is None:
        return
    if export.data is not None and export.sha256 is not None:
        records.archive.store(export.data)
        records.receive(
            export.claim.id,
            export_sha256=export.sha256,
            name=export.name,
            size=export.size,
            actor=ACTOR,
        )
    records.refuse(export.claim.id, error, export_sha256=export.sha256, folder=folder.name, actor=ACTOR)
