"""Past exports taken in, a period handed out, a backup put back: what auditors and IT do with the records."""

from __future__ import annotations

import json
import re
import shutil
import sqlite3
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest
from cryptography import x509
from cryptography.hazmat.primitives import hashes
from cryptography.hazmat.primitives.asymmetric import ec
from rig import BATCHES, NAME, Site, export

from qcreport.canonical import sha256_hex

pytestmark = pytest.mark.slow
IN_A_PERIOD = {
    "reports",
    "originals",
    "ledger.jsonl",
    "checkpoint.json",
    "checkpoint.sig",
    "service.crt",
    "summary.csv",
    "summary.json",
    "HOW-TO-CHECK.txt",
    "SHA256SUMS",
}
EVER = ("--from", "2000-01-01", "--to", "2999-12-31")


@pytest.fixture
def past(tmp_path: Path) -> Path:
    """Return a folder of past exports: two of one growing list, one broken, one of no plan."""
    folder = tmp_path / "past"
    folder.mkdir()
    export(folder / "lap-shear-1.xlsx", {"LA-1": (24.0, 24.1, 24.2)})
    export(folder / "lap-shear-2.xlsx", {"LA-1": (24.0, 24.9, 24.2), "LA-2": (23.0,)})
    (folder / "lap-shear-3.xlsx").write_bytes(b"no workbook")
    (folder / "other.xlsx").write_bytes(b"nor this")
    return folder


def test_past_exports_enter_the_store_without_reports_and_are_joined_later(
    site: Site, past: Path, an_export: Path
) -> None:
    ran = site.run("records", "import", past, "--json")
    assert ran.code == 3
    files = {f["name"]: f for f in ran.json["files"]}
    assert {name: f["state"] for name, f in files.items()} == {
        "lap-shear-1.xlsx": "imported",
        "lap-shear-2.xlsx": "imported",
        "lap-shear-3.xlsx": "refused",
        "other.xlsx": "refused",
    }
    second = files["lap-shear-2.xlsx"]
    assert (second["new"], second["known"], second["changed"], second["retests"]) == (1, 2, 1, 1)
    codes = [files[name]["refusal"]["code"] for name in ("lap-shear-3.xlsx", "other.xlsx")]
    assert codes == ["not_a_workbook", "no_plan"]
    assert "4 of 4" in ran.err
    assert site.reports == []
    assert site.done("records", "list", "--json").json["reports"] == []
    again = site.run("records", "import", past)
    assert "0 imported, 2 known already, 2 refused." in again.out
    assert "not_a_workbook" in again.out
    assert site.done("records", "check", "--reread", "all", "--json").json["reread"] == 2
    joined = export(an_export.with_name("lap-shear-4.xlsx"), {"LA-1": (24.0, 24.9, 24.2), **BATCHES})
    values = site.done("compare", joined, "--json").json["values"]
    assert (values["new"], values["known"]) == (15, 3)
    assert values["changed"][0]["source"] == "an imported export"
    assert site.holds()["ok"]


def test_an_import_names_its_layout_and_refuses_what_is_not_there(site: Site, past: Path) -> None:
    odd = past / "odd name.xlsx"
    shutil.copy(past / "lap-shear-1.xlsx", odd)
    assert site.done("records", "import", odd, "--layout", "shear-rig").out.startswith("1 imported")
    assert site.run("records", "import", odd, "--layout", "absent").code == 2
    assert site.run("records", "import", past / "absent.xlsx").code == 2


def test_a_changed_import_is_found(site: Site, past: Path) -> None:
    site.done("records", "import", past / "lap-shear-1.xlsx")
    raw = sqlite3.connect(site.root / "records/records.sqlite3")
    raw.execute("DROP TRIGGER measurement_no_update")
    raw.execute("UPDATE measurement SET text = '25.0', value = 25.0 WHERE id = 1")
    raw.commit()
    raw.close()
    ran = site.run("records", "check", "--reread", "all")
    assert ran.code == 1
    assert "Measurements imported from lap-shear-1.xlsx were changed" in ran.out
    assert "holds 1 values that the store has not: Results!E2" in ran.out
    assert site.run("records", "check", "--reread", "none").code == 2


@pytest.fixture
def exported(reported: Site, tmp_path: Path) -> Path:
    reported.done("records", "export", tmp_path / "period", *EVER)
    return tmp_path / "period"


def script_of(folder: Path) -> str:
    """Return the check that the page gives an auditor to save."""
    page = (folder / "HOW-TO-CHECK.txt").read_text("utf-8")
    found = re.search(r"^----- check\.py -----\n(.*)^----- end -----$", page, re.DOTALL | re.MULTILINE)
    assert found is not None
    return found.group(1)


def checked(folder: Path) -> subprocess.CompletedProcess[str]:
    """Run that check by plain Python, without anything that is installed here."""
    return subprocess.run(
        [sys.executable, "-I", "-S", "-c", script_of(folder)],
        cwd=folder,
        capture_output=True,
        text=True,
        check=False,
    )


def test_a_period_is_one_folder_that_can_be_checked_alone(reported: Site, exported: Path) -> None:
    assert {p.name for p in exported.iterdir()} == IN_A_PERIOD
    sums = [line.split("  ", 1) for line in (exported / "SHA256SUMS").read_text("utf-8").splitlines()]
    assert all(sha256_hex((exported / name).read_bytes()) == digest for digest, name in sums)
    files = {str(p.relative_to(exported)) for p in exported.rglob("*") if p.is_file()}
    assert {name for _, name in sums} == files - {"SHA256SUMS"}
    report = reported.reports[0]
    assert (exported / "reports" / report.name).read_bytes() == report.read_bytes()
    assert [p.name.split(" ", 1)[1] for p in (exported / "originals").iterdir()] == [NAME]
    ran = checked(exported)
    assert "The chain holds" in ran.stdout
    assert "names this very entry" in ran.stdout
    certificate = x509.load_pem_x509_certificate((exported / "service.crt").read_bytes())
    key = certificate.public_key()
    assert isinstance(key, ec.EllipticCurvePublicKey)
    signature, document = ((exported / f"checkpoint.{end}").read_bytes() for end in ("sig", "json"))
    key.verify(signature, document, ec.ECDSA(hashes.SHA256()))
    (row,) = json.loads((exported / "summary.json").read_text("utf-8"))["reports"]
    assert (row["file"], row["state"]) == (report.name, "sealed")


@pytest.mark.parametrize("how", ["changed", "dropped", "cut", "swapped"])
def test_the_auditors_own_check_finds_what_was_done_to_the_ledger(exported: Path, how: str) -> None:
    path = exported / "ledger.jsonl"
    lines = path.read_text("utf-8").splitlines()
    if how == "changed":
        lines[2] = lines[2].replace('"actor":"', '"actor":"not ')
    elif how == "dropped":
        del lines[2]
    elif how == "cut":
        del lines[-1]
    else:
        lines[2], lines[3] = lines[3], lines[2]
    path.write_text("\n".join(lines) + "\n", "utf-8")
    assert checked(exported).returncode != 0


def test_an_export_never_writes_over_anything_and_says_what_is_missing(
    reported: Site, exported: Path
) -> None:
    assert reported.run("records", "export", exported, *EVER).code == 2
    before = ("--from", "2000-01-02", "--to", "2000-01-01")
    assert reported.run("records", "export", exported / "x", *before).code == 2
    assert reported.run("records", "export", exported / "x", "--from", "soon", "--to", "now").code == 2
    reported.reports[0].unlink()
    ran = reported.run("records", "export", exported / "x", *EVER)
    assert ran.code == 1
    assert "cannot be read" in ran.out


def test_a_backup_put_back_is_proved_by_the_check(reported: Site, tmp_path: Path, an_export: Path) -> None:
    shutil.copytree(reported.root, tmp_path / "backup")
    number = reported.reports[0].name.split()[0]
    reported.done("records", "withdraw", number, "--reason", "After the backup")
    kept_elsewhere = tmp_path / "checkpoints.jsonl"
    shutil.copy(reported.root / "records/checkpoints.jsonl", kept_elsewhere)
    shutil.rmtree(reported.root)
    shutil.copytree(tmp_path / "backup", reported.root)
    restored: Any = reported.done("records", "check", "--reread", "all", "--json").json
    assert (restored["ok"], restored["reports"], restored["reread"]) == (True, 1, 1)
    late = reported.run("records", "check", "--checkpoint", kept_elsewhere)
    assert late.code == 1
    assert "is known to have been written" in late.out
    (reported.root / "archive").rename(tmp_path / "forgotten")
    assert "archive lacks" in reported.run("records", "check").out
