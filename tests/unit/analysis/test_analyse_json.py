"""The result as a document: full precision, null never NaN, the same bytes twice."""

from __future__ import annotations

import importlib.resources
import json
import subprocess
import sys
from pathlib import Path
from typing import Any

import jsonschema
import numpy
import pytest
import scipy
from analysis_cases import CONTEXT, of_groups, only, plan, run

import qcreport
from qcreport.canonical import to_readable_json_bytes

GROUPS = {
    "A": [5.1, 5.4, 4.8, 5.0],
    "B": [6.0, 6.4, 5.9, 6.2, 9.0],
    "C": [5.0, 5.0, 5.0, 5.0],
    "D": [1.0],
}
MARGIN = "margin = 0.5\nlower_limit = 4.0"


def document(groups: dict[str, Any] | None = None, comparison: str = "") -> dict[str, Any]:
    result = run(groups or GROUPS, plan(comparison=comparison, characteristic=MARGIN))
    found: dict[str, Any] = json.loads(to_readable_json_bytes(result.to_json()))
    return found


def test_what_the_context_says_is_in_it() -> None:
    found = document()
    assert found["schema"] == "qcreport/result/1"
    assert found["export"] == {"name": CONTEXT.export_name, "sha256": CONTEXT.export_sha256}
    assert found["plan"] == {"name": "made-by-hand", "sha256": CONTEXT.plan_sha256}
    assert found["run"] == {"k": 2, "n": 2}
    assert found["versions"] == {
        "numpy": numpy.__version__,
        "qcreport": qcreport.__version__,
        "scipy": scipy.__version__,
    }


def test_every_number_is_the_one_computed() -> None:
    result = only(GROUPS, plan(characteristic=MARGIN))
    (found,) = document()["characteristics"]
    for pair, written in zip(result.pairs, found["pairs"], strict=True):
        for key in ("difference", "se", "statistic", "critical_value", "p", "lower", "upper", "detectable"):
            assert written[key] == getattr(pair, key), key
    for group, written in zip(result.groups, found["groups"], strict=True):
        assert (written["mean"], written["sd"]) == (group.mean, group.sd)
    assert found["margin"] == [-0.5, 0.5]
    assert (found["lower_limit"], found["upper_limit"]) == (4.0, None)
    assert found["components"] is None


def test_what_is_undefined_is_null() -> None:
    (found,) = document()["characteristics"]
    checks = {c["name"]: c for c in found["checks"]}
    assert checks["spread_ratio_limit"]["statistic"] is None  # infinite: a group without spread
    assert checks["bartlett"]["statistic"] is None
    assert checks["bartlett"]["note"]
    assert [p["df"] for p in found["pairs"]] == [None] * 3  # the chosen procedure has none of its own
    assert (found["critical_value"], found["hsd"]) == (None, None)
    assert found["groups"][3]["sd"] is None


@pytest.mark.parametrize("margin", ["", MARGIN])
def test_ranks_of_limits_are_a_document_too(margin: str) -> None:
    groups = {"A": [5.1, 5.4, "<0.5", 5.0], "B": [6.0, 6.4, 5.9, 6.2], "C": ["<0.5", "<0.5", 5.2, 5.3]}
    result = run(groups, plan(characteristic=margin))
    found = json.loads(to_readable_json_bytes(result.to_json()))
    text = (importlib.resources.files("qcreport") / "schemas" / "result.schema.json").read_text("utf-8")
    jsonschema.Draft202012Validator(json.loads(text)).validate(found)
    (characteristic,) = found["characteristics"]
    assert characteristic["procedure"] == "steel_dwass"
    assert characteristic["overall"]["name"] == "kruskal_wallis"
    assert [p["lower"] for p in characteristic["pairs"]] == [None] * 3
    assert [p["upper"] for p in characteristic["pairs"]] == [None] * 3
    assert {p["answer"] for p in characteristic["pairs"]} == {"not_settled" if margin else "not_shown"}
    assert [g["mean"] for g in characteristic["groups"]] == [None, 6.125, None]
    assert "censored_values_tied" in [n["code"] for n in found["notices"]]


def test_a_common_critical_value_and_hsd_are_written() -> None:
    groups = {label: GROUPS[label][:4] for label in "AB"}
    (found,) = document(groups, 'procedure = "tukey_hsd"')["characteristics"]
    (pair,) = found["pairs"]
    assert found["critical_value"] == pair["critical_value"]
    assert found["hsd"] == pytest.approx(pair["critical_value"] * pair["se"], rel=1e-14)
    assert pair["upper"] - pair["difference"] == pytest.approx(found["hsd"], rel=1e-12)
    assert found["overall"]["ms_within"] == found["analysis_of_variance"]["ms_within"]


def test_facts_are_written_as_the_table_sees_them() -> None:
    (found,) = document()["characteristics"]
    assert found["facts"] == {
        "comparison": "every pair",
        "groups": 3,
        "smallest_n": 4,
        "sizes": "unequal",
        "variation": "some",
        "censored": "none",
        "spread": found["facts"]["spread"],
        "scale": "as measured",
    }
    assert [f["fact"] for f in found["facts_evidence"]] == list(found["facts"])
    assert all(f["source"] for f in found["facts_evidence"])


def test_the_same_inputs_give_the_same_bytes() -> None:
    first, second = (
        to_readable_json_bytes(run(of_groups(GROUPS), plan(characteristic=MARGIN)).to_json())
        for _ in range(2)
    )
    assert first == second


def test_another_process_gives_the_same_bytes() -> None:
    code = (
        "import sys; sys.path.insert(0, sys.argv[1])\n"
        "from analysis_cases import of_groups, plan, run\n"
        "from test_analyse_json import GROUPS, MARGIN\n"
        "from qcreport.canonical import to_readable_json_bytes\n"
        "result = run(of_groups(GROUPS), plan(characteristic=MARGIN))\n"
        "sys.stdout.buffer.write(to_readable_json_bytes(result.to_json()))\n"
    )
    here = Path(__file__).resolve().parent
    command = [sys.executable, "-c", code, str(here)]
    done = subprocess.run(
        command,
        capture_output=True,
        check=True,
        timeout=120,
        env={"PYTHONHASHSEED": "77"},
        cwd=here.parents[2],
    )
    assert done.stdout == to_readable_json_bytes(run(GROUPS, plan(characteristic=MARGIN)).to_json())
