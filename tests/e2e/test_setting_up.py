"""Setting up a site: every command says what is missing, at once, and what comes next."""

from __future__ import annotations

import json
import re
import sqlite3
import stat
import tomllib
from pathlib import Path

import pytest
from rig import Site, conforms, done, export, qcreport, readme, replaced

from qcreport.cli.parser import COMMANDS

ANSWERS = ("--name", "A lab", "--address", "A street 1", "--time-zone", "Europe/Berlin", "--language", "en")


@pytest.fixture
def secret(tmp_path: Path) -> Path:
    path = tmp_path / "passphrase"
    path.write_text("a secret of this test\n")
    path.chmod(0o600)
    return path


# -- commands and their help --------------------------------------------------------------------------


@pytest.mark.parametrize("command", COMMANDS)
def test_every_command_has_help_and_stands_in_the_readme(command: str) -> None:
    ran = done(*command.split(), "--help")
    assert ran.out.startswith(f"usage: qcreport {command}")
    assert "options:" in ran.out
    table = readme().split("## Commands")[1].split("\n## ")[0]
    assert re.search(rf"`{command}[ `]", table), f"`{command}` is not in the README's table"
    group = done("--help").out
    assert all(word in group for word in command.split())


def test_commands_that_the_readme_names_exist() -> None:
    table = re.findall(r"^\| (.*?) \|", readme().split("## Commands")[1].split("\n## ")[0], re.MULTILINE)
    named = [entry for row in table for entry in re.findall(r"`([^`]*)`", row)]
    in_text = re.findall(r"^ *qcreport ([^\n]*)", readme(), re.MULTILINE)
    in_text += re.findall(r"`qcreport ([^`]*)`", readme())
    assert len(named) >= len(COMMANDS)
    for words in named + in_text:
        found = [c for c in COMMANDS if f"{words} ".startswith(f"{c} ")]
        assert len(found) == 1, f"the README names a command that is not there: {words}"
        help_text = done(*found[0].split(), "--help").out
        for option in re.findall(r"--[a-z-]+", words.split("#")[0]):
            assert option in help_text, f"{found[0]} has no {option}"


def test_options_in_the_readme_table_exist() -> None:
    for row in readme().split("## Commands")[1].split("\n## ")[0].splitlines():
        for command in [c for c in COMMANDS if row.startswith((f"| `{c} ", f"| `{c}`"))]:
            help_text = done(*command.split(), "--help").out
            for option in re.findall(r"--[a-z-]+", row):
                assert option in help_text, f"{command} has no {option}"


def test_without_words_the_help() -> None:
    assert qcreport().out.startswith("qcreport: from an instrument's Excel export")
    assert re.fullmatch(r"qcreport \d+\.\d+\.\d+\n", done("--version").out)


# -- site new -----------------------------------------------------------------------------------------


def test_a_new_site_without_answers_names_the_options(tmp_path: Path) -> None:
    ran = qcreport("site", "new", tmp_path / "site")
    assert ran.code == 2
    assert ran.err.endswith("Give: --name … --address … --time-zone … --language …\n")
    ran = qcreport("site", "new", tmp_path / "site", "--name", "A lab", "--language", "en")
    assert ran.err.endswith("Give: --address … --time-zone …\n")
    assert not (tmp_path / "site").exists()


def test_a_wrong_answer_makes_nothing(tmp_path: Path) -> None:
    ran = qcreport("site", "new", tmp_path / "site", *ANSWERS[:-4], "--time-zone", "Mars", "--language", "en")
    assert ran.code == 2
    assert "not an IANA time zone such as Europe/Berlin, found 'Mars'" in ran.err
    assert not (tmp_path / "site").exists()


def test_a_new_site_and_its_next_steps(tmp_path: Path, secret: Path) -> None:
    root = tmp_path / "a site"
    ran = done("site", "new", root, *ANSWERS)
    assert ran.out.splitlines()[-1] == f'Next: qcreport keys new --for service "A lab" --site {root}'
    assert not list((root / "config/plans").iterdir()), "example plans stay out of a real site"
    for name in ("work", "keys", "records"):
        assert stat.S_IMODE((root / name).stat().st_mode) == 0o700
    again = qcreport("site", "new", root, *ANSWERS)
    assert again.code == 2
    assert "Name a new folder" in again.err
    unset = qcreport("config", "check", "--site", root)
    assert unset.code == 2
    assert "qcreport keys new --for service" in unset.err
    ran = done("keys", "new", "--for", "service", "A lab", "--passphrase-file", secret, "--site", root)
    assert ran.out.splitlines()[-1] == f"Next: qcreport config check --site {root}"
    ran = done("config", "check", "--site", root)
    assert "nothing wrong was found" in ran.out
    assert "plans:     none yet" in ran.out
    assert "Next: write a plan" in ran.out


def test_names_with_quotes_and_umlauts_survive(tmp_path: Path) -> None:
    root = tmp_path / "site"
    name = 'Müller & "Söhne" \\ Prüflabor'
    done("site", "new", root, "--name", name, *ANSWERS[2:])
    assert tomllib.loads((root / "config/site.toml").read_text("utf-8"))["lab"]["name"] == name


# -- keys new -----------------------------------------------------------------------------------------


def test_a_service_key(site_as_made: Path) -> None:
    key, certificate = site_as_made / "keys/service.p12", site_as_made / "keys/service.crt"
    assert stat.S_IMODE(key.stat().st_mode) == 0o600
    assert certificate.read_bytes().startswith(b"-----BEGIN CERTIFICATE-----")
    settings = (site_as_made / "config/site.toml").read_text("utf-8")
    assert 'key = "keys/service.p12"' in settings
    assert 'passphrase_file = "keys/passphrase"' in settings


def test_a_second_service_key_overwrites_nothing(site: Site) -> None:
    before = (site.root / "keys/service.p12").read_bytes()
    ran = site.run(
        "keys", "new", "--for", "service", "Other", "--passphrase-file", site.root / "keys/passphrase"
    )
    assert ran.code == 2
    assert "is there already" in ran.err
    assert (site.root / "keys/service.p12").read_bytes() == before


def test_a_service_key_for_settings_without_the_shipped_lines(site: Site) -> None:
    for path in (site.root / "keys").glob("service.*"):
        path.unlink()
    text = site.settings.read_text("utf-8")
    kept = [line for line in text.splitlines() if not re.match(r"(# )?(key|passphrase_file) =", line)]
    site.settings.write_text("\n".join(kept) + "\n", "utf-8")
    passphrase = site.root / "keys/passphrase"
    site.done("keys", "new", "--for", "service", "Other", "--passphrase-file", passphrase)
    assert "key:       Other" in site.done("config", "check").out


def test_a_service_key_for_settings_without_a_seal_table(site: Site) -> None:
    for path in (site.root / "keys").glob("service.*"):
        path.unlink()
    text = site.settings.read_text("utf-8")
    site.settings.write_text(re.sub(r"\[seal\]\n.*?\n\n", "", text, flags=re.DOTALL), "utf-8")
    assert "[seal]" not in site.settings.read_text("utf-8")
    passphrase = site.root / "keys/passphrase"
    site.done("keys", "new", "--for", "service", "Other", "--passphrase-file", passphrase)
    assert "key:       Other" in site.done("config", "check").out


def test_a_persons_key(site: Site, secret: Path) -> None:
    before = site.settings.read_bytes()
    ran = site.done("keys", "new", "--for", "person", "Ada Example", "--passphrase-file", secret)
    assert "person-ada-example.p12" in ran.out
    assert ran.out.splitlines()[-1].startswith("Next: ")
    assert re.search(r"Fingerprint: +([0-9a-f]{8} ){8}\(SHA-256\)", ran.out)
    assert site.settings.read_bytes() == before
    of_the_service = {"QCREPORT_KEY_PASSPHRASE": "not a person's"}
    from_environment = site.run("keys", "new", "--for", "person", "B", **of_the_service)
    assert from_environment.code == 2
    assert "--passphrase-file" in from_environment.err
    assert not (site.root / "keys/person-b.p12").exists()


@pytest.mark.parametrize("days", ["0", "-1", "1000000", "99999999999", "many"])
def test_a_key_for_no_number_of_days(days: str, site: Site, secret: Path) -> None:
    ran = site.run("keys", "new", "--for", "person", "A", "--passphrase-file", secret, f"--days={days}")
    assert ran.code == 2
    assert days in ran.err
    assert not list((site.root / "keys").glob("person-*"))


# -- config check -------------------------------------------------------------------------------------


def test_a_sound_site(site: Site) -> None:
    ran = site.done("config", "check")
    assert "plans:     lap-shear" in ran.out
    assert "key:       Your laboratory, report seal, 729 days left" in ran.out
    assert "Next: drop an export" in ran.out
    assert site.done("config", "check", "--json").json == {"ok": True, "faults": []}


def test_all_faults_at_once(site: Site) -> None:
    replaced(site.settings, "[lab]", "[lab]\ncolour = 1")
    replaced(site.plan, "alpha = 0.05", "alpah = 0.05")
    second = site.plan.with_name("second.toml")
    second.write_text('name = "second"\nlayout = "nowhere"\n', "utf-8")
    for name in ("own", "theirs"):
        (site.root / f"config/rules/{name}.toml").write_text("name = 3\n", "utf-8")
    (site.root / "config/layouts/unused.toml").write_text("layout_version = 1\nnmae = 1\n", "utf-8")
    ran = site.run("config", "check")
    assert ran.code == 2
    for place in (
        "config/site.toml, line 4, lab.colour",
        "lap-shear.toml, line 11, comparison.alpah",
        "second.toml",
        "own.toml, line 1, name",
        "theirs.toml, line 1, name",
        "unused.toml, line 2, nmae",
    ):
        assert place in ran.err
    as_json = site.run("config", "check", "--json")
    assert as_json.code == 2
    conforms(as_json.json, "error")


def test_faults_beside_site_toml_at_once(site: Site) -> None:
    replaced(site.plan, "alpha = 0.05", "alpah = 0.05")
    (site.root / "templates/remark.html").write_text("{% if %}", "utf-8")
    (site.root / "keys/service.p12").chmod(0o644)
    ran = site.run("config", "check")
    assert ran.code == 2
    for place in ("comparison.alpah", "remark.html", "chmod 600"):
        assert place in ran.err


# -- layout try ---------------------------------------------------------------------------------------


def test_what_would_be_read(site: Site, an_export: Path) -> None:
    ran = site.done("layout", "try", an_export)
    rows = [re.split(r" {2,}", line) for line in ran.out.splitlines()]
    assert rows[0][:2] == ["characteristic", "batch"]
    assert rows[1] == ["lap_shear", "LA-2411", "LA-2411-1", "24.1", "MPa", "Results!E2"]
    assert "15 values read." in ran.out
    assert "Next: " in ran.out
    named = qcreport("layout", "try", an_export, "--layout", site.layout)  # no site is needed
    assert named.out == ran.out
    document = site.done("layout", "try", an_export, "--layout", "shear-rig", "--json").json
    conforms(document, "layout_try")
    assert document["outcome"] == "read"
    assert len(document["characteristics"][0]["groups"]["LC-2411"]) == 5
    assert site.holds()["entries"] == 0, "nothing is recorded"


def test_what_would_be_refused(site: Site, tmp_path: Path) -> None:
    path = export(tmp_path / "lap-shear-1.xlsx", heading="Peel (MPa)")
    ran = site.run("layout", "try", path)
    assert ran.code == 3
    assert "(layout_mismatch)" in ran.err
    as_json = site.run("layout", "try", path, "--json")
    assert as_json.code == 3
    conforms(as_json.json, "layout_try")
    assert as_json.json["code"] == "layout_mismatch"


def test_what_would_be_left_alone(site: Site, tmp_path: Path) -> None:
    path = tmp_path / "~$lap-shear-1.xlsx"
    path.write_bytes(b"\x05user")
    assert "left alone" in site.done("layout", "try", path).out
    document = site.done("layout", "try", path, "--json").json
    conforms(document, "layout_try")
    assert document["outcome"] == "ignored"


def test_no_layout_is_known_for_a_name(site: Site, tmp_path: Path) -> None:
    path = export(tmp_path / "peel.xlsx")
    ran = site.run("layout", "try", path)
    assert ran.code == 2
    assert "--layout" in ran.err
    assert "shear-rig" in ran.err
    as_json = site.run("layout", "try", path, "--json")
    assert as_json.code == 2
    conforms(as_json.json, "error")
    unknown = site.run("layout", "try", path, "--layout", "peel-rig")
    assert unknown.code == 2
    assert "there is no layout 'peel-rig'" in unknown.err


# -- rules show ---------------------------------------------------------------------------------------


@pytest.mark.parametrize("table", ["default", "textbook"])
def test_a_decision_table(table: str, site: Site, tmp_path: Path) -> None:
    ran = site.done("rules", "show", table)
    assert ran.out.startswith(f"{table}: ")
    assert ran.out.count("    procedure  ") == ran.out.count("    reason     ") > 5
    assert qcreport("rules", "show", table, cwd=tmp_path).out == ran.out, "as shipped where there is no site"


def test_a_table_that_is_not_there(site: Site) -> None:
    ran = site.run("rules", "show", "habit")
    assert ran.code == 2
    assert "There are: default, textbook" in ran.err
    elsewhere = site.run("rules", "show", "../plans/lap-shear")
    assert elsewhere.code == 2
    assert "There are: default, textbook" in elsewhere.err


# -- records ------------------------------------------------------------------------------------------


def test_what_was_reported(reported: Site) -> None:
    (report,) = reported.reports
    number = report.name.split(" ")[0]
    listed = reported.done("records", "list")
    assert listed.out == f"{number}  sealed  lap-shear-2411.xlsx  lap-shear  lap_shear: matters\n"
    (row,) = reported.done("records", "list", "--json").json["reports"]
    assert (row["number"], row["report"], row["run"]["k"]) == (number, report.name, 1)
    assert "Everything holds together." in reported.done("records", "check").out
    assert reported.holds()["problems"] == []


def test_nothing_reported_yet(site: Site) -> None:
    assert site.done("records", "list").out == "No report yet.\n"
    assert site.holds()["entries"] == 0


def change_a_row(site: Site) -> None:
    path = site.root / "records/records.sqlite3"
    connection = sqlite3.connect(path)
    try:
        triggers = connection.execute("SELECT name, sql FROM sqlite_master WHERE type = 'trigger'").fetchall()
        for name, _ in triggers:
            connection.execute(f'DROP TRIGGER "{name}"')
        changed = connection.execute(
            "UPDATE ledger SET facts = replace(facts, 'lap-shear-2411', 'lap-shear-2410') "
            "WHERE kind = 'received' AND facts LIKE '%lap-shear-2411%'"
        )
        assert changed.rowcount == 1
        for _, sql in triggers:
            connection.execute(sql)
        connection.commit()
    finally:
        connection.close()


def change_an_archived_file(site: Site) -> None:
    (path,) = [p for p in (site.root / "archive").rglob("*") if p.is_file() and p.read_bytes()[:2] == b"PK"]
    path.chmod(0o600)
    path.write_bytes(path.read_bytes() + b" ")


def remove_an_archived_file(site: Site) -> None:
    (path,) = [p for p in (site.root / "archive").rglob("*") if p.is_file() and p.read_bytes()[:2] == b"PK"]
    path.unlink()


def change_the_report(site: Site) -> None:
    (path,) = site.reports
    path.chmod(0o600)
    path.write_bytes(path.read_bytes()[:-1] + b" ")


def remove_the_report(site: Site) -> None:
    site.reports[0].unlink()


@pytest.mark.parametrize(
    "change",
    [
        change_a_row,
        change_an_archived_file,
        remove_an_archived_file,
        change_the_report,
        remove_the_report,
    ],
)
def test_records_check_finds(change: object, reported: Site) -> None:
    assert callable(change)
    change(reported)
    ran = reported.run("records", "check")
    assert ran.code == 1
    assert re.search(r"\d+ problems? found\.", ran.out)
    as_json = reported.run("records", "check", "--json")
    assert as_json.code == 1
    document = json.loads(as_json.out)
    assert document["ok"] is False
    assert document["problems"]
    for problem in document["problems"]:
        assert problem in ran.out
