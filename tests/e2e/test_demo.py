"""`qcreport demo`: one command from inbox to verified reports, and nothing new on a second call."""

from __future__ import annotations

import re
import subprocess
from pathlib import Path

import pytest
from rig import ROOT, Demo, copied, replaced

pytestmark = pytest.mark.slow

REPORTED = {
    "2026-0001": "lap-shear-2403",
    "2026-0002": "lap-shear-textbook-2404",
    "2026-0003": "open-time-ref-2404",
    "2026-0004": "peel-2404",
    "2026-0005": "two-characteristics-2405",
    "2026-0006": "viscosity-2404",
}
"""Number less its year, and export, in the order of the inbox."""


def tail(number: str) -> str:
    return number.split("-")[1]


def tool(*words: str | Path) -> str:
    ended = subprocess.run(words, capture_output=True, text=True, check=False, timeout=60)
    assert ended.returncode == 0, ended.stdout + ended.stderr
    return ended.stdout


def test_it_ends_well_and_says_that_it_is_a_demonstration(demo: Demo) -> None:
    for time in ("first", "second"):
        ran = demo.ran(time)
        assert ran.code == 0, ran.text
        assert "demonstration" in ran.out.splitlines()[0]
        assert "Not for release" in ran.out.splitlines()[0]
        assert "6 reports, 1 refused" in ran.out


def test_every_example_is_reported_or_refused(demo: Demo) -> None:
    examples = {p.stem for p in (ROOT / "inbox_example").glob("*.xlsx")}
    stems = [p.stem.split(" ", 1) for p in demo.site.reports]
    assert [(tail(number), stem) for number, stem in stems] == [(tail(n), s) for n, s in REPORTED.items()]
    assert examples == set(REPORTED.values()) | {"lap-shear-2405-rework"}


def test_every_report_was_verified(demo: Demo) -> None:
    for time in ("first", "second"):
        verified = re.findall(r"^  (\d{4}-\d{4})  Valid: (.*)$", demo.ran(time).out, re.MULTILINE)
        assert [tail(number) for number, _ in verified] == [tail(number) for number in REPORTED]
        assert {words for _, words in verified} == {
            "nothing changed since it was sealed; all 6 attachments match; "
            "computed anew from them, every number repeats, and the pages show them."
        }


def test_the_refused_export_is_named_with_its_reason(demo: Demo) -> None:
    (folder,) = demo.site.refused
    why = (folder / "why.txt").read_text("utf-8")
    assert why in demo.ran("first").out
    assert why.splitlines()[0] == "Not read:  lap-shear-2405-rework.xlsx"
    assert "Results!G10" in why
    assert "12.4*" in why
    assert "(unreadable_values)" in why
    original = ROOT / "inbox_example/lap-shear-2405-rework.xlsx"
    assert (folder / original.name).read_bytes() == original.read_bytes()


def test_a_second_call_answers_from_what_is_there(demo: Demo) -> None:
    again = re.findall(
        r"^Already answered in (\S+); nothing new written", demo.ran("second").out, re.MULTILINE
    )
    assert [tail(number) for number in again] == [tail(number) for number in REPORTED]
    assert "sealed; a draft" not in demo.ran("second").out
    assert demo.files("second") == demo.files("first")


def test_the_records_hold_together(demo: Demo) -> None:
    assert demo.site.holds()["reports"] == 6


def test_another_reader_finds_every_seal_good(demo: Demo) -> None:
    for report in demo.site.reports:
        said = tool("pdfsig", "-nocert", report)
        assert "Signature Validation: Signature is Valid." in said
        assert "Total document signed" in said
        fields = re.findall(r"Signature Field Name: (.*)", said)
        assert fields == ["Seal", "Reviewed", "Authorised"]
        assert said.count("The signature form field is not signed.") == 2


def test_every_page_says_that_it_is_a_demonstration(demo: Demo) -> None:
    for report in demo.site.reports:
        pages = tool("pdftotext", "-layout", report, "-").rstrip("\f\n").split("\f")
        assert len(pages) > 1
        for page in pages:
            assert re.search(r"demonstration", page, re.IGNORECASE), page


def test_the_next_steps_it_names_work(demo: Demo, tmp_path: Path) -> None:
    _, steps = demo.ran("first").out.split("Next: ")
    assert "qcreport watch --once --site demo-site" in steps
    assert 'qcreport compare EXPORT --reason "…" --site demo-site' in steps
    site = copied(demo.site.root, tmp_path / "demo-site")
    replaced(site.root / "config/plans/lap-shear-batches.toml", "margin = 1.5", "margin = 2.5")
    export = ROOT / "inbox_example/lap-shear-2403.xlsx"
    ran = site.done("compare", export, "--reason", "the margin was agreed anew", "--no-report", "--json")
    assert (ran.json["run"]["k"], ran.json["run"]["n"]) == (2, 2)
    assert site.done("watch", "--once").out == "0 done, 0 refused, 0 failed.\n"
