"""The answers of page 1: one mark and one sentence, most serious first."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.analysis.result import CharacteristicResult, PairResult
from qcreport.report.figure_mark import answer_mark
from qcreport.report.model import Answer, AnswerLine
from qcreport.report.numbers import Numbers
from qcreport.report.pairs import (
    OPEN,
    WITHIN,
    PairView,
    for_figure,
    higher_first,
    most_serious_first,
    null_of,
    rank_of,
    size_of,
)

PAIRS_ON_FIRST_PAGE = 5


def register_word(answer: str) -> str:
    """Return the one word of register and mail: beyond, open, within; or not compared."""
    if answer == "matters":
        return "beyond"
    if answer in OPEN:
        return "open"
    return "within" if answer in WITHIN else "not compared"


def most_serious(results: Sequence[CharacteristicResult]) -> CharacteristicResult | None:
    """Return the characteristic that page 1 draws: the most serious one, the first of equals."""
    return min(results, key=lambda r: rank_of(r.answer), default=None)


def pair_sentence(pair: PairResult, numbers: Numbers, *, margin: str) -> str:
    """Return the answer for one pair as a sentence."""
    words, view = numbers.words, higher_first(pair, numbers.result)
    drawn = for_figure(pair, numbers.result)
    at_once = words.at_once(with_reference=numbers.result.reference is not None)
    if pair.answer == "not_compared":
        return words.pair_not_compared(pair.first, pair.second)
    if not view.has_interval and numbers.result_has_limits:
        return _by_ranks_alone(view, numbers, at_once, margin)
    range_text = numbers.range_with_unit(drawn)
    if pair.answer == "not_settled":
        text = words.not_settled(drawn.first, drawn.second, range_text, at_once, margin, ratio=numbers.log)
        return text if pair.needed_n is None else f"{text} {words.would_settle(pair.needed_n)}"
    if pair.answer == "equivalent":
        return words.pair_within(drawn.first, drawn.second, range_text, at_once, margin)
    if pair.answer == "not_shown":
        return words.not_shown(drawn.first, drawn.second, range_text, at_once)
    stem = _stem(view, numbers, at_once)
    if pair.answer == "matters":
        return words.beyond(stem, margin)
    if pair.answer == "within_margin":
        return words.differs_within(stem, margin)
    if not view.has_margin:
        return words.differs_no_margin(stem)
    return words.open_beyond(stem, margin)


def _by_ranks_alone(view: PairView, numbers: Numbers, at_once: str, margin: str) -> str:
    """Return the sentence of a pair of which limits leave no interval."""
    words, p = numbers.words, numbers.said_p(view.pair.p)
    if view.answer != "different":
        return words.not_settled_by_limits(view.first, view.second, p, at_once, margin)
    stem = words.by_direction(_relation(view, numbers), p, at_once)
    if view.has_margin:
        return words.direction_against_margin(stem, margin)
    return words.direction_no_margin(stem)


def _stem(view: PairView, numbers: Numbers, at_once: str) -> str:
    amount = numbers.amount(view.difference)
    relation = _relation(view, numbers)
    return numbers.words.by_amount(relation, amount, numbers.range(view), at_once, ratio=numbers.log)


def _relation(view: PairView, numbers: Numbers) -> str:
    reference = numbers.result.reference
    lower_speaks = reference is None or view.first == reference
    subject, other = (view.second, view.first) if lower_speaks else (view.first, view.second)
    return numbers.words.relation(
        subject,
        other,
        lower=lower_speaks,
        is_reference=reference is not None and other == reference,
        typically=numbers.ranks,
    )


def first_page_answer(numbers: Numbers, *, most: int, title: str, target: str, first_use: bool) -> Answer:
    """Return the answer of one characteristic with at most `most` sentences."""
    result, words = numbers.result, numbers.words
    margin = numbers.margin()
    said = words.margin_at_first(margin) if first_use and margin else margin
    ordered = most_serious_first(result)
    serious = [p for p in ordered if p.answer not in WITHIN]
    if result.procedure == "none" or not ordered:
        lines = [_line(None, numbers, words.not_compared(_why_not(result)))]
        return _answer(title, lines, _left_out(numbers), "", target)
    if not serious:
        lines = [_line(_furthest(ordered, result), numbers, _all_within(ordered, numbers, said))]
        return _answer(title, lines, _left_out(numbers), "", target)
    if all(p.answer == "not_shown" for p in ordered):
        at_once = words.at_once(with_reference=result.reference is not None)
        lines = [_line(_furthest(ordered, result), numbers, words.none_shown(len(ordered), at_once))]
        return _answer(title, lines, _left_out(numbers), "", target)
    lines = []
    beside = [for_figure(p, result) for p in serious[:most]]
    for index, pair in enumerate(serious[:most]):
        text = pair_sentence(pair, numbers, margin=said if index == 0 else margin)
        lines.append(_line(pair, numbers, text, beside))
    within = len(ordered) - len(serious)
    rest = " ".join(filter(None, (words.others_within(within) if within else "", _left_out(numbers))))
    hidden = len(serious) - len(lines)
    return _answer(title, lines, rest, words.more(hidden) if hidden else "", target)


def _answer(title: str, lines: Sequence[AnswerLine], rest: str, more: str, target: str) -> Answer:
    return Answer(title=title, lines=tuple(lines), rest=rest, more=more, target=target)


def _line(
    pair: PairResult | None, numbers: Numbers, text: str, beside: Sequence[PairView] = ()
) -> AnswerLine:
    answer = "not_compared" if pair is None else pair.answer
    view = None if pair is None else for_figure(pair, numbers.result)
    title = numbers.words.mark_alt(answer, view, numbers.decimals)
    return AnswerLine(
        mark=answer_mark(view, log=numbers.log, title=title, beside=beside),
        word=register_word(answer),
        text=text,
    )


def _why_not(result: CharacteristicResult) -> str:
    if len(result.groups) < 2 and result.not_compared:
        return "; ".join(f"{g.label}: {g.reason.strip().rstrip('.')}" for g in result.not_compared)
    return result.rule.reason


def _left_out(numbers: Numbers) -> str:
    result = numbers.result
    if result.procedure == "none":
        return ""
    shown = result.not_compared[:3]
    texts = [numbers.words.group_left_out(g.label, g.reason) for g in shown]
    if len(result.not_compared) > len(shown):
        texts.append(numbers.words.more_left_out(len(result.not_compared) - len(shown)))
    return " ".join(texts)


def _reach(pair: PairResult, result: CharacteristicResult) -> float:
    view = higher_first(pair, result)
    log = null_of(result) == 1.0
    ends = [x for x in (view.low, view.high) if x is not None]
    return max((size_of(x, log=log) for x in ends), default=size_of(view.difference, log=log))


def _furthest(ordered: Sequence[PairResult], result: CharacteristicResult) -> PairResult:
    return max(ordered, key=lambda p: _reach(p, result))


def _all_within(ordered: Sequence[PairResult], numbers: Numbers, margin: str) -> str:
    result, words = numbers.result, numbers.words
    view = higher_first(_furthest(ordered, result), result)
    ends = [x for x in (view.low, view.high) if x is not None]
    log = numbers.log
    far = max(ends, key=lambda x: size_of(x, log=log), default=view.difference)
    size = (1 / far if 0 < far < 1 else far) if log else abs(far)
    text = numbers.end(size, view)
    furthest = words.factor(text) if log else numbers.with_unit(text)
    at_once = words.at_once(with_reference=result.reference is not None)
    return words.all_within(len(ordered), margin, furthest, numbers.level(), at_once)
