"""The archive: originals, settings, contexts and results by digest, read-only, never rewritten."""

from __future__ import annotations

import os
import re
from pathlib import Path

from qcreport.canonical import sha256_hex
from qcreport.durable import failed, make_folder, write_durably
from qcreport.errors import LedgerError

_DIGEST = re.compile(r"[0-9a-f]{64}\Z")


class Archive:
    """Bytes by digest under one folder: `ab/cdef….bin`.

    The name says nothing but the digest: an original's own name is hostile and is kept in the records.
    """

    def __init__(self, root: Path) -> None:
        self.root = root

    def path_of(self, sha256: str) -> Path:
        """Return where bytes of this digest are kept.

        Raises
        ------
        LedgerError
            Where `sha256` is no digest in lower-case hexadecimal.
        """
        if not _DIGEST.match(sha256):
            raise LedgerError(f"{sha256[:80]!r} is not a SHA-256 in lower-case hexadecimal.")
        return self.root / sha256[:2] / f"{sha256[2:]}.bin"

    def store(self, data: bytes) -> Path:
        """Keep `data` and return where; bytes that are there already are checked and left alone.

        Raises
        ------
        LedgerError
            Where the file of this digest is there with other content.
        EnvironmentFailedError
            Where the disk refuses.
        """
        digest = sha256_hex(data)
        path = self.path_of(digest)
        if self.has(digest):
            self.read(digest)
            return path
        make_folder(path.parent)
        write_durably(path, data, mode=0o444)
        return path

    def has(self, sha256: str) -> bool:
        """Return whether a file of this digest is there; its content is not looked at."""
        return os.path.lexists(self.path_of(sha256))

    def read(self, sha256: str) -> bytes:
        """Return the bytes of a digest.

        Raises
        ------
        LedgerError
            Where the file is missing, is no plain file, or no longer matches its digest.
        """
        path = self.path_of(sha256)
        try:
            descriptor = os.open(path, os.O_RDONLY | os.O_NOFOLLOW | os.O_NONBLOCK | os.O_CLOEXEC)
            with os.fdopen(descriptor, "rb") as stream:
                data = stream.read()
        except FileNotFoundError:
            raise LedgerError(f"The archive lacks {path}. Bring it back from a backup.") from None
        except OSError as error:
            if path.is_symlink() or path.is_dir():
                raise LedgerError(f"{path} is not a plain file. Bring it back from a backup.") from error
            raise failed(f"{path} could not be read", error) from error
        if sha256_hex(data) != sha256:
            raise LedgerError(
                f"{path} no longer matches its digest. Keep it as evidence and bring the original "
                "back from a backup."
            )
        return data
