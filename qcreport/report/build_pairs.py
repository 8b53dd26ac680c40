"""The sections *Every value* (further characteristics) and *How far apart*."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.analysis.result import CharacteristicResult, GroupResult
from qcreport.report.blocks import Block, Column, Figure, Paragraph, Section, Subheading, Table
from qcreport.report.build_answers import first_page_answer
from qcreport.report.build_beside import contrast_blocks, design_blocks, effect_blocks
from qcreport.report.figure_apart import apart_panel, shown_pairs
from qcreport.report.figure_mark import pair_grid
from qcreport.report.figure_values import values_panel
from qcreport.report.letters import letter_name, letters_of
from qcreport.report.numbers import Numbers
from qcreport.report.pairs import EXCLUDES_NULL, higher_first, most_serious_first
from qcreport.report.rounding import shortest, significant, trimmed
from qcreport.report.shapes import Drawing

LETTERS_ABOVE = 8


def flag_keys(result: CharacteristicResult) -> dict[str, str]:
    """Return the key letter of each flagged cell: a, b, … z, aa."""
    return {f.cell: letter_name(i) for i, f in enumerate(result.flagged)}


def panels(numbers: Numbers) -> tuple[Drawing, Drawing | None]:
    """Return both panels of a characteristic; the second is None where nothing was compared."""
    values = values_panel(
        numbers.result,
        decimals=numbers.decimals,
        keys=flag_keys(numbers.result),
        margin_text=numbers.margin(),
        words=numbers.words,
    )
    if not numbers.result.pairs:
        return values, None
    return values, apart_panel(numbers.result, decimals=numbers.decimals, words=numbers.words)


def figures_section(
    all_numbers: Sequence[Numbers], drawn_on_first: CharacteristicResult | None
) -> Section | None:
    """Return the panels that page 1 has no room for; None where it has them all."""
    blocks: list[Block] = []
    for numbers in all_numbers:
        if numbers.result is drawn_on_first or not numbers.result.groups:
            continue
        if len(all_numbers) > 1:
            blocks.append(Subheading(text=numbers.result.title))
        values, apart = panels(numbers)
        blocks.append(Figure(drawing=values))
        if apart is not None:
            blocks.append(Figure(drawing=apart, caption=numbers.words.apart_caption(_partly(numbers))))
    if not blocks:
        return None
    heading = all_numbers[0].words.EVERY_VALUE
    return Section(anchor="every-value", heading=heading, blocks=tuple(blocks))


def _partly(numbers: Numbers) -> bool:
    return len(shown_pairs(numbers.result)) < len(numbers.result.pairs)


def apart_section(all_numbers: Sequence[Numbers]) -> Section:
    """Return the section *How far apart*: per characteristic the answer, pairs and groups."""
    blocks: list[Block] = []
    for index, numbers in enumerate(all_numbers):
        title = numbers.result.title
        blocks.append(Subheading(text=title, anchor=f"apart-{index + 1}"))
        blocks += _characteristic(numbers)
    return Section(anchor="apart", heading=all_numbers[0].words.HOW_FAR_APART, blocks=tuple(blocks))


def _characteristic(numbers: Numbers) -> list[Block]:
    result, words = numbers.result, numbers.words
    blocks: list[Block] = []
    if not result.pairs:
        answer = first_page_answer(numbers, most=1, title="", target="", first_use=False)
        blocks.append(Paragraph(text=answer.lines[0].text))
    else:
        intro = words.apart_intro(
            numbers.level(),
            result.unit,
            numbers.margin(),
            with_reference=result.reference is not None,
            log=numbers.log,
        )
        blocks += [Paragraph(text=intro), _pairs_table(numbers)]
        if len(result.groups) > LETTERS_ABOVE and result.reference is None:
            blocks.append(Figure(drawing=pair_grid(result, words), caption=words.grid_caption()))
        blocks += _after_pairs(numbers)
    if result.groups:
        blocks.append(_groups_table(numbers))
    blocks += _variance_table(numbers)
    return blocks


def _pairs_table(numbers: Numbers) -> Table:
    result, words = numbers.result, numbers.words
    heads = words.pair_heads(with_reference=result.reference is not None, ranks=numbers.ranks)
    shares = (19, 19, 12, 19, 13, 18)
    columns = tuple(
        Column(title=h, share=s, numeric=i in (2, 3, 4))
        for i, (h, s) in enumerate(zip(heads, shares, strict=True))
    )
    rows = []
    for pair in most_serious_first(result):
        view = higher_first(pair, result)
        rows.append(
            (
                view.first,
                view.second,
                numbers.difference(view.difference),
                numbers.range(view),
                numbers.p(pair.p),
                words.in_short(pair.answer, view.has_margin),
            )
        )
    return Table(columns=columns, rows=tuple(rows))


def _after_pairs(numbers: Numbers) -> list[Block]:
    result, words = numbers.result, numbers.words
    blocks: list[Block] = []
    if result.all_within_margin is not None:
        level = f"{trimmed((1 - 2 * result.alpha) * 100, 4)} %"
        blocks.append(Paragraph(text=words.all_within_margin(result.all_within_margin, level)))
    blocks += [*contrast_blocks(numbers), *design_blocks(numbers), *effect_blocks(numbers)]
    if any(g.n <= 4 for g in result.groups):
        blocks.append(Paragraph(text=words.few_results(), note=True))
    return blocks


def _groups_table(numbers: Numbers) -> Table:
    result, words = numbers.result, numbers.words
    letters = len(result.groups) > LETTERS_ABOVE and bool(result.letters)
    heads = words.group_heads(letters=letters)
    shares = (28, 6, 11, 11, 17, 27)
    columns = tuple(
        Column(title=h, share=s, numeric=1 <= i <= 4)
        for i, (h, s) in enumerate(zip(heads, shares, strict=True))
    )
    apart = _shown_different(result)
    groups_of = letters_of(result) if letters else {}
    rows = [_group_row(g, numbers, apart, groups_of) for g in result.groups]
    return Table(columns=columns, rows=tuple(rows))


def _shown_different(result: CharacteristicResult) -> frozenset[frozenset[str]]:
    return frozenset(frozenset((p.first, p.second)) for p in result.pairs if p.answer in EXCLUDES_NULL)


def _group_row(
    group: GroupResult, numbers: Numbers, apart: frozenset[frozenset[str]], letters: dict[str, str]
) -> tuple[str, ...]:
    words, result = numbers.words, numbers.result
    if letters:
        last = letters[group.label]
    else:
        others = [g.label for g in result.groups if frozenset((g.label, group.label)) in apart]
        last = ", ".join(others) or (words.nobody() if result.pairs else "–")
    label = words.reference_mark(group.label) if group.label == result.reference else group.label
    low, high = numbers.value(group.minimum), numbers.value(group.maximum)
    below_zero = group.minimum is not None and group.minimum < 0
    span = words.between(low, high) if below_zero else f"{low}–{high}"
    return label, str(group.n), numbers.mean(group.mean), numbers.mean(group.sd), span, last


def _variance_table(numbers: Numbers) -> list[Block]:
    overall = numbers.result.analysis_of_variance
    if overall is None or overall.ss_between is None or overall.ss_within is None or len(overall.df) != 2:
        return []
    between, within = overall.ss_between, overall.ss_within
    df_between, df_within = overall.df
    heads, names = numbers.words.variance_heads(), numbers.words.variance_rows()
    parts = (
        (between, df_between, overall.ms_between),
        (within, df_within, overall.ms_within),
        (between + within, df_between + df_within, None),
    )
    rows = [
        (name, significant(ss, 5), shortest(df), "" if ms is None else significant(ms, 5))
        for name, (ss, df, ms) in zip(names, parts, strict=True)
    ]
    shares = (40, 22, 16, 22)
    columns = tuple(
        Column(title=h, share=s, numeric=i > 0) for i, (h, s) in enumerate(zip(heads, shares, strict=True))
    )
    return [Table(columns=columns, rows=tuple(rows))]
