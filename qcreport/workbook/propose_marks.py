"""Drafting which rows are left out and which texts among the values mean that there is none."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.workbook import propose_words as known
from qcreport.workbook.propose_choice import Choice
from qcreport.workbook.propose_draft import toml_texts
from qcreport.workbook.propose_layout import LayoutDraft


def draft_summary_rows(draft: LayoutDraft, choices: Sequence[Choice]) -> None:
    """Draft the rows of means and the like, by what stands in their batch cell."""
    found: dict[str, None] = {}
    for choice in choices:
        if not choice.groups:
            continue
        column = choice.groups[0][0].column
        cells = [choice.table.sheet.cell(row, column) for row in choice.table.rows]
        texts = [cell.text.strip() for cell in cells if cell is not None]
        found.update(dict.fromkeys(text for text in texts if text.casefold() in known.SUMMARY))
    if found:
        draft.add()
        draft.add(value="[leave_out_rows]")
        draft.add("group_matches", toml_texts(list(found)), "rows of means and the like")


def draft_marks(draft: LayoutDraft, choices: Sequence[Choice]) -> None:
    """Draft the marks for missing values and for what was not detected."""
    values = [facts for choice in choices for facts, _ in choice.values]
    texts = list(dict.fromkeys(text.strip() for facts in values for text in facts.texts))
    marks = {
        "missing": [text for text in texts if text.casefold() in known.MISSING],
        "not_detected": [text for text in texts if text.casefold() in known.NOT_DETECTED],
    }
    if not any(marks.values()):
        return
    draft.add()
    draft.add(value="[numbers]")
    for key, found in marks.items():
        if found:
            draft.add(key, toml_texts(found), "as they stand among the values; check them")
