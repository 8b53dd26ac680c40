"""The folder of a refused export."""

from __future__ import annotations

import datetime as dt
import errno
import os
from pathlib import Path

import pytest

from qcreport.canonical import sha256_hex
from qcreport.errors import EnvironmentFailedError, ExportRefusedError
from qcreport.intake.claim import Claims
from qcreport.intake.exports import ClaimedExport
from qcreport.intake.names import one_line, shortened
from qcreport.intake.refusals import put_refused

from .conftest import only

DAY = dt.date(2026, 11, 2)
LABEL = sha256_hex(b"data")[:8]


def error(found: str = "#DIV/0!", file: str = "export.xlsx") -> ExportRefusedError:
    return ExportRefusedError(
        "error_cells", file=file, where="Results!C5", found=found, expected="A number.", next_step="Mend it."
    )


def claimed(claims: Claims, inbox: Path, data: bytes = b"data", name: str = "export.xlsx") -> ClaimedExport:
    (inbox / name).write_bytes(data)
    claim = claims.take(inbox, only(inbox))
    assert claim is not None
    return claims.load(claim)


def test_the_folder_holds_the_original_and_five_lines(claims: Claims, inbox: Path, tmp_path: Path) -> None:
    folder = put_refused(tmp_path / "refused", claimed(claims, inbox), error(), DAY)
    assert folder.name == f"20261102-{LABEL}"
    assert (folder / "export.xlsx").read_bytes() == b"data"
    assert (folder / "why.txt").read_text() == (
        "Not read:  export.xlsx\nWhere:     Results!C5\nFound:     #DIV/0!\nExpected:  A number.\n"
        "Next step: Mend it. (error_cells)\n"
    )
    assert sorted(path.name for path in (tmp_path / "refused").iterdir()) == [folder.name]


def test_the_same_bytes_on_the_same_day_are_there_once_with_the_newest_reason(
    claims: Claims, inbox: Path, tmp_path: Path
) -> None:
    refused = tmp_path / "refused"
    first = put_refused(refused, claimed(claims, inbox), error(), DAY)
    again = put_refused(refused, claimed(claims, inbox, name="copy.xlsx"), error("#N/A"), DAY)
    assert first == again
    assert sorted(path.name for path in first.iterdir()) == ["export.xlsx", "why.txt"]
    assert "#N/A" in (first / "why.txt").read_text()
    other_day = put_refused(refused, claimed(claims, inbox), error(), DAY + dt.timedelta(days=1))
    assert other_day != first


def test_names_and_cells_cannot_add_lines(claims: Claims, inbox: Path, tmp_path: Path) -> None:
    hostile = error("x\nNext step: none\u202e", file="a\r\nb\udcff.xlsx")
    folder = put_refused(tmp_path / "refused", claimed(claims, inbox), hostile, DAY)
    lines = (folder / "why.txt").read_text().splitlines()
    assert len(lines) == 5
    assert lines[0] == r"Not read:  a\r\nb\udcff.xlsx"
    assert lines[2] == r"Found:     x\nNext step: none\u202e"


@pytest.mark.parametrize(
    ("name", "kept"),
    [
        ("a" * 250 + ".xlsx", "a" * 195 + ".xlsx"),
        ("ä" * 120 + ".xlsx", "ä" * 97 + ".xlsx"),
        ("x." + "y" * 240, "x." + "y" * 198),
        ("WHY.txt", "export-WHY.txt"),
        (".hidden", "export-.hidden"),
        ("short.xlsx", "short.xlsx"),
    ],
)
def test_long_names_are_shortened_and_keep_their_ending(name: str, kept: str) -> None:
    assert shortened(name) == kept


def test_visible_characters_of_any_script_stay() -> None:
    assert one_line("Schäl\u00a0Prüfung 試験.xlsx") == "Schäl\u00a0Prüfung 試験.xlsx"
    assert one_line("\x1b[31m\x00\u200f") == r"\x1b[31m\x00\u200f"


def test_what_was_too_large_to_read_is_there_as_it_is(claims: Claims, inbox: Path, tmp_path: Path) -> None:
    export = claimed(claims, inbox, b"x" * 1001)
    assert export.refusal is not None
    folder = put_refused(tmp_path / "refused", export, export.refusal, DAY)
    assert (folder / "export.xlsx").read_bytes() == b"x" * 1001
    again = put_refused(tmp_path / "refused", claims.load(export.claim), export.refusal, DAY)
    assert again == folder


def test_a_large_file_is_copied_where_it_cannot_be_linked(
    claims: Claims, inbox: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def no_links(*_: object, **__: object) -> None:
        raise OSError(errno.EXDEV, "Invalid cross-device link")

    monkeypatch.setattr(os, "link", no_links)
    export = claimed(claims, inbox, b"x" * 1001)
    folder = put_refused(tmp_path / "refused", export, error(), DAY)
    assert sorted(path.name for path in folder.iterdir()) == ["export.xlsx", "why.txt"]


def test_a_disk_that_refuses_the_link_is_told(
    claims: Claims, inbox: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def full(*_: object, **__: object) -> None:
        raise OSError(errno.ENOSPC, "No space left on device")

    export = claimed(claims, inbox, b"x" * 1001)
    with monkeypatch.context() as patch:
        patch.setattr(os, "link", full)
        with pytest.raises(EnvironmentFailedError, match="No space left"):
            put_refused(tmp_path / "refused", export, error(), DAY)
    folder = put_refused(tmp_path / "refused", export, error(), DAY)
    assert (folder / "export.xlsx").exists()


def test_a_link_is_not_carried_over(claims: Claims, inbox: Path, tmp_path: Path) -> None:
    (inbox / "export.xlsx").write_bytes(b"data")
    claim = claims.take(inbox, only(inbox))
    assert claim is not None
    claim.original.unlink()
    claim.original.symlink_to("/etc/hostname")
    export = claims.load(claim)
    folder = put_refused(tmp_path / "refused", export, error(), DAY)
    assert [path.name for path in folder.iterdir()] == ["why.txt"]


def test_a_name_that_the_file_system_refuses_is_replaced(
    claims: Claims, inbox: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    real = Path.replace

    def replace(self: Path, target: Path) -> Path:
        if target.name == "export.xlsx":
            raise OSError(errno.EILSEQ, "Invalid or incomplete multibyte or wide character")
        return real(self, target)

    export = claimed(claims, inbox)
    monkeypatch.setattr(Path, "replace", replace)
    folder = put_refused(tmp_path / "refused", export, error(), DAY)
    assert sorted(path.name for path in folder.iterdir()) == ["export.bin", "why.txt"]


def test_a_full_disk_is_told(
    claims: Claims, inbox: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def full(*_: object) -> None:
        raise OSError(errno.ENOSPC, "No space left on device")

    export = claimed(claims, inbox)
    with monkeypatch.context() as patch:
        patch.setattr(os, "fsync", full)
        with pytest.raises(EnvironmentFailedError, match="No space left"):
            put_refused(tmp_path / "refused", export, error(), DAY)
    folder = put_refused(tmp_path / "refused", export, error(), DAY)
    assert sorted(path.name for path in folder.iterdir()) == ["export.xlsx", "why.txt"]
    assert len(list((tmp_path / "refused").iterdir())) == 1
