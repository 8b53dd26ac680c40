"""What a report carries, written out without touching anything that is there."""

from __future__ import annotations

from pathlib import Path

import pytest
from signing.appending import with_swapped_attachment
from signing.report_fixture import rendered_report

from qcreport.audit.extract import extract_report, write_extracted
from qcreport.errors import EnvironmentFailedError, NotOurReportError, UsageError
from qcreport.signing.keys import SigningKey

from .example import sealed_with


def test_the_sealed_files_are_written(report: bytes, files: dict[str, bytes], tmp_path: Path) -> None:
    swapped = with_swapped_attachment(report, "plan.toml", b"swapped")
    written = write_extracted(extract_report(swapped), tmp_path / "new" / "folder")
    assert {path.name: path.read_bytes() for path in written} == files


def test_nothing_is_overwritten_and_nothing_written_beside_it(
    files: dict[str, bytes], tmp_path: Path
) -> None:
    (tmp_path / "result.json").write_bytes(b"mine")
    with pytest.raises(UsageError, match=r"result\.json is already"):
        write_extracted(files, tmp_path)
    assert [path.name for path in tmp_path.iterdir()] == ["result.json"]
    assert (tmp_path / "result.json").read_bytes() == b"mine"


def test_a_link_is_not_followed(files: dict[str, bytes], tmp_path: Path) -> None:
    outside = tmp_path / "outside"
    folder = tmp_path / "folder"
    folder.mkdir()
    (folder / "plan.toml").symlink_to(outside)
    with pytest.raises(UsageError, match=r"plan\.toml is already"):
        write_extracted(files, folder)
    assert not outside.exists()


def test_a_folder_that_cannot_be_made(files: dict[str, bytes], tmp_path: Path) -> None:
    (tmp_path / "file").write_bytes(b"")
    with pytest.raises(EnvironmentFailedError, match="cannot be written"):
        write_extracted(files, tmp_path / "file" / "folder")


def test_no_other_name_is_ever_written(tmp_path: Path) -> None:
    with pytest.raises(ValueError, match="fixed name"):
        write_extracted({"../plan.toml": b""}, tmp_path / "folder")
    assert list(tmp_path.iterdir()) == []


def test_a_pdf_that_carries_nothing(service_key: SigningKey) -> None:
    with pytest.raises(NotOurReportError, match="carries none"):
        extract_report(sealed_with({}, service_key))
    with pytest.raises(NotOurReportError, match="no seal"):
        extract_report(rendered_report({}))
