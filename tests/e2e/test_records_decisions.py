"""Reruns, values left out, reports replaced and withdrawn, approvals: decisions are in the open."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
from openpyxl import load_workbook
from rig import BATCHES, NAME, Site, conforms, done, export, replaced

pytestmark = pytest.mark.slow


def notices(result: Any) -> dict[str, str]:
    return {notice["code"]: notice["text"] for notice in result["notices"]}


def ledger(site: Site, kind: str) -> list[Any]:
    """Return the facts of the entries of one kind, from the folder that auditors get."""
    folder = site.root.parent / f"exported-{kind.replace(' ', '-')}"
    site.done("records", "export", folder, "--from", "2000-01-01", "--to", "2999-12-31")
    lines = (folder / "ledger.jsonl").read_text("utf-8").splitlines()
    return [entry["facts"] for entry in map(json.loads, lines) if entry["kind"] == kind]


def test_a_rerun_names_the_other_run_and_what_changed(reported: Site, an_export: Path) -> None:
    first = reported.reports[0].name.split()[0]
    replaced(reported.plan, "margin = 1.5", "margin = 1.0")
    unexplained = reported.run("compare", an_export)
    assert unexplained.code == 2
    assert "--reason" in unexplained.err
    result = reported.done("compare", an_export, "--reason", "Margin agreed with QA", "--json").json
    conforms(result, "result")
    (other,) = result["runs"]["others"]
    assert (result["run"]["k"], result["run"]["n"], other["number"]) == (2, 2, first)
    change = {"what": "plan", "key": "characteristic[lap_shear].margin", "before": "1.5", "after": "1.0"}
    assert other["changes"] == [change]
    assert "margin: 1.5 → 1.0" in notices(result)["run_of_several"]
    (compared,) = [f for f in ledger(reported, "compared") if f["k"] == 2]
    assert compared["others"][0]["changes"][0]["old"] == "1.5"
    changed = [f for f in ledger(reported, "settings changed") if f["what"] == "changed"]
    assert [f["file"] for f in changed] == ["config/plans/lap-shear.toml"]
    assert changed[0]["changes"][0] | {"what": ""} == {
        "what": "", "key": "characteristic[lap_shear].margin", "old": "1.5", "new": "1.0"
    }  # fmt: skip
    assert reported.run("verify", reported.reports[1], "--json").json["valid"]


def test_another_layout_is_told_value_by_value(reported: Site, reported_once: Path) -> None:
    replaced(reported.layout, "first_row = 2", "first_row = 3")
    result = reported.done(
        "compare", reported_once / "export" / NAME, "--reason", "First row is a header", "--json"
    ).json
    changes = result["runs"]["others"][0]["changes"]
    assert [(c["what"], c["key"], c["before"], c["after"]) for c in changes] == [
        ("layout", "table[1].first_row", "2", "3"),
        ("value", "Results!E2 (lap_shear)", "24.1 MPa", None),
    ]


def test_a_value_left_out_gives_both_answers_and_stays_on_the_page(reported: Site, an_export: Path) -> None:
    asked = ("compare", an_export, "--leave-out", "results!$e$7")
    result = reported.done(*asked, "--reason", "Grip slipped", "--json").json
    conforms(result, "result")
    assert result["left_out"]["cells"] == ["Results!E7"]
    assert result["left_out"]["reason"] == "Grip slipped"
    (found,) = result["characteristics"]
    assert [(g["label"], g["n"]) for g in found["groups"]] == [("LA-2411", 5), ("LB-2411", 4), ("LC-2411", 5)]
    before = json.loads((_extracted(reported, 0) / "result.json").read_text("utf-8"))["characteristics"][0]
    assert found["left_out"]["values"][0]["text"] == "24.3"
    assert found["left_out"]["with_them"]["answer"] == before["answer"]
    assert found["left_out"]["with_them"]["procedure"] == before["procedure"]
    with_it = [(p["difference"], p["lower"], p["upper"]) for p in found["left_out"]["with_them"]["pairs"]]
    assert with_it == [(p["difference"], p["lower"], p["upper"]) for p in before["pairs"]]
    assert found["pairs"] != before["pairs"]
    assert "Grip slipped" in notices(result)["left_out"]
    change = {"what": "left out", "key": "Results!E7", "before": "kept", "after": "left out"}
    assert result["runs"]["others"][0]["changes"] == [change]
    (entry,) = ledger(reported, "left out")
    assert (entry["values"], entry["reason"]) == ([{"cell": "Results!E7", "text": "24.3"}], "Grip slipped")
    assert reported.run("verify", reported.reports[1], "--json").json["valid"]
    again = reported.done("compare", an_export, "--leave-out", "E7", "--reason", "Grip slipped")
    assert "Already answered" in again.out
    assert reported.holds()["ok"]


def _extracted(site: Site, place: int) -> Path:
    folder = site.root.parent / f"extracted-{place}"
    done("extract", site.reports[place], folder)
    return folder


@pytest.mark.parametrize(
    ("words", "told"),
    [
        (("--leave-out", "Results!Z9", "--reason", "x"), "Results!Z9 holds no value"),
        (("--leave-out", "Results!A2", "--reason", "x"), "Results!A2 holds no value"),
        (("--leave-out", "Results!E2"), "--leave-out needs a reason"),
        (("--leave-out", "Results!E2", "--reason", "  "), "--leave-out needs a reason"),
        (("--replaces", "1999-0001", "--reason", "x"), "There is no report 1999-0001"),
        (("--replaces", "1999-0001"), "--replaces needs a reason"),
        (("--replaces", "1999-0001", "--reason", "x", "--no-report"), "Only a report can replace"),
    ],
)
def test_what_cannot_be_meant_is_refused_and_uses_no_number(
    reported: Site, an_export: Path, words: tuple[str, ...], told: str
) -> None:
    ran = reported.run("compare", an_export, *words)
    assert ran.code == 2
    assert told in ran.err
    assert len(reported.done("records", "list", "--json").json["reports"]) == 1


def test_a_report_is_replaced_once_and_by_name(reported: Site, tmp_path: Path) -> None:
    first = reported.reports[0].name.split()[0]
    mended = export(tmp_path / NAME, {**BATCHES, "LA-2411": (24.1, 24.9, 24.6, 24.4, 25.0)})
    asked = ("compare", mended, "--replaces", first, "--reason", "Typing error")
    result = reported.done(*asked, "--json").json
    value = {"what": "value", "key": "Results!E4 (lap_shear)", "before": "23.6 MPa", "after": "24.6 MPa"}
    assert result["replaces"] == {"number": first, "reason": "Typing error", "changes": [value]}
    assert first in notices(result)["replaces"]
    assert {"value_changed", "retest"} <= notices(result).keys()
    old, new = reported.done("records", "list", "--json").json["reports"]
    assert (old["state"], old["replaced_by"]) == ("replaced", new["number"])
    assert (new["state"], new["replaces"]) == ("sealed", first)
    assert "Already answered" in reported.done(*asked).out
    third = export(tmp_path / "lap-shear-3.xlsx", {**BATCHES, "LA-2411": (24.1, 24.9, 24.7, 24.4, 25.0)})
    twice = reported.run("compare", third, "--replaces", first, "--reason", "Again")
    assert twice.code == 2
    assert f"replaced already, by {new['number']}" in twice.err
    assert reported.holds()["ok"]


def test_a_report_is_withdrawn_with_its_reason(reported: Site, an_export: Path) -> None:
    number = reported.reports[0].name.split()[0]
    sealed = reported.reports[0].read_bytes()
    reported.done("records", "withdraw", number, "--reason", "Wrong specimens")
    (row,) = reported.done("records", "list", "--state", "withdrawn", "--json").json["reports"]
    assert (row["number"], row["state_reason"]) == (number, "Wrong specimens")
    assert reported.done("records", "list", "--state", "sealed").out == "No report fits.\n"
    again = reported.run("records", "withdraw", number, "--reason", "Twice")
    assert (again.code, "withdrawn already" in again.err) == (2, True)
    assert reported.run("records", "withdraw", "1999-0001", "--reason", "x").code == 2
    assert "that report is withdrawn" in reported.done("compare", an_export).out
    assert reported.reports[0].read_bytes() == sealed
    assert reported.holds()["ok"]


def test_a_workbook_saved_anew_is_recognised_and_cannot_hide_a_rerun(
    reported: Site, an_export: Path, tmp_path: Path
) -> None:
    book = load_workbook(an_export)
    book.properties.title = "saved anew"
    saved = tmp_path / "lap-shear-saved-anew.xlsx"
    book.save(saved)
    book.close()
    assert saved.read_bytes() != an_export.read_bytes()
    ran = reported.done("compare", saved)
    assert "Already answered in" in ran.out
    assert "same_measurements" in ran.out
    assert len(reported.reports) == 1
    assert [f["same_measurements"] for f in ledger(reported, "duplicate")] == [True]
    replaced(reported.plan, "alpha = 0.05", "alpha = 0.01")
    assert reported.run("compare", saved).code == 2
    result = reported.done("compare", saved, "--reason", "Asked by QA", "--json").json
    assert result["run"]["k"] == 2
    assert [c["key"] for c in result["runs"]["others"][0]["changes"]] == ["comparison.alpha"]


def test_what_was_computed_without_a_report_is_told_by_the_next_one(site: Site, an_export: Path) -> None:
    site.done("compare", an_export, "--no-report")
    replaced(site.plan, "alpha = 0.05", "alpha = 0.01")
    result = site.done("compare", an_export, "--json").json
    assert result["runs"]["without_report"] == 1
    assert "once without a report" in notices(result)["computed_without_report"]


def test_exports_without_sample_ids_are_not_joined_and_say_so(site: Site, an_export: Path) -> None:
    replaced(site.layout, "sample = {", "# sample = {")
    replaced(site.plan, 'independent_unit = "sample"', 'independent_unit = "reading"')
    result = site.done("compare", an_export, "--json").json
    assert result["values"]["not_joined"] == 15
    assert "sample ids" in notices(result)["exports_not_joined"]


def test_a_persons_key_approves_and_a_change_takes_it_away(site: Site, an_export: Path) -> None:
    passphrase = site.root.parent / "person-passphrase"
    passphrase.write_text("a person's own\n")
    passphrase.chmod(0o600)
    site.done("keys", "new", "--for", "person", "Ada Approver", "--passphrase-file", passphrase)
    key = next((site.root / "keys").glob("person-*.p12"))
    asked = ("config", "approve", "lap-shear", "--key", key, "--passphrase-file", passphrase)
    site.done(*asked, "--reason", "Agreed")
    result = site.done("compare", an_export, "--json").json
    (approval,) = result["approvals"]
    assert approval["by"] == "Ada Approver"
    assert "Ada Approver" in notices(result)["approved"]
    replaced(site.plan, "alpha = 0.05", "alpha = 0.01")
    later = site.done("compare", an_export, "--reason", "Other alpha", "--json").json
    assert later["approvals"] == []
    assert "not_approved" in notices(later)
    service = ("config", "approve", "lap-shear", "--key", site.root / "keys/service.p12")
    denied = site.run(*service, "--passphrase-file", site.root / "keys/passphrase")
    assert denied.code != 0
    assert "the key that seals" in denied.err
