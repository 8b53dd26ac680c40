"""What a signature shows in its box on page 1: name, meaning and time on the ruled lines."""

from __future__ import annotations

from functools import cache
from typing import Any

from markupsafe import Markup

from qcreport.report.assets import SCHEME
from qcreport.report.glyphs import lines_of, printable
from qcreport.report.render import at_work

SIZE = 8.0
_PAD = 2.0
_LINES = 3

_PAGE = Markup("<html><body>{}</body></html>")
_LINE = Markup('<p style="top:{}pt">{}</p>')
_STYLE = """
@font-face {{ font-family: "Report Sans"; font-weight: 400; src: url("{font}") }}
@page {{ size: {width}pt {height}pt; margin: 0 }}
body {{ margin: 0 }}
p {{ position: absolute; left: 2pt; margin: 0; white-space: pre; font: 8pt/10pt "Report Sans"; color: #111 }}
"""


def render_stamp(name: str, meaning: str, time_text: str, width_pt: float, height_pt: float) -> bytes:
    """Return one transparent page with three lines that stand on the rules of the signature box.

    Parameters
    ----------
    name : str
        Who signs, from the certificate.
    meaning : str
        What the signature means.
    time_text : str
        When, with time zone.
    width_pt, height_pt : float
        Size of the field, in points.

    Raises
    ------
    EnvironmentFailedError
        Where a font is missing.

    Notes
    -----
    The only font is embedded and one of ours, as PDF/A asks of everything that is added to a report. A text
    too long for its line loses its middle; the whole of it stands in the certificate.
    """
    from weasyprint import CSS, HTML

    from qcreport.report.fetcher import OwnAssetsFetcher

    room = height_pt / _LINES
    texts = [
        lines_of(printable(t.strip(), set()), SIZE, width_pt - 2 * _PAD, 1)[0]
        for t in (name, meaning, time_text)
    ]
    tops = [f"{index * room + (room - 10) / 2:.2f}" for index in range(_LINES)]
    lines = Markup("").join(_LINE.format(top, text) for top, text in zip(tops, texts, strict=True))
    fetcher = OwnAssetsFetcher()
    with at_work(fetcher):
        style = CSS(
            string=_STYLE.format(font=f"{SCHEME}sans-400", width=width_pt, height=height_pt),
            font_config=_fonts(),
            url_fetcher=fetcher,
        )
        document = HTML(string=_PAGE.format(lines), url_fetcher=fetcher)
        pdf: bytes = document.write_pdf(font_config=_fonts(), stylesheets=[style])
    return pdf


@cache
def _fonts() -> Any:
    import atexit

    from weasyprint.text.fonts import FontConfiguration

    atexit.register(_fonts.cache_clear)  # fonts must go before the interpreter takes its modules apart
    return FontConfiguration()
