"""From a report model to an unsealed PDF: PDF/A-3a and PDF/UA-1, the same bytes for the same inputs."""

from __future__ import annotations

import atexit
import gc
import io
import threading
import warnings
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from functools import cache
from typing import Any

from qcreport.errors import ConfigError, EnvironmentFailedError, Fault
from qcreport.report.attachment import Attachment
from qcreport.report.html import render_html, style_text
from qcreport.report.model import ReportModel
from qcreport.report.moments import utc_moment
from qcreport.report.templates import TemplateSet

_LOCK = threading.Lock()


@dataclass(frozen=True, slots=True, kw_only=True)
class RenderedReport:
    """An unsealed report."""

    pdf: bytes
    """The file, with empty signature fields `Seal`, `Reviewed`, `Authorised`."""
    pages: int
    """Number of pages."""


def render_report(
    model: ReportModel, attachments: Sequence[Attachment], templates: TemplateSet
) -> RenderedReport:
    """Return the report as an unsealed PDF.

    Parameters
    ----------
    model : ReportModel
        Every text ready; see `build_model`.
    attachments : sequence of Attachment
        Files that travel inside, in any order; their dates are the report's.
    templates : TemplateSet
        From `load_templates`.

    Raises
    ------
    ConfigError
        Where a template of the laboratory cannot be filled in or asks for something that is not ours.
    EnvironmentFailedError
        Where a font is missing, or the pages would not fit the paper.
    """
    document = lay_out(model, templates)
    return write(document, model, attachments)


def lay_out(model: ReportModel, templates: TemplateSet) -> Any:
    """Return the laid-out pages; nothing runs off a page."""
    from weasyprint import HTML

    from qcreport.report.fetcher import OwnAssetsFetcher
    from qcreport.report.page_checks import require_inside_pages

    html = render_html(model, templates)
    fetcher = OwnAssetsFetcher()
    with at_work(fetcher):
        fonts, style = _style(model.page_size, templates)
        document = HTML(string=html, url_fetcher=fetcher).render(font_config=fonts, stylesheets=[style])
    require_inside_pages(document)
    return document


def write(document: Any, model: ReportModel, attachments: Sequence[Attachment]) -> RenderedReport:
    """Return laid-out pages as a PDF with attachments and signature fields."""
    from weasyprint import Attachment as PdfAttachment

    from qcreport.report.finish import Finisher
    from qcreport.report.page_checks import require_own_fonts

    moment = utc_moment(model.made_at)
    given = sorted(attachments, key=lambda a: a.name)
    if len({a.name for a in given}) != len(given):
        raise EnvironmentFailedError("Two attachments have the same name.")
    inside = [
        PdfAttachment(
            file_obj=io.BytesIO(a.data),
            name=a.name,
            description=a.description,
            relationship=a.relationship,
            created=moment,
            modified=moment,
        )
        for a in given
    ]
    with at_work(document.url_fetcher):
        pdf = document.write_pdf(
            pdf_variant="pdf/a-3a", pdf_tags=True, attachments=inside, finisher=Finisher(given)
        )
    require_own_fonts(document)
    return RenderedReport(pdf=pdf, pages=len(document.pages))


@contextmanager
def at_work(fetcher: Any) -> Iterator[None]:
    """Guard a piece of work of the layout library.

    One thread at a time; what a page may not fetch is told as a fault of the templates; the collector of
    cycles looks less often, since a layout makes many objects and drops few; and the library may leave its
    own colour profile open.
    """
    from qcreport.report.fetcher import RefusedFetchError

    before = gc.get_threshold()
    with _LOCK, warnings.catch_warnings():
        warnings.simplefilter("ignore", ResourceWarning)
        gc.set_threshold(1_000_000, before[1], before[2])
        try:
            yield
        except RefusedFetchError:
            _require_nothing_refused(fetcher.refused)
        finally:
            gc.set_threshold(*before)
    _require_nothing_refused(fetcher.refused)


def _require_nothing_refused(refused: Sequence[str]) -> None:
    if refused:
        fault = Fault(text=f"may not fetch anything; a page asked for {refused[0][:120]!r}", file="templates")
        raise ConfigError((fault,)) from None


@cache
def _style(page_size: str, templates: TemplateSet) -> tuple[Any, Any]:
    from weasyprint import CSS
    from weasyprint.text.fonts import FontConfiguration

    from qcreport.report.fetcher import OwnAssetsFetcher

    fonts = FontConfiguration()
    atexit.register(_style.cache_clear)  # its fonts must go before the interpreter takes its modules apart
    css = CSS(string=style_text(page_size, templates), font_config=fonts, url_fetcher=OwnAssetsFetcher())
    return fonts, css
