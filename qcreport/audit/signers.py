"""Each person's signature in plain words: who, as what, and what is proven of it."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass

from qcreport.analysis.context import Signer
from qcreport.signing.roles import ROLE_OF_FIELD
from qcreport.signing.status import PdfStatus, SignatureStatus


@dataclass(frozen=True, slots=True, kw_only=True)
class Explained:
    """A signature with its explanation."""

    status: SignatureStatus
    """As judged."""
    text: str
    """One plain sentence."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Signers:
    """Everybody known to be allowed to sign."""

    by_seal: tuple[Signer, ...]
    """Named in the report, under its seal."""
    by_site: tuple[Signer, ...]
    """Named in people.toml of a site that the caller trusts."""

    def pinned(self) -> frozenset[str]:
        """Return the digests of the certificates that the caller trusts as they are."""
        return frozenset(s.certificate_sha256 for s in self.by_site)

    def vouched(self) -> frozenset[str]:
        """Return the digests of the certificates that the seal vouches for."""
        return frozenset(s.certificate_sha256 for s in self.by_seal)

    def of(self, fingerprint: str | None) -> tuple[Signer, ...]:
        """Return what is known of a certificate."""
        return tuple(s for s in (*self.by_site, *self.by_seal) if s.certificate_sha256 == fingerprint)


def signer_problems(status: PdfStatus, signers: Signers) -> Iterator[str]:
    """Yield what speaks against the signers: the seal's key, a lacking right, one person in both fields."""
    seen: dict[str, str] = {}
    for signature in status.signatures:
        if signature.fingerprint_sha256 == status.seal.fingerprint_sha256:
            yield f"the key of the seal signed in the field {signature.field}, where a person signs"
        known = signers.of(signature.fingerprint_sha256)
        role = ROLE_OF_FIELD.get(signature.field)
        if known and role is not None and not any(role in signer.may for signer in known):
            yield f"{known[0].name} signed as {role}, which that person may not"
        for who in _names(signature, known):
            if seen.setdefault(who, signature.field) != signature.field:
                yield f"one person signed in both fields, {seen[who]} and {signature.field}"
                break


def _names(signature: SignatureStatus, known: Iterable[Signer]) -> Iterator[str]:
    """Yield what tells a person apart: certificate and listed name."""
    if signature.fingerprint_sha256 is not None:
        yield signature.fingerprint_sha256
    yield from {f"name {signer.name}" for signer in known}


def explained(status: PdfStatus, signers: Signers) -> tuple[Explained, ...]:
    """Return every person's signature with a sentence that says what it is worth."""
    return tuple(Explained(status=s, text=_text(s, signers)) for s in status.signatures)


def _text(signature: SignatureStatus, signers: Signers) -> str:
    who = signature.signer or "somebody who cannot be read"
    role = ROLE_OF_FIELD.get(signature.field, "something else")
    if not signature.holds:
        why = "; ".join(signature.problems) or "the report was changed after it"
        return f"this signature as {role} by {who} does not hold: {why}"
    if signature.trusted:
        return f"{who} signed the report as {role}; {_why_trusted(signature, signers)}"
    told = f"somebody whose certificate says {who} signed the report as {role}; "
    if signature.trusted is None:
        return told + "who that is, is not proven, since no certificate was given to trust"
    if signers.of(signature.fingerprint_sha256):
        return (
            told
            + "the laboratory names that certificate, but it was not valid then or the seal is not trusted"
        )
    return told + "neither the report's seal nor the certificates given vouch for that certificate"


def _why_trusted(signature: SignatureStatus, signers: Signers) -> str:
    if signature.fingerprint_sha256 in signers.pinned():
        return "the site names that certificate"
    if signature.fingerprint_sha256 in signers.vouched():
        return "the laboratory vouches for that certificate under its seal"
    return "that certificate leads to one you trust"
