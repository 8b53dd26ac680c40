"""What a signature shows on the page."""

from __future__ import annotations

import subprocess
from io import BytesIO

import pikepdf
import pytest

from qcreport.report.stamp import render_stamp

TIME = "2026-12-01 08:30 +01:00"


def _text(pdf: bytes) -> str:
    done = subprocess.run(["pdftotext", "-layout", "-", "-"], input=pdf, capture_output=True, check=True)
    return done.stdout.decode()


@pytest.fixture(scope="module")
def stamp() -> bytes:
    return render_stamp("Ines Moreau", "reviewed for correctness", TIME, 104.9, 41.7)


def test_a_stamp_is_one_page_of_the_size_of_its_field_with_three_lines(stamp: bytes) -> None:
    with pikepdf.open(BytesIO(stamp)) as pdf:
        assert len(pdf.pages) == 1
        assert [float(v) for v in pdf.pages[0].MediaBox] == pytest.approx([0, 0, 104.9, 41.7], abs=0.01)
    lines = [line.strip() for line in _text(stamp).splitlines() if line.strip()]
    assert lines == ["Ines Moreau", "reviewed for correctness", TIME]


def test_a_stamp_paints_nothing_but_text_in_an_embedded_font_of_ours(stamp: bytes) -> None:
    with pikepdf.open(BytesIO(stamp)) as pdf:
        painted = {str(op.operator) for op in pikepdf.parse_content_stream(pdf.pages[0])}
        assert painted & {"Tj", "TJ"}
        assert not painted & {"f", "f*", "F", "S", "B", "Do", "sh"}
    done = subprocess.run(["pdffonts", "-"], input=stamp, capture_output=True, check=True)
    (row,) = done.stdout.decode().splitlines()[2:]
    assert "Report-Sans" in row
    assert row.split()[-5:-2] == ["yes", "yes", "yes"]


def test_the_same_stamp_is_the_same_bytes_and_a_long_or_strange_name_stays_inside(stamp: bytes) -> None:
    assert render_stamp("Ines Moreau", "reviewed for correctness", TIME, 104.9, 41.7) == stamp
    said = _text(render_stamp("A" * 90 + " שלום <b>", "authorised for issue", TIME, 104.9, 41.7))
    assert "AAAA…" in said
    assert "<b>" in said
    assert max(len(line.strip()) for line in said.splitlines()) < 40
