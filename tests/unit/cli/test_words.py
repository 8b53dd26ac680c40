"""Outcomes as they are told on a terminal."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from qcreport.cli.words import ANSWERS, outcome_lines
from qcreport.pipeline.outcome import ComputedOnly, Reported


def result(answer: str, *, margin: object = (-1.5, 1.5), procedure: str = "tukey_hsd", **more: Any) -> bytes:
    characteristic = {
        "title": "Lap shear",
        "answer": answer,
        "margin": list(margin) if isinstance(margin, tuple) else margin,
        "procedure": procedure,
        "rule": {"reason": "Fewer than two groups hold enough results."},
    }
    document = {"export": {"name": "a.xlsx"}, "plan": {"name": "p"}, "notices": []} | more
    return json.dumps(document | {"characteristics": [characteristic]}).encode()


def computed(data: bytes) -> list[str]:
    return outcome_lines(ComputedOnly(plan_name="p", result=data, answers=()))


def reported(data: bytes, *, new: bool) -> list[str]:
    return outcome_lines(
        Reported(
            plan_name="p",
            number="2026-0042",
            path=Path("/r/2026-0042 a.pdf"),
            result=data,
            answers=(),
            new=new,
            pages=6,
        )
    )


@pytest.mark.parametrize("answer", ANSWERS)
def test_every_answer_has_words(answer: str) -> None:
    first, second, *_ = computed(result(answer))
    assert first == "a.xlsx by plan p"
    assert second == f"  Lap shear: {ANSWERS[answer]} (tukey_hsd)"
    assert "significant" not in second


def test_a_difference_without_a_margin() -> None:
    assert computed(result("different", margin=(None, None)))[1].startswith(
        "  Lap shear: differs; no margin set"
    )


def test_why_nothing_was_compared() -> None:
    lines = computed(result("not_compared", procedure="none"))
    assert lines[1] == "  Lap shear: not compared. Fewer than two groups hold enough results."


def test_a_new_report_is_a_draft_and_its_path_comes_last() -> None:
    lines = reported(result("matters"), new=True)
    assert any("2026-0042" in line and "draft until it is signed" in line for line in lines)
    assert lines[-1].endswith("/r/2026-0042 a.pdf")


def test_an_earlier_report_is_named_and_nothing_else() -> None:
    lines = reported(result("matters"), new=False)
    assert lines[0] == "Already answered in 2026-0042; nothing new written."
    assert lines[-1].endswith("/r/2026-0042 a.pdf")
    assert len(lines) == 2


def test_notices_are_told_once_each() -> None:
    notices = [{"code": "missing_values"}, {"code": "status_excluded"}, {"code": "missing_values"}]
    assert "  notices: missing_values, status_excluded" in computed(result("matters", notices=notices))


def test_names_from_a_file_cannot_steer_the_terminal() -> None:
    lines = computed(result("matters", export={"name": "a\x1b[2J.xlsx"}))
    assert lines[0] == "a\\x1b[2J.xlsx by plan p"
