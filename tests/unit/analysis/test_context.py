"""The context: read back exactly, spoiled documents refused."""

from __future__ import annotations

import copy
import json
from collections.abc import Callable
from typing import Any

import pytest
from analysis_cases import CONTEXT

from qcreport.analysis import context_from_json
from qcreport.canonical import to_readable_json_bytes


def test_it_comes_back_as_it_was_written() -> None:
    document = json.loads(to_readable_json_bytes(CONTEXT.to_json()))
    assert context_from_json(document) == CONTEXT
    assert context_from_json(document | {"added": 1}) == CONTEXT


def test_templates_are_sorted_by_name() -> None:
    document = CONTEXT.to_json() | {"templates": {"b.css": "1" * 64, "a.html": "2" * 64}}
    assert context_from_json(document).templates == (("a.html", "2" * 64), ("b.css", "1" * 64))


def test_another_schema_is_refused() -> None:
    with pytest.raises(ValueError, match="expected 'qcreport/context/1'"):
        context_from_json(CONTEXT.to_json() | {"schema": "qcreport/context/2"})
    with pytest.raises(ValueError, match="schema None"):
        context_from_json({})


PARTS = (
    "report",
    "laboratory",
    "export",
    "plan",
    "layout",
    "rules",
    "templates",
    "templates_changed",
    "run",
    "ledger_head",
    "seal",
    "demonstration",
    "software_version",
)


@pytest.mark.parametrize("key", PARTS)
def test_a_missing_part_is_refused(key: str) -> None:
    document = CONTEXT.to_json()
    del document[key]
    with pytest.raises(ValueError, match="lacks or spoils"):
        context_from_json(document)


@pytest.mark.parametrize(
    "spoil",
    [
        lambda d: d.update(report=None),
        lambda d: d.update(report=[]),
        lambda d: d.update(templates=["a"]),
        lambda d: d.update(templates_changed=None),
        lambda d: d["run"].update(k=None),
        lambda d: d["run"].update(k="two"),
        lambda d: d["run"].update(k=float("inf")),
        lambda d: d["run"].update(k=float("nan")),
        lambda d: d["ledger_head"].update(sequence={}),
    ],
)
def test_a_spoiled_part_is_refused(spoil: Callable[[dict[str, Any]], object]) -> None:
    document = copy.deepcopy(CONTEXT.to_json())
    spoil(document)
    with pytest.raises(ValueError, match=r"lacks or spoils|invalid literal|cannot convert"):
        context_from_json(document)
