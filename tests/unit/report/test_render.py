"""The finished file: standards, text, fields, attachments, and the same bytes every time."""

from __future__ import annotations

import dataclasses
import hashlib
import pickle
import re
import subprocess
import sys
from io import BytesIO
from pathlib import Path

import page
import pikepdf
import pytest

from qcreport.analysis.result import CharacteristicResult
from qcreport.errors import EnvironmentFailedError
from qcreport.report.attachment import Attachment
from qcreport.report.job import RenderJob, render_job
from qcreport.report.render import RenderedReport
from qcreport.report.templates import load_templates

from .samples import (
    ATTACHMENTS,
    LAP_SHEAR,
    characteristic,
    context,
    left_out_group,
    measurements,
    plan_of,
    result_of,
)

HERE = Path(__file__).parent


def job_of(
    *results: CharacteristicResult, site: dict[str, bytes] | None = None, **changes: object
) -> RenderJob:
    return RenderJob(
        result=result_of(*results),
        measurements=measurements(results),
        plan=plan_of(*results),
        context=context(**changes),
        attachments=ATTACHMENTS,
        templates=load_templates(site or {}),
    )


def text_of(pdf: bytes, *options: str) -> str:
    done = subprocess.run(["pdftotext", *options, "-", "-"], input=pdf, capture_output=True, check=True)
    return done.stdout.decode()


@pytest.fixture(scope="module")
def report() -> RenderedReport:
    return render_job(job_of(characteristic(flagged=True), demonstration=True))


@pytest.fixture(scope="module")
def odd() -> RenderedReport:
    names = {"LA-2403": "<i>" + "L" * 240, "LB-2403": "שלום LB", "LC-2404": "LC 😀\u202e4042"}
    data = {names.get(k, k): v for k, v in LAP_SHEAR.items()}
    return render_job(job_of(characteristic(data), page_size="Letter", time_zone="UTC"))


@pytest.mark.parametrize("which", ["report", "odd"])
@pytest.mark.parametrize("profile", [page.ValidationProfile.PDF_A_3A, page.ValidationProfile.PDF_UA_1])
def test_it_keeps_pdf_a_and_pdf_ua(
    which: str, profile: page.ValidationProfile, request: pytest.FixtureRequest
) -> None:
    rendered: RenderedReport = request.getfixturevalue(which)
    found = page.validate_pdf_bytes(rendered.pdf, profile=profile)
    assert [(f.rule_id, f.message) for f in found.failures] == []
    assert found.is_compliant
    assert found.document.page_count == rendered.pages


def test_it_claims_both_standards_in_metadata_that_stays_readable(report: RenderedReport) -> None:
    assert b"<pdfuaid:part>1</pdfuaid:part>" in report.pdf
    assert b"pdfaSchema:namespaceURI" in report.pdf
    assert re.search(rb'pdfaid:part="?>?3', report.pdf) or b"<pdfaid:part>3" in report.pdf


def test_page_one_answers_the_four_questions(report: RenderedReport) -> None:
    first = " ".join(text_of(report.pdf, "-l", "1").split())
    assert "LD-2404 is lower than LC-2404 by 1.905 MPa" in first
    assert (
        "Whether by more than the margin of 1.5 MPa, the smallest difference that matters, is open." in first
    )
    assert "Counts only with both signatures; without them this is a draft." in first
    assert "supports and never replaces the release decision" in first
    assert "1 flagged (a: LD-2404, 23.33 MPa)" in first
    assert "run 1 of 1" in first
    assert "differs; margin open" in first
    assert "2026-12-01 07:12 +01:00 (Europe/Berlin), 06:12 UTC" in first


def test_every_page_names_the_report_and_counts_and_the_last_one_ends_it(report: RenderedReport) -> None:
    for number in range(1, report.pages + 1):
        said = text_of(report.pdf, "-f", str(number), "-l", str(number))
        assert "Report 2026-0042, revision 1" in said
        assert f"page {number} of {report.pages}" in said
        assert "Demonstration: sealed with a demonstration key; not for release." in said
        assert ("End of report 2026-0042, revision 1" in said) == (number == report.pages)


def test_a_real_site_prints_no_demonstration_line(odd: RenderedReport) -> None:
    assert "Demonstration" not in text_of(odd.pdf)


def test_three_empty_fields_stand_tagged_on_page_one(report: RenderedReport) -> None:
    with pikepdf.open(BytesIO(report.pdf)) as pdf:
        fields = list(pdf.Root.AcroForm.Fields)
        assert [str(f.T) for f in fields] == ["Seal", "Reviewed", "Authorised"]
        assert "/NeedAppearances" not in pdf.Root.AcroForm
        assert pdf.pages[0].Tabs == "/S"
        tree = dict(zip(*[iter(pdf.Root.StructTreeRoot.ParentTree.Nums)] * 2, strict=True))
        for field in fields:
            assert (field.FT, field.Subtype, "/V" in field) == ("/Sig", "/Widget", False)
            assert field.P.objgen == pdf.pages[0].objgen
            assert len(str(field.TU)) > 5
            element = tree[int(field.StructParent)]
            assert element.S == "/Form"
            assert element.K[0].Obj.objgen == field.objgen
        seal, reviewed, authorised = ([float(v) for v in f.Rect] for f in fields)
        assert (seal[0], seal[1]) == (seal[2], seal[3])
        for left, bottom, right, top in (reviewed, authorised):
            assert right - left > 95
            assert 40 < top - bottom < 60
        assert reviewed[2] < authorised[0]


def test_attachments_are_sorted_dated_and_listed_once(report: RenderedReport) -> None:
    with pikepdf.open(BytesIO(report.pdf)) as pdf:
        names = [str(x) for x in pdf.Root.Names.EmbeddedFiles.Names[::2]]
        assert names == sorted(a.name for a in ATTACHMENTS)
        listed = list(pdf.Root.AF)
        assert [str(f.UF) for f in listed] == names
        given = {a.name: a for a in ATTACHMENTS}
        for spec in listed:
            attachment = given[str(spec.UF)]
            assert spec.EF.F.read_bytes() == attachment.data
            assert spec.AFRelationship == f"/{attachment.relationship}"
            assert str(spec.Desc) == attachment.description
            assert spec.EF.F.Subtype == f"/{attachment.mime}"
            assert str(spec.EF.F.Params.CreationDate) == "D:20261201061200Z"
            assert str(spec.EF.F.Params.ModDate) == "D:20261201061200Z"


def test_only_the_pinned_fonts_are_embedded(report: RenderedReport, odd: RenderedReport) -> None:
    for rendered in (report, odd):
        done = subprocess.run(["pdffonts", "-"], input=rendered.pdf, capture_output=True, check=True)
        rows = done.stdout.decode().splitlines()[2:]
        assert len(rows) == 4
        assert all(re.match(r"[A-Z]{6}\+Report-(Sans|Serif)", row) for row in rows)
        assert all(row.split()[-5:-2] == ["yes", "yes", "yes"] for row in rows)


def test_odd_names_are_printed_as_text_or_by_number(odd: RenderedReport) -> None:
    said = text_of(odd.pdf)
    assert "<i>LLLL" in said
    assert "[U+05E9]" in said
    assert "LC [U+1F600][U+202E]4042" in said
    with pikepdf.open(BytesIO(odd.pdf)) as pdf:
        assert [float(v) for v in pdf.pages[0].MediaBox] == [0, 0, 612, 792]


SCRIPT = """
import sys, hashlib
sys.path.insert(0, {folder!r})
from report.test_render import job_of, render_job, characteristic
print(hashlib.sha256(render_job(job_of(characteristic(flagged=True), demonstration=True)).pdf).hexdigest())
"""


@pytest.mark.slow
def test_two_processes_in_two_zones_write_the_same_bytes(report: RenderedReport) -> None:
    digests = set()
    for zone, seed in (("Asia/Tokyo", "1"), ("America/Lima", "2")):
        done = subprocess.run(
            [sys.executable, "-c", SCRIPT.format(folder=str(HERE.parent))],
            capture_output=True,
            text=True,
            check=True,
            env={"TZ": zone, "PYTHONHASHSEED": seed, "PATH": "/usr/bin:/bin", "LANG": "C.UTF-8"},
        )
        assert done.stderr == ""
        digests.add(done.stdout.strip())
    assert digests == {hashlib.sha256(report.pdf).hexdigest()}


def test_a_job_can_be_sent_to_another_process(report: RenderedReport) -> None:
    job = job_of(characteristic(flagged=True), demonstration=True)
    again = pickle.loads(pickle.dumps(job))  # noqa: S301 - our own bytes, as a pool of workers does it
    assert render_job(again).pdf == report.pdf


def test_importing_the_job_loads_no_layout_library() -> None:
    done = subprocess.run(
        [sys.executable, "-c", "import qcreport.report.job, sys; print('weasyprint' in sys.modules)"],
        capture_output=True,
        text=True,
        check=True,
    )
    assert done.stdout.strip() == "False"


@pytest.mark.parametrize("text", ["שלום", "x \U0001f600"])
def test_a_template_that_needs_another_font_is_refused(text: str) -> None:
    with pytest.raises(EnvironmentFailedError, match="our fonts do not hold"):
        render_job(job_of(left_out_group(characteristic()), site={"remark.html": text.encode()}))


def test_what_would_run_off_the_page_is_refused() -> None:
    wide = b'<p style="white-space: nowrap; overflow-wrap: normal">' + b"WIDE" * 200 + b"</p>"
    with pytest.raises(EnvironmentFailedError, match="run off the page"):
        render_job(job_of(left_out_group(characteristic()), site={"remark.html": wide}))


def test_a_template_without_the_fields_cannot_happen_and_two_equal_names_are_refused() -> None:
    job = job_of(left_out_group(characteristic()))
    twice = dataclasses.replace(job, attachments=(*ATTACHMENTS, ATTACHMENTS[0]))
    with pytest.raises(EnvironmentFailedError, match="same name"):
        render_job(twice)


def test_equal_bytes_under_two_names_keep_their_own_relationships() -> None:
    same = tuple(
        Attachment(name=n, data=b"same", relationship=r, description=n, mime="text/csv")
        for n, r in (("a.csv", "Source"), ("b.csv", "Data"))
    )
    job = dataclasses.replace(job_of(left_out_group(characteristic())), attachments=same)
    with pikepdf.open(BytesIO(render_job(job).pdf)) as pdf:
        assert [str(f.AFRelationship) for f in pdf.Root.AF] == ["/Source", "/Data"]


def test_boxes_stay_on_page_one_when_the_figure_has_no_room_there() -> None:
    data = {f"LB-24{i:02d} second mixing line": [24 + i / 9 + x for x in (0, 0.4, 1.1)] for i in range(24)}
    rendered = render_job(job_of(characteristic(data, procedure="tamhane_t2")))
    with pikepdf.open(BytesIO(rendered.pdf)) as pdf:
        assert all(f.P.objgen == pdf.pages[0].objgen for f in pdf.Root.AcroForm.Fields)
    said = " ".join(text_of(rendered.pdf).split())
    assert re.search(r"\d+ more, page \d+", said)
    assert "Each batch’s most serious pair; every pair stands in the table." in said


def test_nothing_compared_is_a_report_too() -> None:
    rendered = render_job(job_of(left_out_group(characteristic())))
    first = " ".join(text_of(rendered.pdf, "-l", "1").split())
    assert "Not compared: LB-2403: 2 results, the plan asks for at least 3." in first
