"""`compare` again and again: one run key, one report; another setting needs a reason and is counted."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from rig import NAME, Ran, Site, conforms, export, replaced

CHANGED_SINCE = (
    "This export was compared before, as 2026-0001, and plan, layout, rules or templates have changed since."
)


@pytest.fixture
def reported_export(reported_once: Path) -> Path:
    return reported_once / "export" / NAME


def counted(ran: Ran) -> tuple[int, int]:
    """Return k and n of run k of n."""
    return ran.json["run"]["k"], ran.json["run"]["n"]


def first_number(site: Site) -> str:
    return site.reports[0].name.split(" ")[0]


def test_the_same_again_is_answered_from_the_records(
    reported: Site, reported_export: Path, tmp_path: Path
) -> None:
    (report,) = reported.reports
    before = report.read_bytes()
    number = first_number(reported)
    ran = reported.done("compare", reported_export)
    assert ran.out.startswith(f"Already answered in {number}; nothing new written.\n")
    assert ran.out.endswith(f"{report}\n")
    result = reported.done("compare", reported_export, "--json", "--out", tmp_path / "out").out
    assert result == reported.done("compare", reported_export, "--json", "--no-report").out
    conforms(json.loads(result), "result")
    written = {p.name: p.read_bytes() for p in (tmp_path / "out").iterdir()}
    assert written == {"result.json": result.encode("utf-8"), f"{number}.pdf": before}
    assert reported.reports == [report]
    assert report.read_bytes() == before
    assert reported.holds()["reports"] == 1


def test_without_a_report_the_result_is_that_of_the_later_report(
    site: Site, an_export: Path, tmp_path: Path
) -> None:
    alone = site.done("compare", an_export, "--no-report", "--json")
    assert alone.err == ""
    conforms(alone.json, "result")
    assert site.reports == []
    out = tmp_path / "new" / "out"
    sealed = site.done("compare", an_export, "--json", "--out", out)
    assert sealed.out == alone.out
    assert counted(alone) == (1, 1)
    assert (out / "result.json").read_bytes() == alone.out.encode("utf-8")
    (report,) = site.reports
    assert (out / f"{first_number(site)}.pdf").read_bytes() == report.read_bytes()
    (listed,) = site.done("records", "list", "--json").json["reports"]
    assert listed["answers"] == [{"characteristic": "lap_shear", "answer": "matters"}]


def test_other_settings_need_a_reason(reported: Site, reported_export: Path) -> None:
    replaced(reported.plan, "alpha = 0.05", "alpha = 0.01")
    number = first_number(reported)
    said = CHANGED_SINCE.replace("2026-0001", number)
    for more in ((), ("--no-report",)):
        ran = reported.run("compare", reported_export, *more)
        assert ran.code == 2
        assert said in ran.err
        assert "--reason" in ran.err
    as_json = reported.run("compare", reported_export, "--json")
    assert as_json.code == 2
    conforms(as_json.json, "error")
    assert said in as_json.json["error"]["text"]
    assert len(reported.reports) == 1
    ran = reported.done("compare", reported_export, "--reason", "alpha was agreed anew", "--json")
    assert counted(ran) == (2, 2)
    assert len(reported.reports) == 2
    first, second = reported.done("records", "list", "--json").json["reports"]
    assert (first["run"]["k"], second["run"]["k"]) == (1, 2)
    assert second["run"]["reason"] == "alpha was agreed anew"
    assert reported.holds()["reports"] == 2
    replaced(reported.plan, "alpha = 0.01", "alpha = 0.05")
    back = reported.done("compare", reported_export)
    assert back.out.startswith(f"Already answered in {number}; nothing new written.")


def test_a_sentence_tells_what_to_do_about_the_reason(reported: Site, reported_export: Path) -> None:
    replaced(reported.plan, "alpha = 0.05", "alpha = 0.01")
    ran = reported.run("compare", reported_export)
    assert ran.err.endswith('Every further run must be explained: --reason "…".\n')


def test_the_same_bytes_under_another_name_are_the_same_export(
    reported: Site, reported_export: Path, tmp_path: Path
) -> None:
    copy = tmp_path / "lap-shear-copy.xlsx"
    copy.write_bytes(reported_export.read_bytes())
    assert reported.done("compare", copy).out.startswith("Already answered in ")


def test_a_changed_export_is_another(reported: Site, tmp_path: Path) -> None:
    changed = export(tmp_path / NAME, {"LA-2411": [24.1, 24.2, 24.9], "LC-2411": [21.0, 21.9, 20.1]})
    ran = reported.done("compare", changed, "--no-report", "--json")
    assert counted(ran) == (1, 1)
    assert [g["label"] for g in ran.json["characteristics"][0]["groups"]] == ["LA-2411", "LC-2411"]


def second_plan(site: Site, *, layout: str = "shear-rig") -> None:
    text = site.plan.read_text("utf-8")
    text = text.replace('name = "lap-shear"', 'name = "z-second"').replace("margin = 1.5", "margin = 9.0")
    text = text.replace('layout = "shear-rig"', f'layout = "{layout}"')
    (site.root / "config/plans/z-second.toml").write_text(text, "utf-8")


def test_every_plan_that_fits_is_run(site: Site, an_export: Path, tmp_path: Path) -> None:
    second_plan(site)
    ran = site.done("compare", an_export, "--no-report", "--out", tmp_path / "out")
    assert "by plan lap-shear\n" in ran.out
    assert "by plan z-second\n" in ran.out
    answers = {p.name: json.loads(p.read_bytes()) for p in (tmp_path / "out").iterdir()}
    assert sorted(answers) == ["lap-shear.result.json", "z-second.result.json"]
    ambiguous = site.run("compare", an_export, "--no-report", "--json")
    assert ambiguous.code == 2
    assert "--plan" in ambiguous.json["error"]["text"]
    for plan in ("z-second", site.root / "config/plans/z-second.toml"):
        one = site.done("compare", an_export, "--no-report", "--json", "--plan", plan)
        assert one.json["plan"]["name"] == "z-second"
    unknown = site.run("compare", an_export, "--plan", "third")
    assert unknown.code == 2
    assert "Plans of this site: lap-shear, z-second" in unknown.err


def test_what_one_plan_answered_is_told_where_the_next_refuses(site: Site, an_export: Path) -> None:
    text = site.layout.read_text("utf-8")
    other = text.replace('"shear-rig"', '"other"').replace("Lap shear (MPa)", "Peel (MPa)")
    (site.root / "config/layouts/a-other.toml").write_text(other, "utf-8")
    second_plan(site, layout="a-other")
    (site.root / "config/plans/z-second.toml").rename(site.root / "config/plans/a-second.toml")
    third = site.plan.read_text("utf-8").replace('name = "lap-shear"', 'name = "third"')
    (site.root / "config/plans/z-third.toml").write_text(third, "utf-8")
    ran = site.run("compare", an_export, "--no-report")
    assert ran.code == 3
    assert "by plan lap-shear\n" in ran.out
    assert "by plan third\n" in ran.out
    assert "(layout_mismatch)" in ran.err
    (refused,) = site.done("records", "list", "--json").json["refused"]
    assert (refused["plan"], refused["code"]) == ("z-second", "layout_mismatch")


def test_a_plan_of_its_own_whatever_the_name(site: Site, an_export: Path, tmp_path: Path) -> None:
    other = tmp_path / "from the rig.xlsx"
    an_export.rename(other)
    ran = site.done("compare", other, "--plan", "lap-shear", "--no-report", "--json")
    assert ran.json["export"]["name"] == "from the rig.xlsx"
