"""German: every text is there, numbers and dates take its form, nothing English is left in our own words."""

from __future__ import annotations

import inspect
import re
from io import BytesIO

import pikepdf
import pytest

from qcreport.plan.model import Groups
from qcreport.report.build import build_model
from qcreport.report.job import render_job
from qcreport.report.model import ReportModel
from qcreport.report.words import LANGUAGES, words_for
from qcreport.report.words_de import WordsDe
from qcreport.report.words_en import Words

from .samples import characteristic, context, left_out_group, measurements, plan_of, result_of
from .test_golden import _lines
from .test_render import job_of, text_of

SAME = {"__init__", "group_list", "row_name", "why_not", "versions"}
"""Neither language nor words in them."""
ENGLISH = re.compile(
    r"\b(the|and|with|from|which|were|margin|range|pairs?|values?|lower|higher|mean|batch(es)?|page|report|"
    r"sealed|signed|below|above|shown|spread|compared|difference)\b"
)


def german(*results: object, **changes: object) -> ReportModel:
    return build_model(
        result_of(*results),
        measurements(results),
        plan_of(*results),
        context(language="de", **changes),  # type: ignore[arg-type]
    )


def _defined(kind: type) -> set[str]:
    return {name for c in kind.__mro__ if c is not object for name in vars(c) if not name.startswith("__")}


@pytest.mark.parametrize("language", sorted(set(LANGUAGES) - {"en"}))
def test_another_language_says_every_text_itself(language: str) -> None:
    kind = LANGUAGES[language]
    for name in _defined(Words) - SAME:
        owner = next(c for c in kind.__mro__ if name in vars(c))
        assert "_en" not in owner.__module__, name
        if callable(getattr(Words, name)):
            ours = list(inspect.signature(getattr(kind, name)).parameters)
            assert ours == list(inspect.signature(getattr(Words, name)).parameters), name


def test_our_own_words_in_german_hold_no_english() -> None:
    model = german(characteristic(flagged=True))
    sentences = [line.text for a in model.first.answers for line in a.lines]
    texts = [*sentences, *model.first.counts, *model.first.cautions, *model.closing, model.subtitle]
    texts += [f.role + f.text + f.description for f in model.first.fields]
    texts += [label for label, _ in model.first.basis]
    for drawing in (model.first.values, model.first.apart):
        assert drawing is not None
        texts += [drawing.title]
    texts += ["\n".join(_lines(s)) for s in model.sections if s.anchor in ("checking", "terms", "arithmetic")]
    for text in texts:
        plain = re.sub(
            r"(kind|digests|note|text|heading|anchor|columns|rows|numeric|share|title|blocks):.?", "", text
        )
        plain = re.sub(r"- \w+\n|qcreport verify|laboratory\.pem|signed-bytes", "", plain)
        assert not ENGLISH.search(plain), plain


def test_sentences_numbers_and_dates_take_the_german_form() -> None:
    model = german(characteristic())
    assert model.first.answers[0].lines[0].text == (
        "LD-2404 ist niedriger als LC-2404, um 1,905 MPa (0,880 bis 2,930, alle Paare zugleich). Ob "
        "um mehr als "
        "die Grenze von 1,5 MPa, dem kleinsten Unterschied, auf den es ankommt, ist offen."
    )
    basis = dict(model.first.basis)
    assert basis["Daten"].startswith("gemessen 30.11.2026; erhalten 01.12.2026 07:11 +01:00")
    assert "Plan genehmigt von Ines Moreau am 02.11.2026." in basis["Plan"]
    said = "\n".join(line for s in model.sections if s.anchor == "data" for line in _lines(s))
    assert "24,84" in said
    assert "„" not in said
    assert "24.84" not in said
    again = build_model(
        result_of(characteristic()), measurements((characteristic(),)), plan_of(characteristic()), context()
    )
    assert "1.905 MPa" in again.first.answers[0].lines[0].text


def test_lines_are_named_so_and_nothing_compared_is_said() -> None:
    words = words_for("de", Groups.LINE)
    assert isinstance(words, WordsDe)
    assert "Linien, die an verschiedenen Tagen" in words.cautions()[0]
    model = german(left_out_group(characteristic()))
    assert model.first.answers[0].lines[0].text.startswith("Nicht verglichen: LB-2403")


def test_the_pages_are_set_in_german() -> None:
    rendered = render_job(job_of(characteristic(flagged=True), language="de", demonstration=True))
    said = " ".join(text_of(rendered.pdf).split())
    for part in (
        "Antwort",
        "Wie weit auseinander",
        "Seite 1 von",
        "Ende des Berichts 2026-0042, Fassung 1",
        "Gilt nur mit beiden Unterschriften; ohne sie ist dies ein Entwurf.",
        "Vorführung:",
        "Entscheidungsregel und ihre Risiken",
    ):
        assert part in said
    with pikepdf.open(BytesIO(rendered.pdf)) as pdf:
        assert str(pdf.Root.Lang) == "de"
