"""Keys for one test session; none is ever kept."""

from __future__ import annotations

import datetime as dt

from qcreport.signing.keys import SigningKey, load_certificates, load_signing_key, new_key

NOW = dt.datetime(2026, 11, 2, 6, 12, 0, tzinfo=dt.UTC)
PASSPHRASE = b"only for this session"


def key_of(name: str, *, start: dt.datetime = NOW, days: int = 365, purpose: str = "service") -> SigningKey:
    """Return a new key that is valid from `start`."""
    made = new_key(
        name,
        purpose="person" if purpose == "person" else "service",
        organisation="Test Laboratory",
        now=start,
        days=days,
        passphrase=PASSPHRASE,
    )
    return load_signing_key(made.pkcs12, passphrase=PASSPHRASE, now=start)


def root_of(key: SigningKey) -> tuple[object, ...]:
    """Return the key's certificate as the only trust root, read back from the published form."""
    return load_certificates(key.certificate_pem())
