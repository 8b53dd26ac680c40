"""The sections *Data, cell by cell* and *Flagged and left out*."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence

from qcreport.analysis.result import Result
from qcreport.measurements import CellRef, Censoring, Measurement, MeasurementSet, quoted_sheet
from qcreport.plan.model import ComparisonPlan, Groups, Unit
from qcreport.report.blocks import Block, Cells, Paragraph, Section, Subheading
from qcreport.report.build_pairs import flag_keys
from qcreport.report.build_stated import left_out_blocks
from qcreport.report.numbers import Numbers
from qcreport.report.rounding import LARGEST_DECIMALS, fixed
from qcreport.report.words_en import Words

_HOLD = "\u00a0"


def group_of(measurement: Measurement, plan: ComparisonPlan) -> str:
    """Return the label a measurement is compared under."""
    if plan.groups is Groups.LINE and measurement.line is not None:
        return measurement.line
    return measurement.batch


def data_section(all_numbers: Sequence[Numbers], plan: ComparisonPlan, read: MeasurementSet) -> Section:
    """Return every value with its cell, group by group, as compact running text."""
    words = all_numbers[0].words
    blocks: list[Block] = [Paragraph(text=words.data_intro(read.export_name))]
    for numbers in all_numbers:
        if len(all_numbers) > 1:
            blocks.append(Subheading(text=numbers.result.title))
        groups: dict[str, list[Measurement]] = defaultdict(list)
        for measurement in read.measurements:
            if measurement.characteristic == numbers.result.name:
                groups[group_of(measurement, plan)].append(measurement)
        keys = flag_keys(numbers.result)
        blocks += [_group(label, found, plan, keys, words) for label, found in groups.items()]
    return Section(anchor="data", heading=words.DATA, blocks=tuple(blocks))


def _group(
    label: str, found: Sequence[Measurement], plan: ComparisonPlan, keys: dict[str, str], words: Words
) -> Cells:
    sheets = {m.cell.sheet for m in found}
    only = next(iter(sheets)) if len(sheets) == 1 else None
    by_sample = plan.independent_unit is not Unit.READING and any(m.sample for m in found)
    parts = []
    sample: str | None = None
    for measurement in found:
        text = value_in_cell(measurement, only, keys, words)
        if by_sample and measurement.sample != sample and measurement.sample is not None:
            sample = measurement.sample
            text = f"{words.sample(sample)}: {text}"
            text = _held(text)
        parts.append(text)
    head = words.data_group(label, len(found), words.sheet(quoted_sheet(only)) if only else "")
    return Cells(label=head, text=f"{_HOLD}{_HOLD}{_HOLD} ".join(parts))


def _held(text: str) -> str:
    """Return `text` without breaks, unless it is so long that it has to break."""
    return text.replace(" ", _HOLD) if len(text) <= 40 else text


def value_in_cell(
    measurement: Measurement, only_sheet: str | None, keys: dict[str, str], words: Words
) -> str:
    """Return one value after its cell: `C5 24.83`, with the stored text where it differs."""
    cell = measurement.cell
    place = _place(cell) if only_sheet is not None else str(cell)
    printed = _printed(measurement, words)
    parts = [place, printed]
    if measurement.text.strip() not in (printed, printed.replace(words.DECIMAL_MARK, ".")):
        parts.append(words.stored(_held(measurement.text)))
    parts += [words.mark(m) for m in measurement.marks]
    if str(cell) in keys:
        parts.append(f"[{keys[str(cell)]}]")
    return _HOLD.join(_held(p) for p in parts)


def _place(cell: CellRef) -> str:
    return str(CellRef(sheet="S", row=cell.row, column=cell.column)).split("!")[1]


def _printed(measurement: Measurement, words: Words) -> str:
    if measurement.censored is Censoring.NOT_DETECTED:
        return words.not_detected()
    if measurement.value is None:
        return words.missing()
    number = fixed(measurement.value, min(measurement.decimals, LARGEST_DECIMALS))
    if measurement.censored is None:
        return number
    return {"<=": "≤", ">=": "≥"}.get(measurement.censored.value, measurement.censored.value) + number


def flagged_section(all_numbers: Sequence[Numbers], result: Result, unprintable: Sequence[str]) -> Section:
    """Return what was flagged, what was left out and every notice with its cells."""
    words = all_numbers[0].words
    blocks: list[Block] = []
    for numbers in all_numbers:
        found: list[Block] = [Paragraph(text=t) for t in _flagged(numbers) + _described(numbers)]
        found += left_out_blocks(numbers, result.provenance)
        if len(all_numbers) > 1 and found:
            blocks.append(Subheading(text=numbers.result.title))
        blocks += found
    if not any(n.result.flagged for n in all_numbers):
        blocks.append(Paragraph(text=words.nothing_flagged()))
    blocks.append(Subheading(text=words.reading_notices()))
    notices = [words.notice(n.text, _some(n.cells)) for n in result.notices]
    blocks += [Paragraph(text=t) for t in notices or [words.no_notices()]]
    if unprintable:
        blocks.append(Paragraph(text=words.unprintable(", ".join(unprintable))))
    return Section(anchor="flagged", heading=words.FLAGGED, blocks=tuple(blocks))


def _some(cells: Sequence[str]) -> str:
    shown = ", ".join(cells[:40])
    return f"{shown}, … ({len(cells)})" if len(cells) > 40 else shown


def _flagged(numbers: Numbers) -> list[str]:
    keys, words = flag_keys(numbers.result), numbers.words
    return [
        words.flagged_line(
            keys[f.cell],
            f.group,
            numbers.with_unit(numbers.value(f.value)),
            f.cell,
            words.test_name(f.test),
            numbers.p(f.p),
            words.without_it(f.changes_answer),
        )
        for f in numbers.result.flagged
    ]


def _described(numbers: Numbers) -> list[str]:
    return [numbers.words.described_only(g.label, g.n, g.reason) for g in numbers.result.not_compared]
