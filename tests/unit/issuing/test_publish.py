"""A published report has a name that every file system takes, and is never written over another one."""

from __future__ import annotations

from pathlib import Path

import pytest
from signing.keys_fixture import NOW, key_of
from signing.report_fixture import rendered_report

from qcreport.errors import EnvironmentFailedError
from qcreport.issuing.publish import already_published, publish, report_name
from qcreport.signing.seal import seal

ATTACHED = {"plan.toml": b'name = "p"\n', "result.json": b"{}"}


@pytest.mark.parametrize(
    ("export_name", "expected"),
    [
        ("lap-shear-2403.xlsx", "2026-0042 lap-shear-2403.pdf"),
        ("lap.shear.2403.xlsx", "2026-0042 lap.shear.2403.pdf"),
        ("no-extension", "2026-0042 no-extension.pdf"),
        ("Prüfung 23 °C.xlsx", "2026-0042 Prüfung 23 _C.pdf"),
        ("a/b\\c:d*e?f|g<h>i\"j'k$l\n.xlsx", "2026-0042 a_b_c_d_e_f_g_h_i_j_k_l_.pdf"),
        ("  ..  .xlsx", "2026-0042 export.pdf"),
        (".xlsx", "2026-0042 export.pdf"),
        ("\udcff\udcfe.xlsx", "2026-0042 __.pdf"),
        ("x" * 200 + ".xlsx", f"2026-0042 {'x' * 80}.pdf"),
    ],
)
def test_names(export_name: str, expected: str) -> None:
    assert report_name("2026-0042", export_name) == expected


@pytest.mark.parametrize("letter", ["x", "ü", "漢", "𠀀"])
def test_a_long_name_in_any_alphabet_can_be_written(letter: str, tmp_path: Path) -> None:
    longest = 250 // len(letter.encode())
    name = report_name("2026-0042", letter * longest + ".xlsx")
    assert name.startswith(f"2026-0042 {letter * 20}")
    assert publish(tmp_path, name, b"sealed").read_bytes() == b"sealed"


def test_nothing_is_overwritten(tmp_path: Path) -> None:
    name = "2026-0042 a.pdf"
    assert publish(tmp_path, name, b"sealed") == tmp_path / name
    assert publish(tmp_path, name, b"sealed") == tmp_path / name, "the same again is no fault"
    with pytest.raises(EnvironmentFailedError, match="is there already and is another file"):
        publish(tmp_path, name, b"another")
    assert (tmp_path / name).read_bytes() == b"sealed"
    assert [p.name for p in tmp_path.iterdir()] == [name]


def test_a_folder_that_is_gone(tmp_path: Path) -> None:
    with pytest.raises(EnvironmentFailedError, match="could not be written"):
        publish(tmp_path / "gone", "2026-0042 a.pdf", b"sealed")


def test_what_an_interrupted_try_published_is_taken_up(tmp_path: Path) -> None:
    key = key_of("QC reports")
    report = seal(rendered_report(ATTACHED), key, at=NOW, reason="Sealed", location="")
    name = "2026-0042 a.pdf"
    assert already_published(tmp_path, name, ATTACHED) is None
    publish(tmp_path, name, report)
    assert already_published(tmp_path, name, ATTACHED) == report
    assert already_published(tmp_path, name, {**ATTACHED, "result.json": b"{ }"}) is None
    assert already_published(tmp_path, name, {"plan.toml": ATTACHED["plan.toml"]}) is None
