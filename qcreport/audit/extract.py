"""What a report carries, written out for whoever wants to look at it."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

from qcreport.errors import EnvironmentFailedError, NotOurReportError, UsageError
from qcreport.signing.attachments import attachments_of, is_fixed_name
from qcreport.signing.reading import sealed_revision


def extract_report(pdf: bytes) -> dict[str, bytes]:
    """Return the attachments of the sealed revision by their fixed names.

    Raises
    ------
    NotOurReportError
        Not a sealed report that can be read, or one that carries nothing.
    """
    files = attachments_of(sealed_revision(pdf))
    if not files:
        raise NotOurReportError("This sealed PDF carries none of the files that a report carries.")
    return files


def write_extracted(files: Mapping[str, bytes], directory: Path) -> tuple[Path, ...]:
    """Write the files into a folder, made where it is absent; nothing that exists is overwritten.

    Raises
    ------
    UsageError
        A file of one of these names is there already; then nothing is written.
    EnvironmentFailedError
        The folder cannot be written.
    """
    foreign = [name for name in files if not is_fixed_name(name)]
    if foreign:
        raise ValueError(f"not a fixed name: {foreign[0]!r}")
    targets = {directory / name: data for name, data in files.items()}
    for path in targets:
        if path.exists() or path.is_symlink():
            raise UsageError(
                f"{path.name} is already in that folder and is not overwritten; name an empty folder."
            )
    try:
        directory.mkdir(parents=True, exist_ok=True)
        for path, data in targets.items():
            with path.open("xb") as stream:
                stream.write(data)
    except OSError as error:
        raise EnvironmentFailedError(f"The files cannot be written: {error.strerror}.") from None
    return tuple(targets)
