"""The evidence: its numbers can be redone, its cautions stand, its data is complete."""

from __future__ import annotations

import dataclasses
import datetime as dt
import math
import re

import pytest
from scipy import stats

from qcreport.analysis.result import NotCompared, Result, RuleApplied, TraceStep
from qcreport.measurements import Censoring, Notice
from qcreport.plan.model import PROCEDURES, RANKS, Approval, Unit
from qcreport.report.attachment import export_attachment_name
from qcreport.report.blocks import Cells, Facts, Formula, Paragraph, Section, Steps, Subheading, Table
from qcreport.report.build import build_model
from qcreport.report.letters import letter_name, letters_of
from qcreport.report.model import ReportModel

from .samples import (
    ATTACHMENTS,
    LAP_SHEAR,
    characteristic,
    context,
    left_out_group,
    measurements,
    plan_of,
    result_of,
    with_changed_answers,
)

HEADINGS = [
    "How far apart",
    "Why this procedure",
    "The arithmetic, to be redone by hand",
    "Sensitivity, not a second finding",
    "Data, cell by cell",
    "Flagged and left out",
    "Where this comes from",
    "How to check without our software",
    "Terms",
]


def model_of(*results, notices=(), **plan):  # type: ignore[no-untyped-def]
    return build_model(
        result_of(*results, notices=notices),
        measurements(results, notices),
        plan_of(*results, **plan),
        context(),
    )


def section(model: ReportModel, heading: str) -> Section:
    return next(s for s in model.sections if s.heading == heading)


def text_of(part: Section) -> str:
    out: list[str] = []
    for block in part.blocks:
        if isinstance(block, Paragraph | Formula | Subheading):
            out.append(block.text)
        elif isinstance(block, Table):
            out += [" | ".join(row) for row in block.rows]
        elif isinstance(block, Facts | Steps):
            out += [f"{a}: {b}" for a, b in block.rows]
        elif isinstance(block, Cells):
            out += [block.label, block.text]
    return "\n".join(out)


def test_sections_come_in_their_order() -> None:
    assert [s.heading for s in model_of(characteristic()).sections] == HEADINGS


def test_the_worked_line_of_tukey_can_be_redone() -> None:
    lines = [
        b.text for b in section(model_of(characteristic()), HEADINGS[2]).blocks if isinstance(b, Formula)
    ]
    q, ms, n, hsd = (
        float(x)
        for x in re.search(
            r"= ([\d.]+) × √\(([\d.]+) ÷ (\d+)\) = ([\d.]+), with q for 4 means and 28 df", lines[0]
        ).groups()  # type: ignore[union-attr]
    )
    assert q == pytest.approx(3.8612, abs=1e-4)
    assert q * math.sqrt(ms / n) == pytest.approx(hsd, rel=1e-4)
    difference, half, low, high = (float(x) for x in re.findall(r"[\d.]+", lines[-1])[:4])
    assert (difference - half, difference + half) == (
        pytest.approx(low, abs=0.0011),
        pytest.approx(high, abs=0.0011),
    )


@pytest.mark.parametrize(
    "procedure", [p for p in PROCEDURES if p not in RANKS and p not in ("none", "nested")]
)
def test_every_procedure_on_means_prints_a_line_that_leads_to_its_interval(procedure: str) -> None:
    base = characteristic(
        procedure="tamhane_t2", reference="LB-2403" if procedure.startswith("dunnett_u") else None
    )
    result = dataclasses.replace(base, procedure=procedure)
    lines = [b.text for b in section(model_of(result), HEADINGS[2]).blocks if isinstance(b, Formula)]
    half_line = next(line for line in lines if line.startswith("half width"))
    se = float(lines[0].rsplit("= ", 1)[1])
    numbers = [float(x) for x in re.findall(r"\d+\.\d+", half_line)]
    factor = numbers[0] / math.sqrt(2) if "÷ √2 ×" in half_line else numbers[0]
    assert numbers[1] == pytest.approx(se, rel=1e-4)
    assert factor * se == pytest.approx(numbers[2], rel=1e-3)


@pytest.mark.parametrize("procedure", ["dunnett_c", "dunnett_weighted"])
def test_weighted_critical_values_show_where_they_come_from(procedure: str) -> None:
    base = characteristic(procedure="tamhane_t2")
    groups = {g.label: g for g in base.groups}
    pairs = []
    for pair in base.pairs:
        a = [(groups[x].sd or 0.0) ** 2 / groups[x].n for x in (pair.first, pair.second)]
        c = float(stats.studentized_range.ppf(0.95, 4, 7)) / math.sqrt(2)
        if procedure == "dunnett_weighted":
            c = float(stats.t.ppf(0.5 + 0.95 ** (1 / 6) / 2, 7))
        weighted = (c * a[0] + c * a[1]) / sum(a)
        pairs.append(dataclasses.replace(pair, critical_value=weighted, df=None))
    result = dataclasses.replace(base, procedure=procedure, pairs=tuple(pairs))
    lines = [b.text for b in section(model_of(result), HEADINGS[2]).blocks if isinstance(b, Formula)]
    line = next(x for x in lines if x.startswith("critical value"))
    c1, a1, c2, a2, below1, below2, value = (float(x) for x in re.findall(r"\d+\.\d+", line))
    assert (a1, a2) == (below1, below2)
    assert (c1 * a1 + c2 * a2) / (a1 + a2) == pytest.approx(value, abs=1e-4)
    floored = dataclasses.replace(pairs[1], critical_value=9.9)
    other = dataclasses.replace(result, pairs=(floored,))
    said = text_of(section(model_of(other), HEADINGS[2]))
    assert "with s² ÷ n as weights" not in said


def test_nested_and_ranks_and_nothing_have_their_own_words() -> None:
    nested = text_of(
        section(model_of(dataclasses.replace(characteristic(), procedure="nested")), HEADINGS[2])
    )
    assert "between the independent units" in nested
    ranks = text_of(
        section(model_of(dataclasses.replace(characteristic(), procedure="steel_dwass")), HEADINGS[2])
    )
    assert "Hodges and Lehmann" in ranks
    nothing = text_of(section(model_of(left_out_group(characteristic())), HEADINGS[2]))
    assert "nothing to redo" in nothing


def test_the_statistic_has_no_more_digits_than_the_data_support() -> None:
    base = characteristic()
    assert base.overall is not None
    overall = dataclasses.replace(base.overall, statistic=2001.3456, supported_digits=2)
    said = text_of(section(model_of(dataclasses.replace(base, overall=overall)), HEADINGS[2]))
    assert "F(3, 28) = 2000, p =" in said


def test_pairs_stand_most_serious_first_with_the_higher_one_first() -> None:
    table = next(b for b in section(model_of(characteristic()), HEADINGS[0]).blocks if isinstance(b, Table))
    assert [c.title for c in table.columns] == [
        "Higher",
        "Lower",
        "Apart by",
        "Range, all pairs at once",
        "p, all pairs",
        "In words",
    ]
    assert table.rows[0][:4] == ("LC-2404", "LD-2404", "1.905", "0.880 to 2.930")
    assert [row[5] for row in table.rows] == ["differs; margin open"] * 3 + ["not settled"] + [
        "within the margin"
    ] * 2


def test_groups_name_from_whom_they_are_shown_to_differ() -> None:
    tables = [b for b in section(model_of(characteristic()), HEADINGS[0]).blocks if isinstance(b, Table)]
    rows = {row[0]: row for row in tables[1].rows}
    assert rows["LD-2404"][1:] == ("8", "22.543", "0.476", "22.00–23.33", "LA-2403, LB-2403, LC-2404")
    assert tables[2].rows[2][:3] == ("altogether", "32.856", "31")


def test_above_eight_groups_letters_stand_for_names() -> None:
    data = {f"LB-{i}": [20 + i, 20.4 + i, 20.9 + i, 21.3 + i] for i in range(9)}
    tables = [
        b
        for b in section(model_of(characteristic(data, procedure="tamhane_t2")), HEADINGS[0]).blocks
        if isinstance(b, Table)
    ]
    assert tables[1].columns[5].title == "same letter: no difference shown"
    assert tables[1].rows[8][5]
    assert not set(tables[1].rows[8][5].split()) & set(tables[1].rows[0][5].split())


def test_letters_are_shared_exactly_where_nothing_is_shown() -> None:
    result = characteristic()
    groups, letters = result.groups, letters_of(result)
    shown = ("matters", "different", "within_margin")
    apart = {frozenset((p.first, p.second)) for p in result.pairs if p.answer in shown}
    for a in groups:
        for b in groups:
            if a is not b:
                share = set(letters[a.label].split()) & set(letters[b.label].split())
                assert bool(share) is (frozenset((a.label, b.label)) not in apart)
    assert [letter_name(i) for i in (0, 25, 26, 27)] == ["a", "z", "aa", "ab"]


def test_why_names_rule_facts_checks_rows_tried_declaration_and_approval() -> None:
    said = text_of(section(model_of(characteristic()), HEADINGS[1]))
    for part in (
        "Tukey’s HSD, chosen by row “every pair similar equal” of the rules table “default”",
        "Rests on: Tukey (1953)",
        "sizes | equal | smallest n 8, largest 8 | export",
        "Median-centred Levene (Brown and Forsythe) | 1.210 | 3, 28 | 0.32 | 0.05 | description only",
        "nothing to compare | four comparable groups",
        "Spread was declared similar by Ines Moreau on 2026-11-02: same rig",
        "Plan approved by Ines Moreau on 2026-11-02.",
        "near-normal data",
    ):
        assert part in said
    assert "Set after the data" not in said


def test_a_plan_younger_than_the_data_says_so_on_page_one_too() -> None:
    late = Approval(by="Ines Moreau", on=dt.date(2026, 12, 1))
    model = model_of(characteristic(), approved=late)
    said = (
        "Set after the data: the plan was approved on 2026-12-01, the earliest measurement is of 2026-11-30."
    )
    assert said in text_of(section(model, HEADINGS[1]))
    assert said in dict(model.first.basis)["plan"]


def test_without_approval_it_says_not_approved() -> None:
    result = characteristic()
    plan = dataclasses.replace(plan_of(result), approved=None)
    model = build_model(result_of(result), measurements([result]), plan, context())
    assert "not approved" in dict(model.first.basis)["plan"]


def test_the_textbook_table_prints_its_own_error_rates() -> None:
    rule = RuleApplied(table="textbook", id="equal", reason="variances pass", source="")
    said = text_of(section(model_of(dataclasses.replace(characteristic(), rule=rule)), HEADINGS[1]))
    assert "up to 15 %, where small groups scatter most" in said
    assert "up to 15 %" not in text_of(section(model_of(characteristic()), HEADINGS[1]))


def test_a_procedure_fixed_in_the_plan_says_so() -> None:
    rule = RuleApplied(table="plan", id="fixed_by_plan", reason="The plan fixes it", source="")
    said = text_of(section(model_of(dataclasses.replace(characteristic(), rule=rule)), HEADINGS[1]))
    assert said.startswith("Tukey’s HSD, fixed in the plan")


def test_sensitivity_shows_one_alternative_and_page_one_warns() -> None:
    model = model_of(with_changed_answers(characteristic()))
    said = text_of(section(model, HEADINGS[3]))
    assert "would be Games–Howell" in said
    assert "LA-2403 | LB-2403 | within the margin | not settled" in said
    assert "depends on how spread is judged" in model.first.counts[0]
    assert "Every pair would get the same answer" in text_of(section(model_of(characteristic()), HEADINGS[3]))
    none = dataclasses.replace(characteristic(), sensitivity=None)
    assert "no other policy" in text_of(section(model_of(none), HEADINGS[3]))


def test_every_value_stands_with_its_cell() -> None:
    said = text_of(section(model_of(characteristic(flagged=True)), HEADINGS[4])).replace("\u00a0", " ")
    assert "LA-2403, 8 cells, sheet Results" in said
    assert "C5 24.84" in said
    assert "C31 23.33 [a]" in said
    found = re.findall(r"\bC(\d+) (\d+\.\d\d)", said)
    wanted = [f"{v:.2f}" for group in LAP_SHEAR.values() for v in group]
    assert [value for _, value in found] == wanted
    assert [int(row) for row, _ in found] == list(range(5, 37))


def test_stored_text_states_and_limits_are_printed_beside_the_value() -> None:
    result = characteristic()
    read = measurements([result])
    first = read.measurements
    changed = (
        dataclasses.replace(first[0], text="24,84", marks=("struck", "hidden")),
        dataclasses.replace(first[1], text="<0.05", value=0.05, censored=Censoring.BELOW),
        dataclasses.replace(first[2], text="n/a", value=None),
        dataclasses.replace(first[3], text="nd", value=None, censored=Censoring.NOT_DETECTED),
        dataclasses.replace(first[4], text=">=9", value=9.0, censored=Censoring.AT_LEAST, sample="S 1"),
        *first[5:],
    )
    plan = dataclasses.replace(plan_of(result), independent_unit=Unit.SAMPLE)
    model = build_model(result_of(result), dataclasses.replace(read, measurements=changed), plan, context())
    said = text_of(section(model, HEADINGS[4])).replace("\u00a0", " ")
    for part in (
        "C5 24.84 (“24,84”) struck out hidden",
        "C6 <0.05",
        "C7 missing (“n/a”)",
        "C8 not detected (“nd”)",
        "sample S 1: C9 ≥9.00 (“>=9”)",
    ):
        assert part in said


def test_flagged_values_groups_not_compared_and_notices_are_listed_with_cells() -> None:
    notice = Notice(
        code="hidden_rows_included", cells=("Results!C7", "Results!C8"), text="Two rows are hidden."
    )
    base = characteristic(flagged=True)
    result = dataclasses.replace(
        base, not_compared=(NotCompared(label="LX-1", n=2, reason="only 2 results"),)
    )
    model = model_of(result, notices=(notice,))
    said = text_of(section(model, HEADINGS[5]))
    assert "a: LD-2404, 23.33 MPa, Results!C31. Grubbs’ test by group, p at most 0.011. Kept" in said
    assert "LX-1 (n = 2) is described, not compared: only 2 results." in said
    assert "Two rows are hidden. Cells: Results!C7, Results!C8." in said
    assert "LX-1 is not compared: only 2 results." in model.first.answers[0].rest
    assert (
        "1 flagged (a: LD-2404, 23.33 MPa), kept; the answers are the same without it"
        in model.first.counts[0]
    )


def test_digests_stand_in_groups_of_eight() -> None:
    said = text_of(section(model_of(characteristic()), HEADINGS[6]))
    assert "export (SHA-256): 9f86d081 884c7d65 9a2feaa0 c55ad015 a3bf4f1b 2b0b822c d15d6c15 b0f00a08" in said
    assert "newest entry of the records (117)" in said
    assert "run 1 of 1 over this export at the time of printing" in said
    assert "PAdES B-B" in said


def test_checking_names_every_attachment_and_plain_tools() -> None:
    said = text_of(section(model_of(characteristic()), HEADINGS[7]))
    for part in (
        "pdfsig 2026-0042.pdf",
        "openssl cms -verify",
        "export.xlsx",
        "plan.toml",
        "layout.toml",
        "rules.toml",
        "context.json",
        "result.json",
        "pdfdetach",
    ):
        assert part in said


@pytest.mark.parametrize(
    ("name", "attached"),
    [("a.XLSX", "export.xlsx"), ("b.csv", "export.csv"), ("c.exe", "export.bin"), ("d", "export.bin")],
)
def test_the_export_travels_under_a_fixed_name(name: str, attached: str) -> None:
    assert export_attachment_name(name) == attached


def test_every_caution_is_printed() -> None:
    model = model_of(characteristic())
    said = " ".join((*model.closing, *model.first.cautions))
    for part in (
        "supports and never replaces the release decision of the responsible person",
        "relates only to the items tested",
        "different days, on different rigs or by different analysts",
        "not the measurement uncertainty",
        "one batch says nothing of its line",
        "our or fewer results a batch",
        "Independence of the results is assumed",
        "depends on how spread is judged",
        "near-normal data",
        "conformity is not judged",
    ):
        assert part.lower() in said.lower()


def test_no_word_that_judges_data_or_batches() -> None:
    model = model_of(
        characteristic(flagged=True), with_changed_answers(characteristic(name="peel", column=4))
    )
    said = repr(model).lower()
    for word in (
        "accept",
        "reject",
        "pass/fail",
        "significan",
        "p-value",
        "✓",
        "✗",
        "***",
        " worse",
        " better",
    ):
        assert word not in said


def test_characters_without_a_glyph_are_printed_by_number_everywhere() -> None:
    data = {("LA 😀" if k == "LA-2403" else k): v for k, v in LAP_SHEAR.items()}
    model = model_of(characteristic(data))
    assert model.unprintable == ("U+1F600",)
    assert "LA [U+1F600]" in text_of(section(model, HEADINGS[0]))
    assert "printed by their number in Unicode: U+1F600" in text_of(section(model, HEADINGS[5]))
    assert "😀" not in repr(model)


def test_marks_that_turn_text_round_are_made_visible() -> None:
    data = {("LA\u202e3042" if k == "LA-2403" else k): v for k, v in LAP_SHEAR.items()}
    assert "LA[U+202E]3042" in repr(model_of(characteristic(data)))


def test_readings_that_were_averaged_are_told() -> None:
    base = characteristic()
    groups = tuple(dataclasses.replace(g, n_readings=24) for g in base.groups)
    result = dataclasses.replace(base, groups=groups, independent_unit="sample")
    assert model_of(result).first.counts[0].startswith("96 readings averaged to 32 sample values")


def test_many_characteristics_show_the_most_serious_and_count_the_rest() -> None:
    calm = [
        characteristic(name=f"c{i}", title=f"Character {i}", column=4 + i, margin=(-9.0, 9.0))
        for i in range(7)
    ]
    model = model_of(*calm, characteristic(title="Peel", name="peel", column=20))
    assert len(model.first.answers) == 6
    assert model.first.answers[0].title == "Peel"
    assert model.first.answers_more == "2 more characteristics, page"
    assert model.first.figure_title == "Peel"


def test_a_rerun_gives_its_reason() -> None:
    result = characteristic()
    made = context(run_k=2, run_n=2, run_reason="margin corrected", ledger_sequence=0, ledger_hash="")
    model = build_model(result_of(result), measurements([result]), plan_of(result), made)
    assert (
        "run 2 of 2 over this export at the time of printing; run again because: margin corrected"
        in dict(model.first.basis)["export"]
    )
    assert "no entry yet" in text_of(section(model, HEADINGS[6]))


def test_fixture_attachments_have_different_names() -> None:
    assert len({a.name for a in ATTACHMENTS}) == len(ATTACHMENTS)
    assert isinstance(result_of(characteristic()), Result)


def test_rows_tried_are_said_in_words_once_a_reason_and_without_the_row_that_decided() -> None:
    steps = (
        TraceStep(id="too_few_groups", applied=False, why="needs groups < 2; here it is 4"),
        TraceStep(id="censored_with_reference", applied=False, why="needs censored is some; here it is none"),
        TraceStep(id="censored_every_pair", applied=False, why="needs censored is some; here it is none"),
        TraceStep(id="similar_equal_sizes", applied=True, why="spread is similar"),
    )
    part = section(model_of(dataclasses.replace(characteristic(), trace=steps)), HEADINGS[1])
    table = [b for b in part.blocks if isinstance(b, Table)][-1]
    assert table.rows == (
        ("too few groups", "needs groups < 2; here it is 4"),
        ("censored with reference, censored every pair", "needs censored is some; here it is none"),
    )
    assert "_" not in text_of(part)
