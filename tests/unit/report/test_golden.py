"""The model and its HTML as text. Renew with GOLDEN=renew, then read the difference before committing it."""

from __future__ import annotations

import dataclasses
import os
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from qcreport.analysis.result import CharacteristicResult
from qcreport.report.build import build_model
from qcreport.report.html import render_html
from qcreport.report.shapes import Drawing
from qcreport.report.templates import load_templates

from .samples import (
    VISCOSITY,
    VISCOSITY_AS,
    characteristic,
    context,
    left_out_group,
    measurements,
    plan_of,
    result_of,
    with_changed_answers,
)

GOLDEN = Path(__file__).parents[2] / "golden"
CASES: dict[str, tuple[CharacteristicResult, ...]] = {
    "four-batches": (characteristic(flagged=True),),
    "with-reference": (characteristic(procedure="dunnett_unequal", reference="LB-2403"),),
    "nothing-compared": (left_out_group(characteristic()),),
    "two-characteristics": (
        characteristic(VISCOSITY, **VISCOSITY_AS),  # type: ignore[arg-type]
        with_changed_answers(characteristic(name="peel", title="T-peel", column=4, margin=(None, None))),
    ),
}


def _lines(value: Any, indent: str = "") -> Iterator[str]:
    """Yield a model as indented text; drawings by what they say."""
    for field in dataclasses.fields(value):
        found = getattr(value, field.name)
        if isinstance(found, Drawing):
            yield f"{indent}{field.name}: drawing: {found.title}"
        elif dataclasses.is_dataclass(found):
            yield f"{indent}{field.name}:"
            yield from _lines(found, indent + "  ")
        elif isinstance(found, tuple):
            yield f"{indent}{field.name}:"
            for item in found:
                if dataclasses.is_dataclass(item):
                    yield f"{indent}- {type(item).__name__}"
                    yield from _lines(item, indent + "  ")
                else:
                    yield f"{indent}- {' | '.join(item) if isinstance(item, tuple) else item}"
        else:
            yield f"{indent}{field.name}: {found}"


def _compare(name: str, text: str) -> None:
    path = GOLDEN / name
    if os.environ.get("GOLDEN") == "renew":
        path.write_text(text, encoding="utf-8")
    assert text == path.read_text(encoding="utf-8")


@pytest.mark.parametrize("case", sorted(CASES))
def test_the_model_as_text(case: str) -> None:
    results = CASES[case]
    model = build_model(result_of(*results), measurements(results), plan_of(*results), context())
    _compare(f"report-{case}.txt", "\n".join(_lines(model)) + "\n")


def test_the_pages_as_html() -> None:
    results = CASES["four-batches"]
    model = build_model(result_of(*results), measurements(results), plan_of(*results), context())
    _compare("report-four-batches.html", render_html(model, load_templates({})))
