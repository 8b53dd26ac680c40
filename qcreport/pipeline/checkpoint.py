"""Signing the ledger's head with the service key, and judging such signatures."""

from __future__ import annotations

from datetime import datetime

from qcreport.records.checkpoints import FILE_NAME, newest, write_checkpoint
from qcreport.records.facade import Records
from qcreport.records.moments import utc_text
from qcreport.signing.detached import sign_detached, signer_of
from qcreport.signing.keys import SigningKey, fingerprint


def sign_head(records: Records, key: SigningKey | None, *, at: datetime) -> None:
    """Write a checkpoint of the head, unless the newest one is of this very head or no key is here."""
    if key is None:
        return
    folder = records.database.path.parent
    head = records.head()
    try:
        last = newest(folder / FILE_NAME)
    except ValueError:  # spoiled: `records check` tells; a good line is added all the same
        last = None
    if head.sequence == 0 or (last is not None and last.head == head):
        return
    write_checkpoint(
        folder,
        head,
        at=utc_text(at),
        sign=lambda document: sign_detached(key, document),
        certificate_pem=key.certificate_pem(),
    )


def checkpoint_signer(document: bytes, signature: bytes, certificate_pem: bytes) -> str | None:
    """Return the fingerprint of the key that signed a checkpoint, None where the signature does not hold."""
    certificate = signer_of(document, signature, certificate_pem)
    return None if certificate is None else fingerprint(certificate)
