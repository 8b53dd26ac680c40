"""Withdrawing, replacing, leaving out, settings seen, approvals, runs over the same data."""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path

import pytest

from qcreport.canonical import sha256_hex
from qcreport.errors import UsageError
from qcreport.measurements import CellRef
from qcreport.records.chain import Kind
from qcreport.records.check import check
from qcreport.records.facade import Reading, Records
from qcreport.records.identity import content_digest
from qcreport.records.listing import ReportState, Wanted
from qcreport.records.run import RunInputs

from .example import LAYOUT, Handling, measured, measurement


@dataclass
class Replacing(Handling):
    """An export whose report replaces another."""

    replaces: str = ""
    left_out: tuple[str, ...] = ()

    @property
    def inputs(self) -> RunInputs:
        return replace(super().inputs, replaces=self.replaces, left_out=self.left_out)


@pytest.fixture
def reports(tmp_path: Path) -> Path:
    return tmp_path / "reports"


def states(records: Records) -> dict[str, str]:
    return {row.number: str(row.state) for row in records.reports()}


def test_a_withdrawn_report_stays_and_says_why(records: Records, reports: Path) -> None:
    Handling(records).whole(reports)
    records.withdraw("2026-0001", reason=" Wrong specimens ", actor="ada")
    (row,) = records.reports()
    assert (row.state, row.state_reason) == (ReportState.WITHDRAWN, "Wrong specimens")
    with pytest.raises(UsageError, match="withdrawn already, on 2026-11-02: Wrong specimens"):
        records.withdraw("2026-0001", reason="again", actor="ada")
    assert check(records, reports).problems == ()


@pytest.mark.parametrize(("number", "reason"), [("2026-0001", " "), ("2026-0009", "x")])
def test_what_cannot_be_withdrawn(records: Records, reports: Path, number: str, reason: str) -> None:
    Handling(records).whole(reports)
    before = records.head()
    with pytest.raises(UsageError):
        records.withdraw(number, reason=reason, actor="ada")
    assert records.head() == before


def test_a_number_without_a_report_cannot_be_withdrawn(records: Records) -> None:
    handling = Handling(records)
    handling.receive()
    handling.reserve()
    with pytest.raises(UsageError, match="no report"):
        records.withdraw("2026-0001", reason="x", actor="ada")


def test_a_chain_of_replacements(records: Records, reports: Path) -> None:
    Handling(records).whole(reports)
    for place, name in enumerate(("b", "c"), start=1):
        old = f"2026-000{place}"
        Replacing(records, claim=name, data=name.encode(), replaces=old, reason="Mended").whole(reports)
    assert states(records) == {"2026-0001": "replaced", "2026-0002": "replaced", "2026-0003": "sealed"}
    rows = {row.number: row for row in records.reports()}
    assert (rows["2026-0001"].replaced_by, rows["2026-0002"].replaces) == ("2026-0002", "2026-0001")
    assert [e.facts_object() for e in records.entries(kind=Kind.REPLACED)] == [
        {"number": "2026-0001", "replaced_by": "2026-0002", "reason": "Mended"},
        {"number": "2026-0002", "replaced_by": "2026-0003", "reason": "Mended"},
    ]
    with pytest.raises(UsageError, match="replaced already, by 2026-0002"):
        records.require_replaceable("2026-0001", by_key="another")
    key = rows["2026-0002"].number
    run = records.run_of_number(key)
    assert run is not None
    assert records.require_replaceable("2026-0001", by_key=run.key).number == "2026-0001"
    with pytest.raises(UsageError, match="withdraw that one"):
        records.withdraw("2026-0001", reason="x", actor="ada")
    assert check(records, reports).problems == ()


def test_a_step_that_replaces_is_written_once(records: Records, reports: Path) -> None:
    Handling(records).whole(reports)
    second = Replacing(records, claim="b", data=b"b", replaces="2026-0001", reason="Mended")
    second.whole(reports)
    second.sealed(reports)
    assert len(records.entries(kind=Kind.REPLACED)) == 1


def test_leaving_out_is_one_entry_a_run_key(records: Records) -> None:
    for claim in ("a", "b"):
        records.leave_out(claim, run_key="k", values=(("Results!E2", "24.1"),), reason="slipped", actor="ada")
    (entry,) = records.entries(kind=Kind.LEFT_OUT)
    assert entry.facts_object()["values"] == [{"cell": "Results!E2", "text": "24.1"}]
    assert entry.actor == "ada"


def test_settings_are_seen_once_and_each_change_is_told_by_key(records: Records) -> None:
    files = {"config/site.toml": b"a = 1\n", "config/plans/p.toml": b"b = 2\n"}
    assert [e.facts_object()["what"] for e in records.settings_seen(files, actor="s")] == ["first seen"] * 2
    assert records.settings_seen(files, actor="s") == ()
    files["config/plans/p.toml"] = b"b = 3\n"
    files["config/plans/q.toml"] = b"c = 1\n"
    del files["config/site.toml"]
    changed = {e.facts_object()["file"]: e.facts_object() for e in records.settings_seen(files, actor="s")}
    assert {name: facts["what"] for name, facts in changed.items()} == {
        "config/site.toml": "removed",
        "config/plans/p.toml": "changed",
        "config/plans/q.toml": "new",
    }
    change = {"what": "setting", "key": "b", "old": "2", "new": "3"}
    assert changed["config/plans/p.toml"]["changes"] == [change]
    assert records.archive.read(sha256_hex(b"b = 2\n")) == b"b = 2\n"
    assert records.settings_seen(files, actor="s") == ()


def test_approvals_are_of_exactly_these_settings(records: Records) -> None:
    digests = {"plan_sha256": "a", "layout_sha256": "b", "rules_sha256": "c"}
    facts = {**digests, "statement": "s", "fingerprint_sha256": "f"}
    for _ in range(2):
        records.approve(facts, actor="Ada")
    assert len(records.approvals(digests)) == 1
    assert records.approvals(digests | {"rules_sha256": "d"}) == ()


def with_content(handling: Handling) -> None:
    """Read an export as the pipeline does, with what it holds."""
    handling.receive()
    survey = handling.records.survey(handling.measurements)
    handling.records.read(
        handling.claim,
        export_sha256=sha256_hex(handling.data),
        name=handling.name,
        reading=Reading(
            plan_name=handling.plan_name,
            layout_name="shear-rig",
            layout_sha256=sha256_hex(LAYOUT),
            n_measurements=len(handling.values),
            notices=(),
            survey=survey,
            content=content_digest(handling.measurements),
        ),
        actor="service",
    )


def test_runs_count_over_what_an_export_holds(records: Records, reports: Path) -> None:
    for place, claim in enumerate(("a", "b", "c"), start=1):
        handling = Handling(records, claim=claim, data=claim.encode(), plan=claim.encode())
        with_content(handling)
        assert handling.reserve().k == place
        handling.compared()
        handling.sealed(reports)
    other = Handling(records, claim="d", data=b"d", values=(measurement(2, "1"),))
    with_content(other)
    assert other.reserve().k == 1
    assert [(row.k, row.n) for row in records.reports()] == [(1, 3), (2, 3), (3, 3), (1, 1)]
    found = records.runs_over_data(sha256_hex(b"b"), "shear")
    assert [run.k for run in found] == [1, 2, 3]
    assert records.runs_over_data(sha256_hex(b"b"), "another plan") == ()


@pytest.mark.parametrize(
    ("change", "same"),
    [
        ({"cell": "moved"}, True),
        ({"text": "1.0"}, False),
        ({"time": "2026-11-01T08:00:00"}, False),
        ({"marks": ("struck",)}, False),
        ({"status": "invalid"}, False),
        ({"sample": "other"}, False),
    ],
)
def test_what_makes_two_workbooks_hold_the_same(change: dict[str, object], same: bool) -> None:
    if "cell" in change:
        change = {"cell": CellRef(sheet="Other", row=7, column=7)}
    one = measured(b"x", measurement(2, "1"), measurement(3, "2"))
    other = measured(b"y", measurement(3, "2"), measurement(2, "1", **change))
    assert (content_digest(one) == content_digest(other)) is same


def test_without_samples_or_values_nothing_is_said_to_be_the_same() -> None:
    assert content_digest(measured(b"x", measurement(2, "1", sample=None))) is None
    assert content_digest(measured(b"x")) is None


def test_computations_without_a_report_are_counted_by_settings(records: Records) -> None:
    handling = Handling(records)
    handling.receive()
    others = [replace(handling.inputs, plan_sha256=sha256_hex(plan)) for plan in (b"p", b"q")]
    for claim, inputs in (("a", others[0]), ("b", others[0]), ("c", others[1])):
        records.computed_only(claim, inputs, plan_name="shear", facts={"plan": "shear"}, actor="ada")
    assert records.trials_over_data(handling.inputs, "shear") == 2
    assert records.trials_over_data(others[0], "shear") == 1
    assert records.trials_over_data(handling.inputs, "other") == 0


def test_the_list_is_filtered(records: Records, reports: Path) -> None:
    Handling(records).whole(reports)
    values = (measurement(2, "1", batch="LB", line="L2", characteristic="peel"),)
    Replacing(records, claim="b", data=b"b", values=values, replaces="2026-0001").whole(reports)

    def numbers(**wanted: str) -> list[str]:
        return [row.number for row in records.reports(Wanted(**wanted))]

    assert numbers(batch="LB") == numbers(line="L2") == numbers(characteristic="peel") == ["2026-0002"]
    assert numbers(batch="LB", line="L1") == []
    assert numbers(state="replaced") == ["2026-0001"]
    assert numbers(answer="different") == ["2026-0001", "2026-0002"]
    assert numbers(answer="matters") == []
    assert numbers(since="2026-11-02T06:12:01Z") == []
    assert numbers(until="2026-11-02T06:12:00Z") == []
    assert len(numbers(since="2026-11-02T06:12:00Z", until="2026-11-02T06:12:01Z")) == 2
