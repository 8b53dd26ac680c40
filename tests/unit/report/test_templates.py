"""What a laboratory may restyle, what is refused, and that text from a workbook is data wherever it lands."""

from __future__ import annotations

import hashlib

import pytest
from markupsafe import Markup

from qcreport.errors import ConfigError
from qcreport.report.assets import page_names, shipped_templates
from qcreport.report.build import build_model
from qcreport.report.html import render_html, style_text
from qcreport.report.templates import LAB_FILES, load_templates, typeset

from .samples import LAP_SHEAR, characteristic, context, measurements, plan_of, result_of


def html(data: dict[str, list[float]] = LAP_SHEAR, site: dict[str, bytes] | None = None) -> str:
    result = characteristic(data)
    model = build_model(result_of(result), measurements([result]), plan_of(result), context())
    return render_html(model, load_templates(site or {}))


def test_every_text_used_has_its_digest_and_nothing_is_changed_as_shipped() -> None:
    templates = load_templates({})
    names = [name for name, _ in templates.digests]
    assert names == sorted([*page_names(), *(f"lab/{n}" for n in LAB_FILES)])
    assert templates.changed == ()
    assert (
        dict(templates.digests)["report.css"]
        == hashlib.sha256(templates.text("report.css").encode()).hexdigest()
    )
    assert load_templates(shipped_templates()) == templates


def test_a_changed_letterhead_is_named_and_used() -> None:
    site = {"letterhead.html": b"<p>Our own head of {{ letterhead.laboratory }}</p>\n"}
    templates = load_templates(site)
    assert templates.changed == ("letterhead.html",)
    assert templates.digests != load_templates({}).digests
    assert "Our own head of Halden Adhesives" in html(site=site)


@pytest.mark.parametrize(
    ("name", "data", "line", "said"),
    [
        ("footer.html", b"one\n{{ letterhead.laboratory ", 2, "broken template"),
        ("letterhead.html", b"a\nb\n{% for %}", 3, "broken template"),
        ("style.css", b":root {\n  background: url(http://example.org/x.png) }", 2, "may not fetch"),
        ("style.css", b"@import 'x.css';", 1, "may not fetch"),
        ("footer.html", b"one\ntwo \xff", 2, "not UTF-8"),
        ("logo.html", b"x", None, "not a template we know"),
    ],
)
def test_a_broken_template_is_told_with_file_and_line(
    name: str, data: bytes, line: int | None, said: str
) -> None:
    with pytest.raises(ConfigError) as caught:
        load_templates({name: data})
    (fault,) = caught.value.faults
    assert (fault.file, fault.line) == (f"templates/{name}", line)
    assert said in fault.text


def test_all_faults_are_told_at_once() -> None:
    with pytest.raises(ConfigError) as caught:
        load_templates({"footer.html": b"{{", "letterhead.html": b"{%"})
    assert len(caught.value.faults) == 2


@pytest.mark.parametrize(
    "text",
    [
        b"line 1\n{{ unknown_name }}",
        b"line 1\n{{ letterhead.laboratory.__class__.__mro__ }}",
        b"line 1\n{{ cycler.__init__.__globals__ }}",
        b"line 1\n{% include 'nothing.html' %}",
    ],
)
def test_a_template_that_cannot_be_filled_in_is_told_with_its_line(text: bytes) -> None:
    with pytest.raises(ConfigError) as caught:
        html(site={"footer.html": text})
    fault = caught.value.faults[0]
    assert (fault.file, fault.line) == ("templates/footer.html", 2)


def test_names_from_a_workbook_stay_text() -> None:
    nasty = "<b>LA</b> & {{ 7 * 7 }} <img src=x onerror=y> \"'"
    page = html({nasty if k == "LA-2403" else k: v for k, v in LAP_SHEAR.items()})
    assert "&lt;b&gt;LA&lt;/b&gt; &amp; {{ 7 * 7 }}" in page
    assert "<b>" not in page
    assert "<img" not in page
    assert "49" not in page.split("&lt;b&gt;LA")[1][:40]


def test_negative_exponents_are_set_as_superscripts() -> None:
    assert typeset("8.6 × 10⁻⁴ & s²") == Markup("8.6 × 10<sup>−4</sup> &amp; s²")
    assert typeset("10⁻¹²") == Markup("10<sup>−12</sup>")


def test_the_style_knows_paper_and_fonts() -> None:
    templates = load_templates({})
    assert "size: A4" in style_text("A4", templates)
    assert "size: Letter" in style_text("Letter", templates)
    assert style_text("A4", templates).count("@font-face") == 4
