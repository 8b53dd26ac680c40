"""Results made by hand for the report's tests: a fictional maker of structural adhesives, lines A to D.

The numbers follow from the values by the published formulas, so that the printed arithmetic can be redone.
"""

from __future__ import annotations

import dataclasses
import datetime as dt
import itertools
import math
import statistics
from collections.abc import Mapping, Sequence

from scipy import special, stats

from qcreport.analysis.context import Context, Laboratory
from qcreport.analysis.result import (
    ChangedAnswer,
    CharacteristicResult,
    Check,
    FactEvidence,
    Flagged,
    GroupResult,
    NotCompared,
    Overall,
    PairResult,
    Result,
    RuleApplied,
    Sensitivity,
    TraceStep,
    UnitValue,
)
from qcreport.measurements import CellRef, Measurement, MeasurementSet, Notice
from qcreport.plan.model import (
    BY_RULES,
    Approval,
    CharacteristicPlan,
    ComparisonPlan,
    Direction,
    Family,
    Groups,
    Scale,
    SpreadDeclaration,
    Unit,
)
from qcreport.report.attachment import Attachment
from qcreport.stats.letters import compact_letters

LAP_SHEAR: dict[str, list[float]] = {
    "LA-2403": [24.84, 22.95, 23.11, 25.36, 23.45, 24.80, 24.98, 23.98],
    "LB-2403": [23.29, 24.33, 25.06, 22.58, 23.50, 23.25, 24.82, 23.33],
    "LC-2404": [24.63, 23.43, 24.85, 24.65, 25.27, 23.68, 24.93, 24.14],
    "LD-2404": [22.08, 22.43, 23.33, 22.00, 22.92, 22.41, 22.96, 22.21],
}
VISCOSITY: dict[str, list[float]] = {
    "LA-2403": [4120, 4180, 4150, 4090],
    "LB-2403": [4130, 4160, 4110, 4170],
    "LC-2404": [4140, 4100, 4180, 4120],
    "LD-2404": [4150, 4090, 4160, 4130],
}
VISCOSITY_AS: dict[str, object] = {
    "name": "viscosity",
    "title": "Viscosity",
    "unit": "mPa·s",
    "decimals": 0,
    "margin": (-100.0, 100.0),
}
DIGEST = "9f86d081884c7d659a2feaa0c55ad015a3bf4f1b2b0b822cd15d6c15b0f00a08"
Margin = tuple[float | None, float | None]


def answer_of(low: float | None, high: float | None, margin: Margin, null: float = 0.0) -> str:
    """Read an answer off an interval."""
    lo, hi = -math.inf if low is None else low, math.inf if high is None else high
    excludes = lo > null or hi < null
    if margin == (None, None):
        return "different" if excludes else "not_shown"
    below = -math.inf if margin[0] is None else margin[0]
    above = math.inf if margin[1] is None else margin[1]
    if lo > above or hi < below:
        return "matters"
    inside = lo >= below and hi <= above
    if excludes:
        return "within_margin" if inside else "different"
    return "equivalent" if inside else "not_settled"


def group_results(data: Mapping[str, Sequence[float]], decimals: int, column: int) -> tuple[GroupResult, ...]:
    groups, row = [], 5
    for label, values in data.items():
        units = []
        for value in values:
            cell = str(CellRef(sheet="Results", row=row, column=column))
            row += 1
            units.append(
                UnitValue(
                    value=float(value),
                    text=f"{value:.{decimals}f}",
                    decimals=decimals,
                    sample=None,
                    cells=(cell,),
                    censored=None,
                    marks=(),
                )
            )
        groups.append(
            GroupResult(
                label=label,
                n=len(values),
                n_readings=len(values),
                mean=statistics.fmean(values),
                sd=statistics.stdev(values) if len(values) > 1 else None,
                minimum=min(values),
                maximum=max(values),
                median=statistics.median(values),
                censored=0,
                missing=0,
                cells=tuple(c for u in units for c in u.cells),
                units=tuple(units),
            )
        )
    return tuple(groups)


def anova(groups: Sequence[GroupResult]) -> Overall:
    total = sum(g.n for g in groups)
    grand = sum(g.mean * g.n for g in groups) / total
    between = math.fsum(g.n * (g.mean - grand) ** 2 for g in groups)
    within = math.fsum((g.n - 1) * (g.sd or 0.0) ** 2 for g in groups)
    df = (float(len(groups) - 1), float(total - len(groups)))
    f = (between / df[0]) / (within / df[1])
    return Overall(
        name="anova",
        statistic=f,
        df=df,
        p=float(special.fdtrc(*df, f)),
        ms_within=within / df[1],
        ms_between=between / df[0],
        ss_within=within,
        ss_between=between,
        supported_digits=3,
    )


def tukey_pairs(
    groups: Sequence[GroupResult], ms: float, df: float, margin: Margin
) -> tuple[PairResult, ...]:
    k = len(groups)
    critical = float(stats.studentized_range.ppf(0.95, k, df)) / math.sqrt(2)
    pairs = []
    for a, b in itertools.combinations(groups, 2):
        se = math.sqrt(ms * (1 / a.n + 1 / b.n))
        difference = a.mean - b.mean
        t = difference / se
        low, high = difference - critical * se, difference + critical * se
        answer = answer_of(low, high, margin)
        pairs.append(
            PairResult(
                first=a.label,
                second=b.label,
                difference=difference,
                se=se,
                statistic=t,
                df=df,
                critical_value=critical,
                p=float(stats.studentized_range.sf(math.sqrt(2) * abs(t), k, df)),
                lower=low,
                upper=high,
                detectable=3.6 * se,
                needed_n=14 if answer == "not_settled" else None,
                answer=answer,
            )
        )
    return tuple(pairs)


def welch_pairs(
    groups: Sequence[GroupResult], margin: Margin, reference: str | None = None, *, log: bool = False
) -> tuple[PairResult, ...]:
    """Pairs by Welch t at Šidák's level: Tamhane's T2, or each with the reference."""
    if reference is None:
        chosen = list(itertools.combinations(groups, 2))
    else:
        base = next(g for g in groups if g.label == reference)
        chosen = [(g, base) for g in groups if g is not base]
    level = 1 - 0.95 ** (1 / len(chosen))
    pairs = []
    for a, b in chosen:
        va, vb = (a.sd or 0.0) ** 2 / a.n, (b.sd or 0.0) ** 2 / b.n
        se = math.sqrt(va + vb)
        df = (va + vb) ** 2 / (va**2 / (a.n - 1) + vb**2 / (b.n - 1))
        critical = float(special.stdtrit(df, 1 - level / 2))
        difference = a.mean - b.mean
        t = difference / se
        p = min(1.0, 1 - (1 - 2 * float(special.stdtr(df, -abs(t)))) ** len(chosen))
        low, high = difference - critical * se, difference + critical * se
        if log:
            se = se / b.mean
            difference, low, high = a.mean / b.mean, (b.mean + low) / b.mean, (b.mean + high) / b.mean
        answer = answer_of(low, high, margin, 1.0 if log else 0.0)
        pairs.append(
            PairResult(
                first=a.label,
                second=b.label,
                difference=difference,
                se=se,
                statistic=t,
                df=df,
                critical_value=critical,
                p=p,
                lower=low,
                upper=high,
                detectable=None,
                needed_n=None,
                answer=answer,
            )
        )
    return tuple(pairs)


ORDER = ("matters", "different", "not_settled", "within_margin", "equivalent", "not_shown", "not_compared")


def characteristic(
    data: Mapping[str, Sequence[float]] = LAP_SHEAR,
    *,
    name: str = "lap_shear",
    title: str = "Lap-shear strength",
    unit: str = "MPa",
    decimals: int = 2,
    column: int = 3,
    margin: Margin = (-1.5, 1.5),
    procedure: str = "tukey_hsd",
    reference: str | None = None,
    log: bool = False,
    flagged: bool = False,
) -> CharacteristicResult:
    groups = group_results(data, decimals, column)
    overall = anova(groups)
    assert overall.ms_within is not None
    if procedure == "tukey_hsd":
        pairs = tukey_pairs(groups, overall.ms_within, overall.df[1], margin)
    else:
        pairs = welch_pairs(groups, margin, reference, log=log)
    critical = pairs[0].critical_value if procedure == "tukey_hsd" else None
    hsd = None if critical is None else critical * math.sqrt(2 * overall.ms_within / groups[0].n)
    return CharacteristicResult(
        name=name,
        title=title,
        unit=unit,
        alpha=0.05,
        margin=margin,
        scale="log" if log else "as measured",
        direction="both",
        lower_limit=18.0 if name == "lap_shear" else None,
        upper_limit=None,
        independent_unit="reading",
        reference=reference,
        groups=groups,
        not_compared=(),
        checks=CHECKS,
        facts=facts(groups, reference),
        rule=RULE,
        trace=TRACE,
        overall=overall,
        analysis_of_variance=overall,
        procedure=procedure,
        critical_value=critical,
        hsd=hsd,
        all_within_margin=None if margin == (None, None) else all(p.answer == "equivalent" for p in pairs),
        pairs=pairs,
        sensitivity=Sensitivity(procedure="dunnett_t3", changed=()),
        letters=letters_of(groups, pairs) if reference is None else (),
        flagged=flag(groups[-1]) if flagged else (),
        answer=min((p.answer for p in pairs), key=ORDER.index),
    )


def letters_of(groups: Sequence[GroupResult], pairs: Sequence[PairResult]) -> tuple[str, ...]:
    order = [g.label for g in groups]
    shown = ("matters", "different", "within_margin")
    return compact_letters(
        len(order), [(order.index(p.first), order.index(p.second)) for p in pairs if p.answer in shown]
    )


def flag(group: GroupResult) -> tuple[Flagged, ...]:
    unit = max(group.units, key=lambda u: abs(u.value - group.mean))
    return (
        Flagged(
            group=group.label,
            cell=unit.cells[0],
            value=unit.value,
            test="grubbs",
            statistic=1.8,
            p=0.011,
            changes_answer=False,
        ),
    )


CHECKS = (
    Check(name="brown_forsythe", statistic=1.21, df=(3.0, 28.0), p=0.324, threshold=0.05, met=None),
    Check(name="spread_ratio_limit", statistic=3.98, df=(), p=None, threshold=1.5, met=False),
    Check(
        name="spread_conflict",
        statistic=0.41,
        df=(7.0, 21.0),
        p=0.89,
        threshold=0.0125,
        met=True,
        note="LA-2403 scatters most",
    ),
)
RULE = RuleApplied(
    table="default",
    id="every-pair-similar-equal",
    reason="Spread is declared similar and the data do not contradict it; sizes are equal.",
    source="Tukey (1953), The problem of multiple comparisons",
)
TRACE = (
    TraceStep(id="nothing-to-compare", applied=False, why="four comparable groups"),
    TraceStep(id="ranks", applied=False, why="no value is known only by a limit"),
    TraceStep(id="reference-similar", applied=False, why="every pair is compared"),
    TraceStep(id="every-pair-similar-equal", applied=True, why="applied"),
)


def facts(groups: Sequence[GroupResult], reference: str | None) -> tuple[FactEvidence, ...]:
    sizes = sorted({g.n for g in groups})
    return (
        FactEvidence(
            fact="comparison",
            value="each with the reference" if reference else "every pair",
            observed="as the plan asks",
            source="plan",
        ),
        FactEvidence(
            fact="sizes",
            value="equal" if len(sizes) == 1 else "unequal",
            observed=f"smallest n {sizes[0]}, largest {sizes[-1]}",
            source="export",
        ),
        FactEvidence(
            fact="spread",
            value="similar",
            observed="declared, and no group’s variance exceeds the pooled rest",
            source="plan; F test at 0.05/k",
        ),
        FactEvidence(fact="censored", value="none", observed="every value is a number", source="export"),
    )


def measurements(results: Sequence[CharacteristicResult], notices: Sequence[Notice] = ()) -> MeasurementSet:
    found = []
    for column, result in enumerate(results, start=3):
        row = 5
        for group in result.groups:
            for unit in group.units:
                found.append(
                    Measurement(
                        characteristic=result.name,
                        batch=group.label,
                        line=group.label[1:2] or None,
                        sample=None,
                        reading=None,
                        value=unit.value,
                        text=unit.text,
                        decimals=unit.decimals,
                        unit=result.unit,
                        censored=None,
                        status=None,
                        time=f"2026-11-30T{6 + row % 12:02d}:15:00",
                        cell=CellRef(sheet="Results", row=row, column=column),
                        marks=unit.marks,
                    )
                )
                row += 1
    return MeasurementSet(
        export_name="lap-shear-2403.xlsx",
        export_sha256=DIGEST,
        layout_name="shear-rig",
        measurements=tuple(found),
        notices=tuple(notices),
    )


def result_of(
    *characteristics: CharacteristicResult,
    notices: Sequence[Notice] = (),
    export: str = "lap-shear-2403.xlsx",
) -> Result:
    return Result(
        export_name=export,
        export_sha256=DIGEST,
        plan_name="lap-shear-batches",
        plan_sha256=DIGEST[::-1],
        run_k=1,
        run_n=1,
        notices=tuple(notices),
        characteristics=characteristics,
        versions=(("qcreport", "0.1.0"), ("numpy", "2.4.6"), ("scipy", "1.17.1")),
    )


def plan_of(
    *results: CharacteristicResult, approved: Approval | None = None, spread: bool = True
) -> ComparisonPlan:
    return ComparisonPlan(
        name="lap-shear-batches",
        title="Lap-shear strength, batch by batch",
        exports=("lap-shear*.xlsx",),
        layout="shear-rig",
        rules="default",
        product="Structural adhesive K-40, aluminium coupons",
        method="single-lap shear, 10 mm/min, 23 °C",
        approved=approved or Approval(by="Ines Moreau", on=dt.date(2026, 11, 2)),
        groups=Groups.BATCH,
        reference=results[0].reference,
        independent_unit=Unit.READING,
        alpha=0.05,
        family=Family.CHARACTERISTIC,
        scale=Scale.AS_MEASURED,
        procedure=BY_RULES,
        smallest_group=3,
        spread=SpreadDeclaration(
            similar=True,
            by="Ines Moreau",
            on=dt.date(2026, 11, 2),
            reason="same rig, same operator, 60 batches of history",
            accept_unequal_sizes=False,
        )
        if spread
        else None,
        characteristics=tuple(
            CharacteristicPlan(
                name=r.name,
                title=r.title,
                unit=r.unit,
                margin_below=r.margin[0],
                margin_above=r.margin[1],
                margin_text="" if r.margin[1] is None else f"{r.margin[1]}",
                target=None,
                direction=Direction.BOTH,
                lower_limit=r.lower_limit,
                upper_limit=None,
            )
            for r in results
        ),
    )


def context(**changes: object) -> Context:
    base = Context(
        report_number="2026-0042",
        revision=1,
        made_at="2026-12-01T06:12:00Z",
        time_zone="Europe/Berlin",
        language="en",
        page_size="A4",
        laboratory=Laboratory(
            name="Halden Adhesives, quality laboratory",
            address="Hafenweg 12\n24103 Kiel",
            place_of_work="Hafenweg 12\n24103 Kiel",
            customer="Production, mixing lines A to D",
        ),
        export_name="lap-shear-2403.xlsx",
        export_sha256=DIGEST,
        received_at="2026-12-01T06:11:40Z",
        plan_name="lap-shear-batches",
        plan_sha256=DIGEST[::-1],
        layout_sha256=DIGEST[8:] + DIGEST[:8],
        rules_sha256=DIGEST[16:] + DIGEST[:16],
        templates=(("lab/style.css", DIGEST), ("report.html", DIGEST[::-1])),
        templates_changed=(),
        run_k=1,
        run_n=1,
        run_reason="",
        ledger_sequence=117,
        ledger_hash=DIGEST[24:] + DIGEST[:24],
        seal_subject="Halden Adhesives report seal",
        seal_fingerprint_sha256=DIGEST[4:] + DIGEST[:4],
        pades_level="B-B",
        demonstration=False,
        software_version="0.1.0",
    )
    return dataclasses.replace(base, **changes)  # type: ignore[arg-type]


ATTACHMENTS = tuple(
    Attachment(name=name, data=data, relationship=relationship, description=text, mime=mime)
    for name, data, relationship, text, mime in (
        (
            "result.json",
            b'{"schema": "qcreport/result/1"}\n',
            "Data",
            "every number at full precision",
            "application/json",
        ),
        ("export.csv", b"batch,MPa\nLA-2403,24.84\n", "Source", "the export as received", "text/csv"),
        ("plan.toml", b'name = "lap-shear-batches"\n', "Supplement", "what was compared", "application/toml"),
        (
            "context.json",
            b'{"schema": "qcreport/context/1"}\n',
            "Data",
            "what came from outside",
            "application/json",
        ),
    )
)


def left_out_group(result: CharacteristicResult) -> CharacteristicResult:
    """Nothing compared: one group is left and the other has too few values."""
    return dataclasses.replace(
        result,
        groups=result.groups[:1],
        pairs=(),
        procedure="none",
        critical_value=None,
        hsd=None,
        overall=None,
        analysis_of_variance=None,
        sensitivity=None,
        all_within_margin=None,
        answer="not_compared",
        rule=RuleApplied(
            table="default", id="nothing-to-compare", reason="fewer than two comparable groups", source=""
        ),
        not_compared=(NotCompared(label="LB-2403", n=2, reason="2 results, the plan asks for at least 3"),),
    )


def with_changed_answers(result: CharacteristicResult) -> CharacteristicResult:
    pair = result.pairs[0]
    changed = ChangedAnswer(first=pair.first, second=pair.second, answer="not_settled")
    return dataclasses.replace(result, sensitivity=Sensitivity(procedure="games_howell", changed=(changed,)))
