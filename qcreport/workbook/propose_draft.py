"""A drafted layout and plan: lines of TOML, some of which a person has to fill in."""

from __future__ import annotations

import json
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Final

BLANK: Final = "FILL-IN"
"""Stands where a person has to decide; it is no TOML, so that the file cannot be used before."""

_MAX_LINES = 5_000
_MAX_TEXT = 2_000
_COMMENT_COLUMN = 34


class DraftError(Exception):
    """A draft that the proposing child would not write."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Line:
    """One line of a file: a heading or remark (no key), or a key with its value."""

    key: str = ""
    """Empty for a table heading, a remark or a blank line."""
    value: str = ""
    """TOML; for a line with a question the proposed value, or empty where nothing can be proposed."""
    comment: str = ""
    """Why, or what is in doubt."""
    question: str | None = None
    """The question that decides the value."""
    trial: str = ""
    """Stands for a value that cannot be proposed, while the draft is tried."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Question:
    """Something that the cells alone do not say."""

    key: str
    """Named by the lines that wait for the answer."""
    text: str
    """As asked at the terminal."""
    choices: tuple[str, ...] = ()
    """Values in TOML to choose from."""
    kind: str = "choice"
    """`choice`, `number` or `text`: what may be typed besides."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Draft:
    """What is proposed for one export."""

    layout: tuple[Line, ...]
    """Lines of the layout."""
    plan: tuple[Line, ...]
    """Lines of the plan."""
    questions: tuple[Question, ...]
    """In the order in which they are asked; those of the layout first."""
    confidence: float
    """0 to 1: the score of the group and value columns together."""
    lead: float
    """By how much the next reading scores less."""


def render(lines: Sequence[Line], answers: Mapping[str, str], *, trial: bool = False) -> str:
    """Return a file's text.

    Parameters
    ----------
    lines : sequence of Line
        Of a draft.
    answers : mapping
        Question → value in TOML.
    trial : bool
        Use the proposed value where there is no answer, and leave out a line without one, to try it.
    """
    texts = []
    for line in lines:
        open_question = line.question is not None and line.question not in answers
        value = answers.get(line.question or "", line.value or (line.trial if trial else ""))
        if value == "" and line.key and (trial or not open_question):
            continue
        if open_question and not trial:
            shown = f"proposed: {line.value}. " if line.value else ""
            texts.append(_line(line.key, BLANK, shown + line.comment))
        else:
            texts.append(_line(line.key, value, line.comment))
    return "\n".join(texts) + "\n"


def _line(key: str, value: str, comment: str) -> str:
    text = f"{key} = {value}" if key else value
    if not comment:
        return text
    return f"{text.ljust(_COMMENT_COLUMN)} # {comment}" if text else f"# {comment}"


def to_json(draft: Draft) -> bytes:
    """Return a draft as the proposing child writes it."""
    record = {
        "layout": [_fields(line) for line in draft.layout],
        "plan": [_fields(line) for line in draft.plan],
        "questions": [[q.key, q.text, list(q.choices), q.kind] for q in draft.questions],
        "confidence": draft.confidence,
        "lead": draft.lead,
    }
    return json.dumps(["draft", record]).encode("ascii") + b"\n"


def _fields(line: Line) -> list[str | None]:
    return [line.key, line.value, line.comment, line.question, line.trial]


def from_json(record: Any) -> Draft:
    """Return the draft that a child wrote; anything unexpected is a DraftError."""
    try:
        return Draft(
            layout=tuple(_checked_line(line) for line in record["layout"][:_MAX_LINES]),
            plan=tuple(_checked_line(line) for line in record["plan"][:_MAX_LINES]),
            questions=tuple(_checked_question(question) for question in record["questions"][:_MAX_LINES]),
            confidence=float(record["confidence"]),
            lead=float(record["lead"]),
        )
    except (KeyError, TypeError, ValueError) as error:
        raise DraftError(str(error)) from None


def _checked_line(record: Any) -> Line:
    key, value, comment, question, trial = record
    return Line(
        key=_plain(key), value=_plain(value), comment=_plain(comment),
        question=None if question is None else _plain(question), trial=_plain(trial),
    )  # fmt: skip


def _checked_question(record: Any) -> Question:
    key, text, choices, kind = record
    if kind not in ("choice", "number", "text"):
        raise DraftError("a question")
    return Question(
        key=_plain(key), text=_plain(text), choices=tuple(_plain(choice) for choice in choices), kind=kind
    )


def _plain(text: Any) -> str:
    """Return a text of one line without control characters."""
    if not isinstance(text, str) or len(text) > _MAX_TEXT or not (text.isprintable()):
        raise DraftError("a text")
    return text


def toml_text(text: str) -> str:
    """Return a text from a workbook as a TOML string; what does not print is escaped."""
    shown = []
    for character in text:
        if character in '"\\':
            shown.append("\\" + character)
        elif character.isprintable():
            shown.append(character)
        else:
            shown.append(
                f"\\u{ord(character):04X}" if ord(character) < 0x10000 else f"\\U{ord(character):08X}"
            )
    return '"' + "".join(shown) + '"'


def toml_texts(texts: Sequence[str]) -> str:
    """Return texts as a TOML array."""
    return "[" + ", ".join(toml_text(text) for text in texts) + "]"


def remark(text: str, length: int = 120) -> str:
    """Return a text from a workbook as it may stand in a comment."""
    shown = "".join(c if c.isprintable() else f"U+{ord(c):04X}" for c in text[:length])
    return shown + "…" if len(text) > length else shown
