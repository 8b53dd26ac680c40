"""`plan size`: how many results a group are needed."""

from __future__ import annotations

import importlib.resources
import json
import math
from pathlib import Path
from typing import Any

import jsonschema
import pytest
from scipy import stats

from qcreport.cli import main
from qcreport.settings.shipped import shipped_folder

PLAN = """name = "shear"
title = "Shear"
exports = ["shear*.xlsx"]
layout = "shear-rig"
[comparison]
{comparison}
[[characteristic]]
name = "lap_shear"
unit = "MPa"
{characteristic}
"""


@pytest.fixture
def site(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> Path:
    words = ("--name", "L", "--address", "A", "--time-zone", "Europe/Berlin", "--language", "en")
    assert main(["site", "new", str(tmp_path / "site"), *words]) == 0
    layout = (shipped_folder("config/layouts") / "shear-rig.toml").read_bytes()
    (tmp_path / "site/config/layouts/shear-rig.toml").write_bytes(layout)
    capsys.readouterr()
    return tmp_path / "site"


def planned(site: Path, comparison: str = "", characteristic: str = "margin = 1.5") -> list[str]:
    text = PLAN.format(comparison=comparison, characteristic=characteristic)
    (site / "config/plans/shear.toml").write_text(text, encoding="utf-8")
    return ["--site", str(site), "--plan", "shear"]


def sized(capsys: pytest.CaptureFixture[str], *words: str) -> dict[str, Any]:
    assert main(["plan", "size", "--json", *words]) == 0
    document: dict[str, Any] = json.loads(capsys.readouterr().out)
    schema = importlib.resources.files("qcreport") / "schemas" / "plan_size.schema.json"
    jsonschema.Draft202012Validator(json.loads(schema.read_text("utf-8"))).validate(document)
    return document


def refused(capsys: pytest.CaptureFixture[str], *words: str) -> str:
    assert main(["plan", "size", *words]) == 2
    printed = capsys.readouterr()
    assert printed.out == ""
    return printed.err


def test_two_groups_without_a_plan(capsys: pytest.CaptureFixture[str]) -> None:
    """By scipy's noncentral t: 63 a group see half a standard deviation with power .795, 64 with .801."""
    found = sized(capsys, "--difference", "1", "--sd", "2")["to_detect"]
    assert (found["n"], found["procedure"]) == (64, "games_howell")
    nc = found["detectable"] / (2.0 * math.sqrt(2.0 / 64))
    assert stats.nct.sf(stats.t.isf(0.025, 126), 126, nc) == pytest.approx(0.80, abs=1e-9)
    assert found["half_width"] == pytest.approx(stats.t.isf(0.025, 126) * 2.0 * math.sqrt(2.0 / 64))


def test_it_is_told_in_words(capsys: pytest.CaptureFixture[str]) -> None:
    words = ["--difference", "1", "--sd", "2", "--margin", "1.2", "--procedure", "tukey_hsd", "--groups", "4"]
    assert main(["plan", "size", *words]) == 0
    lines = capsys.readouterr().out.splitlines()
    assert lines[0] == "4 groups, every pair, tukey_hsd, alpha 0.05, standard deviation of a result 2"
    assert lines[1] == "To see a true difference of 1 with power 0.8: 94 results a group."
    critical = stats.studentized_range.isf(0.05, 4, 4 * 93) / math.sqrt(2.0)
    assert stats.nct.sf(critical, 4 * 93, 0.5 * math.sqrt(94 / 2.0)) == pytest.approx(0.8010, abs=1e-4)
    assert lines[3].startswith("For intervals narrower than the margin of 1.2: ")
    assert lines[-1].startswith("Assumes independent")


def test_the_rules_choose_by_the_very_size(capsys: pytest.CaptureFixture[str]) -> None:
    """Below ten results a group the shipped table does not use Games–Howell."""
    found = sized(capsys, "--sd", "0.8", "--margin", "1.5", "--groups", "5")
    assert found["difference"] == found["margin"] == 1.5
    assert (found["to_settle"]["n"], found["to_settle"]["procedure"]) == (7, "dunnett_t3")
    assert found["to_settle"]["half_width"] < 1.5
    assert found["to_detect"]["procedure"] == "games_howell"
    assert found["to_detect"]["detectable"] <= 1.5
    assert sized(capsys, "--sd", "1", "--difference", "9", "--groups", "5")["to_detect"]["procedure"] == (
        "dunnett_c"
    )


def test_margin_alpha_reference_and_scatter_come_from_the_plan(
    site: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    comparison = 'reference = "R"\nprocedure = "dunnett"\nalpha = 0.01\nsmallest_group = 4'
    entry = 'margin_below = 1.5\nmargin_above = 2\ndirection = "lower_matters"\nscatter = 0.8'
    found = sized(capsys, *planned(site, comparison, entry), "--groups", "3")
    assert (found["alpha"], found["margin"], found["difference"], found["sd"]) == (0.01, 1.5, 1.5, 0.8)
    assert (found["comparison"], found["two_sided"], found["unit"]) == (
        "each with the reference",
        False,
        "MPa",
    )
    n = found["to_detect"]["n"]
    one_of_two = stats.t.isf(0.005, 3 * (n - 1))  # Bonferroni bounds what Dunnett asks for
    assert stats.t.isf(0.01, 3 * (n - 1)) < found["to_detect"]["critical_value"] < one_of_two
    given = sized(
        capsys, *planned(site, comparison, entry), "--groups", "3", "--alpha", "0.05", "--sd", "0.5"
    )
    assert (given["alpha"], given["sd"], given["to_detect"]["n"]) == (0.05, 0.5, 4)
    assert main(["plan", "size", *planned(site, comparison, entry)]) == 0
    assert "one direction, dunnett, alpha 0.01" in capsys.readouterr().out


def test_a_declaration_and_a_shared_alpha(site: Path, capsys: pytest.CaptureFixture[str]) -> None:
    declared = '[spread]\nsimilar = {}\nby = "Q"\non = 2026-01-01\nreason = "r"'
    shared = 'family = "export"\n'
    found = sized(capsys, *planned(site, shared + declared.format("true")), "--sd", "1", "--groups", "5")
    assert (found["alpha"], found["to_detect"]["procedure"]) == (0.05, "tukey_hsd")
    found = sized(capsys, *planned(site, declared.format("false")), "--sd", "1", "--groups", "5")
    assert found["to_detect"]["procedure"] == "games_howell"


def test_on_the_log_scale_differences_are_ratios(site: Path, capsys: pytest.CaptureFixture[str]) -> None:
    words = planned(site, 'scale = "log"\nprocedure = "tukey_hsd"', "margin = 1.25")
    found = sized(capsys, *words, "--sd", "0.1", "--difference", "0.8")
    assert found["difference"] == found["margin"] == pytest.approx(math.log(1.25))
    assert main(["plan", "size", *words, "--sd", "0.1"]) == 0
    text = capsys.readouterr().out
    assert "standard deviation of a result 0.1 (of natural logarithms)" in text
    assert "To see a true difference of 1.25 with power 0.8" in text
    assert "reaches a factor of 1." in text
    assert "1 is none" in refused(capsys, *words, "--sd", "0.1", "--difference", "1")


def test_a_size_beyond_all_reason_is_said(capsys: pytest.CaptureFixture[str]) -> None:
    assert sized(capsys, "--difference", "1e-3", "--sd", "1")["to_detect"] is None
    assert main(["plan", "size", "--difference", "1e-3", "--sd", "1"]) == 0
    assert "more than 100,000 results a group." in capsys.readouterr().out


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (["--sd", "1"], "Say what is to be seen"),
        (["--difference", "1"], "Say how results scatter"),
        (["--difference", "1", "--sd", "0"], "--sd must lie between 0 and inf, found 0."),
        (["--difference", "nan", "--sd", "1"], "--difference must lie between"),
        (["--difference", "1", "--sd", "inf"], "--sd must lie between"),
        (["--difference", "1", "--sd", "1", "--alpha", "0.5"], "--alpha must lie between 0 and 0.5"),
        (["--difference", "1", "--sd", "1", "--power", "1"], "--power must lie between"),
        (["--difference", "1", "--sd", "1", "--groups", "1"], "--groups must lie between 2 and 1000"),
        (["--difference", "1", "--sd", "1", "--procedure", "steel"], "No size can be planned for steel"),
        (["--difference", "1", "--sd", "1", "--characteristic", "x"], "name the plan too"),
    ],
)
def test_what_is_refused(words: list[str], said: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert said in refused(capsys, *words)


def test_one_of_several_characteristics_is_named(site: Path, capsys: pytest.CaptureFixture[str]) -> None:
    words = [*planned(site), "--sd", "1", "--characteristic"]
    assert "one of lap_shear" in refused(capsys, *words, "peel")
    assert sized(capsys, *words, "lap_shear")["characteristic"] == "lap_shear"
