"""What stands in small print beside the pairs: design, effects, contrasts, the decision rule."""

from __future__ import annotations

import math
from collections.abc import Sequence

from qcreport.analysis.result import CharacteristicResult, ContrastResult, EffectSize, PairResult
from qcreport.plan.model import Direction
from qcreport.rates.at_hand import ErrorRate
from qcreport.report.blocks import Block, Column, Paragraph, Subheading, Table
from qcreport.report.numbers import MISSING, Numbers
from qcreport.report.pairs import higher_first, is_lower, most_serious_first
from qcreport.report.rounding import fixed, shortest

EFFECTS_LISTED = 10


def design_blocks(numbers: Numbers) -> list[Block]:
    """Return what the design could have shown, with the limits of the scatter it rests on."""
    pairs = [p for p in numbers.result.pairs if p.detectable is not None and math.isfinite(p.detectable)]
    if not pairs:
        return []
    words, known = numbers.words, numbers.result.known_scatter
    found = _span([p.detectable for p in pairs if p.detectable is not None], numbers)
    ends = [e for p in pairs for e in p.detectable_limits or () if e is not None and math.isfinite(e)]
    limits = _span(ends, numbers) if ends and known is None else ""
    scatter = "" if known is None else numbers.with_unit(numbers.mean(known))
    source = numbers.result.known_scatter_from or "plan"
    return [Paragraph(text=words.detectable(found, scatter, source, limits), note=True)]


def _span(values: Sequence[float], numbers: Numbers) -> str:
    low, high = numbers.difference(min(values)), numbers.difference(max(values))
    return numbers.words.span(low, high, "" if numbers.log else numbers.result.unit)


def effect_blocks(numbers: Numbers) -> list[Block]:
    """Return the dimensionless sizes, in small print."""
    result, words = numbers.result, numbers.words
    texts = []
    if (overall := result.overall_effect) is not None:
        texts.append(words.overall_effect(*_three(overall), _level(overall)))
    effects = dict(zip(result.pairs, result.pair_effects, strict=True)) if result.pair_effects else {}
    listed = [
        (p, e) for p in most_serious_first(result)[:EFFECTS_LISTED] if (e := effects.get(p)) is not None
    ]
    if listed:
        said = "; ".join(_pair_effect(p, e, numbers) for p, e in listed)
        texts.append(words.pair_effects(said, _level(listed[0][1])))
    return [Paragraph(text=" ".join([*texts, words.effects_describe()]), note=True)] if texts else []


def _three(effect: EffectSize) -> tuple[str, str, str]:
    return fixed(effect.value, 2), fixed(effect.lower, 2), fixed(effect.upper, 2)


def _pair_effect(pair: PairResult, effect: EffectSize, numbers: Numbers) -> str:
    value, low, high = effect.value, effect.lower, effect.upper
    if is_lower(pair, numbers.result):
        value, low, high = -value, -high, -low
    view = higher_first(pair, numbers.result)
    ends = fixed(value, 2), fixed(low, 2), fixed(high, 2)
    return numbers.words.pair_effect(view.first, view.second, *ends)


def _level(effect: EffectSize) -> str:
    return f"{shortest(round(effect.confidence * 100, 6))} %"


def contrast_blocks(numbers: Numbers) -> list[Block]:
    """Return the plan's contrasts as a table."""
    if not numbers.result.contrasts:
        return []
    heads = numbers.words.contrast_heads("" if numbers.log else numbers.result.unit)
    shares = (22, 32, 14, 18, 14)
    columns = tuple(
        Column(title=h, share=s, numeric=i > 1) for i, (h, s) in enumerate(zip(heads, shares, strict=True))
    )
    return [Table(columns=columns, rows=tuple(_contrast(c, numbers) for c in numbers.result.contrasts))]


def _contrast(contrast: ContrastResult, numbers: Numbers) -> tuple[str, ...]:
    def said(value: float | None) -> str:
        return MISSING if value is None else numbers.difference(value)

    weights = ", ".join(f"{shortest(round(w, 6))} × {label}" for label, w in contrast.weights)
    span = numbers.words.between(said(contrast.lower), said(contrast.upper))
    return contrast.name, weights, said(contrast.estimate), span, numbers.p(contrast.p)


def rule_blocks(all_numbers: Sequence[Numbers]) -> list[Block]:
    """Return the decision rule with its risks, once for all characteristics that share it."""
    compared = [n for n in all_numbers if n.result.pairs]
    if not compared:
        return []
    rules = dict.fromkeys(text for n in compared for text in _rule(n))
    rates = dict.fromkeys(_rate(n.result.error_rate, n) for n in compared if n.result.error_rate is not None)
    head = Subheading(text=compared[0].words.decision_heading())
    return [head, *(Paragraph(text=t) for t in rules), *(Paragraph(text=t, note=True) for t in rates)]


def _rate(rate: ErrorRate, numbers: Numbers) -> str:
    cases = [rate.equal, rate.small_wide, rate.large_wide]
    if rate.equal is None or any(c is None for c in cases):
        return numbers.words.no_error_rate(rate.reason)
    equal, small, large = (f"{fixed(100 * (c or 0.0), 1)} %" for c in cases)
    return numbers.words.error_rate(numbers.result.rule.table, equal, small, large, str(rate.replicates))


def _rule(numbers: Numbers) -> list[str]:
    result, words = numbers.result, numbers.words
    texts = [
        words.decision_rule(
            shortest(result.alpha),
            numbers.level(),
            numbers.margin(),
            with_reference=result.reference is not None,
            ranks=numbers.ranks,
        )
    ]
    if result.direction != Direction.BOTH and _is_one_sided(result):
        texts.append(words.one_sided(result.direction))
    return texts


def _is_one_sided(result: CharacteristicResult) -> bool:
    return any((p.lower is None) != (p.upper is None) for p in result.pairs)
