"""A person's approval of a plan with its layout and rules, signed by that person's key."""

from __future__ import annotations

import base64
from datetime import datetime

from qcreport.canonical import to_json_bytes
from qcreport.errors import SigningDeniedError
from qcreport.pipeline.provenance import APPROVAL_SCHEMA, settings_digests
from qcreport.records.chain import Entry
from qcreport.records.facade import Records
from qcreport.records.moments import utc_text
from qcreport.settings.plans import PlanSettings
from qcreport.signing.detached import sign_detached
from qcreport.signing.keys import SigningKey


def approve(
    records: Records,
    settings: PlanSettings,
    key: SigningKey,
    *,
    service_fingerprint: str,
    reason: str,
    at: datetime,
) -> Entry:
    """Sign the digests of plan, layout and rules and record that; return the entry.

    Raises
    ------
    SigningDeniedError
        Where the key is the one that seals: a service cannot approve.
    """
    if key.fingerprint_sha256 == service_fingerprint:
        raise SigningDeniedError(
            "This is the key that seals reports. Only a person approves: qcreport keys new --for person NAME"
        )
    digests = settings_digests(settings)
    for file in (settings.plan_file, settings.layout_file, settings.rules_file):
        records.archive.store(file.data)
    statement = to_json_bytes(
        {
            "schema": APPROVAL_SCHEMA,
            "plan": settings.plan.name,
            **digests,
            "reason": reason,
            "at": utc_text(at),
        }
    )
    facts = {
        "plan": settings.plan.name,
        **digests,
        "by": key.subject,
        "fingerprint_sha256": key.fingerprint_sha256,
        "reason": reason,
        "statement": statement.decode("utf-8"),
        "signature": base64.b64encode(sign_detached(key, statement)).decode("ascii"),
        "certificate": key.certificate_pem().decode("ascii"),
    }
    return records.approve(facts, actor=key.subject)
