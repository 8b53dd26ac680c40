"""What the records know of an export: into the context and back, into the result, and as notices."""

from __future__ import annotations

import json
from dataclasses import replace

import pytest
from analysis_cases import CONTEXT, export, measurement, plan, rules

from qcreport.analysis import analyse, context_from_json
from qcreport.analysis.left_out import LEFT_OUT_MARK, marked_left_out
from qcreport.analysis.provenance import (
    Approval,
    Change,
    LeftOut,
    OtherRun,
    Provenance,
    Replaces,
    Retest,
    ValueChange,
)
from qcreport.analysis.result import CharacteristicResult, Result
from qcreport.measurements import MeasurementSet

CHANGE = Change(what="plan", key="comparison.alpha", before="0.05", after=None)
FULL = Provenance(
    others=(
        OtherRun(
            number="2026-0001",
            k=1,
            made_at="2026-11-02T06:12:00Z",
            reason="",
            state="sealed",
            answers=(("strength", "matters"),),
            changes=(CHANGE,),
        ),
    ),
    without_report=2,
    left_out=LeftOut(cells=("Results!B7",), reason="Grip slipped.", by="ada"),
    replaces=Replaces(number="2026-0001", reason="Mended", changes=()),
    new=3,
    known=4,
    not_joined=1,
    changed=(ValueChange(cell="Results!B2", before="1 u", after="2 u", source="2026-0001", when="now"),),
    retests=(Retest(cell="Results!B2", sample="s", batch="A", why="one more result", source="2026-0001"),),
    approvals=(Approval(by="Ada", fingerprint_sha256="ab" * 32, at="2026-11-01T00:00:00Z", sequence=7),),
)
GROUPS = {"A": (12.6, 12.9, 12.7, 12.8, 5.0), "B": (10.1, 10.9, 10.4, 10.6), "C": (10.3, 10.8, 10.5, 10.1)}


def measured() -> MeasurementSet:
    """Return three groups; A's last value, in B6, stands out."""
    pairs = [(label, value) for label, values in GROUPS.items() for value in values]
    return export(
        measurement(v, batch=b, row=row, sample=f"s{row}") for row, (b, v) in enumerate(pairs, start=2)
    )


def analysed(records: Provenance | None, measurements: MeasurementSet | None = None) -> Result:
    asked = plan(characteristic="margin = 1.0")
    return analyse(measurements or measured(), asked, rules(), replace(CONTEXT, provenance=records))


def left_out(*cells: str) -> Provenance:
    return Provenance(left_out=LeftOut(cells=cells, reason="Grip slipped", by="ada"))


def only(result: Result) -> CharacteristicResult:
    (found,) = result.characteristics
    return found


def texts(records: Provenance) -> dict[str, str]:
    return {n.code: n.text for n in analysed(records).notices}


def test_the_context_brings_back_what_it_was_given() -> None:
    context = replace(CONTEXT, provenance=FULL)
    document = json.loads(json.dumps(context.to_json()))
    assert context_from_json(document) == context
    document["records"]["a later key"] = 1
    assert context_from_json(document) == context


def test_a_context_of_before_has_none() -> None:
    assert context_from_json(json.loads(json.dumps(CONTEXT.to_json()))).provenance is None
    assert not {n.code for n in analysed(None).notices} & {"not_approved", "run_of_several"}


@pytest.mark.parametrize("key", FULL.to_json())
def test_a_part_that_is_missing_is_told(key: str) -> None:
    document = replace(CONTEXT, provenance=FULL).to_json()
    del document["records"][key]
    with pytest.raises(ValueError, match=key):
        context_from_json(document)


def test_the_result_carries_what_the_records_say() -> None:
    document = analysed(replace(FULL, left_out=None)).to_json()
    assert document["runs"]["others"][0]["changes"] == [
        {"what": "plan", "key": "comparison.alpha", "before": "0.05", "after": None}
    ]
    assert document["replaces"]["number"] == "2026-0001"
    assert (document["values"]["new"], document["values"]["known"]) == (3, 4)
    assert document["left_out"] is None


def test_every_word_of_the_records_is_a_notice() -> None:
    found = texts(replace(FULL, left_out=None))
    assert "comparison.alpha: 0.05 → not there" in found["run_of_several"]
    assert "2 times without a report" in found["computed_without_report"]
    assert "replaces 2026-0001. Reason: Mended. Changed against it: nothing." in found["replaces"]
    assert "Results!B2 reads 2 u; it was 1 u in 2026-0001" in found["value_changed"]
    assert found["retest"].startswith("Retest? Sample measured before: A s (Results!B2), one more result")
    assert "without sample ids" in found["exports_not_joined"]
    assert "approved by Ada on 2026-11-01 (key abababab abababab, ledger entry 7)" in found["approved"]
    assert "not_approved" not in found


def test_no_approval_is_told_too() -> None:
    assert texts(Provenance())["not_approved"].startswith("Not approved")


def test_an_approval_after_the_data_says_so() -> None:
    timed = [replace(m, time="2026-10-31T08:00:00") for m in measured().measurements]
    notices = {n.code: n.text for n in analysed(FULL, export(timed)).notices if n.code == "approved"}
    assert "after the first measurement, of 2026-10-31" in notices["approved"]


@pytest.mark.parametrize(
    ("when", "code"),
    [("now", "value_changed"), ("earlier", "value_changed_earlier"), ("later", "value_superseded")],
)
def test_when_a_value_changed_has_its_own_notice(when: str, code: str) -> None:
    (change,) = FULL.changed
    assert code in texts(Provenance(changed=(replace(change, when=when),)))


def test_an_export_that_brings_nothing_new_says_so() -> None:
    assert "values_all_known" in texts(Provenance(known=5))
    assert "values_all_known" not in texts(Provenance(known=5, new=1))


def test_many_changes_are_counted_in_the_sentence_and_kept_whole() -> None:
    many = tuple(replace(CHANGE, key=f"k{i}") for i in range(20))
    records = Provenance(others=(replace(FULL.others[0], changes=many),))
    assert "and 12 more" in texts(records)["run_of_several"]
    assert len(analysed(records).to_json()["runs"]["others"][0]["changes"]) == 20


class TestLeavingOut:
    def test_the_answer_is_that_of_an_export_without_the_value(self) -> None:
        without = export(m for m in measured().measurements if str(m.cell) != "Results!B6")
        found, plain = only(analysed(left_out("Results!B6"))), only(analysed(None, without))
        assert found.pairs == plain.pairs
        assert found.answer == plain.answer
        assert [g.n for g in found.groups] == [g.n for g in plain.groups] == [4, 4, 4]

    def test_the_other_answer_is_that_of_the_whole_export(self) -> None:
        beside, whole = only(analysed(left_out("Results!B6"))).left_out, only(analysed(None))
        assert beside is not None
        assert (beside.procedure, beside.answer) == (whole.procedure, whole.answer)
        assert [(p.difference, p.lower, p.upper, p.p) for p in beside.pairs] == [
            (p.difference, p.lower, p.upper, p.p) for p in whole.pairs
        ]
        answers = {(p.first, p.second): p.answer for p in only(analysed(left_out("Results!B6"))).pairs}
        assert beside.changed
        assert all(answers[c.first, c.second] != c.answer for c in beside.changed)

    def test_the_value_stays_for_figure_and_data_and_is_marked(self) -> None:
        group = only(analysed(left_out("Results!B6"))).groups[0]
        (marked,) = [u for u in group.units if LEFT_OUT_MARK in u.marks]
        assert (marked.value, marked.cells) == (5.0, ("Results!B6",))
        assert (group.n, len(group.units), group.cells) == (4, 5, tuple(f"Results!B{r}" for r in range(2, 6)))
        data = marked_left_out(measured(), {"Results!B6"}).measurements
        assert [str(m.cell) for m in data if LEFT_OUT_MARK in m.marks] == ["Results!B6"]
        assert len(data) == len(measured().measurements)

    def test_the_notice_names_who_why_and_both_answers(self) -> None:
        (notice,) = [n for n in analysed(left_out("Results!B6")).notices if n.code == "left_out"]
        assert notice.cells == ("Results!B6",)
        assert "Left out by ada: Results!B6 (5.0 u, A). Reason: Grip slipped." in notice.text
        assert "without" in notice.text
        assert "with the values left out" in notice.text

    def test_a_group_of_which_nothing_is_left_holds_back_every_clearing(self) -> None:
        found = only(analysed(left_out(*(f"Results!B{row}" for row in range(7, 11)))))
        assert [g.label for g in found.groups] == ["A", "C"]
        assert [g.label for g in found.not_compared] == ["B"]
        assert found.left_out is not None
        assert len(found.left_out.pairs) == 3

    def test_one_reading_of_a_sample_is_left_out_of_its_mean(self) -> None:
        pairs = [(b, v) for b, values in GROUPS.items() for v in values for _ in (0, 1)]
        read = export(
            measurement(v, batch=b, row=row, sample=f"s{row // 2}")
            for row, (b, v) in enumerate(pairs, start=2)
        )
        found = only(analysed(left_out("Results!B2"), read))
        assert [(g.n, g.n_readings) for g in found.groups] == [(5, 9), (4, 8), (4, 8)]
