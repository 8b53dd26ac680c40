"""What people state: statements by clause, values left out, the report replaced, other runs."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.analysis.context import Context
from qcreport.analysis.provenance import Change, Provenance
from qcreport.report.blocks import Block, Column, Facts, Paragraph, Section, Table
from qcreport.report.numbers import MISSING, Numbers
from qcreport.report.words_en import Words

CHANGES_NAMED = 4


def stated_section(context: Context, words: Words) -> Section | None:
    """Return what a report must say and only the laboratory can; None where it says nothing."""
    given = {s.name: s for s in context.statements}
    if not given:
        return None
    rows = tuple(
        (label, given[name].text.strip() or words.not_stated(given[name].left_out.strip()))
        for name, label in words.statement_labels().items()
        if name in given
    )
    return Section(anchor="stated", heading=words.STATED, blocks=(Facts(rows=rows),))


def left_out_blocks(numbers: Numbers, records: Provenance | None) -> list[Block]:
    """Return what a person left out of one characteristic, and the answers with and without it."""
    found, words = numbers.result.left_out, numbers.words
    if found is None or not found.values:
        return []
    values = "; ".join(f"{v.group}, {numbers.with_unit(v.text.strip())}, {v.cell}" for v in found.values)
    who = records.left_out if records is not None else None
    by, reason = (who.by, who.reason) if who is not None else (MISSING, MISSING)
    blocks: list[Block] = [Paragraph(text=words.left_out_by(values, by, reason))]
    procedure = words.procedure(found.procedure)
    if not found.changed:
        return [*blocks, Paragraph(text=words.left_out_same(procedure))]
    has_margin = any(m is not None for m in numbers.result.margin)
    here = {(p.first, p.second): p.answer for p in numbers.result.pairs}
    rows = tuple(
        (
            c.first,
            c.second,
            words.in_short(here.get((c.first, c.second), "not_compared"), has_margin),
            words.in_short(c.answer, has_margin),
        )
        for c in found.changed
    )
    columns = tuple(
        Column(title=h, share=s) for h, s in zip(words.left_out_heads(), (24, 24, 26, 26), strict=True)
    )
    return [*blocks, Paragraph(text=words.left_out_changed(procedure)), Table(columns=columns, rows=rows)]


def changes_in_short(changes: Sequence[Change], words: Words) -> str:
    """Return what changed, by name only."""
    names = list(dict.fromkeys(words.change(c.what, c.key) for c in changes))
    if len(names) > CHANGES_NAMED:
        names = [*names[:CHANGES_NAMED], words.and_more(len(names) - CHANGES_NAMED)]
    return ", ".join(names)


def run_changes(context: Context, words: Words) -> str:
    """Return what this run changed against the newest other one; empty where it is the only one."""
    others = () if context.provenance is None else context.provenance.others
    if not others:
        return ""
    last = others[-1]
    return words.run_changes(last.k, last.number, changes_in_short(last.changes, words))


def replaces_row(context: Context, words: Words) -> tuple[tuple[str, str], ...]:
    """Return the row on the report that is replaced; empty where none is."""
    found = None if context.provenance is None else context.provenance.replaces
    if found is None:
        return ()
    text = words.replaces(found.number, found.reason, changes_in_short(found.changes, words))
    return ((words.replaces_label(), text),)
