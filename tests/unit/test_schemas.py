"""The published forms of result, context and error: real documents conform, spoiled ones do not."""

from __future__ import annotations

import copy
import functools
import importlib.resources
import json
from collections.abc import Callable
from typing import Any

import jsonschema
import pytest

from qcreport.analysis import Context, analyse
from qcreport.analysis.context import Laboratory
from qcreport.canonical import to_readable_json_bytes
from qcreport.cli.run import error_json
from qcreport.errors import ConfigError, EnvironmentFailedError, Fault, UsageError
from qcreport.measurements import CellRef, Measurement, MeasurementSet, Notice
from qcreport.plan import parse_plan
from qcreport.rules import RulesTable, parse_rules
from qcreport.settings.shipped import shipped_folder

Json = dict[str, Any]
Spoil = Callable[[Json], object]

CONTEXT = Context(
    report_number="2026-0042",
    revision=1,
    made_at="2026-12-01T06:12:00Z",
    time_zone="Europe/Berlin",
    language="en",
    page_size="A4",
    laboratory=Laboratory(name="Lab", address="Street 1", place_of_work="", customer=""),
    export_name="export.xlsx",
    export_sha256="a" * 64,
    received_at="2026-12-01T06:11:00Z",
    plan_name="made-by-hand",
    plan_sha256="b" * 64,
    layout_sha256="c" * 64,
    rules_sha256="d" * 64,
    templates=(("style.css", "e" * 64),),
    templates_changed=("style.css",),
    run_k=1,
    run_n=1,
    run_reason="",
    ledger_sequence=0,
    ledger_hash="",
    seal_subject="Lab service",
    seal_fingerprint_sha256="0" * 64,
    pades_level="B-B",
    demonstration=True,
    software_version="0.1.0",
)


def schema(name: str) -> Json:
    text = (importlib.resources.files("qcreport") / "schemas" / f"{name}.schema.json").read_text("utf-8")
    document: Json = json.loads(text)
    return document


def validator(name: str) -> jsonschema.Draft202012Validator:
    return jsonschema.Draft202012Validator(schema(name))


@functools.cache
def default_rules() -> RulesTable:
    return parse_rules((shipped_folder("config") / "rules" / "default.toml").read_bytes(), "default.toml")


@functools.cache
def result_bytes(case: str) -> bytes:
    """Return the JSON of an analysis as a report carries it."""
    groups, comparison, characteristic = RESULTS[case]
    plan = parse_plan(
        f'name = "p"\ntitle = "P"\nexports = ["*"]\nlayout = "l"\n[comparison]\n{comparison}\n'
        f'[[characteristic]]\nname = "c"\nunit = "u"\n{characteristic}\n'.encode(),
        "p.toml",
    )
    pairs = [(label, value) for label, values in groups.items() for value in values]
    measured = tuple(
        Measurement(
            characteristic="c", batch=label, line=None, sample=None, reading=None, value=value,
            text=str(value), decimals=1, unit="u", censored=None, status=None, time=None,
            cell=CellRef(sheet="Data", row=row, column=2),
        )
        for row, (label, value) in enumerate(pairs, start=2)
    )  # fmt: skip
    data = MeasurementSet(
        export_name="export.xlsx",
        export_sha256="a" * 64,
        layout_name="l",
        measurements=measured,
        notices=(Notice(code="decimal_comma", cells=("Data!B2",), text="Decimal commas."),),
    )
    return to_readable_json_bytes(analyse(data, plan, default_rules(), CONTEXT).to_json())


def result_of(case: str) -> Json:
    document: Json = json.loads(result_bytes(case))
    return document


PLAIN = {"A": [5.1, 5.4, 4.8, 5.0], "B": [6.0, 6.4, 5.9, 6.2, 9.0], "C": [5.5, 5.0, 5.2, 5.3]}
RESULTS = {
    "plain": (PLAIN, "", "margin = 0.5"),
    "no margin": (PLAIN, "", ""),
    "pooled": ({k: v[:4] for k, v in PLAIN.items()}, 'procedure = "tukey_hsd"', "margin_below = 0.5"),
    "one-sided": (PLAIN, 'reference = "A"', 'direction = "lower_matters"'),
    "log": (PLAIN, 'scale = "log"\nprocedure = "games_howell"', 'margin = "5 %"'),
    "one group": ({"A": [1.0, 2.0, 3.0]}, "", "margin = 1"),
    "a group too small": (PLAIN | {"D": [1.0]}, "", "margin = 1"),
    "no variation": ({"A": [1.0, 1.0, 1.0], "B": [1.0, 1.0, 1.0]}, "", ""),
    "a group without spread": (PLAIN | {"D": [1.0, 1.0, 1.0]}, "", "margin = 1"),
    "full": (
        {"A": [5.1, 5.4, 4.8, 5.0], "B": [6.0, 6.4, 5.9, 6.2, 6.1, 30.0], "D": [1.0]},
        "",
        "margin = 0.5",
    ),
    "out of range": ({"A": [1e200, 2e200, 3e200], "B": [1.0, 2.0, 3.0]}, "", ""),
}


@pytest.mark.parametrize("name", ["result", "context", "error"])
def test_the_schema_itself_is_sound(name: str) -> None:
    jsonschema.Draft202012Validator.check_schema(schema(name))
    assert schema(name)["$schema"] == "https://json-schema.org/draft/2020-12/schema"


@pytest.mark.parametrize("case", RESULTS)
def test_real_results_conform(case: str) -> None:
    validator("result").validate(result_of(case))


def test_the_context_conforms() -> None:
    validator("context").validate(json.loads(to_readable_json_bytes(CONTEXT.to_json())))


@pytest.mark.parametrize(
    "error",
    [
        ConfigError((Fault(text="unknown key", file="site.toml", line=3, key="lab.nmae"),)),
        ConfigError((Fault(text="not UTF-8 text", file="site.toml"),)),
        UsageError("No site here"),
        EnvironmentFailedError("disk full", file="records"),
    ],
)
def test_errors_conform(error: ConfigError | UsageError | EnvironmentFailedError) -> None:
    validator("error").validate(json.loads(json.dumps(error_json(error))))


def test_added_keys_are_no_fault() -> None:
    document = result_of("plain")
    document["added"] = 1
    document["characteristics"][0]["added"] = {"x": None}
    document["characteristics"][0]["pairs"][0]["added"] = []
    validator("result").validate(document)
    validator("context").validate(CONTEXT.to_json() | {"added": 1})
    validator("error").validate(
        {"error": {"kind": "usage", "text": "t", "file": None, "key": None, "line": 3}}
    )


CONTRACT = {
    (): ["schema", "export", "plan", "run", "notices", "characteristics", "versions"],
    ("export",): ["name", "sha256"],
    ("plan",): ["name", "sha256"],
    ("run",): ["k", "n"],
    ("notices", 0): ["code", "cells", "text"],
    ("characteristics", 0): [
        "name", "unit", "alpha", "margin", "scale", "direction", "independent_unit", "groups", "not_compared",
        "checks", "facts", "rule", "trace", "overall", "procedure", "critical_value", "hsd",
        "all_within_margin", "pairs", "components", "sensitivity", "flagged", "answer",
    ],
    ("characteristics", 0, "groups", 0): [
        "label", "n", "n_readings", "mean", "sd", "median", "censored", "cells",
    ],
    ("characteristics", 0, "not_compared", 0): ["label", "n", "reason"],
    ("characteristics", 0, "checks", 0): ["name", "statistic", "df", "p"],
    ("characteristics", 0, "facts"): ["comparison", "sizes", "spread"],
    ("characteristics", 0, "rule"): ["table", "id", "reason", "source"],
    ("characteristics", 0, "overall"): ["name", "statistic", "df", "p", "ms_within"],
    ("characteristics", 0, "pairs", 0): [
        "first", "second", "difference", "se", "statistic", "df", "critical_value", "p", "lower", "upper",
        "detectable", "answer",
    ],
    ("characteristics", 0, "sensitivity"): ["procedure", "changed"],
    ("characteristics", 0, "flagged", 0): ["cell", "value", "test", "p"],
    ("versions",): ["qcreport", "numpy", "scipy"],
}  # fmt: skip


def at(document: Json, path: tuple[str | int, ...]) -> Any:
    found: Any = document
    for part in path:
        found = found[part]
    return found


@pytest.mark.parametrize(
    ("path", "key"),
    [(path, key) for path, keys in CONTRACT.items() for key in keys],
    ids=lambda value: ".".join(map(str, value)) if isinstance(value, tuple) else value,
)
def test_every_key_of_the_contract_is_there_and_asked_for(path: tuple[str | int, ...], key: str) -> None:
    document = result_of("full")
    assert key in at(document, path)
    validator("result").validate(document)
    del at(document, path)[key]
    assert not validator("result").is_valid(document)


def test_keys_stand_in_the_order_of_the_contract() -> None:
    document = result_of("full")
    for path, keys in CONTRACT.items():
        if path == ("versions",):
            continue
        present = [key for key in at(document, path) if key in keys]
        if path[-1:] == ("facts",):
            assert sorted(present) == sorted(keys)
        else:
            assert present == keys, path


@pytest.mark.parametrize(
    "spoil",
    [
        lambda d: d.update(schema="qcreport/result/2"),
        lambda d: d["export"].update(sha256="A" * 64),
        lambda d: d["export"].update(sha256="a" * 63),
        lambda d: d["run"].update(k=0),
        lambda d: d["run"].update(n="1"),
        lambda d: d["notices"][0].update(code="Decimal comma"),
        lambda d: d["notices"][0].update(cells="Data!B2"),
        lambda d: d["characteristics"].clear(),
        lambda d: d["versions"].update(numpy=2),
        lambda d: d["characteristics"][0].update(alpha=0.0),
        lambda d: d["characteristics"][0].update(margin=[-0.5]),
        lambda d: d["characteristics"][0].update(margin=[-0.5, 0.5, 1.0]),
        lambda d: d["characteristics"][0].update(margin=0.5),
        lambda d: d["characteristics"][0].update(scale="logarithmic"),
        lambda d: d["characteristics"][0].update(direction="lower"),
        lambda d: d["characteristics"][0].update(independent_unit="coupon"),
        lambda d: d["characteristics"][0].update(procedure="scheffe"),
        lambda d: d["characteristics"][0].update(answer="significant"),
        lambda d: d["characteristics"][0].update(trace=[]),
        lambda d: d["characteristics"][0].update(all_within_margin="yes"),
        lambda d: d["characteristics"][0]["groups"][0].update(n=0),
        lambda d: d["characteristics"][0]["groups"][0].update(n=4.5),
        lambda d: d["characteristics"][0]["groups"][0].update(mean="5.0"),
        lambda d: d["characteristics"][0]["groups"][0].update(sd=-1.0),
        lambda d: d["characteristics"][0]["facts"].update(spread="equal"),
        lambda d: d["characteristics"][0]["facts"].update(groups="2"),
        lambda d: d["characteristics"][0]["overall"].update(name="F"),
        lambda d: d["characteristics"][0]["pairs"][0].update(p=1.5),
        lambda d: d["characteristics"][0]["pairs"][0].update(p=None),
        lambda d: d["characteristics"][0]["pairs"][0].update(difference="1.0"),
        lambda d: d["characteristics"][0]["pairs"][0].update(df=0),
        lambda d: d["characteristics"][0]["pairs"][0].update(lower="-inf"),
        lambda d: d["characteristics"][0]["pairs"][0].update(answer="better"),
        lambda d: d["characteristics"][0]["pairs"][0].update(needed_n=7.5),
        lambda d: d["characteristics"][0]["sensitivity"].update(procedure="anova"),
        lambda d: d["characteristics"][0]["flagged"][0].update(value=None),
    ],
)
def test_a_spoiled_result_does_not_conform(spoil: Spoil) -> None:
    document = result_of("full")
    validator("result").validate(document)
    spoil(document)
    assert not validator("result").is_valid(document)


CONTEXT_KEYS = """schema report report.number report.revision report.made_at report.time_zone report.language
report.page_size laboratory laboratory.name laboratory.address laboratory.place_of_work laboratory.customer
export export.name export.sha256 export.received_at plan plan.name plan.sha256 layout layout.sha256 rules
rules.sha256 templates templates_changed run run.k run.n run.reason ledger_head ledger_head.sequence
ledger_head.hash seal seal.subject seal.fingerprint_sha256 seal.pades_level demonstration software_version"""


@pytest.mark.parametrize("path", [tuple(text.split(".")) for text in CONTEXT_KEYS.split()], ids=".".join)
def test_a_context_that_lacks_a_key_does_not_conform(path: tuple[str, ...]) -> None:
    document = copy.deepcopy(CONTEXT.to_json())
    del at(document, path[:-1])[path[-1]]
    assert not validator("context").is_valid(document)


@pytest.mark.parametrize(
    "spoil",
    [
        lambda d: d.update(schema="qcreport/context/2"),
        lambda d: d["report"].update(number="42"),
        lambda d: d["report"].update(made_at="2026-12-01 06:12"),
        lambda d: d["report"].update(page_size="A3"),
        lambda d: d["rules"].update(sha256=""),
        lambda d: d["templates"].update({"style.css": "unknown"}),
        lambda d: d["ledger_head"].update(sequence=-1),
        lambda d: d["seal"].update(pades_level="B"),
        lambda d: d.update(demonstration="false"),
    ],
)
def test_a_spoiled_context_does_not_conform(spoil: Spoil) -> None:
    document = copy.deepcopy(CONTEXT.to_json())
    spoil(document)
    assert not validator("context").is_valid(document)


@pytest.mark.parametrize(
    "document",
    [
        {},
        {"error": "text"},
        {"error": {"kind": "usage", "text": "t", "file": None}},
        {"error": {"kind": "Usage error", "text": "t", "file": None, "key": None}},
        {"error": {"kind": "usage", "text": "", "file": None, "key": None}},
        {"error": {"kind": "usage", "text": "t", "file": 3, "key": None}},
    ],
)
def test_a_spoiled_error_does_not_conform(document: Json) -> None:
    assert not validator("error").is_valid(document)
