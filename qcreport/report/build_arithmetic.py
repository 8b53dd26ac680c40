"""The section *The arithmetic, to be redone by hand*."""

from __future__ import annotations

import math
from collections.abc import Sequence

from qcreport.analysis.result import CharacteristicResult, GroupResult, Overall
from qcreport.plan.model import POOLED
from qcreport.report.blocks import Block, Column, Formula, Paragraph, Section, Subheading, Table
from qcreport.report.numbers import MISSING, Numbers
from qcreport.report.pairs import PairView, higher_first, most_serious_first, n_compared
from qcreport.report.rounding import fixed, shortest, significant
from qcreport.report.weighted_line import weighted_line

RANGE_PROCEDURES = frozenset({"tukey_hsd", "tukey_kramer", "games_howell"})
PAIRS_WORKED = 40
_DIGITS = 5


def arithmetic_section(all_numbers: Sequence[Numbers]) -> Section:
    """Return for each characteristic the overall test, the worked line and the table under it."""
    blocks: list[Block] = []
    for numbers in all_numbers:
        if len(all_numbers) > 1:
            blocks.append(Subheading(text=numbers.result.title))
        blocks += _characteristic(numbers)
    return Section(anchor="arithmetic", heading=all_numbers[0].words.ARITHMETIC, blocks=tuple(blocks))


def _characteristic(numbers: Numbers) -> list[Block]:
    result, words = numbers.result, numbers.words
    blocks: list[Block] = []
    if result.overall is not None:
        blocks.append(Paragraph(text=_overall(result.overall, numbers)))
    if not result.pairs or result.procedure == "none":
        return [*blocks, Paragraph(text=words.nothing_compared())]
    if numbers.ranks:
        law = [] if result.law is None else [words.law(result.law)]
        return [*blocks, Paragraph(text=" ".join([words.ranks(), *law]))]
    view = higher_first(most_serious_first(result)[0], result)
    blocks.append(Paragraph(text=words.redo_intro(view.first, view.second)))
    if numbers.log:
        blocks.append(Paragraph(text=words.log_intro(), note=True))
    blocks += [Formula(text=line) for line in worked_lines(view, numbers)]
    if result.hsd is not None:
        hsd = numbers.amount(result.hsd) if not numbers.log else significant(result.hsd, _DIGITS)
        blocks.append(Paragraph(text=words.hsd_reads(hsd)))
    blocks.append(_table(numbers))
    if len(result.pairs) > PAIRS_WORKED:
        blocks.append(Paragraph(text=words.further_pairs(len(result.pairs) - PAIRS_WORKED), note=True))
    return blocks


def _overall(overall: Overall, numbers: Numbers) -> str:
    letter = "H" if overall.name == "kruskal_wallis" else "F"
    if overall.statistic is None or not math.isfinite(overall.statistic):
        statistic = f"{letter} {MISSING}"
    else:
        digits = max(1, min(overall.supported_digits, 4))
        df = ", ".join(_df(d) for d in overall.df)
        statistic = f"{letter}({df}) = {significant(overall.statistic, digits)}"
    said = MISSING if overall.p is None else numbers.said_p(overall.p)
    return numbers.words.overall_line(numbers.words.overall(overall.name), statistic, said)


def _df(value: float | None) -> str:
    if value is None or not math.isfinite(value):
        return MISSING
    return shortest(value) if float(value).is_integer() else fixed(value, 2)


def worked_lines(view: PairView, numbers: Numbers) -> list[str]:
    """Return the arithmetic of one pair, line by line, for a procedure based on means."""
    result, words = numbers.result, numbers.words
    pair = view.pair
    if pair.se is None or pair.critical_value is None:
        return []
    lines = []
    if result.hsd is not None and (ms_within := _ms_within(result)) is not None:
        lines.append(_hsd_line(result, ms_within, numbers))
    lines += _standard_error(view, numbers)
    half = pair.critical_value * pair.se
    printed_half = numbers.difference(half) if not numbers.log else significant(half, _DIGITS)
    se = significant(pair.se, _DIGITS)
    if result.procedure in RANGE_PROCEDURES:
        q = fixed(math.sqrt(2) * pair.critical_value, 4)
        of = words.studentized(str(n_compared(result)), _df(pair.df))
        lines.append(words.half_width_q(q, se, printed_half, of))
    else:
        lines += [line for line in (weighted_line(view, numbers),) if line is not None]
        of = words.critical_source(result.procedure, _df(pair.df), str(len(result.pairs)))
        lines.append(words.half_width(fixed(pair.critical_value, 4), se, printed_half, of))
    difference = math.log(view.difference) if numbers.log else view.difference
    if view.low is not None and view.high is not None:
        ends = [math.log(e) if numbers.log else e for e in (view.low, view.high)]
        low, high = (_plain(e, numbers) for e in ends)
        lines.append(words.range_line(_plain(difference, numbers), printed_half, low, high))
    return lines


def _ms_within(result: CharacteristicResult) -> float | None:
    tables = (result.overall, result.analysis_of_variance)
    return next((t.ms_within for t in tables if t is not None and t.ms_within is not None), None)


def _plain(value: float, numbers: Numbers) -> str:
    return fixed(value, 4) if numbers.log else numbers.difference(value)


def _hsd_line(result: CharacteristicResult, ms_within: float, numbers: Numbers) -> str:
    critical = result.critical_value if result.critical_value is not None else result.pairs[0].critical_value
    q = fixed(math.sqrt(2) * (critical or 0.0), 4)
    df = _df(result.pairs[0].df)
    hsd = significant(result.hsd or 0.0, _DIGITS)
    named = {label for p in result.pairs for label in (p.first, p.second)}
    n = str(next(g.n for g in result.groups if g.label in named))
    k = str(n_compared(result))
    return numbers.words.hsd(q, significant(ms_within, _DIGITS), n, hsd, k, df)


def _standard_error(view: PairView, numbers: Numbers) -> list[str]:
    result, words, pair = numbers.result, numbers.words, view.pair
    groups = {g.label: g for g in result.groups}
    se = significant(pair.se or 0.0, _DIGITS)
    if result.procedure == "nested":
        return [words.nested_se(se)]
    first, second = groups[view.first], groups[view.second]
    if result.procedure in POOLED and (ms_within := _ms_within(result)) is not None:
        ms = significant(ms_within, _DIGITS)
        return [words.pooled_se(ms, str(first.n), str(second.n), se)]
    if numbers.log:
        return [words.nested_se(se)] if result.procedure == "nested" else [f"se = {se}"]
    line = words.own_se(_spread(first), str(first.n), _spread(second), str(second.n), se)
    return [line] if pair.df is None else [line, words.welch_df(_df(pair.df))]


def _spread(group: GroupResult) -> str:
    return MISSING if group.sd is None else significant(group.sd, _DIGITS)


def _table(numbers: Numbers) -> Table:
    result = numbers.result
    heads = numbers.words.arithmetic_heads()
    shares = (20, 20, 13, 14, 9, 12, 12)
    columns = tuple(
        Column(title=h, share=s, numeric=i > 1) for i, (h, s) in enumerate(zip(heads, shares, strict=True))
    )
    return Table(
        columns=columns,
        rows=tuple(_row(higher_first(p, result), numbers) for p in most_serious_first(result)[:PAIRS_WORKED]),
    )


def _row(view: PairView, numbers: Numbers) -> tuple[str, ...]:
    pair = view.pair
    difference = math.log(view.difference) if numbers.log and view.difference > 0 else view.difference
    return (
        view.first,
        view.second,
        _plain(difference, numbers),
        MISSING if pair.se is None else significant(pair.se, 4),
        _df(pair.df),
        MISSING if pair.statistic is None else fixed(abs(pair.statistic), 3),
        MISSING if pair.critical_value is None else fixed(pair.critical_value, 4),
    )
