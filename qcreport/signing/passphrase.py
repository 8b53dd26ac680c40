"""Where a key's passphrase comes from: a private file, the environment, or a person at a terminal."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from pathlib import Path

from qcreport.errors import EnvironmentFailedError, SigningDeniedError
from qcreport.signing.key_checks import check_key_file_mode

PASSPHRASE_VARIABLE = "QCREPORT_KEY_PASSPHRASE"  # noqa: S105  the variable's name, not a passphrase
_LONGEST = 4096


def find_passphrase(
    passphrase_file: Path | None, environment: Mapping[str, str], prompt: Callable[[], str] | None
) -> bytes | None:
    """Return the passphrase from the first source that has one, or None.

    Parameters
    ----------
    passphrase_file : Path or None
        A file that only its owner may read; one line end at its end is not part of the passphrase.
    environment : mapping
        Read for QCREPORT_KEY_PASSPHRASE; a caller that asks for a person's passphrase passes an empty one.
    prompt : callable or None
        Asks at the terminal; None where there is no terminal.

    Raises
    ------
    SigningDeniedError
        The file may be read by others, is empty, or is too long to be a passphrase.
    EnvironmentFailedError
        The file cannot be read.
    """
    if passphrase_file is not None:
        return _from_file(passphrase_file)
    if environment.get(PASSPHRASE_VARIABLE):
        return environment[PASSPHRASE_VARIABLE].encode("utf-8")
    if prompt is not None:
        return prompt().encode("utf-8") or None
    return None


def _from_file(path: Path) -> bytes:
    check_key_file_mode(path)
    try:
        data = path.read_bytes()
    except OSError as error:
        raise EnvironmentFailedError(
            f"{path.name} cannot be read: {error.strerror}.", file=path.name
        ) from None
    text = data.removesuffix(b"\n").removesuffix(b"\r")
    if not text or len(text) > _LONGEST:
        raise SigningDeniedError(
            f"{path.name} should hold the passphrase on one line; it is empty or too long.", file=path.name
        )
    return text
