"""Drafting the plan: everything that matters in it is a person's to say."""

from __future__ import annotations

import re
from collections.abc import Sequence

from qcreport.workbook.propose_draft import Line, Question, remark, toml_text
from qcreport.workbook.propose_layout import Characteristic
from qcreport.workbook.propose_words import kind_of

_LISTED_BATCHES = 12


def draft_plan(
    name: str,
    export_name: str,
    groups: Sequence[str],
    characteristics: Sequence[Characteristic],
    *,
    samples: bool,
) -> tuple[list[Line], list[Question]]:
    """Return the lines of a plan and its questions; no margin, limit or reference is proposed."""
    labels = list(dict.fromkeys(groups))[:_LISTED_BATCHES]
    reference = Question(
        key="reference",
        text='Compare each batch with one reference batch, or (with "") every pair?',
        choices=('""', *(toml_text(label) for label in labels)),
        kind="text",
    )
    lines = [
        _remark(
            "A plan, proposed from one export. A person fills it in, checks it and puts it into config/plans."
        ),
        _remark("FILL-IN marks what only a person can say; the plan cannot be used before."),
        Line(key="name", value=toml_text(name)),
        Line(key="title", value=toml_text(name.replace("_", " ").replace("-", " ").capitalize())),
        Line(
            key="exports", value=f"[{toml_text(pattern_of(export_name))}]", comment="which files of the inbox"
        ),
        Line(key="layout", value=toml_text(name)),
        _remark('approved = { by = "Name, role", on = 2026-11-02 }   the day on which it was approved'),
        Line(),
        Line(value="[comparison]"),
        Line(key="groups", value='"batch"', comment="batch | line"),
        Line(key="reference", comment='a batch, or "" for every pair', question="reference"),
        Line(
            key="independent_unit",
            value='"sample"' if samples else '"reading"',
            comment="reading | sample | batch: what was taken independently; finer readings are averaged",
        ),
        Line(key="alpha", value="0.05"),
    ]
    questions = [reference]
    for position, characteristic in enumerate(characteristics):
        more, asked = _characteristic(characteristic, position)
        lines.extend(more)
        questions.extend(asked)
    return lines, questions


def _characteristic(characteristic: Characteristic, position: int) -> tuple[list[Line], list[Question]]:
    shown = remark(characteristic.title, 40) or "the characteristic"
    unit = f" in {remark(characteristic.unit, 24)}" if characteristic.unit else ""
    margin = Question(
        key=f"margin{position}",
        text=f"Smallest difference of {shown} that matters{unit}? It comes from those who know the product.",
        kind="number",
    )
    low, high = (
        Question(key=f"{side}{position}", text=f"{side.capitalize()} specification limit of {shown}{unit}?",
                 choices=("none",), kind="number")
        for side in ("lower", "upper")
    )  # fmt: skip
    lines = [
        Line(),
        Line(value="[[characteristic]]"),
        _settled("name", characteristic.name, characteristic.name_question),
        _settled("title", characteristic.title, characteristic.name_question),
        _unit(characteristic),
        Line(
            key="margin",
            question=margin.key,
            comment="smallest difference that matters, set before the data are seen",
        ),
        Line(key="lower_limit", question=low.key, comment="delete the line where there is none"),
        Line(key="upper_limit", question=high.key, comment="delete the line where there is none"),
    ]
    return lines, [margin, low, high]


def _settled(key: str, text: str, question: str | None) -> Line:
    if question is None:
        return Line(key=key, value=toml_text(text))
    return Line(key=key, question=question, comment="as in the layout")


def _unit(characteristic: Characteristic) -> Line:
    if characteristic.unit is not None:
        return Line(key="unit", value=toml_text(characteristic.unit))
    return Line(key="unit", question=characteristic.unit_question, comment="as in the layout")


def _remark(text: str) -> Line:
    return Line(comment=text)


def pattern_of(export_name: str) -> str:
    """Return a pattern for exports of the same kind: the numbers that end the name are left open."""
    stem, dot, ending = export_name.rpartition(".")
    escaped = re.sub(r"([\[\]*?])", "?", kind_of(stem))
    return f"{escaped}*{dot}{ending}"
