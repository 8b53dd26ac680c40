"""From a result to the report model: the one way in."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.analysis.context import Context
from qcreport.analysis.result import Result
from qcreport.measurements import MeasurementSet
from qcreport.plan.model import CharacteristicPlan, ComparisonPlan
from qcreport.report.blocks import Section
from qcreport.report.build_answers import most_serious
from qcreport.report.build_arithmetic import arithmetic_section
from qcreport.report.build_data import data_section, flagged_section
from qcreport.report.build_first import first_page
from qcreport.report.build_origin import checking_section, origin_section, terms_section
from qcreport.report.build_pairs import apart_section, figures_section
from qcreport.report.build_stated import stated_section
from qcreport.report.build_why import sensitivity_section, why_section
from qcreport.report.model import Letterhead, ReportModel, Running
from qcreport.report.moments import local_time
from qcreport.report.numbers import Numbers
from qcreport.report.printable import with_printable_texts
from qcreport.report.rounding import decimal_mark, shortest
from qcreport.report.words import words_for
from qcreport.report.words_en import Words


def build_model(
    result: Result,
    measurements: MeasurementSet,
    plan: ComparisonPlan,
    context: Context,
    *,
    figure_on_first_page: bool = True,
) -> ReportModel:
    """Return everything the pages print.

    Parameters
    ----------
    result : Result
        With at least one characteristic.
    measurements : MeasurementSet
        What was read, for the annex of values.
    plan : ComparisonPlan
        What was asked.
    context : Context
        Laboratory, number, moment, digests.
    figure_on_first_page : bool
        False moves the figure to page 2, where page 1 has no room for it.

    Raises
    ------
    ConfigError
        Where there are no texts in the context's language.
    """
    missing: set[str] = set()
    result, measurements = with_printable_texts((result, measurements), missing)
    plan, context = with_printable_texts((plan, context), missing)
    words = words_for(context.language, plan.groups)
    with decimal_mark(words.DECIMAL_MARK):
        return _built(result, measurements, plan, context, words, figure_on_first_page, missing)


def _built(
    result: Result,
    measurements: MeasurementSet,
    plan: ComparisonPlan,
    context: Context,
    words: Words,
    figure_on_first_page: bool,
    missing: set[str],
) -> ReportModel:
    plans = {c.name: c for c in plan.characteristics}
    all_numbers = tuple(
        Numbers(result=r, words=words, margin_text=_percent_margin(plans.get(r.name), words))
        for r in result.characteristics
    )
    said = tuple(f"U+{ord(c):04X}" for c in sorted(missing))
    return _model(result, measurements, plan, context, words, all_numbers, figure_on_first_page, said)


def _percent_margin(plan: CharacteristicPlan | None, words: Words) -> str:
    if plan is None or "%" not in plan.margin_text:
        return ""
    text = plan.margin_text.strip()
    return text if plan.target is None else words.margin_of_target(text, shortest(plan.target))


def _model(
    result: Result,
    measurements: MeasurementSet,
    plan: ComparisonPlan,
    context: Context,
    words: Words,
    all_numbers: Sequence[Numbers],
    figure_on_first_page: bool,
    unprintable: tuple[str, ...],
) -> ReportModel:
    drawn = most_serious(result.characteristics) if figure_on_first_page else None
    sections: list[Section | None] = [
        figures_section(all_numbers, drawn),
        apart_section(all_numbers),
        why_section(all_numbers, plan, measurements),
        arithmetic_section(all_numbers),
        sensitivity_section(all_numbers),
        data_section(all_numbers, plan, measurements),
        flagged_section(all_numbers, result, unprintable),
        stated_section(context, words),
        origin_section(result, context, words),
        checking_section(context, words),
        terms_section(words),
    ]
    made = local_time(context.made_at, context.time_zone, words.DATE)
    labels = tuple(dict.fromkeys(g.label for r in result.characteristics for g in r.groups))
    return ReportModel(
        language=context.language,
        page_size=context.page_size,
        title=plan.title or plan.name,
        subtitle=words.subtitle(words.group_list(labels), plan.reference) if labels else "",
        made_at=context.made_at,
        identity=words.identity_rows(context.report_number, context.revision, made),
        letterhead=_letterhead(context, words),
        running=_running(context, words),
        closing_heading=words.CAUTIONS,
        closing=words.cautions(),
        first=first_page(all_numbers, plan, measurements, result, context, drawn),
        sections=tuple(s for s in sections if s is not None),
        unprintable=unprintable,
    )


def _letterhead(context: Context, words: Words) -> Letterhead:
    laboratory = context.laboratory
    elsewhere = laboratory.place_of_work.strip() not in ("", laboratory.address.strip())
    return Letterhead(
        laboratory=laboratory.name,
        address=tuple(line.strip() for line in laboratory.address.splitlines() if line.strip()),
        place_of_work=words.place_of_work(laboratory.place_of_work.strip()) if elsewhere else "",
        customer=words.customer(laboratory.customer.strip()) if laboratory.customer.strip() else "",
    )


def _running(context: Context, words: Words) -> Running:
    return Running(
        identity=words.identity(context.report_number, context.revision),
        laboratory=context.laboratory.name,
        page=words.page(),
        of=words.of(),
        end_mark=words.end_mark(context.report_number, context.revision),
        demonstration=words.DEMONSTRATION if context.demonstration else "",
    )
