"""Signed heads of the ledger, kept beside it and handed out: a cut end shows against them.

One line of JSON each in `checkpoints.jsonl`: the document as text, its signature and the certificate, both as
the caller's key made them. The file is only ever appended to.
"""

from __future__ import annotations

import base64
import binascii
import json
import os
from collections import deque
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path

from qcreport.canonical import to_json_bytes
from qcreport.durable import failed, sync_folder
from qcreport.records.chain import Head

FILE_NAME = "checkpoints.jsonl"
_SCHEMA = "qcreport/checkpoint/1"

Sign = Callable[[bytes], bytes]
"""Returns the signature of a document."""
Signer = Callable[[bytes, bytes, bytes], str | None]
"""Returns the fingerprint of the key that signed (document, signature, certificate PEM), None for none."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Checkpoint:
    """One signed head."""

    head: Head
    """Newest entry when it was signed."""
    at: str
    """UTC time."""
    document: bytes
    """What was signed."""
    signature: bytes
    """The signature."""
    certificate_pem: bytes
    """Of the key that signed."""


def write_checkpoint(folder: Path, head: Head, *, at: str, sign: Sign, certificate_pem: bytes) -> Checkpoint:
    """Sign the ledger's head and append it to the checkpoints in the records' folder.

    Raises
    ------
    EnvironmentFailedError
        Where the disk refuses.
    """
    document = to_json_bytes(
        {"schema": _SCHEMA, "sequence": head.sequence, "entry_hash": head.entry_hash, "at": at}
    )
    checkpoint = Checkpoint(
        head=head, at=at, document=document, signature=sign(document), certificate_pem=certificate_pem
    )
    line = {
        "document": document.decode("utf-8"),
        "signature": base64.b64encode(checkpoint.signature).decode("ascii"),
        "certificate": certificate_pem.decode("ascii"),
    }
    _append(folder / FILE_NAME, to_json_bytes(line) + b"\n")
    return checkpoint


def checkpoints(path: Path) -> Iterator[Checkpoint]:
    """Yield the checkpoints of a file; a last line that a kill cut off is passed over.

    Raises
    ------
    ValueError
        Where any other line is none.
    """
    try:
        lines = path.read_bytes().split(b"\n")
    except FileNotFoundError:
        return
    for place, line in enumerate(lines, start=1):
        try:
            if line.strip():
                yield _parsed(line)
        except (ValueError, KeyError, TypeError, binascii.Error) as error:
            if place == len(lines):
                return
            raise ValueError(f"line {place} of {path.name} is no checkpoint") from error


def newest(path: Path) -> Checkpoint | None:
    """Return the last checkpoint of a file, or None."""
    last = deque(checkpoints(path), maxlen=1)
    return last[0] if last else None


def _parsed(line: bytes) -> Checkpoint:
    fields = json.loads(line)
    document = fields["document"].encode("utf-8")
    said = json.loads(document)
    if said["schema"] != _SCHEMA:
        raise ValueError("another schema")
    return Checkpoint(
        head=Head(sequence=int(said["sequence"]), entry_hash=str(said["entry_hash"])),
        at=str(said["at"]),
        document=document,
        signature=base64.b64decode(fields["signature"], validate=True),
        certificate_pem=fields["certificate"].encode("ascii"),
    )


def _append(path: Path, line: bytes) -> None:
    """Append one line in one write; a line that a kill cut off is ended first."""
    try:
        fresh = not path.exists()
        descriptor = os.open(path, os.O_RDWR | os.O_CREAT | os.O_APPEND | os.O_NOFOLLOW | os.O_CLOEXEC, 0o644)
        try:
            size = os.fstat(descriptor).st_size
            whole = size == 0 or os.pread(descriptor, 1, size - 1) == b"\n"
            if not whole:
                _drop_torn_line(descriptor, size)
            os.write(descriptor, line)
            os.fsync(descriptor)
        finally:
            os.close(descriptor)
        if fresh:
            sync_folder(path.parent)
    except OSError as error:
        raise failed(f"The checkpoint in {path} could not be written", error) from error


def _drop_torn_line(descriptor: int, size: int) -> None:
    kept = os.pread(descriptor, size, 0).rfind(b"\n") + 1
    os.ftruncate(descriptor, kept)
