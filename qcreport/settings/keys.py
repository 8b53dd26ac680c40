"""Where keys lie in a site, and how a new one gets there."""

from __future__ import annotations

import os
from dataclasses import dataclass
from pathlib import Path
from typing import Protocol

from qcreport.durable import write_durably
from qcreport.errors import EnvironmentFailedError, UsageError
from qcreport.settings.new_site import with_seal
from qcreport.settings.site import SITE_FILE, Site, parse_site


class MadeKey(Protocol):
    """A key as made by the signing room."""

    @property
    def pkcs12(self) -> bytes:
        """The protected key."""

    @property
    def certificate_pem(self) -> bytes:
        """Its certificate."""


@dataclass(frozen=True, slots=True, kw_only=True)
class KeyFiles:
    """The files of one key."""

    key: Path
    """PKCS#12, mode 600."""
    certificate: Path
    """PEM, to be handed out."""
    service: bool
    """True for the key that seals."""


def key_files(site: Site, purpose: str, name: str) -> KeyFiles:
    """Return where a new key goes; UsageError where one is there already."""
    stem = "service" if purpose == "service" else _stem(name)
    files = KeyFiles(
        key=site.folders.keys / f"{stem}.p12",
        certificate=site.folders.keys / f"{stem}.crt",
        service=purpose == "service",
    )
    for path in (files.key, files.certificate):
        if path.exists():
            raise UsageError(
                f"{path} is there already. Move it away first; reports sealed with it stay valid.",
                file=str(path),
            )
    return files


def write_key(site: Site, files: KeyFiles, made: MadeKey, passphrase_file: str | None) -> None:
    """Write the key (mode 600), its certificate, and for a service key [seal] in site.toml.

    Raises
    ------
    EnvironmentFailedError
        Where the disk refuses.
    """
    write_durably(files.key, made.pkcs12, mode=0o600)
    write_durably(files.certificate, made.certificate_pem)
    if not files.service:
        return
    path = site.root / SITE_FILE
    stored = None
    if passphrase_file is not None:
        stored = _relative(Path(passphrase_file).resolve(), site.root)
    text = with_seal(path.read_text(encoding="utf-8"), _relative(files.key, site.root), stored)
    parse_site(text.encode(), SITE_FILE, site.root)
    write_durably(path, text.encode("utf-8"))


def read_bytes(path: Path, what: str) -> bytes:
    """Return a file's bytes.

    Raises
    ------
    UsageError
        Where it is not there.
    EnvironmentFailedError
        Where it cannot be read.
    """
    try:
        return path.read_bytes()
    except (FileNotFoundError, NotADirectoryError):
        raise UsageError(f"{what} {path} is not there. Correct the name.", file=os.fspath(path)) from None
    except IsADirectoryError:
        raise UsageError(f"{what} {path} is a folder. Name the file.", file=os.fspath(path)) from None
    except OSError as error:
        raise EnvironmentFailedError(
            f"{what} {path} cannot be read: {error.strerror}.", file=os.fspath(path)
        ) from None


def _stem(name: str) -> str:
    safe = "".join(c if c.isalnum() else "-" for c in name.casefold()).strip("-")
    return f"person-{safe[:60] or 'unnamed'}"


def _relative(path: Path, root: Path) -> str:
    return str(path.relative_to(root)) if path.is_relative_to(root) else str(path)
