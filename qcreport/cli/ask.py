"""Asking at the terminal what a draft leaves open; a bare Return leaves it open."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.cli.run import printable
from qcreport.workbook.propose_draft import Question, toml_text
from qcreport.workbook.sheet_xml import is_stored_number


def ask(questions: Sequence[Question]) -> dict[str, str]:
    """Return the answers as TOML values, by question."""
    print("Return leaves a question open; it is then marked in the files.")
    answers: dict[str, str] = {}
    for question in questions:
        answer = _ask_one(question)
        if answer is not None:
            answers[question.key] = answer
    return answers


def _ask_one(question: Question) -> str | None:
    print(printable(question.text))
    for number, choice in enumerate(question.choices, start=1):
        print(printable(f"  {number}) {choice}"))
    while True:
        try:
            typed = input("> ").strip()
        except EOFError:
            return None
        if not typed:
            return None
        answer = _answer(question, typed)
        if answer is not None:
            return answer
        print(_expected(question))


def _answer(question: Question, typed: str) -> str | None:
    """Return what was typed as a TOML value, or None where it cannot be meant."""
    if question.kind == "number":
        if typed.casefold() in question.choices:
            return ""
        plain = typed.replace(",", ".") if typed.count(",") == 1 and "." not in typed else typed
        return (
            plain.lstrip("+") if is_stored_number(plain) and plain[-1].isdigit() and plain[0] != "." else None
        )
    if typed.isdigit() and 1 <= int(typed) <= len(question.choices):
        return question.choices[int(typed) - 1]
    if typed in question.choices:
        return typed
    if typed.casefold() in ("y", "yes") and len(question.choices) == 1:
        return question.choices[0]
    return toml_text(typed) if question.kind == "text" and not typed.startswith("{") else None


def _expected(question: Question) -> str:
    if question.kind == "number":
        return "A number is expected" + (', or "none".' if question.choices else ".")
    return f"Type a number from 1 to {len(question.choices)}, or Return to leave it open."
