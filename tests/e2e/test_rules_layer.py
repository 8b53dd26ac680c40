"""The choice of procedure through the command line: history from the records, explanations, verification."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from rig import Site, done, export, replaced

SHAPE = (0.14, -0.72, 1.13, -1.31, 0.41, 0.93, -0.22, 0.64, -0.95, 0.31)
PAST = "lap-shear-past.xlsx"


def batches(names: list[str], n: int = 10) -> dict[str, list[float]]:
    return {name: [round(24.0 + 0.02 * i + x, 2) for x in SHAPE[:n]] for i, name in enumerate(names)}


def tonight(folder: Path) -> Path:
    return export(folder / "lap-shear-2411.xlsx", batches(["LA-2411", "LB-2411", "LC-2411"]))


@pytest.fixture
def site_with_past(site: Site, tmp_path: Path) -> Site:
    """Return a site whose records hold forty batches of before."""
    past = batches([f"P{i:02}-2410" for i in range(40)])
    site.done("records", "import", export(tmp_path / PAST, past))
    return site


@pytest.mark.slow
def test_forty_earlier_batches_show_that_spread_is_similar(site_with_past: Site, tmp_path: Path) -> None:
    explained = site_with_past.done("rules", "explain", tonight(tmp_path), "--json").json
    result = site_with_past.done("compare", tonight(tmp_path), "--json").json["characteristics"][0]
    assert (result["facts"]["spread"], result["procedure"]) == ("similar", "tukey_hsd")
    assert result["rule"]["id"] == "similar_equal_sizes"
    variation = next(c for c in result["checks"] if c["name"] == "spread_variation")
    assert variation["met"] is True
    assert variation["note"].startswith("40 earlier batches")
    (choice,) = explained["characteristics"]
    assert choice["rule"] == result["rule"]
    assert choice["facts"] == result["facts"]
    assert choice["trace"] == result["trace"]
    report = site_with_past.reports[-1]
    verdict = site_with_past.done("verify", report, "--json").json
    assert verdict["recomputed"]["matches"] is True  # from the file alone: the history travels in it
    out = tmp_path / "evidence"
    done("extract", report, out)
    context = json.loads((out / "context.json").read_text("utf-8"))
    (history,) = context["history"]
    assert len(history["batches"]) == 40
    assert {b["df"] for b in history["batches"]} == {9}


@pytest.mark.slow
def test_lines_are_judged_with_their_history_and_this_export(site: Site, tmp_path: Path) -> None:
    replaced(site.layout, 'sample = { col = "C" }', 'line = { col = "B" }\nsample = { col = "C" }')
    replaced(site.plan, 'groups = "batch"', 'groups = "line"')
    lines = ["L1", "L2", "L3", "L4"]
    new = export(tmp_path / "lap-shear-2411.xlsx", batches([f"{line}-2411" for line in lines], n=6))
    alone = site.done("rules", "explain", new, "--json").json["characteristics"][0]
    assert (alone["facts"]["spread"], alone["procedure"]) == ("cannot be judged", "dunnett_t3")
    past = batches([f"{line}-24{month:02}" for month in range(1, 9) for line in lines])
    site.done("records", "import", export(tmp_path / PAST, past))
    result = site.done("compare", new, "--json", "--no-report").json["characteristics"][0]
    assert (result["facts"]["spread"], result["procedure"]) == ("similar", "tukey_hsd")
    together = next(c for c in result["checks"] if c["name"] == "spread_ratio_limit_with_history")
    assert together["note"] == "history and this export, 77 df"  # 8 batches of 10, and 6 results
    evidence = next(f for f in result["facts_evidence"] if f["fact"] == "spread")
    assert evidence["observed"].startswith("Shown by the lines' history and this export together")


def test_without_a_past_the_same_export_is_not_judged_similar(site: Site, tmp_path: Path) -> None:
    result = site.done("compare", tonight(tmp_path), "--json", "--no-report").json["characteristics"][0]
    assert (result["facts"]["spread"], result["procedure"]) == ("cannot be judged", "games_howell")


def test_explain_says_what_one_fact_would_change(site: Site, tmp_path: Path) -> None:
    ran = site.done("rules", "explain", tonight(tmp_path))
    assert "lap_shear: games_howell, row unequal_spread\n" in ran.out
    assert "    spread = similar (here cannot be judged): tukey_hsd, row similar_equal_sizes\n" in ran.out
    assert "    smallest_n = 9 (here 10): dunnett_t3, row unequal_spread_small\n" in ran.out
    assert "    too_few_groups: needs groups < 2; here it is 3\n" in ran.out
    assert ran.out.endswith("Next: qcreport rules show default\n")
    assert site.reports == []
    assert site.holds()["entries"] == 0


def test_explain_with_a_procedure_fixed_in_the_plan(site: Site, tmp_path: Path) -> None:
    replaced(site.plan, "alpha = 0.05", 'alpha = 0.05\nprocedure = "tukey_hsd"')
    (choice,) = site.done("rules", "explain", tonight(tmp_path), "--json").json["characteristics"]
    assert choice["procedure"] == "tukey_hsd"
    assert choice["rule"]["id"] == "fixed_by_plan"
    assert "would choose games_howell by its row unequal_spread" in choice["rule"]["reason"]
    assert {c["name"] for c in choice["checks"]} >= {"brown_forsythe", "spread_ratio_limit"}
    assert choice["alternatives"] == []


def test_explain_refuses_what_compare_refuses(site: Site, tmp_path: Path) -> None:
    wrong = export(tmp_path / "lap-shear-2411.xlsx", heading="Peel (N)")
    ran = site.run("rules", "explain", wrong, "--json")
    assert ran.code == 3
    assert site.run("rules", "explain", tmp_path / "absent.xlsx").code == 2


def test_a_table_with_a_hole_is_refused_by_file_row_and_key(site: Site, tmp_path: Path) -> None:
    table = site.root / "config/rules/default.toml"
    replaced(table, 'id = "unequal_spread"\nwhen = {}', 'id = "unequal_spread"\nwhen = { sizes = "equal" }')
    ran = site.run("compare", tonight(tmp_path))
    assert ran.code == 2
    assert "default.toml" in ran.err
    assert "no row answers this combination: comparison = every pair, sizes = unequal" in ran.err


def test_an_approval_after_the_data_is_said(site: Site, tmp_path: Path) -> None:
    table = site.root / "config/rules/default.toml"
    replaced(table, 'name = "default"\n', 'name = "default"\napproved = { by = "Q", on = 2026-11-30 }\n')
    result = site.done("compare", tonight(tmp_path), "--json", "--no-report").json
    (notice,) = [n for n in result["notices"] if n["code"] == "rules_set_after_data"]
    assert "approved on 2026-11-30, the first measurement is of 2026-11-03" in notice["text"]
    assert result["characteristics"][0]["rule"]["approved"] == {"by": "Q", "on": "2026-11-30"}
    assert "Approved: Q, 2026-11-30" in site.done("rules", "show").out
