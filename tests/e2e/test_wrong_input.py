"""What people get wrong: one clear message, the right exit code, and nothing lost."""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping, Sequence
from pathlib import Path

import pytest
from rig import BATCHES, NAME, Ran, Site, conforms, export, qcreport, replaced

from qcreport.signing.new_key import new_key

PASSPHRASE = b"made for one test session"


def nothing_lost(site: Site, path: Path, before: bytes) -> None:
    """Require that the export is where it was, no report exists, and the records hold together."""
    assert path.read_bytes() == before
    assert site.reports == []
    site.holds()


def compared(site: Site, path: Path, *more: str) -> Ran:
    before = path.read_bytes()
    ran = site.run("compare", path, *more)
    if ran.code != 0:
        nothing_lost(site, path, before)
    return ran


def error_document(site: Site, path: Path) -> dict[str, str]:
    """Return the error of `compare --json`, which is all that it prints."""
    ran = compared(site, path, "--json")
    assert ran.err == ""
    conforms(ran.json, "error")
    found: dict[str, str] = ran.json["error"]
    return found


# -- settings: exit code 2 ----------------------------------------------------------------------------


def test_an_unknown_key_in_a_plan(site: Site, an_export: Path) -> None:
    replaced(site.plan, "alpha = 0.05", "alpah = 0.05")
    ran = compared(site, an_export)
    assert ran.code == 2
    assert ran.err.startswith('lap-shear.toml, line 11, comparison.alpah: unknown key; did you mean "alpha"?')
    error = error_document(site, an_export)
    assert (error["kind"], error["file"], error["key"]) == ("settings", "lap-shear.toml", "comparison.alpah")


def test_every_fault_of_a_plan_at_once(site: Site, an_export: Path) -> None:
    replaced(site.plan, "alpha = 0.05", "alpha = 5")
    replaced(site.plan, "margin = 1.5", 'margin = "much"')
    ran = compared(site, an_export)
    assert ran.code == 2
    assert "comparison.alpha" in ran.err
    assert "characteristic[1].margin" in ran.err


def test_a_plan_that_is_no_toml(site: Site, an_export: Path) -> None:
    site.plan.write_text('name = "lap-shear\n', "utf-8")
    ran = compared(site, an_export)
    assert ran.code == 2
    assert ran.err.startswith("lap-shear.toml, line 1")


def test_a_missing_layout(site: Site, an_export: Path) -> None:
    site.layout.unlink()
    ran = compared(site, an_export)
    assert ran.code == 2
    assert "lap-shear.toml, layout:" in ran.err
    assert str(site.layout) in ran.err


def test_missing_rules(site: Site, an_export: Path) -> None:
    replaced(site.plan, 'layout = "shear-rig"', 'layout = "shear-rig"\nrules = "own"')
    ran = compared(site, an_export)
    assert ran.code == 2
    assert "lap-shear.toml, rules:" in ran.err


def test_a_characteristic_that_the_layout_lacks(site: Site, an_export: Path) -> None:
    replaced(site.plan, 'name = "lap_shear"', 'name = "peel"')
    ran = compared(site, an_export)
    assert ran.code == 2
    assert "the layout shear-rig has no characteristic 'peel'. It has: lap_shear" in ran.err


def test_no_site_here(an_export: Path, tmp_path: Path) -> None:
    empty = tmp_path / "empty"
    empty.mkdir()
    for ran in (
        qcreport("compare", an_export, "--site", empty),
        qcreport("compare", an_export, cwd=empty),
        qcreport("compare", an_export, QCREPORT_SITE=str(empty)),
    ):
        assert (ran.code, ran.err) == (2, f"No site here ({empty}), make one: qcreport site new DIR\n")
    as_json = qcreport("compare", an_export, "--site", empty, "--json")
    assert as_json.code == 2
    conforms(as_json.json, "error")
    assert as_json.json["error"]["kind"] == "usage"


def test_an_export_that_is_not_there(site: Site, tmp_path: Path) -> None:
    for path in (tmp_path / NAME, tmp_path):
        ran = site.run("compare", path)
        assert ran.code == 2
        assert "Name an export" in ran.err
        assert str(path) in ran.err
        as_json = site.run("compare", path, "--json")
        conforms(as_json.json, "error")
        assert as_json.json["error"]["file"] == str(path)


@pytest.mark.parametrize(
    ("words", "says"),
    [
        (("compare",), "required: EXPORT"),
        (("comapre", "x.xlsx"), "invalid choice: 'comapre'"),
        (("verify", "a.pdf", "--turst", "x"), "--turst"),
        (("keys", "new", "--for", "robot", "NAME"), "invalid choice: 'robot'"),
        (("config",), "required"),
    ],
)
def test_words_that_are_no_command(words: tuple[str, ...], says: str) -> None:
    ran = qcreport(*words)
    assert ran.code == 2
    assert says in ran.err
    assert "--help" in ran.err
    as_json = qcreport(*words, "--json")
    assert as_json.code == 2
    conforms(as_json.json, "error")
    assert as_json.err == ""


# -- the export: exit code 3 --------------------------------------------------------------------------


def refused(site: Site, path: Path, code: str) -> str:
    """Require a refusal with five lines, the same as JSON, and an open refusal in the records."""
    ran = compared(site, path)
    assert ran.code == 3, ran.text
    assert ran.out == ""
    lines = ran.err.splitlines()
    heads = [line.split(":")[0] for line in lines]
    assert heads == ["Not read", "Where", "Found", "Expected", "Next step"]
    assert lines[0] == f"Not read:  {path.name}"
    assert lines[-1].endswith(f"({code})")
    as_json = compared(site, path, "--json")
    assert as_json.code == 3
    conforms(as_json.json, "layout_try")
    assert (as_json.json["outcome"], as_json.json["code"]) == ("refused", code)
    assert as_json.err == ran.err
    listed = site.done("records", "list", "--json").json["refused"]
    assert {row["code"] for row in listed} == {code}
    return ran.err


def test_a_layout_that_does_not_fit(site: Site, tmp_path: Path) -> None:
    said = refused(site, export(tmp_path / NAME, heading="Peel (MPa)"), "layout_mismatch")
    assert "Results!E1" in said
    assert '"Peel (MPa)"' in said


def test_another_unit(site: Site, tmp_path: Path) -> None:
    said = refused(site, export(tmp_path / NAME, heading="Lap shear (N)"), "unit_conflict")
    assert "Results!E1" in said


@pytest.mark.parametrize("kept", [30, 700, -40])
def test_a_damaged_workbook(kept: int, site: Site, an_export: Path) -> None:
    an_export.write_bytes(an_export.read_bytes()[:kept])
    refused(site, an_export, "damaged_or_incomplete")


def test_an_empty_file(site: Site, an_export: Path) -> None:
    an_export.write_bytes(b"")
    assert "0 bytes" in refused(site, an_export, "empty_file")


@pytest.mark.parametrize("text", ["NaN", "inf", "12.4*", "see note"])
def test_text_where_a_number_should_be(text: str, site: Site, tmp_path: Path) -> None:
    path = export(tmp_path / NAME, {**BATCHES, "LA-2411": [24.1, text, 23.9]})
    said = refused(site, path, "unreadable_values")
    assert "Results!E3" in said
    assert f'"{text}"' in said


def test_a_name_that_fits_no_plan(site: Site, tmp_path: Path) -> None:
    said = refused(site, export(tmp_path / "peel.xlsx"), "no_plan")
    assert "lap-shear*.xlsx (plan lap-shear)" in said


def test_a_reference_that_is_missing(site: Site, an_export: Path) -> None:
    replaced(site.plan, 'reference = ""', 'reference = "LQ-2411"')
    said = refused(site, an_export, "reference_missing")
    assert "LQ-2411" in said
    assert "LA-2411, LB-2411, LC-2411" in said


def test_a_file_above_the_limit(site: Site, an_export: Path) -> None:
    replaced(site.settings, "# max_rows = 200000", "max_file_bytes = 1000")
    said = refused(site, an_export, "too_large")
    assert f"{an_export.stat().st_size:,} bytes" in said
    archived = [path.read_bytes() for path in (site.root / "archive").rglob("*") if path.is_file()]
    assert not any(data.startswith(b"PK") for data in archived), "half a file is no original"


# -- data that cannot be compared: exit code 0 --------------------------------------------------------


@pytest.mark.parametrize(
    ("batches", "left_out", "procedure"),
    [
        ({**BATCHES, "LD-2411": [24.0]}, {"LD-2411"}, None),
        ({"LA-2411": [24.1, 24.9, 23.6]}, {"LA-2411"}, "none"),
        ({"LA-2411": [24.1, 24.9, 23.6], "LB-2411": [24.0]}, {"LA-2411", "LB-2411"}, "none"),
        ({"LA-2411": [24.0] * 3, "LB-2411": [24.0] * 3}, None, "none"),
    ],
    ids=["a group of one", "one group", "one comparable group", "all values equal"],
)
def test_what_cannot_be_compared(
    batches: Mapping[str, Sequence[float]],
    left_out: set[str] | None,
    procedure: str | None,
    site: Site,
    tmp_path: Path,
) -> None:
    path = export(tmp_path / NAME, batches)
    ran = site.done("compare", path, "--no-report", "--json")
    conforms(ran.json, "result")
    (found,) = ran.json["characteristics"]
    if left_out is not None:
        assert {g["label"] for g in found["not_compared"]} == left_out
    assert all(g["reason"] for g in found["not_compared"])
    if procedure == "none":
        assert (found["procedure"], found["answer"], found["pairs"]) == ("none", "not_compared", [])
        assert "not compared" in site.done("compare", path, "--no-report").out
    else:
        assert found["procedure"] != "none"
        assert {p["first"] for p in found["pairs"]} | {p["second"] for p in found["pairs"]} == set(BATCHES)
    site.holds()


def test_what_cannot_be_compared_is_reported_all_the_same(site: Site, tmp_path: Path) -> None:
    path = export(tmp_path / NAME, {"LA-2411": [24.1, 24.9, 23.6], "LB-2411": [24.0]})
    ran = site.done("compare", path)
    assert "not compared. Fewer than two groups hold enough results" in ran.out
    (report,) = site.reports
    assert site.done("verify", report).code == 0
    site.holds()


# -- keys and the machine: exit code 4 ----------------------------------------------------------------


def failed(site: Site, path: Path, **env: str) -> str:
    """Require code 4 with one sentence, the same as JSON, nothing written."""
    ran = site.run("compare", path, **env)
    assert ran.code == 4, ran.text
    assert ran.out == ""
    assert ran.err.strip()
    as_json = site.run("compare", path, "--json", **env)
    assert (as_json.code, as_json.err) == (4, "")
    conforms(as_json.json, "error")
    assert as_json.json["error"]["text"] + "\n" == ran.err
    assert site.reports == []
    return ran.err


def test_a_wrong_passphrase(site: Site, an_export: Path) -> None:
    (site.root / "keys/passphrase").write_text("not this one\n")
    assert "passphrase" in failed(site, an_export)
    assert site.holds()["entries"] == 0


def test_no_passphrase_at_all(site: Site, an_export: Path) -> None:
    replaced(site.settings, 'passphrase_file = "keys/passphrase"', "")
    said = failed(site, an_export)
    assert "QCREPORT_KEY_PASSPHRASE" in said
    assert "passphrase_file" in said
    by_environment = {"QCREPORT_KEY_PASSPHRASE": PASSPHRASE.decode()}
    assert site.done("config", "check", **by_environment).code == 0


@pytest.mark.parametrize("name", ["service.p12", "passphrase"])
def test_a_secret_that_others_may_read(name: str, site: Site, an_export: Path) -> None:
    (site.root / "keys" / name).chmod(0o644)
    said = failed(site, an_export)
    assert name in said
    assert "chmod 600" in said
    assert site.holds()["entries"] == 0


@pytest.mark.parametrize(("days_ago", "says"), [(40, "expired on"), (-40, "valid only from")])
def test_a_key_out_of_time(days_ago: int, says: str, site: Site, an_export: Path) -> None:
    made = new_key(
        "Your laboratory, report seal",
        purpose="service",
        organisation="Your laboratory",
        now=dt.datetime.now(dt.UTC) - dt.timedelta(days=days_ago),
        days=30,
        passphrase=PASSPHRASE,
    )
    (site.root / "keys/service.p12").write_bytes(made.pkcs12)
    assert says in failed(site, an_export)
    assert site.holds()["entries"] == 0


def test_a_key_that_is_gone(site: Site, an_export: Path) -> None:
    (site.root / "keys/service.p12").unlink()
    assert "service.p12" in failed(site, an_export)


def test_a_site_without_a_key(site: Site, an_export: Path) -> None:
    replaced(site.settings, 'key = "keys/service.p12"', "")
    ran = compared(site, an_export)
    assert ran.code == 2
    assert "qcreport keys new --for service" in ran.err
    assert site.done("compare", an_export, "--no-report").code == 0


def test_a_file_where_the_reports_folder_should_be(site: Site, an_export: Path) -> None:
    (site.root / "reports").rmdir()
    (site.root / "reports").write_text("")
    said = failed(site, an_export)
    assert str(site.root / "reports") in said
    assert "not a folder" in said


def test_a_share_that_is_not_mounted(site: Site, an_export: Path, tmp_path: Path) -> None:
    replaced(site.settings, 'reports = "reports"', f'reports = "{tmp_path / "share"}"')
    assert "Mount the share" in failed(site, an_export)
    assert not (tmp_path / "share").exists()


def test_a_reports_folder_that_cannot_be_written(site: Site, an_export: Path) -> None:
    """/proc/sys/kernel takes no file from anybody, root included; once mended, the same number is used."""
    replaced(site.settings, 'reports = "reports"', 'reports = "/proc/sys/kernel"')
    said = failed(site, an_export)
    assert "/proc/sys/kernel/" in said
    replaced(site.settings, 'reports = "/proc/sys/kernel"', 'reports = "reports"')
    site.done("compare", an_export)
    (report,) = site.reports
    assert report.name.endswith("-0001 lap-shear-2411.pdf")
    assert site.holds()["reports"] == 1
