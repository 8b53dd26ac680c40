"""From a report model to HTML and the style it is set with."""

from __future__ import annotations

from jinja2 import TemplateError

from qcreport.report.assets import FONT_FILES, SCHEME
from qcreport.report.model import ReportModel
from qcreport.report.templates import TemplateSet, environment, template_fault


def render_html(model: ReportModel, templates: TemplateSet) -> str:
    """Return the whole report as HTML.

    Raises
    ------
    ConfigError
        Where a template of the laboratory cannot be filled in.
    """
    try:
        page = environment(templates).get_template("report.html")
        return page.render(model=model, letterhead=model.letterhead)
    except TemplateError as error:
        raise template_fault(error) from error


def style_text(page_size: str, templates: TemplateSet) -> str:
    """Return the style: pinned fonts, page size, the laboratory's variables, the evidence's own form."""
    size = "Letter" if page_size == "Letter" else "A4"
    faces = []
    for name in FONT_FILES:
        family, weight = name.split("-")
        faces.append(
            f'@font-face {{ font-family: "Report {family.capitalize()}"; font-weight: {weight}; '
            f'src: url("{SCHEME}{name}") }}'
        )
    page = f"@page {{ size: {size} }}"
    return "\n".join([*faces, page, templates.text("lab/style.css"), templates.text("report.css")])
