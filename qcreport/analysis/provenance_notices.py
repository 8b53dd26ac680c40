"""What the records add to a report, as notices: every one of them is printed."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterator, Sequence

from qcreport.analysis.context import Context
from qcreport.analysis.provenance import Approval, Change, LeftOut, OtherRun, Provenance, Retest, ValueChange
from qcreport.analysis.result import CharacteristicResult
from qcreport.measurements import Notice

MOST_LISTED = 8
"""So many changes or values stand in one sentence; all of them stand in `context.json`."""


def provenance_notices(
    records: Provenance,
    context: Context,
    results: Sequence[CharacteristicResult],
    earliest: dt.date | None,
) -> Iterator[Notice]:
    """Yield what a reader must know of other runs, of people's decisions and of values met before."""
    yield from _runs(records, context)
    if records.left_out is not None:
        yield _left_out(records.left_out, results)
    if records.replaces is not None:
        text = (
            f"This report replaces {records.replaces.number}. Reason: {_sentence(records.replaces.reason)} "
            f"Changed against it: {_changes(records.replaces.changes)}."
        )
        yield Notice(code="replaces", cells=(), text=text)
    yield from _values(records)
    yield _approval(records.approvals, earliest)


def _runs(records: Provenance, context: Context) -> Iterator[Notice]:
    for other in records.others:
        text = (
            f"This is run {context.run_k} over these data by this plan. {_named(other)} "
            f"Changed since: {_changes(other.changes)}."
        )
        yield Notice(code="run_of_several", cells=(), text=text)
    if records.without_report:
        times = "once" if records.without_report == 1 else f"{records.without_report} times"
        text = f"Under other settings these data were computed by this plan {times} without a report."
        yield Notice(code="computed_without_report", cells=(), text=text)


def _named(other: OtherRun) -> str:
    day = f"{other.made_at[:10]} {other.made_at[11:16]} UTC"
    answers = ", ".join(f"{name} {_words(code)}" for name, code in other.answers) or "no answer"
    why = f"; reason: {other.reason.strip().rstrip('.')}" if other.reason.strip() else ""
    return f"Run {other.k} is {other.number} of {day}, {other.state}: {answers}{why}."


def _changes(changes: Sequence[Change]) -> str:
    if not changes:
        return "nothing"
    shown = "; ".join(_change(c) for c in changes[:MOST_LISTED])
    return shown + _more(len(changes))


def _change(change: Change) -> str:
    what = "cell" if change.what == "value" else change.what
    before = "not there" if change.before is None else change.before
    after = "not there" if change.after is None else change.after
    return f"{what} {change.key}: {before} → {after}"


def _left_out(left_out: LeftOut, results: Sequence[CharacteristicResult]) -> Notice:
    places, effects = [], []
    for result in results:
        if result.left_out is None:
            continue
        places += [f"{v.cell} ({v.text} {result.unit}, {v.group})" for v in result.left_out.values]
        effects.append(_with_them(result))
    shown = "; ".join(places[:MOST_LISTED]) + _more(len(places))
    said = (f"Left out by {left_out.by}: {shown}.", f"Reason: {_sentence(left_out.reason)}", *effects)
    return Notice(code="left_out", cells=left_out.cells, text=" ".join(said))


def _with_them(result: CharacteristicResult) -> str:
    """Return the answer with the values left out, beside the one without them."""
    beside = result.left_out
    if beside is None:
        return ""
    text = (
        f"{result.title}: {_words(result.answer)} without, {_words(beside.answer)} with the values left out "
        f"({beside.procedure})."
    )
    here = {(p.first, p.second): p.answer for p in result.pairs}
    changed = [
        f"{c.first} against {c.second}: {_words(here.get((c.first, c.second), 'not_compared'))} without, "
        f"{_words(c.answer)} with"
        for c in beside.changed
    ]
    if not changed:
        return f"{text} No pair's answer changes."
    return f"{text} {'; '.join(changed[:MOST_LISTED])}{_more(len(changed))}."


def _values(records: Provenance) -> Iterator[Notice]:
    for when, code, lead in (
        ("now", "value_changed", "Changed since an earlier export"),
        ("earlier", "value_changed_earlier", "Corrected by an earlier export"),
        ("later", "value_superseded", "A later export gives another value"),
    ):
        found = [c for c in records.changed if c.when == when]
        if found:
            shown = "; ".join(_value(c) for c in found[:MOST_LISTED])
            text = f"{lead}: {shown}{_more(len(found))}. The other text is kept in the records."
            yield Notice(code=code, cells=tuple(c.cell for c in found), text=text)
    if records.retests:
        shown = "; ".join(_retest(r) for r in records.retests[:MOST_LISTED])
        text = f"Retest? Sample measured before: {shown}{_more(len(records.retests))}."
        yield Notice(code="retest", cells=tuple(r.cell for r in records.retests), text=text)
    if records.known and not records.new and not any(c.when == "now" for c in records.changed):
        text = f"All {records.known} values of this export are known from earlier exports; none is new."
        yield Notice(code="values_all_known", cells=(), text=text)
    if records.not_joined:
        text = (
            "This export has values without sample ids. They are not joined with those of other exports: a "
            "value that stands in two exports is not recognised, and neither is a change of it or a retest."
        )
        yield Notice(code="exports_not_joined", cells=(), text=text)


def _value(change: ValueChange) -> str:
    if change.when == "later":
        return f"{change.cell} reads {change.after}; {change.before} in {change.source}"
    return f"{change.cell} reads {change.after}; it was {change.before} in {change.source}"


def _retest(retest: Retest) -> str:
    return f"{retest.batch} {retest.sample} ({retest.cell}), {retest.why}, first in {retest.source}"


def _approval(approvals: Sequence[Approval], earliest: dt.date | None) -> Notice:
    if not approvals:
        text = "Not approved: no person's key has approved this plan with this layout and these rules."
        return Notice(code="not_approved", cells=(), text=text)
    shown = "; ".join(
        f"{a.by} on {a.at[:10]} (key {a.fingerprint_sha256[:8]} {a.fingerprint_sha256[8:16]}, "
        f"ledger entry {a.sequence})"
        for a in approvals
    )
    text = f"Plan, layout and rules approved by {shown}."
    first = min(a.at[:10] for a in approvals)
    if earliest is not None and first > earliest.isoformat():
        text += f" That is after the first measurement, of {earliest.isoformat()}."
    return Notice(code="approved", cells=(), text=text)


def _words(code: str) -> str:
    return code.replace("_", " ")


def _sentence(text: str) -> str:
    return f"{text.strip().rstrip('.')}."


def _more(total: int) -> str:
    return f"; and {total - MOST_LISTED} more" if total > MOST_LISTED else ""
