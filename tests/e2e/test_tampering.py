"""`verify` on changed reports: whatever byte is changed, the answer is no and says what is wrong."""

from __future__ import annotations

import re
from collections.abc import Callable
from pathlib import Path

import pikepdf
import pytest
from rig import ROOT, Site, conforms, copied, done, qcreport

CHANGED = "Not valid: the seal does not hold: bytes that it covers were changed after signing."
UNREADABLE = "This PDF cannot be read as a sealed report: it is damaged, cut off, or was changed."


@pytest.fixture(scope="session")
def report(reported_once: Path) -> bytes:
    (path,) = Site(reported_once / "site").reports
    return path.read_bytes()


def in_the_page(report: bytes, path: Path) -> int:
    """Return where the middle of the first page's drawing instructions lies."""
    with pikepdf.open(path) as pdf:
        contents = pdf.pages[0].obj["/Contents"]
        stream = contents[0] if isinstance(contents, pikepdf.Array) else contents
        raw = stream.read_raw_bytes()
    assert report.count(raw) == 1
    return report.index(raw) + len(raw) // 2


def in_the_attached(name: str) -> Callable[[bytes, Path], int]:
    def find(report: bytes, path: Path) -> int:
        with pikepdf.open(path) as pdf:
            raw = pdf.attachments[name].get_file().obj.read_raw_bytes()
        assert report.count(raw) == 1
        return report.index(raw) + len(raw) // 2

    return find


def in_the_signature(report: bytes, path: Path) -> int:
    found = re.search(rb"/Contents ?<([0-9a-fA-F]{200,})>", report)
    assert found is not None
    return found.start(1) + 600


def in_the_header(report: bytes, path: Path) -> int:
    return 7


def in_the_last_line(report: bytes, path: Path) -> int:
    return len(report) - 3


@pytest.mark.parametrize(
    ("find", "says"),
    [
        (in_the_header, [CHANGED]),
        (in_the_page, [CHANGED, UNREADABLE]),
        (in_the_attached("export.xlsx"), [CHANGED, UNREADABLE]),
        (in_the_attached("result.json"), [CHANGED, UNREADABLE]),
        (in_the_signature, ["Not valid: the seal does not hold: the signature"]),
        (in_the_last_line, [UNREADABLE]),
    ],
    ids=["header", "page", "export", "result", "signature", "end"],
)
def test_one_changed_byte(
    find: Callable[[bytes, Path], int], says: list[str], report: bytes, tmp_path: Path
) -> None:
    path = tmp_path / "report.pdf"
    path.write_bytes(report)
    at = find(report, path)
    changed = bytearray(report)
    changed[at] = ord("0") if changed[at] != ord("0") else ord("1")
    path.write_bytes(changed)
    ran = qcreport("verify", path)
    assert ran.code == 1
    assert any(text in ran.text for text in says), ran.text
    as_json = qcreport("verify", path, "--json")
    assert as_json.code == 1
    if ran.out:
        conforms(as_json.json, "verify")
        assert as_json.json["valid"] is False
        assert not (as_json.json["sealed"]["intact"] and as_json.json["sealed"]["valid"])
    else:
        conforms(as_json.json, "error")


def test_an_exchanged_attachment(report: bytes, tmp_path: Path) -> None:
    path, forged = tmp_path / "report.pdf", tmp_path / "forged.pdf"
    path.write_bytes(report)
    with pikepdf.open(path) as pdf:
        pdf.attachments["result.json"] = b"{}"
        pdf.save(forged)
    ran = qcreport("verify", forged)
    assert ran.code == 1
    assert ran.text.strip()


@pytest.mark.parametrize("part", [0.3, 0.97])
def test_a_report_cut_off(part: float, report: bytes, tmp_path: Path) -> None:
    path = tmp_path / "report.pdf"
    path.write_bytes(report[: int(part * len(report))])
    ran = qcreport("verify", path)
    assert (ran.code, ran.err) == (1, UNREADABLE + "\n")


def test_something_appended(report: bytes, tmp_path: Path) -> None:
    path = tmp_path / "report.pdf"
    path.write_bytes(report + b"\n1 0 obj\n<< /Type /Catalog >>\nendobj\n%%EOF\n")
    ran = qcreport("verify", path)
    assert ran.code == 1
    assert ran.text.strip()


@pytest.mark.parametrize("content", [b"", b"hello", b"PK\x03\x04 not a report"], ids=["empty", "text", "zip"])
def test_not_a_pdf(content: bytes, tmp_path: Path) -> None:
    path = tmp_path / "report.pdf"
    path.write_bytes(content)
    for command in (("verify", path), ("extract", path, tmp_path / "to")):
        ran = qcreport(*command)
        assert (ran.code, ran.err) == (1, "This file is not a PDF.\n")
    as_json = qcreport("verify", path, "--json")
    assert as_json.code == 1
    conforms(as_json.json, "error")
    assert as_json.json["error"]["kind"] == "not_our_report"


def test_a_pdf_that_is_no_report(tmp_path: Path) -> None:
    path = tmp_path / "report.pdf"
    with pikepdf.new() as pdf:
        pdf.add_blank_page()
        pdf.save(path)
    ran = qcreport("verify", path)
    assert ran.code == 1
    assert ran.err.strip()


def test_without_roots_nobody_is_trusted(report: bytes, tmp_path: Path) -> None:
    path = tmp_path / "report.pdf"
    path.write_bytes(report)
    ran = done("verify", path)
    assert "Who sealed this is not proven; compare the fingerprint" in ran.out
    verdict = done("verify", path, "--json").json
    conforms(verdict, "verify")
    assert (verdict["valid"], verdict["trusted"]) == (True, None)
    assert verdict["recomputed"] == {"matches": True, "differences": [], "done": True, "notes": []}
    assert [a["matches"] for a in verdict["attachments"]] == [True] * 6


def test_the_laboratorys_certificate_is_trusted(report: bytes, reported: Site, tmp_path: Path) -> None:
    path = tmp_path / "report.pdf"
    path.write_bytes(report)
    for by in (("--trust", reported.root / "keys/service.crt"), ("--site", reported.root)):
        ran = done("verify", path, *by)
        assert "The seal is by a certificate you trust" in ran.out


def test_a_foreign_certificate_is_not(report: bytes, site: Site, tmp_path: Path) -> None:
    path = tmp_path / "report.pdf"
    path.write_bytes(report)
    secret = tmp_path / "passphrase"
    secret.write_text("a person's own\n")
    secret.chmod(0o600)
    site.done("keys", "new", "--for", "person", "Somebody Else", "--passphrase-file", secret)
    foreign = site.root / "keys/person-somebody-else.crt"
    ran = qcreport("verify", path, "--trust", foreign)
    assert ran.code == 1
    assert "Not valid" not in ran.out
    assert "The seal is not by any certificate you trust" in ran.out
    verdict = qcreport("verify", path, "--trust", foreign, "--json").json
    conforms(verdict, "verify")
    assert (verdict["valid"], verdict["trusted"]) == (True, False)


@pytest.mark.parametrize("option", ["report", "--trust", "--site"])
def test_what_was_named_is_not_there(option: str, report: bytes, tmp_path: Path) -> None:
    path, absent = tmp_path / "report.pdf", tmp_path / "absent"
    path.write_bytes(report)
    ran = qcreport("verify", absent) if option == "report" else qcreport("verify", path, option, absent)
    assert ran.code == 2
    assert str(absent) in ran.err


def test_a_trust_file_without_a_certificate(report: bytes, tmp_path: Path) -> None:
    path = tmp_path / "report.pdf"
    path.write_bytes(report)
    ran = qcreport("verify", path, "--trust", ROOT / "README.md")
    assert ran.code == 2
    assert "holds no certificate" in ran.err


def test_extract_writes_what_was_sealed_and_overwrites_nothing(
    reported: Site, reported_once: Path, tmp_path: Path
) -> None:
    (path,) = reported.reports
    to = tmp_path / "evidence"
    ran = done("extract", path, to)
    written = {p.name: p.read_bytes() for p in to.iterdir()}
    assert sorted(written) == [
        "context.json", "export.xlsx", "layout.toml", "plan.toml", "result.json", "rules.toml",
    ]  # fmt: skip
    assert all(str(to / name) in ran.out for name in written)
    (export,) = (reported_once / "export").iterdir()
    assert written["export.xlsx"] == export.read_bytes()
    assert written["plan.toml"] == reported.plan.read_bytes()
    assert written["layout.toml"] == reported.layout.read_bytes()
    assert written["rules.toml"] == (reported.root / "config/rules/default.toml").read_bytes()
    (to / "plan.toml").write_text("mine")
    again = qcreport("extract", path, to)
    assert again.code == 2
    assert "plan.toml is already in that folder" in again.err or "context.json is already" in again.err
    assert (to / "plan.toml").read_text() == "mine"
    (to / "plan.toml").unlink()
    (to / "result.json").unlink()
    assert qcreport("extract", path, to).code == 2
    assert not (to / "plan.toml").exists(), "some files of an earlier call are there: nothing is written"


def test_the_site_is_not_needed(reported: Site, tmp_path: Path) -> None:
    """An auditor has one file: no site, no settings, another folder."""
    (path,) = reported.reports
    alone = copied(path.parent, tmp_path / "auditor").root
    done("verify", next(alone.glob("*.pdf")).name, cwd=alone)
