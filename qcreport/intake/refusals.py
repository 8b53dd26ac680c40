"""The folder that tells a person why an export was not read, with the original beside it."""

from __future__ import annotations

import datetime as dt
import errno
import os
import shutil
from pathlib import Path

from qcreport.durable import sync_folder, write_whole
from qcreport.errors import ExportRefusedError
from qcreport.intake.exports import ClaimedExport
from qcreport.intake.files import system_errors
from qcreport.intake.names import WHY, one_line, shortened

_NO_LINKS = frozenset({errno.EXDEV, errno.EPERM, errno.EOPNOTSUPP, errno.EMLINK})
_UNFIT_NAME = frozenset({errno.EINVAL, errno.EILSEQ, errno.ENAMETOOLONG})


def refusal_folder_name(day: dt.date, label: str) -> str:
    """Return `YYYYMMDD-DIGEST8`."""
    return f"{day:%Y%m%d}-{label}"


def put_refused(refused: Path, export: ClaimedExport, error: ExportRefusedError, day: dt.date) -> Path:
    """Put a refused export and the reason into its folder and return that.

    The folder appears with its reason in it or not at all. The same bytes refused again on the same day meet
    the same folder, which then tells the newest reason; the original is there once.

    Parameters
    ----------
    refused : Path
        The site's `refused/`.
    export : ClaimedExport
        What is refused.
    error : ExportRefusedError
        Why.
    day : date
        Day of the claim (not of this call: a repeated call must find the same folder).

    Raises
    ------
    EnvironmentFailedError
        Where the disk refuses.
    """
    folder = refused / refusal_folder_name(day, export.label)
    why = five_safe_lines(error).encode("utf-8")
    with system_errors(f"The refusal of {export.claim.name!r} cannot be written to {refused}"):
        refused.mkdir(parents=True, exist_ok=True)
        if not folder.is_dir():
            _appear(folder, why, export.claim.id)
        elif (folder / WHY).read_bytes() != why:
            write_whole(folder / WHY, why)
        if not _others(folder):
            _put_original(folder, export)
    return folder


def five_safe_lines(error: ExportRefusedError) -> str:
    """Return the text of why.txt: five lines, whatever the names and cells in it hold."""
    safe = ExportRefusedError(
        error.code,
        file=one_line(error.file or ""),
        where=one_line(error.where),
        found=one_line(error.found),
        expected=one_line(error.expected),
        next_step=one_line(error.next_step),
    )
    return safe.five_lines()


def _appear(folder: Path, why: bytes, claim_id: str) -> None:
    temporary = folder.with_name(f".{claim_id}.tmp")
    shutil.rmtree(temporary, ignore_errors=True)
    temporary.mkdir()
    write_whole(temporary / WHY, why)
    temporary.rename(folder)
    sync_folder(folder.parent)


def _others(folder: Path) -> bool:
    return any(path.name != WHY and not path.name.startswith(".") for path in folder.iterdir())


def _put_original(folder: Path, export: ClaimedExport) -> None:
    """Put the original under its own name, or under a plain one where the file system refuses that."""
    try:
        _put(folder / shortened(export.claim.name), export)
    except OSError as error:
        if error.errno not in _UNFIT_NAME:
            raise
        _put(folder / "export.bin", export)


def _put(target: Path, export: ClaimedExport) -> None:
    """Write what was read; link or copy what was too large to read (the claim keeps its own meanwhile)."""
    if export.data is not None:
        write_whole(target, export.data)
        return
    original = export.claim.original
    if original.is_symlink() or not original.is_file():
        return
    try:
        os.link(original, target, follow_symlinks=False)
    except OSError as error:
        if error.errno not in _NO_LINKS:
            raise
        partial = target.with_name(".original.tmp")
        shutil.copyfile(original, partial, follow_symlinks=False)
        partial.rename(target)
    sync_folder(target.parent)
