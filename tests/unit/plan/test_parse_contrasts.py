"""Contrasts and a known scatter in the plan's text."""

from __future__ import annotations

import pytest

from qcreport.errors import ConfigError
from qcreport.plan import ComparisonPlan, parse_plan
from qcreport.plan.model import ContrastPlan

TOP = """name = "p"
title = "P"
exports = ["*.xlsx"]
layout = "rig"
[[characteristic]]
name = "shear"
unit = "MPa"
"""


def parse(text: str) -> ComparisonPlan:
    return parse_plan((TOP + text).encode(), "plan.toml")


def faults(text: str) -> list[str]:
    with pytest.raises(ConfigError) as caught:
        parse(text)
    return [str(fault) for fault in caught.value.faults]


def test_without_any() -> None:
    assert parse("").contrasts == ()
    assert parse("").characteristics[0].scatter is None


def test_contrasts_as_written() -> None:
    text = """[[contrast]]
name = "new against old"
weights = { "LA-2411" = 2, "LB-2411" = -1, "LC-2411" = -1.0, "LD-2411" = 0 }
[[contrast]]
name = "first against last"
weights = { A = 0.1, B = 0.2, C = -0.3 }
"""
    first, second = parse(text).contrasts
    assert first == ContrastPlan(
        name="new against old", weights=(("LA-2411", 2.0), ("LB-2411", -1.0), ("LC-2411", -1.0))
    )
    assert second.weights == (("A", 0.1), ("B", 0.2), ("C", -0.3))


@pytest.mark.parametrize(
    ("weights", "said"),
    [
        ("{ A = 1, B = -0.9 }", "must sum to 0, found a sum of 0.1"),
        ("{ A = 0.333, B = 0.333, C = -0.667 }", "must sum to 0, found a sum of -0.001"),
        ("{}", "name the groups with their weights"),
        ("{ A = 0 }", "name the groups with their weights"),
        ('{ A = "one", B = -1 }', "must be a number, found 'one'"),
        ("{ A = inf, B = -1 }", "must be a finite number"),
        ("3", "must be a table [weights]"),
    ],
)
def test_what_is_no_contrast(weights: str, said: str) -> None:
    found = faults(f'[[contrast]]\nname = "c"\nweights = {weights}\n')
    assert said in found[0]
    assert len(found) == 1
    assert found[0].startswith("plan.toml, line 10, contrast[1].weights")


def test_names_and_weights_are_needed_once() -> None:
    twice = '[[contrast]]\nname = "c"\nweights = { A = 1, B = -1 }\n' * 2
    assert any("'c' is named twice" in fault for fault in faults(twice))
    assert any('"weights" is missing' in fault for fault in faults('[[contrast]]\nname = "c"\n'))
    assert any(
        '"name" is missing' in fault for fault in faults("[[contrast]]\nweights = { A = 1, B = -1 }\n")
    )


def test_a_known_scatter() -> None:
    assert parse("scatter = 0.8\n").characteristics[0].scatter == 0.8
    for wrong in ("0", "-1", "inf", '"0.8"', "true"):
        (fault,) = faults(f"scatter = {wrong}\n")
        assert "scatter" in fault
