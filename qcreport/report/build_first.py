"""Page 1."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.analysis.context import Context
from qcreport.analysis.result import CharacteristicResult, Result
from qcreport.canonical import in_groups_of_eight
from qcreport.measurements import MeasurementSet
from qcreport.plan.model import ComparisonPlan, Family, Unit
from qcreport.report.build_answers import PAIRS_ON_FIRST_PAGE, first_page_answer
from qcreport.report.build_pairs import flag_keys, panels
from qcreport.report.build_stated import replaces_row, run_changes
from qcreport.report.build_why import approval_texts, earliest_time, latest_time
from qcreport.report.model import Answer, FieldBox, FirstPage
from qcreport.report.moments import local_time
from qcreport.report.numbers import Numbers
from qcreport.report.pairs import rank_of
from qcreport.report.rounding import shortest
from qcreport.report.words_en import Words

CHARACTERISTICS_ON_FIRST_PAGE = 6


def first_page(
    all_numbers: Sequence[Numbers],
    plan: ComparisonPlan,
    read: MeasurementSet,
    result: Result,
    context: Context,
    drawn: CharacteristicResult | None,
) -> FirstPage:
    """Return page 1; `drawn` is the characteristic whose figure it shows, None for none."""
    words = all_numbers[0].words
    chosen = _chosen(all_numbers)
    answers = _answers(all_numbers, chosen)
    hidden = len(all_numbers) - len(answers)
    numbers = next((n for n in all_numbers if n.result is drawn), None)
    values, apart = panels(numbers) if numbers is not None and numbers.result.groups else (None, None)
    return FirstPage(
        answer_heading=words.ANSWER,
        answers=answers,
        answers_more=words.answers_more(hidden) if hidden else "",
        answers_target="apart",
        counts=tuple(_counts(all_numbers[i], result, titled=len(all_numbers) > 1) for i in chosen),
        values_heading=words.EVERY_VALUE,
        values=values,
        apart_heading=words.HOW_FAR_APART,
        apart=apart,
        figure_title=drawn.title if drawn is not None and len(all_numbers) > 1 else "",
        basis_heading=words.BASIS,
        basis=_basis(all_numbers, plan, read, context),
        signing_heading=words.SIGNING,
        signing_rule=words.SIGNING_RULE,
        fields=field_boxes(words, context.seal_fingerprint_sha256),
        cautions=(words.CAUTION_RELEASE, words.CAUTION_ITEMS),
    )


def _chosen(all_numbers: Sequence[Numbers]) -> tuple[int, ...]:
    """Return which characteristics page 1 answers: all in plan order, or the most serious ones."""
    order = sorted(range(len(all_numbers)), key=lambda i: rank_of(all_numbers[i].result.answer))
    if len(order) <= CHARACTERISTICS_ON_FIRST_PAGE:
        return tuple(sorted(order))
    return tuple(order[:CHARACTERISTICS_ON_FIRST_PAGE])


def _answers(all_numbers: Sequence[Numbers], chosen: Sequence[int]) -> tuple[Answer, ...]:
    most = max(1, PAIRS_ON_FIRST_PAGE // len(all_numbers))
    answers = []
    first_use = True
    for index in chosen:
        numbers = all_numbers[index]
        answers.append(
            first_page_answer(
                numbers,
                most=most,
                title=numbers.result.title if len(all_numbers) > 1 else "",
                target=f"apart-{index + 1}",
                first_use=first_use,
            )
        )
        first_use = first_use and not numbers.margin()
    return tuple(answers)


def _counts(numbers: Numbers, result: Result, *, titled: bool) -> str:
    words, found = numbers.words, numbers.result
    values = sum(g.n for g in found.groups)
    missing = sum(g.missing for g in found.groups)
    censored = sum(g.censored for g in found.groups)
    parts = [words.counts(values, len(found.groups), missing, censored)]
    readings = sum(g.n_readings for g in found.groups)
    if found.independent_unit != Unit.READING and readings != values:
        parts[0] = words.averaged(readings, values, found.independent_unit)
    parts.append(_flagged(numbers))
    if found.left_out is None:
        parts.append(words.none_left_out())
    else:
        parts.append(words.left_out(len(found.left_out.values)))
        parts.append(words.left_out_effect(bool(found.left_out.changed)))
    text = "; ".join(parts) + "."
    if found.sensitivity is not None and found.sensitivity.changed:
        procedure = words.procedure(found.sensitivity.procedure)
        text += " " + words.depends_on_spread(len(found.sensitivity.changed), procedure)
    if numbers.ranks and any(n.code == "ranks_unreachable" for n in result.notices):
        text += " " + words.unreachable()
    return f"{found.title}: {text}" if titled else text


def _flagged(numbers: Numbers) -> str:
    flagged, words = numbers.result.flagged, numbers.words
    if not flagged:
        return words.none_flagged()
    keys = flag_keys(numbers.result)
    shown = [f"{keys[f.cell]}: {f.group}, {numbers.with_unit(numbers.value(f.value))}" for f in flagged[:3]]
    if len(flagged) > 3:
        shown.append("…")
    changes = {f.changes_answer for f in flagged}
    verdict = True if True in changes else None if None in changes else False
    return words.flagged(len(flagged), "; ".join(shown), verdict)


def _basis(
    all_numbers: Sequence[Numbers], plan: ComparisonPlan, read: MeasurementSet, context: Context
) -> tuple[tuple[str, str], ...]:
    words = all_numbers[0].words
    approval = " ".join(approval_texts(all_numbers[0], plan, read))
    rules = dict.fromkeys(
        words.rule(
            words.procedure(n.result.procedure),
            words.reason(n.result.rule.table, n.result.rule.id, n.result.rule.reason),
        )
        for n in all_numbers
    )
    rate = words.rate_and_unit(
        shortest(plan.alpha), plan.independent_unit, export_wide=plan.family is Family.EXPORT
    )
    earliest, latest = earliest_time(read), latest_time(read)
    run = words.run(context.run_k, context.run_n, context.run_reason)
    texts = (
        "; ".join(
            filter(None, (words.export_and_run(context.export_name, run), run_changes(context, words)))
        ),
        words.product(plan.product.strip(), plan.method.strip()),
        words.dates(
            local_time(context.received_at, context.time_zone, words.DATE),
            words.date(earliest[:10]) if earliest else None,
            words.date(latest[:10]) if latest else None,
        ),
        words.plan(plan.name, approval),
        " ".join([*list(rules)[:3], rate]),
    )
    return (*replaces_row(context, words), *zip(words.basis_labels(), texts, strict=True))


def field_boxes(words: Words, fingerprint_sha256: str) -> tuple[FieldBox, ...]:
    """Return the seal's box and the two personal ones."""
    seal = FieldBox(
        name="Seal",
        role="",
        text=words.seal_text(in_groups_of_eight(fingerprint_sha256)),
        entries=(),
        description=words.seal_description(),
    )
    people = tuple(
        FieldBox(name=name, role=role, text="", entries=words.entries(), description=description)
        for name, (role, description) in zip(("Reviewed", "Authorised"), words.roles(), strict=True)
    )
    return (seal, *people)
