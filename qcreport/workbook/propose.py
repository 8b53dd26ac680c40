"""Proposing a layout and a plan from an export alone; a person decides what it cannot know."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.errors import ExportRefusedError
from qcreport.workbook.cells import Book, SheetState
from qcreport.workbook.layout_model import TextForm
from qcreport.workbook.limits import Limits
from qcreport.workbook.opening import open_export
from qcreport.workbook.propose_choice import Choice, choose, wide_columns
from qcreport.workbook.propose_draft import Draft, Question, remark, toml_text
from qcreport.workbook.propose_layout import LayoutDraft, draft_table
from qcreport.workbook.propose_marks import draft_marks, draft_summary_rows
from qcreport.workbook.propose_plan import draft_plan
from qcreport.workbook.propose_text import guess_text_form
from qcreport.workbook.refusals import refused
from qcreport.workbook.sheets import no_table_found

_WORTH_ASKING = 0.5


def propose(data: bytes, *, name: str, plan_name: str, limits: Limits) -> Draft:
    """Return a draft of layout and plan for an export.

    Parameters
    ----------
    data : bytes
        The file as dropped.
    name : str
        Its name, without folders.
    plan_name : str
        What layout and plan are to be called.
    limits : Limits
        Bounds of the reading.

    Raises
    ------
    ExportRefusedError
        It cannot be opened, or nothing in it looks like a table of measurements.
    """
    form = guess_text_form(data, name)
    book = open_export(data, name=name, text=form, limits=limits)
    found = _choices(book)
    book.check_rest()
    if not found:
        raise no_table_found(book) or _no_table()
    each = _one_sheet_a_batch(found)
    chosen = found[:1] if each else _worth_reading(found)
    draft = LayoutDraft()
    _head(draft, plan_name, form, book, chosen, found if each else ())
    several = len(chosen) > 1
    for index, choice in enumerate(chosen):
        draft_table(draft, choice, index=index, several=several, each=bool(each))
    draft_summary_rows(draft, chosen)
    draft_marks(draft, chosen)
    groups = [c.table.sheet.name or "" for c in found] if each else list(draft.groups)
    lines, questions = draft_plan(
        plan_name, name, groups, draft.characteristics,
        samples=any(line.key == "sample" for line in draft.lines),
    )  # fmt: skip
    return Draft(
        layout=tuple(draft.lines),
        plan=tuple(lines),
        questions=(*draft.questions, *questions),
        confidence=round(min(choice.score for choice in chosen), 3),
        lead=round(min(choice.lead for choice in chosen), 3),
    )


def _choices(book: Book) -> list[Choice]:
    """Return how each table of each visible sheet may be read, in the order of the workbook."""
    from qcreport.workbook.propose_tables import find_tables

    found: list[Choice] = []
    for info in book.sheets:
        if info.has_cells and info.state is SheetState.VISIBLE:
            found.extend(choose(book, table) for table in find_tables(book.sheet(info)))
    return [choice for choice in found if choice.values]


def _one_sheet_a_batch(found: Sequence[Choice]) -> str | None:
    """Return the pattern of the sheets where each holds the same table and its name is the batch."""
    names = [choice.table.sheet.name or "" for choice in found]
    if len(found) < 2 or len(set(names)) < len(names) or any(choice.groups_clear for choice in found):
        return None
    headings = {tuple(f.heading for f in choice.facts) for choice in found}
    tops = {(choice.table.header_rows, choice.table.rows[0]) for choice in found}
    return _common_pattern(names) if len(headings) == 1 and len(tops) == 1 else None


def _common_pattern(names: Sequence[str]) -> str:
    """Return a pattern that all names match: `?` where names of one length differ, else `*`."""
    if len({len(name) for name in names}) == 1:
        parts = zip(*names, strict=True)
        return "".join(p[0] if len(set(p)) == 1 and p[0] not in "[]*?" else "?" for p in parts)
    return "*"


def _worth_reading(found: Sequence[Choice]) -> list[Choice]:
    """Return the tables of the sheet with the best one; of these those that may hold measurements."""
    best = max(found, key=lambda choice: choice.score)
    same_sheet = [choice for choice in found if choice.table.sheet.name == best.table.sheet.name]
    good = [choice for choice in same_sheet if choice.score >= _WORTH_ASKING]
    return good or [best]


def _head(
    draft: LayoutDraft,
    name: str,
    form: TextForm | None,
    book: Book,
    chosen: Sequence[Choice],
    sheets: Sequence[Choice],
) -> None:
    score, lead = min(c.score for c in chosen), min(c.lead for c in chosen)
    draft.add(comment="A layout, proposed from the cells of one export. A person checks it and puts it into")
    draft.add(comment="config/layouts. FILL-IN marks what only a person can say; it cannot be used before.")
    draft.add(
        comment=f"Confidence {score:.2f}, the next reading of the columns {max(0.0, score - lead):.2f}."
    )
    for doubt in _doubts(book, chosen, sheets):
        draft.add(comment=f"In doubt: {doubt}")
    draft.add("layout_version", "1")
    draft.add("name", toml_text(name))
    draft.add()
    draft.add(value="[sheet]")
    if form is not None:
        delimiter = "tab" if form.delimiter == "\t" else form.delimiter
        value = f"{{ delimiter = {toml_text(delimiter)}, encoding = {toml_text(form.encoding)} }}"
        question = Question(
            key="text", text="The text export seems to be written so. Is that right?", choices=(value,)
        )
        draft.ask(question, "text", value, "look whether µ, ° and ä come out right")
    elif sheets:
        names = [c.table.sheet.name or "" for c in sheets]
        pattern = toml_text(_common_pattern(names))
        question = Question(
            key="each",
            text=f"Each of these sheets seems to be a batch: {remark(', '.join(names))}. By which pattern?",
            choices=(pattern,),
            kind="text",
        )
        draft.ask(question, "each", pattern, "one sheet a batch; a person has to confirm it")
    else:
        draft.add("name", toml_text(chosen[0].table.sheet.name or ""))


def _doubts(book: Book, chosen: Sequence[Choice], sheets: Sequence[Choice]) -> list[str]:
    doubts = []
    hidden = [info.name for info in book.sheets if info.state is not SheetState.VISIBLE]
    names = {choice.table.sheet.name for choice in (*chosen, *sheets)}
    others = [i.name for i in book.sheets if i.has_cells and i.name not in names and i.name not in hidden]
    if len(chosen) > 1:
        doubts.append(f"the sheet holds {len(chosen)} tables.")
    if hidden:
        doubts.append(f"hidden sheets are not read: {remark(', '.join(hidden))}.")
    if others and any(book.sheet(i).rows for i in book.sheets if i.name in others):
        doubts.append(f"other sheets are not read: {remark(', '.join(others))}.")
    for choice in chosen:
        if not sheets and not choice.groups_clear and wide_columns(choice) is None:
            doubts.append("no column clearly holds the batch.")
    return doubts


def _no_table() -> ExportRefusedError:
    return refused(
        "no_table_found",
        where="the workbook",
        found="No heading with three rows of values below it was found.",
        expected="A table with a batch column and a value column.",
        next_step="Take an export with more rows, or write the layout by hand (README, step 3).",
    )
