"""How one export by one plan ends, other than by a refusal."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path


@dataclass(frozen=True, slots=True, kw_only=True)
class Received:
    """An export as taken in: one set of bytes for hashing, archiving and reading."""

    name: str
    """File name as dropped."""
    data: bytes
    """Its bytes, read once."""
    sha256: str
    """Their digest."""
    claim: str
    """Id of the claim; every step of one claim is recorded once."""
    actor: str
    """Who hands it in: `service`, or the account that runs `compare`."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Reported:
    """A report exists."""

    plan_name: str
    """The plan."""
    number: str
    """`YYYY-NNNN`."""
    path: Path
    """Where it is published."""
    result: bytes
    """result.json."""
    answers: tuple[tuple[str, str], ...]
    """(characteristic, answer code)."""
    new: bool
    """False where the same export, settings and templates were reported before."""
    pages: int
    """Pages of a new report; 0 for an earlier one."""
    same_measurements: bool = False
    """True for an earlier report over another file that holds the same measurements."""
    since: str = ""
    """What became of an earlier report: `withdrawn`, `replaced by NUMBER`; empty where nothing did."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ComputedOnly:
    """Numbers without a report, as asked for."""

    plan_name: str
    """The plan."""
    result: bytes
    """result.json."""
    answers: tuple[tuple[str, str], ...]
    """(characteristic, answer code)."""


Outcome = Reported | ComputedOnly
