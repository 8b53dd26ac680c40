"""The pages of a report beside the same pages rendered anew."""

from __future__ import annotations

import dataclasses
from io import BytesIO
from pathlib import Path

import pikepdf
import pytest

import qcreport
from qcreport.analysis import analyse
from qcreport.analysis.context import Context
from qcreport.audit.page_text import page_texts, to_unicode
from qcreport.audit.pages import compare_pages
from qcreport.audit.recompute import Anew
from qcreport.canonical import sha256_hex
from qcreport.errors import NotOurReportError
from qcreport.plan import parse_plan
from qcreport.report.job import RenderJob, render_job
from qcreport.report.templates import load_templates
from qcreport.rules import parse_rules
from qcreport.signing.keys import SigningKey
from qcreport.workbook.read_in_child import read_in_child

from .example import context_of

ROOT = Path(__file__).parents[3]
NAME = "lap-shear-2403.xlsx"


@pytest.fixture(scope="module")
def made(service_key: SigningKey) -> tuple[Context, Anew]:
    config = ROOT / "config"
    export = (ROOT / "inbox_example" / NAME).read_bytes()
    plan = (config / "plans/lap-shear-batches.toml").read_bytes()
    layout = (config / "layouts/shear-rig.toml").read_bytes()
    rules = (config / "rules/default.toml").read_bytes()
    context = context_of(
        service_key,
        export_name=NAME,
        export_sha256=sha256_hex(export),
        plan_sha256=sha256_hex(plan),
        layout_sha256=sha256_hex(layout),
        rules_sha256=sha256_hex(rules),
        templates=load_templates({}).digests,
        software_version=qcreport.__version__,
    )
    measurements = read_in_child(export, name=NAME, layout_bytes=layout, layout_file="layout.toml")
    parsed = parse_plan(plan, "plan.toml")
    result = analyse(measurements, parsed, parse_rules(rules, "rules.toml"), context)
    return context, Anew(result=result, measurements=measurements, plan=parsed)


@pytest.fixture(scope="module")
def pdf(made: tuple[Context, Anew]) -> bytes:
    context, anew = made
    job = RenderJob(
        result=anew.result,
        measurements=anew.measurements,
        plan=anew.plan,
        context=context,
        attachments=(),
        templates=load_templates({}),
    )
    return render_job(job).pdf


def with_first_page(pdf: bytes, change: bytes) -> bytes:
    """Return the report with a drawing instruction more at the end of its first page."""
    out = BytesIO()
    with pikepdf.open(BytesIO(pdf)) as document:
        document.pages[0].contents_add(document.make_stream(change))
        document.save(out)
    return out.getvalue()


def test_the_pages_repeat(made: tuple[Context, Anew], pdf: bytes) -> None:
    context, anew = made
    status = compare_pages(pdf, context, anew, None)
    assert status.to_json() == {"matches": True, "differences": [], "reason": None}
    texts = page_texts(pdf)
    assert "2026-0042" in texts[0]
    assert "\ufffd" not in "".join(texts), "every character is read"


def test_other_words_on_a_page_are_found(made: tuple[Context, Anew], pdf: bytes) -> None:
    context, anew = made
    other = dataclasses.replace(context, report_number="2026-0043")
    status = compare_pages(pdf, other, anew, None)
    assert status.matches is False
    assert status.differences[0].startswith("page 1 shows …")


def test_a_page_that_is_missing_is_found(made: tuple[Context, Anew], pdf: bytes) -> None:
    context, anew = made
    out = BytesIO()
    with pikepdf.open(BytesIO(pdf)) as document:
        pages = len(document.pages)
        del document.pages[-1]
        document.save(out)
    status = compare_pages(out.getvalue(), context, anew, None)
    assert f"the report has {pages - 1} pages, rendered anew there are {pages}" in status.differences


def test_what_cannot_be_compared_is_said(made: tuple[Context, Anew], pdf: bytes) -> None:
    context, anew = made
    older = dataclasses.replace(context, software_version="0.0.1")
    assert "set by qcreport 0.0.1" in str(compare_pages(pdf, older, anew, None).reason)
    own = load_templates({"footer.html": b"<p>Our own</p>"})
    changed = dataclasses.replace(context, templates=own.digests, templates_changed=own.changed)
    assert "templates of its own (footer.html)" in str(compare_pages(pdf, changed, anew, None).reason)
    missing = dataclasses.replace(context, templates=())
    assert "other page templates" in str(compare_pages(pdf, missing, anew, None).reason)
    broken = compare_pages(pdf, context, anew, {"footer.html": b"\xff"})
    assert broken.matches is None
    assert "could not be rendered anew" in str(broken.reason)


def test_without_the_layout_libraries_it_is_said(
    made: tuple[Context, Anew], pdf: bytes, monkeypatch: pytest.MonkeyPatch
) -> None:
    def absent(_: RenderJob) -> None:
        raise OSError("cannot load library")

    monkeypatch.setattr("qcreport.report.job.render_job", absent)
    context, anew = made
    assert "libraries are not installed" in str(compare_pages(pdf, context, anew, None).reason)


def test_text_with_a_code_of_no_font_is_read_as_unknown(pdf: bytes) -> None:
    font = b"BT /Nothing 8 Tf <FFFF> Tj ET"
    with pytest.raises(NotOurReportError):
        page_texts(with_first_page(pdf, font))


@pytest.mark.parametrize(
    ("table", "found"),
    [
        (b"1 beginbfchar <0001> <0041> endbfchar", {b"\0\1": "A"}),
        (b"beginbfrange <0001> <0003> <0041> endbfrange", {b"\0\1": "A", b"\0\2": "B", b"\0\3": "C"}),
        (
            b"beginbfrange <0001> <0002> [<0041> <00660069>] <0005> <0005> <005A> endbfrange",
            {b"\0\1": "A", b"\0\2": "fi", b"\0\5": "Z"},
        ),
        (b"beginbfrange [ <0001> <0002> endbfrange", {}),
        (b"nothing", {}),
    ],
)
def test_the_table_of_a_font(table: bytes, found: dict[bytes, str]) -> None:
    assert to_unicode(table) == found
