"""Whether the bytes that hold a signature say exactly one thing.

A signature does not cover the place where it is written. Whoever changes unused bytes there changes the file
without breaking the signature, so what is not needed must be empty and what is said twice must agree.
"""

from __future__ import annotations

import binascii
from collections.abc import Iterator
from typing import TYPE_CHECKING

from qcreport.signing.seal import SEAL_FIELD

_OUTERMOST = 3
"""The message, its content with the tag, and the signed data."""

if TYPE_CHECKING:
    from pyhanko.sign.validation.pdf_embedded import EmbeddedPdfSignature


def oddities(pdf: bytes, signature: EmbeddedPdfSignature) -> tuple[str, ...]:
    """Return what is odd about the place that holds a signature, one clause each."""
    return tuple(_oddities(pdf, signature))


def _oddities(pdf: bytes, signature: EmbeddedPdfSignature) -> Iterator[str]:
    content: bytes = signature.pkcs7_content
    first = int(signature.byte_range[1])
    written = pdf[first : first + 2 * len(content) + 2]
    digits = binascii.hexlify(content)
    if written not in (b"<" + digits + b">", b"<" + digits.upper() + b">"):
        yield "the place that holds the signature was changed"
    outer = element(content, 0)
    if outer is None or content[outer[1] :].strip(b"\0"):
        yield "the unused room beside the signature is not empty"
    elif not fills(content, _OUTERMOST):
        yield "the lengths inside the signature do not add up"
    yield from _disagreements(signature, strict=signature.field_name == SEAL_FIELD)


def element(content: bytes, at: int) -> tuple[int, int] | None:
    """Return where the value of a DER element begins and ends; None where it has no definite length."""
    if len(content) < at + 2 or content[at + 1] == 0x80:
        return None
    first = content[at + 1]
    if first < 0x80:
        return at + 2, at + 2 + first
    begins = at + 2 + (first & 0x7F)
    return begins, begins + int.from_bytes(content[at + 2 : begins], "big")


def fills(content: bytes, levels: int) -> bool:
    """Return whether in each of the outermost levels the last element ends where its parent does."""
    at = 0
    for _ in range(levels):
        parent = element(content, at)
        if parent is None:
            return False
        child, end = parent
        while True:
            found = element(content, child)
            if found is None or found[1] >= end:
                break
            child = found[1]
        if found is None or found[1] != end:
            return False
        at = child
    return True


def _disagreements(signature: EmbeddedPdfSignature, *, strict: bool) -> Iterator[str]:
    """Yield where a signature says two things; `strict` for a seal, which is written in one way only.

    Other programs may list their digest with parameters or without, yet never leave it out.
    """
    data, signer = signature.signed_data, signature.signer_info
    listed, own = list(data["digest_algorithms"]), signer["digest_algorithm"]
    if strict:
        agrees = [algorithm.dump() for algorithm in listed] == [own.dump()]
    else:
        agrees = own["algorithm"].dotted in {algorithm["algorithm"].dotted for algorithm in listed}
    if not agrees or any(algorithm["parameters"].native is not None for algorithm in (own, *listed)):
        yield "the signature names its digest in two ways"
    # RFC 5652, 5.1 and 5.3: the versions follow from what the signature holds.
    expected = "v1" if signer["sid"].name == "issuer_and_serial_number" else "v3"
    plain = data["encap_content_info"]["content_type"].native == "data"  # a time stamp's content is not
    if signer["version"].native != expected or data["version"].native != (expected if plain else "v3"):
        yield "the signature has a version that does not fit its form"
