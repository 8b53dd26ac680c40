"""Measurements, plans and contexts made by hand for the tests of the analysis."""

from __future__ import annotations

import functools
import json
import math
from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path
from typing import Any

from qcreport.analysis import Context, Result, analyse
from qcreport.analysis.context import Laboratory
from qcreport.analysis.result import CharacteristicResult, PairResult
from qcreport.measurements import CellRef, Censoring, Measurement, MeasurementSet
from qcreport.plan import ComparisonPlan, parse_plan
from qcreport.rules import RulesTable, parse_rules
from qcreport.settings.shipped import shipped_folder

REFERENCE_DATA = Path(__file__).resolve().parents[2] / "reference" / "data"
DEFAULT = "default"
TEXTBOOK = "textbook"

CONTEXT = Context(
    report_number="2026-0042",
    revision=1,
    made_at="2026-12-01T06:12:00Z",
    time_zone="Europe/Berlin",
    language="en",
    page_size="A4",
    laboratory=Laboratory(name="Lab", address="Street 1, Town", place_of_work="", customer=""),
    export_name="lap-shear-2403.xlsx",
    export_sha256="a" * 64,
    received_at="2026-12-01T06:11:00Z",
    plan_name="made-by-hand",
    plan_sha256="b" * 64,
    layout_sha256="c" * 64,
    rules_sha256="d" * 64,
    templates=(("style.css", "e" * 64),),
    templates_changed=(),
    run_k=2,
    run_n=2,
    run_reason="Margin corrected",
    ledger_sequence=7,
    ledger_hash="f" * 64,
    seal_subject="Lab service",
    seal_fingerprint_sha256="0" * 64,
    pades_level="B-B",
    demonstration=False,
    software_version="0.1.0",
)

Values = Sequence[float | str | None]


@functools.cache
def rules(name: str = DEFAULT) -> RulesTable:
    """Return a shipped decision table."""
    path = shipped_folder("config") / "rules" / f"{name}.toml"
    return parse_rules(path.read_bytes(), path.name)


def plan(
    *,
    comparison: str = "",
    characteristic: str = "",
    top: str = "",
    names: Sequence[str] = ("strength",),
) -> ComparisonPlan:
    """Return a plan with these lines added to its tables."""
    entries = "".join(f'[[characteristic]]\nname = "{n}"\nunit = "u"\n{characteristic}\n' for n in names)
    text = (
        'name = "made-by-hand"\ntitle = "Made by hand"\nexports = ["*.xlsx"]\nlayout = "rig"\n'
        f"{top}\n[comparison]\n{comparison}\n{entries}"
    )
    return parse_plan(text.encode(), "made-by-hand.toml")


def measurement(
    value: float | str | None, *, batch: str, row: int, column: int = 2, **more: Any
) -> Measurement:
    """Return a reading; a text such as `<0.5` or `nd` is censored, None is missing."""
    censored, number = None, value
    if isinstance(value, str):
        sign = value.rstrip("0123456789.")
        censored = Censoring(sign)
        number = float(value[len(sign) :]) if value != "nd" else None
    fields: dict[str, Any] = {
        "characteristic": "strength",
        "batch": batch,
        "line": None,
        "sample": None,
        "reading": None,
        "value": None if number is None else float(number),
        "text": "" if value is None else str(value),
        "decimals": 2,
        "unit": "u",
        "censored": censored,
        "status": None,
        "time": None,
        "cell": CellRef(sheet="Results", row=row, column=column),
    }
    return Measurement(**(fields | more))


def export(measurements: Iterable[Measurement]) -> MeasurementSet:
    """Return an export that was read without notices."""
    return MeasurementSet(
        export_name="lap-shear-2403.xlsx",
        export_sha256="a" * 64,
        layout_name="rig",
        measurements=tuple(measurements),
    )


def of_groups(groups: Mapping[str, Values], **more: Any) -> MeasurementSet:
    """Return an export with one cell a value, group below group in column B."""
    pairs = [(label, value) for label, values in groups.items() for value in values]
    return export(
        measurement(v, batch=label, row=row, **more) for row, (label, v) in enumerate(pairs, start=2)
    )


def run(
    data: MeasurementSet | Mapping[str, Values],
    asked: ComparisonPlan | None = None,
    table: RulesTable | None = None,
) -> Result:
    """Return the analysis of an export, or of groups of values."""
    measured = data if isinstance(data, MeasurementSet) else of_groups(data)
    return analyse(measured, asked or plan(), table or rules(), CONTEXT)


def only(
    data: MeasurementSet | Mapping[str, Values],
    asked: ComparisonPlan | None = None,
    table: RulesTable | None = None,
) -> CharacteristicResult:
    """Return the result of the only characteristic."""
    (found,) = run(data, asked, table).characteristics
    return found


def pair_of(result: CharacteristicResult, first: str, second: str) -> PairResult:
    """Return one pair."""
    return next(p for p in result.pairs if (p.first, p.second) == (first, second))


def reference_data(name: str) -> dict[str, Any]:
    """Return a file of published data with results in high precision."""
    document: dict[str, Any] = json.loads((REFERENCE_DATA / f"{name}.json").read_text(encoding="utf-8"))
    return document


def values_of(document: Mapping[str, Any]) -> dict[str, list[float]]:
    """Return its groups, in its order."""
    return {str(g["label"]): [float(v) for v in g["values"]] for g in document["groups"]}


def digits(value: float, expected: float) -> float:
    """Return how many significant digits agree (16 where all do)."""
    error = abs(value - expected) / abs(expected)
    return 16.0 if error == 0.0 else -math.log10(error)
