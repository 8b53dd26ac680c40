"""The sections *Why this procedure* and *Sensitivity, not a second finding*."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import groupby

from qcreport.analysis.result import CharacteristicResult, Check, TraceStep
from qcreport.measurements import MeasurementSet
from qcreport.plan.model import ComparisonPlan
from qcreport.report.blocks import Block, Column, Paragraph, Section, Subheading, Table
from qcreport.report.build_beside import rule_blocks
from qcreport.report.numbers import MISSING, Numbers
from qcreport.report.rounding import fixed, shortest, significant, trimmed
from qcreport.report.words_en import Words

TEXTBOOK = "textbook"


def why_section(all_numbers: Sequence[Numbers], plan: ComparisonPlan, read: MeasurementSet) -> Section:
    """Return what the choice of procedure rests on."""
    words = all_numbers[0].words
    blocks: list[Block] = []
    for numbers in all_numbers:
        if len(all_numbers) > 1:
            blocks.append(Subheading(text=numbers.result.title))
        blocks += _characteristic(numbers)
    blocks += rule_blocks(all_numbers)
    blocks += [Paragraph(text=t) for t in _plan_texts(all_numbers[0], plan, read)]
    blocks.append(Paragraph(text=words.near_normal(), note=True))
    return Section(anchor="why", heading=words.WHY, blocks=tuple(blocks))


def _characteristic(numbers: Numbers) -> list[Block]:
    result, words = numbers.result, numbers.words
    rule = result.rule
    blocks: list[Block] = [
        Paragraph(text=words.why_intro(words.procedure(result.procedure), rule.table, rule.id)),
        Paragraph(text=words.rule_reason(words.reason(rule.table, rule.id, rule.reason), rule.source)),
    ]
    if rule.table == TEXTBOOK:
        blocks.append(Paragraph(text=words.textbook_rates()))
    if result.facts:
        rows = tuple(
            (words.fact(f.fact), words.fact_value(f.value), f.observed, words.fact_source(f.source))
            for f in result.facts
        )
        blocks.append(Table(columns=_columns(words.fact_heads(), (16, 18, 38, 28), ()), rows=rows))
    if result.checks:
        blocks.append(Paragraph(text=words.not_a_gate()))
        columns = _columns(words.check_heads(), (30, 12, 11, 11, 14, 22), (1, 2, 3, 4))
        blocks.append(Table(columns=columns, rows=tuple(_check_row(c, numbers) for c in result.checks)))
    if tried := _trace_rows(result.trace, words):
        blocks.append(Table(columns=_columns(words.trace_heads(), (50, 50), ()), rows=tried))
    return blocks


def _trace_rows(trace: Sequence[TraceStep], words: Words) -> tuple[tuple[str, str], ...]:
    """Return the rows tried, in order; neighbours that fail for one reason share a line."""
    rows: list[tuple[str, str]] = []
    passed = [t for t in trace if not t.applied]  # the row that decided stands in the first sentence
    for why, steps in groupby(passed, key=lambda t: t.why.strip().rstrip(".")):
        names = ", ".join(words.row_name(t.id) for t in steps)
        rows.append((names, words.why_not(why)))
    return tuple(rows)


def _columns(heads: Sequence[str], shares: Sequence[int], numeric: Sequence[int]) -> tuple[Column, ...]:
    return tuple(
        Column(title=h, share=s, numeric=i in numeric)
        for i, (h, s) in enumerate(zip(heads, shares, strict=True))
    )


def _check_row(check: Check, numbers: Numbers) -> tuple[str, ...]:
    return (
        numbers.words.check(check.name),
        MISSING if check.statistic is None else significant(check.statistic, 4),
        ", ".join(shortest(d) if float(d).is_integer() else fixed(d, 2) for d in check.df) or MISSING,
        numbers.p(check.p),
        MISSING if check.threshold is None else trimmed(check.threshold, 3),
        numbers.words.check_says(check.met, check.note),
    )


def earliest_time(read: MeasurementSet) -> str | None:
    """Return the earliest measurement time in the export, as ISO text; None where it gives none."""
    return min((m.time for m in read.measurements if m.time), default=None)


def latest_time(read: MeasurementSet) -> str | None:
    """Return the latest measurement time in the export, as ISO text; None where it gives none."""
    return max((m.time for m in read.measurements if m.time), default=None)


def approval_texts(numbers: Numbers, plan: ComparisonPlan, read: MeasurementSet) -> list[str]:
    """Return who approved the plan, and whether that was after the data."""
    words = numbers.words
    if plan.approved is None:
        return [words.not_approved()]
    on = plan.approved.on.isoformat()
    texts = [words.approved(plan.approved.by, words.date(on))]
    earliest = earliest_time(read)
    if earliest is not None and on > earliest[:10]:
        texts.append(words.set_after(words.date(on), words.date(earliest[:10])))
    return texts


def _plan_texts(numbers: Numbers, plan: ComparisonPlan, read: MeasurementSet) -> list[str]:
    texts = approval_texts(numbers, plan, read)
    if plan.spread is not None:
        spread = plan.spread
        texts.append(
            numbers.words.declaration(
                similar=spread.similar,
                by=spread.by,
                on=numbers.words.date(spread.on.isoformat()),
                reason=spread.reason,
            )
        )
    return texts


def sensitivity_section(all_numbers: Sequence[Numbers]) -> Section:
    """Return what the other policy on spread would answer, under a heading that says what it is not."""
    blocks: list[Block] = []
    for numbers in all_numbers:
        if len(all_numbers) > 1:
            blocks.append(Subheading(text=numbers.result.title))
        blocks += _sensitivity(numbers)
    return Section(anchor="sensitivity", heading=all_numbers[0].words.SENSITIVITY, blocks=tuple(blocks))


def _sensitivity(numbers: Numbers) -> list[Block]:
    result, words = numbers.result, numbers.words
    if result.sensitivity is None:
        return [Paragraph(text=words.sensitivity_none())]
    procedure = words.procedure(result.sensitivity.procedure)
    changed = result.sensitivity.changed
    if not changed:
        return [Paragraph(text=words.sensitivity_same(procedure))]
    has_margin = any(m is not None for m in result.margin)
    rows = tuple(
        (
            c.first,
            c.second,
            _answer_here(result, c.first, c.second, numbers),
            words.in_short(c.answer, has_margin),
        )
        for c in changed
    )
    return [
        Paragraph(text=words.sensitivity_changed(procedure, len(changed))),
        Table(columns=_columns(words.sensitivity_heads(), (24, 24, 26, 26), ()), rows=rows),
    ]


def _answer_here(result: CharacteristicResult, first: str, second: str, numbers: Numbers) -> str:
    has_margin = any(m is not None for m in result.margin)
    for pair in result.pairs:
        if {pair.first, pair.second} == {first, second}:
            return numbers.words.in_short(pair.answer, has_margin)
    return MISSING
