"""What the analysis and the pages need from outside the export and the settings: `context.json`.

Together with export, plan, layout and rules it makes a report recomputable from its own attachments.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from qcreport.analysis.provenance import Provenance, provenance_from_json
from qcreport.rules.history import SpreadHistory, spread_history_from_json

CONTEXT_SCHEMA = "qcreport/context/1"


@dataclass(frozen=True, slots=True, kw_only=True)
class Laboratory:
    """Who issues the report."""

    name: str
    """Name of the laboratory."""
    address: str
    """Postal address, one line or several."""
    place_of_work: str
    """Where the work was done; the address where it is the same."""
    customer: str
    """For whom, or the site's recorded reason why none is named."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Statement:
    """What a report must say and only the laboratory can, or why it is left out."""

    name: str
    """Its key in site.toml: customer, items, sampling, …"""
    text: str
    """As printed; empty where it is left out."""
    left_out: str
    """The recorded reason why it is left out; empty where there is none."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Signer:
    """Somebody who may sign the report, as the seal vouches for."""

    name: str
    """As people.toml names them."""
    certificate_sha256: str
    """SHA-256 of their certificate, hexadecimal."""
    may: tuple[str, ...]
    """What they may sign as: `reviewed`, `authorised`."""

    def to_json(self) -> dict[str, Any]:
        """Return the entry of `context.json`."""
        return {"name": self.name, "certificate_sha256": self.certificate_sha256, "may": list(self.may)}


@dataclass(frozen=True, slots=True, kw_only=True)
class Context:
    """Facts of the moment at which a report was made."""

    report_number: str
    """`YYYY-NNNN`."""
    revision: int
    """1 for a new report."""
    made_at: str
    """UTC time, ISO 8601 with Z, whole seconds."""
    time_zone: str
    """IANA name of the site's zone, for printed local times."""
    language: str
    """Language of the pages: `en`."""
    page_size: str
    """`A4` or `Letter`."""
    laboratory: Laboratory
    """Who issues it."""
    export_name: str
    """File name as dropped."""
    export_sha256: str
    """Digest of the export."""
    received_at: str
    """UTC time at which the export was received."""
    plan_name: str
    """Name in the plan."""
    plan_sha256: str
    """Digest of the plan file."""
    layout_sha256: str
    """Digest of the layout file."""
    rules_sha256: str
    """Digest of the rules file."""
    templates: tuple[tuple[str, str], ...]
    """(file name, SHA-256) of every template and style used, sorted by name."""
    templates_changed: tuple[str, ...]
    """Names of templates that the laboratory changed against the shipped ones."""
    run_k: int
    """This is run k …"""
    run_n: int
    """… of n over this export."""
    run_reason: str
    """Why it was run again; empty for run 1."""
    ledger_sequence: int
    """Sequence number of the newest ledger entry before rendering; 0 for an empty ledger."""
    ledger_hash: str
    """Hash of that entry, hexadecimal."""
    seal_subject: str
    """Common name in the sealing certificate."""
    seal_fingerprint_sha256: str
    """SHA-256 of the sealing certificate."""
    pades_level: str
    """Level aimed at: `B-B`."""
    demonstration: bool
    """True for a demo site: key and report say so."""
    software_version: str
    """qcreport version."""
    provenance: Provenance | None = None
    """What the records add; None where there are none (and in reports of versions before)."""
    statements: tuple[Statement, ...] = ()
    """What the laboratory states, in the order of site.toml's documentation."""
    history: tuple[SpreadHistory, ...] = ()
    """Spread of earlier exports, one entry a characteristic that has any."""
    signers: tuple[Signer, ...] = ()
    """Who may sign the report, so that an auditor with the report alone can tell."""

    def to_json(self) -> dict[str, Any]:
        """Return the document `qcreport/context/1`."""
        return {
            "schema": CONTEXT_SCHEMA,
            "report": {
                "number": self.report_number,
                "revision": self.revision,
                "made_at": self.made_at,
                "time_zone": self.time_zone,
                "language": self.language,
                "page_size": self.page_size,
            },
            "laboratory": {
                "name": self.laboratory.name,
                "address": self.laboratory.address,
                "place_of_work": self.laboratory.place_of_work,
                "customer": self.laboratory.customer,
            },
            **({"statements": [_statement_json(s) for s in self.statements]} if self.statements else {}),
            "export": {
                "name": self.export_name,
                "sha256": self.export_sha256,
                "received_at": self.received_at,
            },
            "plan": {"name": self.plan_name, "sha256": self.plan_sha256},
            "layout": {"sha256": self.layout_sha256},
            "rules": {"sha256": self.rules_sha256},
            "templates": dict(self.templates),
            "templates_changed": list(self.templates_changed),
            "run": {"k": self.run_k, "n": self.run_n, "reason": self.run_reason},
            "ledger_head": {"sequence": self.ledger_sequence, "hash": self.ledger_hash},
            "history": [h.to_json() for h in self.history] or None,
            **({} if self.provenance is None else {"records": self.provenance.to_json()}),
            "seal": {
                "subject": self.seal_subject,
                "fingerprint_sha256": self.seal_fingerprint_sha256,
                "pades_level": self.pades_level,
            },
            **({"signers": [s.to_json() for s in self.signers]} if self.signers else {}),
            "demonstration": self.demonstration,
            "software_version": self.software_version,
        }


def _statement_json(statement: Statement) -> dict[str, str]:
    return {"name": statement.name, "text": statement.text, "left_out": statement.left_out}


def context_from_json(data: Mapping[str, Any]) -> Context:
    """Return the context of a `context.json` document.

    Raises
    ------
    ValueError
        Where the document is not of schema `qcreport/context/1` or lacks a field.
    """
    if data.get("schema") != CONTEXT_SCHEMA:
        raise ValueError(f"schema {data.get('schema')!r}, expected {CONTEXT_SCHEMA!r}")
    try:
        report, laboratory, export = data["report"], data["laboratory"], data["export"]
        run, head, seal = data["run"], data["ledger_head"], data["seal"]
        records, history = data.get("records"), data.get("history") or ()
        return Context(
            report_number=str(report["number"]),
            revision=int(report["revision"]),
            made_at=str(report["made_at"]),
            time_zone=str(report["time_zone"]),
            language=str(report["language"]),
            page_size=str(report["page_size"]),
            laboratory=Laboratory(
                name=str(laboratory["name"]),
                address=str(laboratory["address"]),
                place_of_work=str(laboratory["place_of_work"]),
                customer=str(laboratory["customer"]),
            ),
            export_name=str(export["name"]),
            export_sha256=str(export["sha256"]),
            received_at=str(export["received_at"]),
            plan_name=str(data["plan"]["name"]),
            plan_sha256=str(data["plan"]["sha256"]),
            layout_sha256=str(data["layout"]["sha256"]),
            rules_sha256=str(data["rules"]["sha256"]),
            templates=tuple(sorted((str(k), str(v)) for k, v in data["templates"].items())),
            templates_changed=tuple(str(v) for v in data["templates_changed"]),
            run_k=int(run["k"]),
            run_n=int(run["n"]),
            run_reason=str(run["reason"]),
            ledger_sequence=int(head["sequence"]),
            ledger_hash=str(head["hash"]),
            seal_subject=str(seal["subject"]),
            seal_fingerprint_sha256=str(seal["fingerprint_sha256"]),
            pades_level=str(seal["pades_level"]),
            demonstration=bool(data["demonstration"]),
            software_version=str(data["software_version"]),
            provenance=None if records is None else provenance_from_json(records),
            statements=tuple(
                Statement(name=str(s["name"]), text=str(s["text"]), left_out=str(s["left_out"]))
                for s in data.get("statements") or ()
            ),
            history=tuple(spread_history_from_json(item) for item in history),
            signers=tuple(
                Signer(
                    name=str(item["name"]),
                    certificate_sha256=str(item["certificate_sha256"]),
                    may=tuple(str(role) for role in item["may"]),
                )
                for item in data.get("signers") or ()
            ),
        )
    except (KeyError, TypeError, AttributeError, OverflowError) as error:
        raise ValueError(f"context.json lacks or spoils {error}") from None
