"""The run key: every input counts, and nothing else."""

from __future__ import annotations

from dataclasses import replace

import pytest

from qcreport.records.run import RunInputs, inputs_from_json, run_key

INPUTS = RunInputs(
    export_sha256="a" * 64,
    plan_sha256="b" * 64,
    layout_sha256="c" * 64,
    rules_sha256="d" * 64,
    templates=(("page.html", "e" * 64), ("style.css", "f" * 64)),
)


@pytest.mark.parametrize(
    "change",
    [
        {"export_sha256": "0" * 64},
        {"plan_sha256": "0" * 64},
        {"layout_sha256": "0" * 64},
        {"rules_sha256": "0" * 64},
        {"templates": (("page.html", "e" * 64),)},
        {"templates": (("page.html", "f" * 64), ("style.css", "e" * 64))},
        {"left_out": ("Results!C5",)},
        {"plan_sha256": "c" * 64, "layout_sha256": "b" * 64},
    ],
)
def test_every_input_counts(change: dict[str, object]) -> None:
    assert run_key(replace(INPUTS, **change)) != run_key(INPUTS)  # type: ignore[arg-type]


def test_the_order_of_templates_and_cells_does_not_count() -> None:
    turned = replace(INPUTS, templates=INPUTS.templates[::-1])
    assert run_key(turned) == run_key(INPUTS)
    assert run_key(replace(INPUTS, left_out=("A1", "B2"))) == run_key(replace(INPUTS, left_out=("B2", "A1")))


@pytest.mark.parametrize("left_out", [(), ("Results!C5",)])
def test_inputs_come_back_from_their_document(left_out: tuple[str, ...]) -> None:
    inputs = replace(INPUTS, left_out=left_out)
    assert inputs_from_json(inputs.to_json()) == inputs


def test_every_digest_is_named_once() -> None:
    assert replace(INPUTS, rules_sha256="a" * 64).digests() == tuple(c * 64 for c in "abcef")
