"""Nothing but our own assets is ever fetched, however a template of the laboratory asks for it."""

from __future__ import annotations

import base64
import zlib
from io import BytesIO
from pathlib import Path

import pikepdf
import pytest

from qcreport.errors import ConfigError
from qcreport.report.job import render_job

from .samples import ATTACHMENTS, characteristic, left_out_group
from .test_render import job_of

SECRET = b"KEPT-IN-THE-LABORATORY-7319"
_PNG_HEAD = b"\x89PNG\r\n\x1a\n"

REFUSED: dict[str, str] = {
    "image of a file": '<img src="{file}">',
    "image over the network": '<img src="http://127.0.0.1:9/x.png">',
    "image over TLS": '<img src="https://127.0.0.1:9/x.png">',
    "image by FTP": '<img src="ftp://127.0.0.1:9/x.png">',
    "image inside the page": '<img src="data:image/png;base64,AAAA">',
    "attachment by link": '<link rel="attachment" href="{file}">',
    "attachment by anchor": '<a rel="attachment" href="{file}">x</a>',
    "background": '<p style="background: url({file})">x</p>',
    "border": '<p style="border-image: url({file}) 1; border-width: 2pt; border-style: solid">x</p>',
    "list mark": '<ul style="list-style-image: url({file})"><li>x</li></ul>',
    "content": '<style>.z::before {{ content: url({file}) }}</style><p class="z">x</p>',
    "style sheet": '<link rel="stylesheet" href="{file}">',
    "imported style": "<style>@import url({file});</style>",
    "font": '<style>@font-face {{ font-family: Z; src: url({file}) }}</style><p style="font-family: Z">x</p>',
    "object": '<object data="{file}"></object>',
    "embedded object": '<embed src="{file}">',
    "image in a drawing": '<svg xmlns="http://www.w3.org/2000/svg" width="9" height="9"><title>t</title>'
    '<image href="{file}" width="9" height="9"/></svg>',
    "background of the paper": "<style>@page {{ background: url({file}) }}</style>",
    "drawing inside the page": '<img src="data:image/svg+xml;base64,{svg}">',
}
"""What the layout library would fetch if it were let."""

IGNORED: dict[str, str] = {
    "drawing used in a drawing": '<svg xmlns="http://www.w3.org/2000/svg" width="9" height="9">'
    '<title>t</title><use href="{file}#a"/></svg>',
    "frame": '<iframe src="{file}"></iframe>',
    "script": '<script src="{file}"></script><script>document.write("x")</script>',
    "poster": '<video poster="{file}" src="{file}"></video>',
    "refresh": '<meta http-equiv="refresh" content="0; url={file}">',
}
"""What it never looks at; held here so that a later release that does is noticed."""


@pytest.fixture(scope="module")
def secret(tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("laboratory") / "secret.png"
    path.write_bytes(_PNG_HEAD + SECRET)
    return path


def _template(text: str, secret: Path) -> bytes:
    svg = (
        '<svg xmlns="http://www.w3.org/2000/svg" width="9" height="9">'
        f'<image href="{secret.as_uri()}" width="9" height="9"/></svg>'
    )
    return text.format(file=secret.as_uri(), svg=base64.b64encode(svg.encode()).decode()).encode()


def _everything_in(pdf: bytes) -> bytes:
    with pikepdf.open(BytesIO(pdf)) as document:
        streams = [o.read_bytes() for o in document.objects if isinstance(o, pikepdf.Stream)]
    return pdf + b"".join(streams)


def test_there_are_as_many_kinds_as_were_thought_of() -> None:
    assert len(REFUSED) >= 19


@pytest.mark.parametrize("kind", sorted(REFUSED))
def test_an_attack_ends_the_rendering(kind: str, secret: Path) -> None:
    remark = _template(REFUSED[kind], secret)
    with pytest.raises(ConfigError, match="may not fetch"):
        render_job(job_of(left_out_group(characteristic()), site={"remark.html": remark}))


def test_what_is_never_looked_at_brings_nothing_in(secret: Path) -> None:
    remark = b"".join(_template(text, secret) for text in IGNORED.values())
    pdf = render_job(job_of(left_out_group(characteristic()), site={"remark.html": remark})).pdf
    assert SECRET not in _everything_in(pdf)
    with pikepdf.open(BytesIO(pdf)) as document:
        assert sorted(document.attachments) == sorted(a.name for a in ATTACHMENTS)


def test_the_search_for_the_secret_would_find_it() -> None:
    with pikepdf.new() as document:
        stream = document.make_stream(zlib.compress(SECRET))
        stream.Filter = pikepdf.Name.FlateDecode
        document.Root.Kept = stream
        out = BytesIO()
        document.save(out)
    assert SECRET not in out.getvalue()
    assert SECRET in _everything_in(out.getvalue())
