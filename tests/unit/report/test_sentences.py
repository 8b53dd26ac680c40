"""The answers in words: who is lower, by how much, and against which margin."""

from __future__ import annotations

import dataclasses
import math

import pytest

from qcreport.analysis.result import CharacteristicResult, PairResult
from qcreport.plan.model import Groups
from qcreport.report.build_answers import first_page_answer, pair_sentence, register_word
from qcreport.report.numbers import Numbers
from qcreport.report.pairs import higher_first
from qcreport.report.words import words_for

from .samples import VISCOSITY, Margin, characteristic, left_out_group


def numbers(result: CharacteristicResult, margin_text: str = "") -> Numbers:
    return Numbers(result=result, words=words_for("en", Groups.BATCH), margin_text=margin_text)


def one_pair(answer: str, low: float | None, high: float | None, **changes: object) -> CharacteristicResult:
    base = characteristic()
    pair = dataclasses.replace(
        base.pairs[0], difference=-1.2, lower=low, upper=high, answer=answer, needed_n=None
    )
    return dataclasses.replace(base, pairs=(pair,), answer=answer, **changes)  # type: ignore[arg-type]


def sentence(result: CharacteristicResult, pair: PairResult | None = None) -> str:
    return pair_sentence(pair or result.pairs[0], numbers(result), margin=numbers(result).margin())


@pytest.mark.parametrize(
    ("answer", "low", "high", "said"),
    [
        (
            "matters",
            -2.4,
            -1.6,
            "LA-2403 is lower than LB-2403 by 1.200 MPa (1.600 to 2.400, all pairs at once): "
            "beyond the margin of 1.5 MPa.",
        ),
        (
            "different",
            -2.0,
            -0.4,
            "LA-2403 is lower than LB-2403 by 1.200 MPa (0.400 to 2.000, all pairs at once). "
            "Whether by more than the margin of 1.5 MPa is open.",
        ),
        (
            "within_margin",
            -1.4,
            -0.4,
            "LA-2403 is lower than LB-2403 by 1.200 MPa (0.400 to 1.400, all pairs at "
            "once), by less than the margin of 1.5 MPa.",
        ),
        (
            "not_settled",
            -2.6,
            0.2,
            "LB-2403 and LA-2403: not settled against the margin of 1.5 MPa, −0.200 to "
            "2.600 MPa (LB-2403 minus LA-2403, all pairs at once).",
        ),
        (
            "equivalent",
            -1.4,
            0.2,
            "LB-2403 and LA-2403 lie within the margin of 1.5 MPa: −0.200 to 1.400 MPa (all pairs at once).",
        ),
        ("not_compared", None, None, "LA-2403 and LB-2403 are not compared."),
        (
            "different",
            None,
            -0.4,
            "LA-2403 is lower than LB-2403 by 1.200 MPa (at least 0.400, all pairs at once). "
            "Whether by more than the margin of 1.5 MPa is open.",
        ),
    ],
)
def test_each_answer_has_its_sentence(answer: str, low: float | None, high: float | None, said: str) -> None:
    assert sentence(one_pair(answer, low, high)) == said


def test_without_a_margin_nothing_is_said_about_what_matters() -> None:
    shown = one_pair("different", -2.0, -0.4, margin=(None, None))
    assert sentence(shown).endswith("No margin is set, so whether it matters is open.")
    hidden = one_pair("not_shown", -2.0, 0.4, margin=(None, None))
    assert "no difference shown" in sentence(hidden)
    assert "not shown to be alike" in sentence(hidden)


def test_an_open_pair_says_how_many_results_would_settle_it() -> None:
    result = one_pair("not_settled", -2.6, 0.2)
    pair = dataclasses.replace(result.pairs[0], needed_n=14)
    assert sentence(result, pair).endswith(
        "About 14 results a batch would settle it, if the scatter is as seen here."
    )
    assert "results a batch" not in sentence(result, dataclasses.replace(pair, answer="different"))


def test_with_a_reference_the_batch_is_the_subject() -> None:
    result = characteristic(procedure="dunnett_unequal", reference="LB-2403", margin=(None, None))
    said = [sentence(result, p) for p in result.pairs]
    assert said[2].startswith("LD-2404 is lower than the reference LB-2403 by 1.228 MPa")
    raised = dataclasses.replace(result.pairs[0], difference=1.9, lower=0.9, upper=2.9, answer="different")
    assert sentence(result, raised).startswith("LA-2403 is higher than the reference LB-2403 by 1.900 MPa")
    assert "all comparisons at once" in said[0]


def test_where_nothing_is_settled_the_direction_is_that_of_the_figure() -> None:
    result = characteristic(procedure="dunnett_unequal", reference="LB-2403")
    pair = dataclasses.replace(result.pairs[2], difference=-0.4, lower=-1.1, upper=0.3, answer="not_settled")
    assert "(LD-2404 minus LB-2403, all comparisons at once)" in sentence(result, pair)
    assert "−1.100 to 0.300 MPa" in sentence(result, pair)
    answer = first_page_answer(numbers(result), most=1, title="", target="", first_use=False)
    assert answer.lines[0].mark.title.startswith("LD-2404 against LB-2403: −2.213 to −0.242")


def test_ranks_say_typically() -> None:
    assert "is typically lower than" in sentence(one_pair("different", -2.0, -0.4, procedure="steel_dwass"))


def test_ratios_are_told_as_factors() -> None:
    result = characteristic(procedure="tamhane_t2", log=True, margin=(0.8, 1.25))
    first = first_page_answer(numbers(result), most=5, title="", target="x", first_use=True)
    assert "All 6 pairs lie within a factor of 0.8 to 1.25" in first.lines[0].text
    assert "none is further apart than a factor of 1.126" in first.lines[0].text
    assert (
        "by a factor of 1.085 (1.046 to 1.123, all pairs at once), by less than the margin of a factor of"
        in sentence(result, next(p for p in result.pairs if {p.first, p.second} == {"LC-2404", "LD-2404"}))
    )


def test_page_one_names_the_serious_pairs_and_sums_up_the_rest() -> None:
    answer = first_page_answer(numbers(characteristic()), most=5, title="", target="apart-1", first_use=True)
    assert [line.word for line in answer.lines] == ["open", "open", "open", "open"]
    assert answer.lines[0].text.startswith("LD-2404 is lower than LC-2404 by 1.905 MPa (0.880 to 2.930")
    assert "1.5 MPa, the smallest difference that matters, is open" in answer.lines[0].text
    assert "smallest difference" not in answer.lines[1].text
    assert answer.rest == "The other 2 pairs lie within the margin."
    assert answer.more == ""


def test_what_page_one_has_no_room_for_is_counted() -> None:
    answer = first_page_answer(numbers(characteristic()), most=1, title="", target="apart-1", first_use=True)
    assert len(answer.lines) == 1
    assert answer.more == "3 more, page"


def test_all_within_is_one_sentence_with_the_furthest_end() -> None:
    result = characteristic(
        VISCOSITY, name="viscosity", title="Viscosity", unit="mPa·s", decimals=0, margin=(-100.0, 100.0)
    )
    answer = first_page_answer(numbers(result), most=5, title="", target="apart-1", first_use=True)
    assert [line.text for line in answer.lines] == [
        "All 6 pairs lie within 100 mPa·s, the smallest difference that matters; none is further apart than "
        "79.5 mPa·s (95 %, all pairs at once)."
    ]
    assert answer.lines[0].word == "within"


def test_nothing_compared_gives_the_reason() -> None:
    answer = first_page_answer(
        numbers(left_out_group(characteristic())), most=5, title="", target="", first_use=True
    )
    assert answer.lines[0].text == "Not compared: LB-2403: 2 results, the plan asks for at least 3."
    assert answer.lines[0].word == "not compared"


def test_percent_margins_show_both_forms() -> None:
    assert numbers(characteristic(), "6 % of 25").margin() == "6 % of 25 (1.5 MPa)"
    uneven = characteristic(margin=(-0.5, 1.5))
    assert numbers(uneven).margin() == "0.5 MPa downwards, 1.5 MPa upwards"
    assert numbers(characteristic(margin=(-0.5, None))).margin() == "0.5 MPa downwards"


@pytest.mark.parametrize(
    ("code", "word"),
    [
        ("matters", "beyond"),
        ("different", "open"),
        ("not_settled", "open"),
        ("not_shown", "open"),
        ("within_margin", "within"),
        ("equivalent", "within"),
        ("not_compared", "not compared"),
    ],
)
def test_register_and_mail_use_three_words(code: str, word: str) -> None:
    assert register_word(code) == word


def by_limits(answer: str, statistic: float, margin: Margin = (-0.5, 0.5)) -> Numbers:
    base = characteristic(procedure="steel_dwass", margin=margin)
    pair = dataclasses.replace(
        base.pairs[0],
        difference=math.nan,
        lower=None,
        upper=None,
        statistic=statistic,
        p=0.004,
        answer=answer,
    )
    groups = (dataclasses.replace(base.groups[0], censored=3, mean=None), *base.groups[1:])
    return numbers(dataclasses.replace(base, groups=groups, pairs=(pair,)))


def test_ranks_with_limits_say_who_is_typically_lower_and_that_by_how_much_is_open() -> None:
    for statistic, said in (
        (-2.9, "LA-2403 is typically lower than LB-2403"),
        (2.9, "LB-2403 is typically lower"),
    ):
        found = by_limits("different", statistic)
        text = pair_sentence(found.result.pairs[0], found, margin="0.5 MPa")
        assert text.startswith(said)
        assert "(p = 0.0040, all pairs at once)" in text
        assert "leave no interval, so by how much is open, also against the margin of 0.5 MPa." in text
        assert "–" not in text


def test_ranks_with_limits_stay_open_without_a_margin_or_a_shown_difference() -> None:
    found = by_limits("different", -2.9, (None, None))
    assert "by how much is open; no margin is set." in pair_sentence(found.result.pairs[0], found, margin="")
    found = by_limits("not_settled", -0.9)
    text = pair_sentence(found.result.pairs[0], found, margin="0.5 MPa")
    assert text.startswith("LA-2403 and LB-2403: not settled") or text.startswith(
        "LB-2403 and LA-2403: not settled"
    )
    assert "no interval" in text
    assert found.range(higher_first(found.result.pairs[0], found.result)) == "open: known only by a limit"
