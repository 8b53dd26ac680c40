"""Drafting the layout of an export from its tables."""

from __future__ import annotations

from dataclasses import dataclass, field

from qcreport.measurements import column_letters
from qcreport.workbook import propose_words as known
from qcreport.workbook.propose_choice import ENOUGH, LEAD, Choice, letters, wide_columns
from qcreport.workbook.propose_columns import ColumnFacts
from qcreport.workbook.propose_draft import Line, Question, remark, toml_text, toml_texts
from qcreport.workbook.units import unit_in_heading, without_unit

TRIAL_UNIT = '"1"'
"""Stands for a unit that only a person can give, while a draft is tried."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Characteristic:
    """What a drafted layout calls a value column."""

    name: str
    """Name in layout and plan."""
    title: str
    """Its heading without the unit."""
    unit: str | None
    """None where a person has to give it."""
    name_question: str | None = None
    """Asked where the export does not say what was measured."""
    unit_question: str | None = None
    """Asked where the export does not say the unit."""


@dataclass(slots=True, kw_only=True)
class LayoutDraft:
    """Collects the lines and questions of a layout."""

    lines: list[Line] = field(default_factory=list)
    questions: list[Question] = field(default_factory=list)
    characteristics: list[Characteristic] = field(default_factory=list)
    groups: tuple[str, ...] = ()

    def add(self, key: str = "", value: str = "", comment: str = "") -> None:
        """Add a line that is settled."""
        self.lines.append(Line(key=key, value=value, comment=comment))

    def ask(self, question: Question, key: str, value: str, comment: str = "", *, trial: str = "") -> None:
        """Add a line that a person has to settle, with the value proposed or one for the trial only."""
        if question not in self.questions:
            self.questions.append(question)
        self.lines.append(Line(key=key, value=value, comment=comment, question=question.key, trial=trial))


def draft_table(draft: LayoutDraft, choice: Choice, *, index: int, several: bool, each: bool) -> None:
    """Draft one `[[table]]`.

    Parameters
    ----------
    draft : LayoutDraft
        Gets the lines.
    choice : Choice
        How the table may be read.
    index : int
        Its position, for its questions.
    several : bool
        There are several tables: a person confirms each.
    each : bool
        The batch is the sheet's name.
    """
    table, wide = choice.table, None if each else wide_columns(choice) if not choice.groups_clear else None
    draft.add()
    draft.add(value="[[table]]")
    shape = "wide" if wide else "replicates_across" if table.across else "long"
    if shape == "long" and not several:
        draft.add("shape", '"long"', "one row a value")
    else:
        words = {"wide": "a column for each batch", "replicates_across": "readings side by side"}
        about = words.get(shape, "one row a value")
        question = Question(
            key=f"shape{index}",
            text=f"The table at row {table.header_rows[0]} of the sheet looks like: {about}. Is that so?",
            choices=(f'"{shape}"',),
        )
        draft.ask(question, "shape", f'"{shape}"', f"{about}; a person has to confirm it")
    draft.add("header_rows", str(list(table.header_rows)))
    if table.units_row is not None:
        draft.add("units_row", str(table.units_row))
    draft.add("first_row", str(table.rows[0]))
    gaps = table.widest_gap > 1 and not several
    draft.add("end", '"sheet"' if gaps else '"blank:2"', "" if gaps else "two blank rows end the table")
    if wide:
        _wide(draft, choice, wide, index)
    else:
        _labels(draft, choice, index=index, each=each)
        _values(draft, choice, index=index)


def _wide(draft: LayoutDraft, choice: Choice, columns: tuple[int, int], index: int) -> None:
    first, last = (column_letters(column) for column in columns)
    draft.add("group", f'{{ header_cells = "{first}:{last}" }}', "the batches stand in the heading")
    names = [f.heading.strip() for f in choice.facts if columns[0] <= f.column <= columns[1]]
    draft.groups = (*draft.groups, *names)
    counters = [f for f in choice.facts if f.counter]
    if counters:
        draft.add("replicate", _column(counters[0]))
    draft.add(value="[[table.value]]")
    name = Question(key=f"name{index}", text="What was measured (a short name)?", kind="text")
    unit = Question(key=f"unit{index}", text="In which unit?", kind="text")
    draft.ask(name, "characteristic", "", "the table does not say what was measured", trial='"value"')
    draft.ask(unit, "unit", "", "the table does not say the unit", trial=TRIAL_UNIT)
    draft.characteristics.append(
        Characteristic(name="value", title="Value", unit=None, name_question=name.key, unit_question=unit.key)
    )


def _labels(draft: LayoutDraft, choice: Choice, *, index: int, each: bool) -> None:
    taken = {f.column for f, _ in choice.values[:1]}
    if each:
        draft.add("group", '{ from = "sheet_name" }', "each sheet is a batch")
    elif choice.groups:
        taken.add(_group(draft, choice, index))
    for key, words in (("line", known.LINE), ("sample", known.SAMPLE), ("replicate", known.REPLICATE)):
        found = choice.column_with(words, taken=taken)
        if found is not None and found.texts:
            draft.add(key, _column(found))
            taken.add(found.column)
    times = choice.times()
    if times is not None and times.column not in taken:
        draft.add("time", _column(times))
        taken.add(times.column)
    status = choice.column_with(known.STATUS, taken=taken)
    if status is not None and status.n_words:
        _status(draft, status, index)


def _group(draft: LayoutDraft, choice: Choice, index: int) -> int:
    best, score = choice.groups[0]
    draft.groups = (*draft.groups, *(text.strip() for text in best.texts))
    if len(choice.likely_groups()) == 1 and choice.groups_clear and max(score, choice.score) >= ENOUGH:
        draft.add("group", _column(best), f"the batch; score {score:.2f}")
        return best.column
    question = Question(
        key=f"group{index}",
        text="Which column holds the batch? "
        + ", ".join(f"{letters(f)} ({remark(f.heading, 40)}, score {s:.2f})" for f, s in choice.groups),
        choices=tuple(_column(f) for f, _ in choice.groups),
    )
    draft.ask(question, "group", _column(best), question.text)
    return best.column


def _status(draft: LayoutDraft, status: ColumnFacts, index: int) -> None:
    seen = list(dict.fromkeys(text.strip() for text in status.texts))[:8]
    question = Question(
        key=f"status{index}",
        text=f"Column {letters(status)} ({remark(status.heading, 40)}) says {remark(', '.join(seen))}. "
        "Which rows count?",
        choices=tuple(f'{{ col = "{letters(status)}", use = {toml_texts([word])} }}' for word in seen),
        kind="text",
    )
    draft.ask(question, "status", "", question.text + " Delete the line where all do.")


def _values(draft: LayoutDraft, choice: Choice, *, index: int) -> None:
    likely = choice.likely_values()
    by_sheet = not choice.groups_clear
    enough = (choice.values[0][1] if by_sheet else choice.score) >= ENOUGH
    single = len(likely) == 1 and enough and choice.values[0][1] >= ENOUGH - LEAD
    for facts in likely:
        draft.add(value="[[table.value]]")
        _value(draft, choice, facts, index=index, single=single)


def _value(draft: LayoutDraft, choice: Choice, facts: ColumnFacts, *, index: int, single: bool) -> None:
    heading = " ".join(facts.heading.split())
    generic = not known.words(heading) - known.RESULT
    title = choice.quantity if generic and choice.quantity else without_unit(heading, facts.unit) or heading
    name = known.slug(title, "value")
    if any(c.name == name for c in draft.characteristics):
        name += f"_{letters(facts).lower()}"
    draft.add("characteristic", toml_text(name))
    key, place = ("cols", _across(choice, facts)) if choice.table.across else ("col", letters(facts))
    if single:
        draft.add(key, f'"{place}"', "the values")
    else:
        question = Question(
            key=f"value{index}{place}",
            text=f"Does column {place} ({remark(heading, 40)}) hold values to compare?",
            choices=(f'"{place}"',),
        )
        draft.ask(question, key, f'"{place}"', "delete this [[table.value]] where it is not measured")
    draft.add("header", toml_text(heading), "checked: a moved column refuses the file")
    unit = _unit(draft, choice, facts, index)
    draft.characteristics.append(
        Characteristic(name=name, title=title, unit=unit, unit_question=_unit_question(facts, index))
    )


def _across(choice: Choice, facts: ColumnFacts) -> str:
    """Return the columns of the merged heading above a column."""
    area = choice.table.sheet.merged_area(choice.table.header_rows[0], facts.column)
    last = area.last_column if area is not None else facts.column
    return f"{letters(facts)}:{column_letters(last)}"


def _unit(draft: LayoutDraft, choice: Choice, facts: ColumnFacts, index: int) -> str | None:
    """Draft where the unit comes from; return the unit, or None where a person has to give it."""
    if choice.table.units_row is not None and facts.unit is not None:
        draft.add("unit", toml_text(facts.unit))
        draft.add("unit_from", '"units_row"')
        return facts.unit
    if facts.unit is not None:
        draft.add("unit", toml_text(facts.unit))
        if unit_in_heading(facts.heading) is not None:
            draft.add("unit_from", '"header"')
        return facts.unit
    units = [f for f in choice.facts if f.units and f.column != facts.column]
    if len(units) == 1:
        draft.add("unit", toml_text(units[0].texts[0].strip()))
        draft.add("unit_from", '"column"')
        draft.add("unit_col", f'"{letters(units[0])}"')
        return units[0].texts[0].strip()
    if choice.unit_cell is not None:
        row, column, text = choice.unit_cell
        draft.add("unit", toml_text(text))
        draft.add("unit_from", '"cell"')
        draft.add("unit_cell", f'"{column_letters(column)}{row}"')
        return text
    question = Question(
        key=_unit_question(facts, index),
        text=f"In which unit is {remark(facts.heading, 40)} (column {letters(facts)})?",
        kind="text",
    )
    draft.ask(question, "unit", "", "the export does not say it", trial=TRIAL_UNIT)
    return None


def _unit_question(facts: ColumnFacts, index: int) -> str:
    return f"unit{index}{letters(facts)}"


def _column(facts: ColumnFacts) -> str:
    """Return the source of a label, with its heading to be checked."""
    heading = " ".join(facts.heading.split())
    checked = f", header = {toml_text(heading)}" if heading else ""
    return f'{{ col = "{letters(facts)}"{checked} }}'
