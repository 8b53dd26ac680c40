"""Outcomes in words for the terminal."""

from __future__ import annotations

import json
from typing import Any

from qcreport.cli.run import printable
from qcreport.pipeline.outcome import Outcome, Reported

ANSWERS = {
    "matters": "beyond the margin",
    "different": "differs; whether by more than the margin is open",
    "not_settled": "not settled: a difference of the size that matters can neither be shown nor ruled out",
    "within_margin": "differs, by less than the margin",
    "equivalent": "shown to differ by less than the margin, if at all",
    "not_shown": "no difference shown; no margin set",
    "not_compared": "not compared",
}
"""The answer of a characteristic, that of its most serious pair."""


def outcome_lines(outcome: Outcome) -> list[str]:
    """Return what happened, one fact a line, ending with the path to open."""
    if isinstance(outcome, Reported) and not outcome.new:
        already = f"Already answered in {outcome.number}; nothing new written."
        lines = [already, f"  {outcome.path}"]
        if outcome.same_measurements:
            lines.insert(1, "  another file with the same measurements (same_measurements)")
        if outcome.since:
            lines.insert(1, f"  that report is {outcome.since}")
        return lines
    lines = answer_lines(json.loads(outcome.result))
    if isinstance(outcome, Reported):
        lines.append(f"  report {outcome.number}, {outcome.pages} pages, sealed; a draft until it is signed")
        lines.append(f"  {outcome.path}")
    else:
        lines.append("  computed and recorded; no report was asked for")
    return lines


def answer_lines(result: dict[str, Any]) -> list[str]:
    """Return the answers of a result.json, one characteristic a line."""
    lines = [printable(f"{result['export']['name']} by plan {result['plan']['name']}")]
    for characteristic in result["characteristics"]:
        answer = characteristic["answer"]
        words = ANSWERS[answer]
        if answer == "different" and characteristic["margin"] == [None, None]:
            words = "differs; no margin set"
        by = f" ({characteristic['procedure']})"
        if characteristic["procedure"] == "none":
            words, by = f"not compared. {characteristic['rule']['reason']}", ""
        lines.append(printable(f"  {characteristic['title']}: {words}{by}"))
    if result["notices"]:
        codes = ", ".join(dict.fromkeys(n["code"] for n in result["notices"]))
        lines.append(f"  notices: {codes}")
    return lines
