"""Signed heads: written, read after a kill, and judged."""

from __future__ import annotations

import hashlib
import json
from pathlib import Path

import pytest

from qcreport.records.chain import Head, Kind
from qcreport.records.check import CheckOptions, check
from qcreport.records.check_checkpoints import Trust
from qcreport.records.checkpoints import FILE_NAME, Checkpoint, checkpoints, newest, write_checkpoint
from qcreport.records.facade import Records

from .test_check import tamper

KEY = b"the key"
TRUST = Trust(
    signer=lambda document, signature, _: "ours" if signature == signed(document) else None,
    fingerprints=("ours",),
)


def signed(document: bytes) -> bytes:
    """Stand in for a signature: only who has the key can make it."""
    return hashlib.sha256(KEY + document).digest()


def write(folder: Path, head: Head) -> Checkpoint:
    return write_checkpoint(folder, head, at="2026-11-02T06:12:00Z", sign=signed, certificate_pem=b"PEM")


def problems(records: Records, tmp_path: Path, *files: Path) -> tuple[str, ...]:
    options = CheckOptions(trust=TRUST, checkpoint_files=files)
    return check(records, tmp_path / "site/reports", options).problems


def test_heads_are_read_as_written(tmp_path: Path) -> None:
    heads = [Head(sequence=n, entry_hash=f"{n:064x}") for n in (1, 5)]
    written = [write(tmp_path, head) for head in heads]
    assert list(checkpoints(tmp_path / FILE_NAME)) == written
    assert newest(tmp_path / FILE_NAME) == written[1]
    assert newest(tmp_path / "absent") is None


@pytest.mark.parametrize("kept", range(1, 40, 7))
def test_a_line_cut_off_by_a_kill_is_passed_over_and_then_replaced(tmp_path: Path, kept: int) -> None:
    first = write(tmp_path, Head(sequence=1, entry_hash="a" * 64))
    path = tmp_path / FILE_NAME
    whole = path.read_bytes()
    path.write_bytes(whole + whole[:kept])
    assert list(checkpoints(path)) == [first]
    second = write(tmp_path, Head(sequence=2, entry_hash="b" * 64))
    assert list(checkpoints(path)) == [first, second]


def test_a_spoiled_line_is_told(tmp_path: Path) -> None:
    write(tmp_path, Head(sequence=1, entry_hash="a" * 64))
    path = tmp_path / FILE_NAME
    path.write_bytes(b"nonsense\n" + path.read_bytes())
    with pytest.raises(ValueError, match="line 1 of"):
        list(checkpoints(path))


def test_good_checkpoints_cover_the_ledger(site: Records, tmp_path: Path) -> None:
    write(site.database.path.parent, site.head())
    status = check(site, tmp_path / "site/reports", CheckOptions(trust=TRUST))
    assert (status.problems, status.covered) == ((), site.head().sequence)


CUT = "DELETE FROM ledger WHERE sequence = (SELECT max(sequence) FROM ledger)"


def test_a_cut_end_shows_against_the_signed_head(site: Records, tmp_path: Path) -> None:
    last = site.note(Kind.VERIFIED, {}, actor="auditor").sequence
    write(site.database.path.parent, site.head())
    tamper(site, CUT)
    found = problems(site, tmp_path)
    assert found == (f"The ledger ends at entry {last - 1}; entry {last} is known to have been written.",)


def test_a_cut_end_shows_against_a_copy_kept_elsewhere(site: Records, tmp_path: Path) -> None:
    site.note(Kind.VERIFIED, {}, actor="auditor")
    write(tmp_path, site.head())
    tamper(site, CUT)
    assert problems(site, tmp_path) == ()
    assert "is known to have been written" in problems(site, tmp_path, tmp_path / FILE_NAME)[0]


def test_a_report_that_the_ledger_does_not_know_is_named(site: Records, tmp_path: Path) -> None:
    (tmp_path / "site/reports/2026-0007 lost.pdf").write_bytes(b"%PDF")
    (tmp_path / "site/reports/notes.pdf").write_bytes(b"%PDF")
    (problem,) = problems(site, tmp_path)
    assert "2026-0007 lost.pdf is not in the ledger" in problem


def test_a_head_signed_by_nobody_or_by_a_strange_key_is_told(site: Records, tmp_path: Path) -> None:
    folder = site.database.path.parent
    write_checkpoint(folder, site.head(), at="x", sign=lambda _: b"forged", certificate_pem=b"PEM")
    assert any("does not match its signature" in p for p in problems(site, tmp_path))
    (folder / FILE_NAME).unlink()
    write(folder, site.head())
    strange = Trust(signer=TRUST.signer, fingerprints=("another",))
    status = check(site, tmp_path / "site/reports", CheckOptions(trust=strange))
    assert any("signed by a key that is none of this site" in p for p in status.problems)


def test_a_changed_document_loses_its_signature(site: Records, tmp_path: Path) -> None:
    folder = site.database.path.parent
    write(folder, site.head())
    line = json.loads((folder / FILE_NAME).read_text())
    line["document"] = line["document"].replace(f'"sequence":{site.head().sequence}', '"sequence":1')
    (folder / FILE_NAME).write_text(json.dumps(line) + "\n")
    assert any("does not match its signature" in p for p in problems(site, tmp_path))
    records_only = check(site, tmp_path / "site/reports")
    assert records_only.problems == ()


def test_the_kinds_of_the_design_are_all_there() -> None:
    kinds = {"received", "duplicate", "refused", "read", "compared", "sealed", "signed", "issued", "returned"}
    kinds |= {"withdrawn", "replaced", "left out", "verified", "settings changed", "service started"}
    kinds |= {"service stopped", "share lost", "share back", "night run", "imported", "approved"}
    assert kinds <= {kind.value for kind in Kind}
