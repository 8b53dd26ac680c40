"""Proposing a layout: above the bar it is right, and what cells cannot say is asked."""

from __future__ import annotations

import json
import tomllib
from typing import Any

import pytest

from qcreport.errors import ConfigError, ExportRefusedError
from qcreport.measurements import MeasurementSet
from qcreport.plan import parse_plan
from qcreport.workbook.layout import parse_layout
from qcreport.workbook.limits import Limits
from qcreport.workbook.propose import propose
from qcreport.workbook.propose_draft import BLANK, Draft, DraftError, from_json, render, to_json, toml_text
from qcreport.workbook.propose_in_child import propose_in_child, try_draft
from qcreport.workbook.propose_plan import pattern_of
from qcreport.workbook.propose_text import guess_text_form
from qcreport.workbook.read_in_child import read_in_child
from qcreport.workbook.reading import read_export
from workbook.books import parts, row, zipped
from workbook.corpus import BY_NAME, CORPUS, export, layout_bytes

KNOWN = [name for name in BY_NAME if (CORPUS / "layouts" / f"{name}.toml").exists()]
ASKED = {
    "o03_two_row_header.xlsx": {"shape0", "value0C:G", "value0H:J"},
    "o05_separators_footers.xlsx": {"unit0C"},
    "o06_stacked_tables.xlsx": {"shape0", "shape1"},
    "o07_sheet_per_batch.xlsx": {"each"},
    "o08_wide.xlsx": {"shape0", "name0", "unit0"},
    "o17_formulas_not_calculated.xlsx": {"value0D"},
    "o20_status_column.xlsx": {"status0"},
    "o26_semicolon_cp1252.csv": {"text"},
}
"""Exports whose layout is not proposed without a question, and the questions."""
Cells = list[tuple[str, float | None, str, str | None, str | None, str | None]]


def draft_of(data: bytes, name: str = "x.xlsx") -> Draft:
    return propose(data, name=name, plan_name="x", limits=Limits())


def asked(draft: Draft) -> set[str]:
    of_layout = {line.question for line in draft.layout}
    return {question.key for question in draft.questions if question.key in of_layout}


def read(data: bytes, name: str, layout: bytes) -> Cells | tuple[str, tuple[str, ...]]:
    try:
        result = read_export(data, name=name, layout=parse_layout(layout, "l.toml"))
    except ExportRefusedError as refusal:
        return refusal.code, refusal.cells
    return [(m.batch, m.value, str(m.cell), m.line, m.sample, m.time) for m in result.measurements]


@pytest.mark.parametrize("name", KNOWN)
def test_corpus_is_proposed_right_or_asked(name: str) -> None:
    draft = draft_of(export(name), name)
    assert asked(draft) == ASKED.get(name, set())
    if not asked(draft):
        assert draft.confidence >= 0.8
        assert draft.lead >= 0.1
    proposed = read(export(name), name, render(draft.layout, {}, trial=True).encode())
    if name != "o20_status_column.xlsx":
        assert proposed == read(export(name), name, layout_bytes(name))


def test_answers_make_the_layout_of_a_status_column_right() -> None:
    name = "o20_status_column.xlsx"
    draft = draft_of(export(name), name)
    question = next(q for q in draft.questions if q.key == "status0")
    answers = {"status0": next(choice for choice in question.choices if '"valid"' in choice)}
    layout = render(draft.layout, answers).encode()
    assert read(export(name), name, layout) == read(export(name), name, layout_bytes(name))


@pytest.mark.parametrize("name", [n for n in BY_NAME if n not in KNOWN and not n.startswith(("~", "o24"))])
def test_what_cannot_be_read_is_refused_as_it_is_elsewhere(name: str) -> None:
    with pytest.raises(ExportRefusedError) as caught:
        propose_in_child(export(name), name=name, plan_name="x")
    assert caught.value.code == BY_NAME[name]["expect"]["refuse"]["code"]
    assert caught.value.file == name


BATCHES = ["LA-2401", "LA-2402", "LA-2403"]


def sheet(heading: list[str], make_row: Any, *, n: int = 18, top: int = 1) -> bytes:
    rows = row(top, *heading)
    rows += "".join(row(top + 1 + i, *make_row(i)) for i in range(n))
    return zipped(parts(rows))


def value(i: int) -> float:
    return 20.25 + (i * 37 % 101) / 16


@pytest.mark.parametrize(
    ("heading", "make_row", "group", "column"),
    [
        (["Lot no.", "Peel force [N/25mm]"], lambda i: [BATCHES[i // 6], value(i)], "A", "B"),
        (
            ["#", "Charge", "Probe", "Breite [mm]", "Zugfestigkeit [MPa]"],
            lambda i: [i + 1, BATCHES[i % 3], f"P{i}", 25.0 + i % 2 / 10, value(i)],
            "B",
            "E",
        ),
        (
            ["Sample", "Width [mm]", "Load [N]", "Lap shear strength [MPa]", "Batch"],
            lambda i: [f"S{i}", 25.1, 7500.5 + 13.7 * i, value(i), BATCHES[i // 6]],
            "E",
            "D",
        ),
        (
            ["Date", "Line", "Batch", "Viscosity (mPa·s)", "Temp (°C)"],
            lambda i: [
                "2026-01-12",
                "AB"[i % 2],
                BATCHES[i // 6],
                12000.5 + 10 * value(i),
                23.1 + i % 3 / 10,
            ],
            "C",
            "D",
        ),
        (
            ["No", "Batch", "Result MPa", "Operator"],
            lambda i: [i + 1, BATCHES[i // 6], value(i), ["Kim", "Lee"][i % 2]],
            "B",
            "C",
        ),
    ],
)
def test_decoys_and_other_words_are_told_apart(
    heading: list[str], make_row: Any, group: str, column: str
) -> None:
    draft = draft_of(sheet(heading, make_row, top=4))
    assert not asked(draft)
    layout = tomllib.loads(render(draft.layout, {}))
    (table,) = layout["table"]
    assert table["group"]["col"] == group
    assert [v["col"] for v in table["value"]] == [column]
    assert (table["header_rows"], table["first_row"]) == ([4], 5)


@pytest.mark.parametrize(
    ("heading", "make_row", "question"),
    [
        (["Batch", "Width [mm]"], lambda i: [BATCHES[i // 6], value(i)], "value"),
        (["Batch", "Lap shear [MPa]", "Peel force [N]"], lambda i: [BATCHES[i // 6], value(i), value(i + 5)],
         "value"),
        (["Lot", "Batch", "Lap shear [MPa]"],
         lambda i: [BATCHES[i // 6], f"B-{i % 4}", value(i)], "group"),
        (["Rig", "Colour", "Lap shear [MPa]"],
         lambda i: ["R1", ["red", "blue"][i % 2], value(i)], "group"),
        (["Batch", "X"], lambda i: [BATCHES[i // 6], value(i)], "value"),
        (["Batch", "Lap shear"], lambda i: [BATCHES[i // 6], value(i)], "unit"),
    ],
)  # fmt: skip
def test_what_is_in_doubt_is_asked(heading: list[str], make_row: Any, question: str) -> None:
    draft = draft_of(sheet(heading, make_row))
    assert any(key.startswith(question) for key in asked(draft))
    with pytest.raises(ConfigError, match="line"):
        parse_layout(render(draft.layout, {}).encode(), "l.toml")


@pytest.mark.parametrize("name", ["o01_plain_long.xlsx", "o03_two_row_header.xlsx"])
def test_margin_limits_and_reference_are_never_proposed(name: str) -> None:
    draft = draft_of(export(name), name)
    plan = render(draft.plan, {})
    for key in ("reference", "margin", "lower_limit", "upper_limit"):
        values = [
            line.partition("=")[2].split("#")[0].strip() for line in plan.splitlines() if line.startswith(key)
        ]
        assert values
        assert set(values) == {BLANK}
    with pytest.raises(ConfigError, match="line"):
        parse_plan(plan.encode(), "p.toml")


def test_answered_plan_can_be_used() -> None:
    draft = draft_of(export("o01_plain_long.xlsx"), "o01_plain_long.xlsx")
    answers = {"reference": '""', "margin0": "1.5", "lower0": "18", "upper0": ""}
    plan = parse_plan(render(draft.plan, answers).encode(), "p.toml")
    (characteristic,) = plan.characteristics
    assert characteristic.name == "lap_shear"
    assert plan.exports == ("o01_plain_long*.xlsx",)
    assert characteristic.lower_limit == 18
    assert characteristic.upper_limit is None


def test_child_proposes_the_same_and_the_draft_is_tried() -> None:
    name = "o02_metadata_block.xlsx"
    draft = propose_in_child(export(name), name=name, plan_name="x")
    assert draft == draft_of(export(name), name)
    tried = try_draft(draft, {}, export(name), name=name)
    assert isinstance(tried, MeasurementSet)
    expected = read_in_child(export(name), name=name, layout_bytes=layout_bytes(name), layout_file="l.toml")
    assert [(m.cell, m.value, m.unit) for m in tried.measurements] == [
        (m.cell, m.value, m.unit) for m in expected.measurements
    ]


def test_draft_that_does_not_read_its_export_is_not_offered() -> None:
    name = "o44_unreadable_values.xlsx"
    draft = propose_in_child(export(name), name=name, plan_name="x")
    with pytest.raises(ExportRefusedError) as caught:
        try_draft(draft, {}, export(name), name=name)
    assert caught.value.code == "unreadable_values"
    assert "Nothing was written" in caught.value.next_step


def test_texts_of_the_workbook_stay_texts_in_the_files() -> None:
    evil = 'Batch"]\n[x]\u202e\x7f\\'
    data = sheet([evil, "Lap shear [MPa]"], lambda i: [f'{BATCHES[i // 6]}"\n#\u2028', value(i)])
    draft = draft_of(data)
    layout = render(draft.layout, {})
    assert all(line.isprintable() for line in layout.split("\n"))
    assert tomllib.loads(layout)["table"][0]["group"]["header"].startswith('Batch"] [x]')
    answers = {"margin0": "1", "lower0": "", "upper0": "", "reference": draft.questions[0].choices[1]}
    plan = parse_plan(render(draft.plan, answers).encode(), "p.toml")
    assert plan.reference == f'{BATCHES[0]}"\n#'
    assert from_json(json.loads(to_json(draft))[1]) == draft


@pytest.mark.parametrize("text", ['a"b', "a\\b", "a\nb", "\x00", "\x7f", "\u202e", "\U000e0001", "µ °", "="])
def test_every_text_is_a_toml_string(text: str) -> None:
    written = toml_text(text)
    assert written.isprintable()
    assert tomllib.loads(f"a = {written}") == {"a": text}


@pytest.mark.parametrize(
    "record",
    [
        None,
        {},
        {"layout": [["a", "b", "c", None]], "plan": [], "questions": [], "confidence": 1, "lead": 1},
        {"layout": [["a", "b\n[x]", "c", None, ""]], "plan": [], "questions": [], "confidence": 1, "lead": 1},
        {"layout": [], "plan": [], "questions": [["a", "b", [], "moon"]], "confidence": 1, "lead": 1},
        {"layout": [], "plan": [], "questions": [["a", "b", [7], "text"]], "confidence": 1, "lead": 1},
        {"layout": [], "plan": [], "questions": [], "confidence": "x", "lead": 1},
    ],
)
def test_drafts_that_the_child_would_not_write(record: Any) -> None:
    with pytest.raises(DraftError):
        from_json(record)


@pytest.mark.parametrize(
    ("name", "pattern"),
    [
        ("lap-shear-2403.xlsx", "lap-shear*.xlsx"),
        ("Export 2026-01-12 0755.xlsx", "Export*.xlsx"),
        ("2403.xlsx", "2403*.xlsx"),
        ("a[1]b*.csv", "a?1?b?*.csv"),
    ],
)
def test_pattern_leaves_the_closing_numbers_open(name: str, pattern: str) -> None:
    assert pattern_of(name) == pattern


def test_form_of_text_exports_is_guessed() -> None:
    form = guess_text_form("Bätch\tvalue\nA,1\t2,5\nA,1\t2,6\n".encode("utf-16"), "x.txt")
    assert form is not None
    assert (form.delimiter, form.encoding) == ("\t", "utf-16")
    form = guess_text_form("Batch,µ\nA,1\n".encode("cp1252"), "x.csv")
    assert form is not None
    assert (form.delimiter, form.encoding) == (",", "cp1252")
    assert guess_text_form(b"Batch,1", "x.xlsx") is None
