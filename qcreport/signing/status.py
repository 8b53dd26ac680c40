"""What the inspection of a sealed PDF found, as plain values."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from enum import StrEnum


class SignatureKind(StrEnum):
    """What a signature in the file is."""

    SEAL = "seal"
    PERSON = "person"
    TIME_STAMP = "time stamp"


@dataclass(frozen=True, slots=True, kw_only=True)
class SignatureStatus:
    """One signature as judged."""

    field: str
    """Name of its field."""
    kind: SignatureKind
    """Seal, person's signature or document time stamp."""
    signer: str | None
    """Common name in the certificate; None where the signature cannot be read."""
    fingerprint_sha256: str | None
    """SHA-256 of the certificate, hexadecimal."""
    signed_at: datetime | None
    """UTC; the time of its time stamp, else the signer's own statement."""
    meaning: str | None
    """Stated reason of signing."""
    location: str | None
    """Stated place."""
    intact: bool
    """The bytes it covers are those that were signed."""
    valid: bool
    """It was made with the key of the certificate it names."""
    trusted: bool | None
    """Its certificate leads to a root that was given; None where no roots were given."""
    covers_entire_file: bool
    """No byte was appended after it."""
    later_changes_allowed: bool
    """What was appended after it, if anything, only fills signature fields or adds proofs to signatures."""
    time_stamped: bool
    """It carries an intact time stamp of an authority."""
    problems: tuple[str, ...]
    """Whatever speaks against it, one plain clause each."""
    notes: tuple[str, ...]
    """What a reader should know and what does not speak against it."""

    @property
    def holds(self) -> bool:
        """Return whether it is intact, valid and followed only by allowed changes."""
        return self.intact and self.valid and self.later_changes_allowed and not self.problems

    @property
    def ok(self) -> bool:
        """Return whether it holds and leads to a given root."""
        return self.holds and self.trusted is True


@dataclass(frozen=True, slots=True, kw_only=True)
class PdfStatus:
    """A sealed PDF as judged."""

    seal: SignatureStatus
    """The service's seal."""
    others: tuple[SignatureStatus, ...]
    """Persons' signatures and time stamps, in the order in which they were made."""
    sealed_length: int
    """Bytes of the revision that the seal covers, from the start of the file."""
    changed_after_seal: bool
    """Something was appended after the seal that is neither a signature nor a proof of one."""
    pades_level: str
    """B-B, B-T, B-LT or B-LTA: what the file carries for the seal."""
    problems: tuple[str, ...]
    """Whatever speaks against the file as a whole, one plain clause each."""

    @property
    def signatures(self) -> tuple[SignatureStatus, ...]:
        """Return the persons' signatures."""
        return tuple(s for s in self.others if s.kind is SignatureKind.PERSON)

    @property
    def holds(self) -> bool:
        """Return whether seal and every signature hold and nothing else was changed."""
        every = all(s.holds for s in (self.seal, *self.others))
        return every and not self.changed_after_seal and not self.problems

    @property
    def trusted(self) -> bool | None:
        """Return whether seal and every person's signature lead to a given root; None without roots."""
        told = (self.seal.trusted, *(s.trusted for s in self.signatures))
        if None in told:
            return None
        return all(told)
