"""A whole report with attachments that agree with each other."""

from __future__ import annotations

import json
from collections.abc import Mapping
from typing import Any

from signing.keys_fixture import NOW
from signing.report_fixture import rendered_report

from qcreport.analysis.context import Context, Laboratory
from qcreport.audit.evidence import Evidence
from qcreport.canonical import sha256_hex, to_readable_json_bytes
from qcreport.signing.keys import SigningKey
from qcreport.signing.seal import seal

SETTINGS = {
    "layout.toml": b'name = "shear-rig"\n',
    "plan.toml": b'name = "lap-shear-batches"\n',
    "rules.toml": b'name = "default"\n',
}
EXPORT = b"PK\x03\x04" + bytes(range(256)) * 20


def context_of(key: SigningKey, **changes: Any) -> Context:
    stated: dict[str, Any] = {
        "report_number": "2026-0042",
        "revision": 1,
        "made_at": "2026-11-02T06:12:00Z",
        "time_zone": "Europe/Berlin",
        "language": "en",
        "page_size": "A4",
        "laboratory": Laboratory(name="Test", address="Here", place_of_work="Here", customer="none"),
        "export_name": "lap-shear-2403.xlsx",
        "export_sha256": sha256_hex(EXPORT),
        "received_at": "2026-11-02T06:11:00Z",
        "plan_name": "lap-shear-batches",
        "plan_sha256": sha256_hex(SETTINGS["plan.toml"]),
        "layout_sha256": sha256_hex(SETTINGS["layout.toml"]),
        "rules_sha256": sha256_hex(SETTINGS["rules.toml"]),
        "templates": (),
        "templates_changed": (),
        "run_k": 1,
        "run_n": 1,
        "run_reason": "",
        "ledger_sequence": 0,
        "ledger_hash": "",
        "seal_subject": key.subject,
        "seal_fingerprint_sha256": key.fingerprint_sha256,
        "pades_level": "B-B",
        "demonstration": False,
        "software_version": "0.1.0",
    }
    return Context(**{**stated, **changes})


def result_document() -> dict[str, Any]:
    return {
        "schema": "qcreport/result/1",
        "export": {"name": "lap-shear-2403.xlsx", "sha256": sha256_hex(EXPORT)},
        "plan": {"name": "lap-shear-batches", "sha256": sha256_hex(SETTINGS["plan.toml"])},
        "run": {"k": 1, "n": 1},
        "notices": [],
        "characteristics": [
            {
                "name": "lap_shear",
                "alpha": 0.05,
                "groups": [{"label": "LA", "n": 10, "mean": 24.1}],
                "all_within_margin": True,
                "procedure": "tukey_hsd",
                "hsd": None,
                "pairs": [
                    {"first": "LA", "second": "LB", "difference": 0.5, "p": 0.0123, "answer": "different"}
                ],
                "answer": "different",
            }
        ],
        "versions": {"qcreport": "0.1.0", "numpy": "2.0.0"},
    }


def attachments(key: SigningKey, **context_changes: Any) -> dict[str, bytes]:
    """Return all attachments of a report sealed by `key`."""
    return {
        **SETTINGS,
        "export.xlsx": EXPORT,
        "context.json": to_readable_json_bytes(context_of(key, **context_changes).to_json()),
        "result.json": to_readable_json_bytes(result_document()),
    }


def sealed_with(files: Mapping[str, bytes], key: SigningKey) -> bytes:
    return seal(rendered_report(files), key, at=NOW, reason="Sealed", location="Test Laboratory")


def repeats(evidence: Evidence) -> dict[str, Any]:
    """Stand for an analysis that computes the same again."""
    document: dict[str, Any] = json.loads(evidence.files["result.json"])
    return document
