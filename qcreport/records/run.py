"""What one run is: its inputs, its key, its number, and what became of it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from qcreport.canonical import sha256_hex, to_json_bytes
from qcreport.records.chain import Head

_DOMAIN = b"qcreport/run-key/1\n"

Answers = tuple[tuple[str, str], ...]
"""(characteristic, answer code), in plan order."""


@dataclass(frozen=True, slots=True, kw_only=True)
class RunInputs:
    """Everything from outside the program that decides what a report says."""

    export_sha256: str
    """Digest of the export."""
    plan_sha256: str
    """Digest of the plan file."""
    layout_sha256: str
    """Digest of the layout file."""
    rules_sha256: str
    """Digest of the rules file."""
    templates: tuple[tuple[str, str], ...]
    """(file name, digest) of every template and style used."""
    left_out: tuple[str, ...] = ()
    """Cells that a person left out."""
    replaces: str = ""
    """Number of the report that this run replaces; empty where it replaces none."""

    def digests(self) -> tuple[str, ...]:
        """Return every digest, each once."""
        own = (self.export_sha256, self.plan_sha256, self.layout_sha256, self.rules_sha256)
        return tuple(dict.fromkeys((*own, *(digest for _, digest in self.templates))))

    def to_json(self) -> dict[str, Any]:
        """Return the document whose digest is the run key."""
        document: dict[str, Any] = {
            "export": self.export_sha256,
            "plan": self.plan_sha256,
            "layout": self.layout_sha256,
            "rules": self.rules_sha256,
            "templates": dict(sorted(self.templates)),
        }
        if self.left_out:
            document["left_out"] = sorted(self.left_out)
        if self.replaces:
            document["replaces"] = self.replaces
        return document


def run_key(inputs: RunInputs) -> str:
    """Return the run key: SHA-256 over the digests, hexadecimal."""
    return sha256_hex(_DOMAIN + to_json_bytes(inputs.to_json()))


def inputs_from_json(document: dict[str, Any]) -> RunInputs:
    """Return the inputs of a stored document."""
    return RunInputs(
        export_sha256=document["export"],
        plan_sha256=document["plan"],
        layout_sha256=document["layout"],
        rules_sha256=document["rules"],
        templates=tuple(sorted(document["templates"].items())),
        left_out=tuple(document.get("left_out", ())),
        replaces=document.get("replaces", ""),
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class Sealing:
    """How a run ended: its report is sealed, published and recorded."""

    result_sha256: str
    """Digest of `result.json`, kept in the archive."""
    report_name: str
    """File name in `reports/`."""
    report_sha256: str
    """Digest of the sealed PDF."""
    sealed_at: str
    """UTC time of the record."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Run:
    """One run key with its number."""

    number: str
    """`YYYY-NNNN`."""
    key: str
    """The run key."""
    inputs: RunInputs
    """What it was computed from."""
    export_name: str
    """File name as dropped."""
    plan_name: str
    """Name in the plan."""
    k: int
    """This is run k over this export by this plan."""
    reason: str
    """Why it was run again; empty for run 1."""
    made_at: str
    """UTC time of the reservation, printed as the report's time."""
    ledger_head: Head
    """The ledger's head when the number was reserved."""
    context_sha256: str
    """Digest of `context.json`, kept in the archive."""
    result_sha256: str | None
    """Digest of `result.json` once compared."""
    answers: Answers
    """Answers once compared."""
    sealing: Sealing | None
    """None while the number is only reserved."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Slot:
    """What a reservation fixes, handed to whoever writes the context."""

    number: str
    """`YYYY-NNNN`."""
    k: int
    """This is run k …"""
    n: int
    """… of n so far."""
    made_at: str
    """UTC time, whole seconds."""
    received_at: str
    """UTC time at which these bytes were first received."""
    ledger_head: Head
    """Newest ledger entry."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Reservation:
    """A number held for one run key, with the context it was reserved under."""

    run: Run
    """The run as recorded."""
    context: bytes
    """`context.json` as fixed by the first reservation of this key."""

    @property
    def number(self) -> str:
        """Return the report number."""
        return self.run.number

    @property
    def k(self) -> int:
        """Return k of run k of n."""
        return self.run.k

    @property
    def n(self) -> int:
        """Return n of run k of n as it stood at the reservation, when this run was the newest."""
        return self.run.k

    @property
    def already(self) -> Sealing | None:
        """Return how this key was answered before, or None."""
        return self.run.sealing
