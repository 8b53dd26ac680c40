"""What stands beside the pairs, and what people state: left out, replaced, other runs, by clause."""

from __future__ import annotations

import dataclasses

from qcreport.analysis.context import Statement
from qcreport.analysis.left_out_result import LeftOutResult, LeftOutValue
from qcreport.analysis.provenance import Change, LeftOut, OtherRun, Provenance, Replaces
from qcreport.analysis.result import ChangedAnswer, CharacteristicResult, ContrastResult, EffectSize
from qcreport.rates.at_hand import ErrorRate
from qcreport.report.build import build_model
from qcreport.report.model import ReportModel

from .samples import characteristic, context, measurements, plan_of, result_of
from .test_sections import HEADINGS, model_of, section, text_of


def left_out(result: CharacteristicResult, *changed: ChangedAnswer) -> CharacteristicResult:
    value = LeftOutValue(cell="Results!C7", group="LA-2403", sample="3", value=19.2, text="19.20")
    beside = LeftOutResult(
        values=(value,), procedure="games_howell", answer="different", pairs=result.pairs, changed=changed
    )
    return dataclasses.replace(result, left_out=beside)


def with_records(**records: object) -> Provenance:
    return Provenance(**records)  # type: ignore[arg-type]


def model_with(result: CharacteristicResult, records: Provenance, **changes: object) -> ReportModel:
    found = dataclasses.replace(result_of(result), provenance=records)
    return build_model(
        found, measurements((result,)), plan_of(result), context(provenance=records, **changes)
    )


def test_values_left_out_are_told_with_reason_and_both_answers() -> None:
    records = with_records(left_out=LeftOut(cells=("Results!C7",), reason="spilled.", by="I. Moreau"))
    model = model_with(left_out(characteristic()), records)
    assert (
        "1 left out by a person, see Flagged and left out; with them the answers are the same"
        in (model.first.counts[0])
    )
    said = text_of(section(model, HEADINGS[5]))
    assert "Left out by I. Moreau: LA-2403, 19.20 MPa, Results!C7. Reason: spilled." in said
    assert "With them (Games–Howell) every pair gets the same answer." in said
    changed = ChangedAnswer(first="LA-2403", second="LB-2403", answer="not_settled")
    model = model_with(left_out(characteristic(), changed), records)
    assert "with them an answer changes" in model.first.counts[0]
    assert "LA-2403 | LB-2403 | within the margin | not settled" in text_of(section(model, HEADINGS[5]))


def test_another_run_and_a_replaced_report_stand_on_page_one_with_what_changed() -> None:
    change = Change(what="plan", key="characteristic.margin", before="2.0", after="1.5")
    other = OtherRun(
        number="2026-0041",
        k=1,
        made_at="2026-12-01T05:00:00Z",
        reason="",
        state="sealed",
        answers=(),
        changes=(change,),
    )
    replaces = Replaces(number="2026-0041", reason="wrong margin.", changes=(change,))
    model = model_with(
        characteristic(),
        with_records(others=(other,), replaces=replaces),
        run_k=2,
        run_n=2,
        run_reason="margin",
    )
    basis = dict(model.first.basis)
    assert basis["replaces"] == "2026-0041; reason: wrong margin; changed: plan characteristic.margin"
    assert "run 2 of 2 over this export at the time of printing; run again because: margin" in basis["export"]
    assert basis["export"].endswith("against run 1, 2026-0041, changed: plan characteristic.margin")


def test_what_the_laboratory_states_is_printed_and_what_it_leaves_out_with_its_reason() -> None:
    statements = (
        Statement(name="customer", text="Production, line A", left_out=""),
        Statement(name="sampling", text="", left_out="the plant draws the samples"),
    )
    model = build_model(
        result_of(characteristic()),
        measurements((characteristic(),)),
        plan_of(characteristic()),
        context(statements=statements),
    )
    said = text_of(section(model, "Stated by the laboratory"))
    assert "customer: Production, line A" in said
    assert "sampling: left out: the plant draws the samples" in said
    assert "Stated by the laboratory" not in [s.heading for s in model_of(characteristic()).sections]


def test_the_decision_rule_is_stated_with_its_risks() -> None:
    said = text_of(section(model_of(characteristic()), HEADINGS[1]))
    assert "Risk of a false statement: over all pairs of a characteristic together at most 0.05" in said
    assert "Risk of missing a difference: up to 0.20" in said
    assert "Held against the margin of 1.5 MPa" in said
    said = text_of(section(model_of(characteristic(margin=(None, None))), HEADINGS[1]))
    assert "No margin is set, so no pair is called beyond or within one." in said


def test_design_effects_and_contrasts_stand_beside_the_pairs() -> None:
    base = characteristic()
    pairs = tuple(dataclasses.replace(p, detectable_limits=(1.1, 1.7)) for p in base.pairs)
    effect = EffectSize(name="hedges_g", value=0.41, lower=-0.3, upper=1.2, confidence=0.95)
    contrast = ContrastResult(
        name="A and B against C and D",
        procedure="scheffe",
        weights=(("LA-2403", 0.5), ("LC-2404", -0.5)),
        estimate=0.48,
        se=0.3,
        statistic=1.6,
        df=28.0,
        critical_value=2.9,
        p=0.31,
        lower=-0.39,
        upper=1.35,
    )
    result = dataclasses.replace(
        base,
        pairs=pairs,
        pair_effects=(effect,) * len(pairs),
        contrasts=(contrast,),
        overall_effect=EffectSize(name="omega_squared", value=0.41, lower=0.2, upper=0.6, confidence=0.9),
    )
    said = text_of(section(model_of(result), HEADINGS[0]))
    assert (
        "with probability 0.80, if the scatter is as seen here (1.100 to 1.700 MPa at the 90 % limits" in said
    )
    assert "ω² = 0.41 (0.20 to 0.60, 90 %)" in said
    assert "LA-2403 against LB-2403 0.41 (−0.30 to 1.20)" in said
    assert "A and B against C and D | 0.5 × LA-2403, −0.5 × LC-2404 | 0.480 | −0.390 to 1.350 | 0.31" in said
    known = dataclasses.replace(base, known_scatter=0.8)
    said = text_of(section(model_of(known), HEADINGS[0]))
    assert "at the scatter of 0.800 MPa that the plan gives" in said


def test_the_error_rate_of_the_design_at_hand_is_told_or_why_there_is_none() -> None:
    rate = ErrorRate(replicates=20000, equal=0.0502, small_wide=0.0811, large_wide=0.031)
    said = text_of(section(model_of(dataclasses.replace(characteristic(), error_rate=rate)), HEADINGS[1]))
    assert "where there is none in 5.0 % of cases with equal spread, in 8.1 % where the smaller" in said
    assert "in 3.1 % where the larger ones do (20000 simulated tables each)" in said
    none = ErrorRate(replicates=0, equal=None, small_wide=None, large_wide=None, reason="too many groups.")
    said = text_of(section(model_of(dataclasses.replace(characteristic(), error_rate=none)), HEADINGS[1]))
    assert "No simulated error rate for this design: too many groups." in said
