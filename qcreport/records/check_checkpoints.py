"""The signed heads held against the ledger and against the keys that may sign them."""

from __future__ import annotations

from collections.abc import Collection, Iterable
from dataclasses import dataclass
from pathlib import Path

from qcreport.records.chain import Head
from qcreport.records.checkpoints import Checkpoint, Signer, checkpoints


@dataclass(frozen=True, slots=True, kw_only=True)
class Trust:
    """How signatures under checkpoints are judged."""

    signer: Signer
    """Returns the fingerprint of the key that signed, or None."""
    fingerprints: Collection[str]
    """Keys that may have signed."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Judged:
    """What the checkpoints say."""

    heads: tuple[Head, ...]
    """Heads whose signature holds."""
    count: int
    """Checkpoints read."""
    problems: tuple[str, ...]
    """One sentence each."""

    @property
    def covers(self) -> int:
        """The newest entry that a good signature covers; 0 where there is none."""
        return max((head.sequence for head in self.heads), default=0)


def judge_checkpoints(paths: Iterable[Path], trust: Trust) -> Judged:
    """Read the checkpoints of all files and return the heads that are signed as they should be."""
    heads: list[Head] = []
    problems: list[str] = []
    count = 0
    for path in paths:
        try:
            for checkpoint in checkpoints(path):
                count += 1
                wrong = _wrong(checkpoint, trust)
                if wrong:
                    problems.append(wrong)
                else:
                    heads.append(checkpoint.head)
        except (ValueError, OSError) as error:
            problems.append(f"The checkpoints cannot be read: {error}.")
    return Judged(heads=tuple(heads), count=count, problems=tuple(problems))


def _wrong(checkpoint: Checkpoint, trust: Trust) -> str:
    fingerprint = trust.signer(checkpoint.document, checkpoint.signature, checkpoint.certificate_pem)
    place = f"The checkpoint of entry {checkpoint.head.sequence}"
    if fingerprint is None:
        return f"{place} does not match its signature."
    if fingerprint not in trust.fingerprints:
        return f"{place} is signed by a key that is none of this site ({fingerprint[:16]}…)."
    return ""
