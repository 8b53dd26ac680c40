"""Signing by persons, through the command line and through the inbox, on a site as the README makes one."""

from __future__ import annotations

import re
import shutil
import sqlite3
import subprocess
from contextlib import closing
from io import BytesIO
from pathlib import Path

import pytest
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter
from pyhanko.sign import signers
from pyhanko.sign.fields import SigSeedSubFilter
from rig import NAME, Ran, Site, conforms, copied, done, export, made_once

ADA, BO, EVE = "Ada Reviewer", "Bo Authoriser", "Eve Stranger"
PASSPHRASE = "only for this session"  # noqa: S105  of keys that no test keeps
RIGHTS = {ADA: '["reviewed", "authorised"]', BO: '["reviewed", "authorised"]'}


def key_of(site: Site, name: str) -> Path:
    return site.root / "keys" / f"person-{name.lower().replace(' ', '-')}.p12"


def passphrase_of(site: Site) -> Path:
    return site.root / "keys/person-passphrase"


def with_people(site: Site) -> None:
    """Make three keys and let two of the people sign."""
    passphrase = passphrase_of(site)
    passphrase.write_text(PASSPHRASE + "\n")
    passphrase.chmod(0o600)
    people = site.root / "config/people.toml"
    for name in (ADA, BO, EVE):
        out = site.done("keys", "new", "--for", "person", name, "--passphrase-file", passphrase).out
        (block,) = re.findall(r"\[\[person\]\]\n.*?\nmay = .*?\n", out, re.DOTALL)
        if name in RIGHTS:
            people.write_text(
                people.read_text("utf-8") + block.replace('["reviewed"]', RIGHTS[name]), "utf-8"
            )


@pytest.fixture(scope="session")
def peopled_once(site_as_made: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    def make(folder: Path) -> None:
        site = copied(site_as_made, folder / "site")
        with_people(site)
        (folder / "export").mkdir()
        site.done("compare", export(folder / "export" / NAME))

    return made_once(tmp_path_factory, "peopled", make) / "site"


@pytest.fixture
def peopled(peopled_once: Path, tmp_path: Path) -> Site:
    """Return a site of its own with one sealed report and people who may sign it."""
    return copied(peopled_once, tmp_path / "site")


@pytest.fixture
def number(peopled: Site) -> str:
    (report,) = peopled.reports
    return report.name[:9]


def sign(site: Site, report: str | Path, role: str, name: str, *more: str) -> Ran:
    key, passphrase = key_of(site, name), passphrase_of(site)
    return site.run("sign", report, "--as", role, "--key", key, "--passphrase-file", passphrase, *more)


def signed_in_a_reader(site: Site, pdf: bytes, name: str, field: str) -> bytes:
    """Return what another program makes of a report: other form of signature, own look, own metadata."""
    signer = signers.SimpleSigner.load_pkcs12(str(key_of(site, name)), passphrase=PASSPHRASE.encode())
    meta = signers.PdfSignatureMetadata(
        field_name=field, reason="I agree", subfilter=SigSeedSubFilter.ADOBE_PKCS7_DETACHED
    )
    writer = IncrementalPdfFileWriter(BytesIO(pdf))
    return bytes(signers.sign_pdf(writer, meta, signer=signer, existing_fields_only=True).getvalue())


def state(site: Site) -> str:
    return str(site.done("records", "list", "--json").json["reports"][0]["state"])


def test_from_draft_to_issued(peopled: Site, number: str, tmp_path: Path) -> None:
    (report,) = peopled.reports
    draft = report.read_bytes()
    waiting = peopled.done("sign", "--json").json["waiting"]
    assert [(w["number"], w["missing"]) for w in waiting] == [(number, ["reviewed", "authorised"])]
    early = sign(peopled, number, "authorised", BO)
    assert early.code == 1
    assert "is not reviewed yet" in early.err
    first = sign(peopled, number, "reviewed", ADA)
    assert first.code == 0, first.text
    assert "run 1 of 1" in first.out, "what is signed is shown"
    assert "Lap-shear strength: beyond the margin" in first.out
    assert state(peopled) == "signed"
    same = sign(peopled, number, "authorised", ADA)
    assert (same.code, "somebody else must sign it" in same.err) == (1, True)
    again = sign(peopled, number, "reviewed", BO)
    assert (again.code, f"{number} is reviewed already, by {ADA}" in again.err) == (1, True)
    second = sign(peopled, report, "authorised", BO, "--json")
    assert second.json["signed"][0]["issued"] is True
    assert state(peopled) == "issued"
    assert peopled.done("sign").out == "No report waits for a signature.\n"
    signed = report.read_bytes()
    assert signed.startswith(draft)
    peopled.holds()
    alone = peopled.root.parent / "alone.pdf"
    alone.write_bytes(signed)
    verdict = done("verify", alone, "--trust", peopled.root / "keys/service.crt", "--json").json
    conforms(verdict, "verify")
    assert (verdict["valid"], verdict["trusted"], verdict["changed_after_seal"]) == (True, True, False)
    assert [(s["name"], s["meaning"]) for s in verdict["signatures"]] == [
        (ADA, "reviewed"),
        (BO, "authorised"),
    ]
    assert all("under its seal" in s["explanation"] for s in verdict["signatures"])
    assert verdict["pages"] == {"matches": True, "differences": [], "reason": None}
    told = subprocess.run(["pdfsig", alone], capture_output=True, text=True, check=False).stdout
    assert told.count("Signature is Valid") == 3
    assert told.count("Total document signed") == 1
    fonts = subprocess.run(["pdffonts", alone], capture_output=True, text=True, check=True).stdout
    assert all(line.split()[-5] == "yes" for line in fonts.splitlines()[2:]), "every font is embedded"
    text = subprocess.run(
        ["pdftotext", "-l", "1", alone, "-"], capture_output=True, text=True, check=True
    ).stdout
    assert ADA in text
    assert BO in text


def test_the_ledger_alone_shows_a_lost_signature(peopled: Site, number: str) -> None:
    (report,) = peopled.reports
    draft = report.read_bytes()
    assert sign(peopled, number, "reviewed", ADA).code == 0
    assert peopled.done("verify", report).out.count("By the records of the site the report is signed.") == 1
    report.write_bytes(draft)
    cut = peopled.run("verify", report)
    assert cut.code == 1
    assert f"the signature as reviewed by {ADA}, which the ledger has, is missing" in cut.out
    check = peopled.run("records", "check")
    assert (check.code, "lacks the signatures that the ledger has" in check.out) == (1, True)
    peopled.done("sign")
    peopled.holds()
    assert report.read_bytes() != draft, "the signed version is put back from the archive"


def test_a_copy_signed_in_a_reader_and_dropped(peopled: Site, number: str) -> None:
    (report,) = peopled.reports
    draft = report.read_bytes()
    copy = signed_in_a_reader(peopled, draft, ADA, "Reviewed")
    (peopled.inbox / "signed.pdf").write_bytes(copy)
    out = peopled.done("watch", "--once").out
    assert f"{number} is reviewed by {ADA}." in out
    assert report.read_bytes() == copy
    assert not peopled.refused
    assert not list(peopled.inbox.iterdir())
    (peopled.inbox / "again.pdf").write_bytes(copy)
    (peopled.inbox / "second.pdf").write_bytes(signed_in_a_reader(peopled, copy, BO, "Authorised"))
    out = peopled.done("watch", "--once").out
    assert "again.pdf is a copy of" in out
    assert f"{number} is authorised by {BO}; it is issued." in out
    peopled.holds()
    verdict = peopled.done("verify", report, "--json").json
    assert (verdict["valid"], verdict["trusted"]) == (True, True)
    assert verdict["records"] == {"matches": True, "state": "issued"}


def test_copies_that_are_refused(peopled: Site, number: str) -> None:
    (report,) = peopled.reports
    draft = report.read_bytes()
    ours = signed_in_a_reader(peopled, draft, ADA, "Reviewed")
    dropped = {
        "stranger.pdf": (signed_in_a_reader(peopled, draft, EVE, "Reviewed"), "names nobody with this cert"),
        "early.pdf": (signed_in_a_reader(peopled, draft, BO, "Authorised"), "is not reviewed yet"),
        "twice.pdf": (signed_in_a_reader(peopled, ours, BO, "Authorised"), "It adds 2 signatures"),
        "appended.pdf": (draft + b"\n%more\n", "no signature"),
        "cut.pdf": (draft[: len(draft) // 2], "does not begin with a report that was sealed here"),
        "touched.pdf": (draft.replace(b"%PDF-1.7", b"%PDF-1.6"), "does not begin with a report"),
        "seal.pdf": (b"%PDF-1.7\nnothing\n", "does not begin with a report"),
    }
    for name, (data, _) in dropped.items():
        (peopled.inbox / name).write_bytes(data)
    out = peopled.done("watch", "--once").out
    reasons = [folder / "why.txt" for folder in peopled.refused]
    assert len(reasons) == len(dropped)
    texts = [path.read_text("utf-8") for path in reasons]
    for name, (_, why) in dropped.items():
        (text,) = [t for t in texts if f"Not read:  {name}\n" in t]
        assert why in text, text
        assert text.count("\n") == 5
    assert out.count("Kept in:") == len(dropped)
    assert report.read_bytes() == draft
    assert state(peopled) == "sealed"
    peopled.holds()


def test_returned_is_signed_no_more(peopled: Site, number: str) -> None:
    without = peopled.run("sign", number, "--return")
    assert (without.code, "--reason" in without.err) == (2, True)
    key, passphrase = key_of(peopled, ADA), passphrase_of(peopled)
    why = ("--return", "--reason", "wrong batch", "--key", key, "--passphrase-file", passphrase)
    assert "is returned" in peopled.done("sign", number, *why).out
    assert state(peopled) == "returned"
    assert peopled.done("sign").out == "No report waits for a signature.\n"
    late = sign(peopled, number, "reviewed", BO)
    assert (late.code, "was returned on" in late.err, "wrong batch" in late.err) == (1, True, True)


def test_keys_that_must_not_sign(peopled: Site, number: str, tmp_path: Path) -> None:
    (report,) = peopled.reports
    draft = report.read_bytes()
    stranger = sign(peopled, number, "reviewed", EVE)
    assert (stranger.code, "names nobody with this certificate" in stranger.err) == (1, True)
    wrong = tmp_path / "wrong"
    wrong.write_text("not that one\n")
    wrong.chmod(0o600)
    key = key_of(peopled, ADA)
    ran = peopled.run("sign", number, "--as", "reviewed", "--key", key, "--passphrase-file", wrong)
    assert (ran.code, "does not open this key" in ran.err) == (1, True)
    assert "not that one" not in ran.text
    env = {"QCREPORT_KEY_PASSPHRASE": PASSPHRASE}
    ran = peopled.run("sign", number, "--as", "reviewed", "--key", key, **env)
    assert (ran.code, "No passphrase was given" in ran.err) == (1, True), "never from the environment"
    assert peopled.run("sign", number, "--as", "reviewed").code == 2
    assert peopled.run("sign", number).code == 2
    assert peopled.run("sign", "2026-0999", "--as", "reviewed", "--key", key).code == 2
    key.chmod(0o644)
    ran = sign(peopled, number, "reviewed", ADA)
    assert (ran.code, "may be read or changed by others" in ran.err) == (1, True)
    elsewhere = tmp_path / "report.pdf"
    shutil.copy(report, elsewhere)
    elsewhere.write_bytes(draft + b"\n")
    assert sign(peopled, elsewhere, "reviewed", BO).code == 1
    assert report.read_bytes() == draft


def test_altered_records_are_found_and_named(peopled: Site, number: str) -> None:
    (report,) = peopled.reports
    assert peopled.done("verify", report).out.startswith(f"Report {number}\nValid: ")
    database = peopled.root / "records/records.sqlite3"
    intact = database.read_bytes()
    with closing(sqlite3.connect(database)) as connection:
        names = connection.execute("SELECT name FROM sqlite_master WHERE type = 'trigger'").fetchall()
        for (name,) in names:
            connection.execute(f'DROP TRIGGER "{name}"')
        connection.execute("UPDATE ledger SET actor = 'nobody' WHERE kind = 'received'")
        connection.commit()
    ran = peopled.run("verify", report)
    assert (ran.code, "records: Entry" in ran.out, "no longer matches its own hash" in ran.out) == (
        1,
        True,
        True,
    )
    database.write_bytes(intact)
    kept = max((peopled.root / "archive").rglob("*.bin"), key=lambda path: path.stat().st_size)
    kept.chmod(0o644)
    kept.write_bytes(kept.read_bytes() + b" ")
    ran = peopled.run("verify", report, "--json")
    assert ran.code == 1
    conforms(ran.json, "verify")
    assert ran.json["records"] == {"matches": False, "state": "sealed"}
    assert any("no longer matches its digest" in problem for problem in ran.json["problems"])


def test_a_report_of_another_site_is_not_known(peopled: Site, reported_once: Path) -> None:
    (theirs,) = Site(reported_once / "site").reports
    ran = peopled.run("verify", theirs, "--json")
    assert ran.code == 1
    assert any("versions of" in problem for problem in ran.json["problems"])
