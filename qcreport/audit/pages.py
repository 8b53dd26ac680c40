"""The pages of a report beside the same pages rendered anew from what it carries."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

import qcreport
from qcreport.analysis.context import Context
from qcreport.audit.page_text import page_texts
from qcreport.audit.recompute import Anew
from qcreport.errors import QcReportError

_AROUND = 40
Json = dict[str, Any]


@dataclass(frozen=True, slots=True, kw_only=True)
class PagesStatus:
    """Whether the pages print what the result says."""

    matches: bool | None
    """None where they were not compared."""
    differences: tuple[str, ...]
    """One a page."""
    reason: str | None
    """Why they were not compared."""

    def to_json(self) -> Json:
        """Return the entry of `verify --json`."""
        return {"matches": self.matches, "differences": list(self.differences), "reason": self.reason}


def not_compared(reason: str) -> PagesStatus:
    """Return the status of pages that were not compared."""
    return PagesStatus(matches=None, differences=(), reason=reason)


def compare_pages(
    sealed: bytes, context: Context, anew: Anew, templates: Mapping[str, bytes] | None
) -> PagesStatus:
    """Render the pages anew and compare what they show.

    Parameters
    ----------
    sealed : bytes
        The sealed revision of the report.
    context : Context
        As attached.
    anew : Anew
        The result computed anew.
    templates : mapping or None
        The laboratory's own templates by file name; None where they are not at hand, then the shipped ones.
    """
    if context.software_version != qcreport.__version__:
        return not_compared(
            f"they were set by qcreport {context.software_version}, this is {qcreport.__version__}"
        )
    try:
        from qcreport.report.templates import load_templates

        loaded = load_templates(dict(templates or {}))
        if loaded.digests != context.templates:
            return not_compared(_other_templates(context, loaded.digests))
        pages = _rendered(anew, context, loaded)
    except (ImportError, OSError):
        return not_compared("the text-layout libraries are not installed here")
    except QcReportError as error:
        return not_compared(f"they could not be rendered anew: {error.text}")
    found = tuple(_differences(page_texts(sealed), page_texts(pages)))
    return PagesStatus(matches=not found, differences=found, reason=None)


def _rendered(anew: Anew, context: Context, templates: Any) -> bytes:
    from qcreport.analysis.analyse import left_out_cells
    from qcreport.analysis.left_out import marked_left_out
    from qcreport.report.job import RenderJob, render_job

    job = RenderJob(
        result=anew.result,
        measurements=marked_left_out(anew.measurements, left_out_cells(context)),
        plan=anew.plan,
        context=context,
        attachments=(),
        templates=templates,
    )
    return render_job(job).pdf


def _other_templates(context: Context, digests: tuple[tuple[str, str], ...]) -> str:
    if context.templates_changed:
        names = ", ".join(context.templates_changed)
        return f"the laboratory set them with templates of its own ({names}); --site finds those of a site"
    there = dict(digests)
    other = [name for name, digest in context.templates if there.get(name) != digest]
    return f"this installation has other page templates ({len(other)} differ)"


def _differences(reported: tuple[str, ...], anew: tuple[str, ...]) -> Iterator[str]:
    if len(reported) != len(anew):
        yield f"the report has {len(reported)} pages, rendered anew there are {len(anew)}"
    for number, (one, other) in enumerate(zip(reported, anew, strict=False), start=1):
        if one != other:
            at = next((i for i, (a, b) in enumerate(zip(one, other, strict=False)) if a != b), 0)
            start = max(0, at - _AROUND // 2)
            yield (
                f"page {number} shows …{one[start : at + _AROUND]}… "
                f"where, rendered anew, it shows …{other[start : at + _AROUND]}…"
            )
