"""The line that shows where a weighted critical value comes from: Dunnett's C and `dunnett_weighted`."""

from __future__ import annotations

import math

from qcreport.analysis.result import CharacteristicResult, GroupResult
from qcreport.report.numbers import Numbers
from qcreport.report.pairs import PairView, n_compared
from qcreport.report.rounding import fixed, significant
from qcreport.stats.distributions import studentized_range_isf
from qcreport.stats.distributions.student import t_two_sided_quantile

AGREES = 1e-6


def weighted_line(view: PairView, numbers: Numbers) -> str | None:
    """Return the line, or None where the procedure has none or the printed spreads do not lead to it.

    They do not where a spread of zero was raised to what the resolution allows; a notice tells of that.
    """
    result = numbers.result
    if result.procedure not in ("dunnett_c", "dunnett_weighted") or view.pair.critical_value is None:
        return None
    groups = {g.label: g for g in result.groups}
    pair = (groups[view.first], groups[view.second])
    if any(g.sd is None or g.n < 2 for g in pair):
        return None
    weights = [(g.sd or 0.0) ** 2 / g.n for g in pair]
    values = [_quantile(result, g) for g in pair]
    if sum(weights) <= 0:
        return None
    mean = sum(c * a for c, a in zip(values, weights, strict=True)) / sum(weights)
    if not math.isclose(mean, view.pair.critical_value, rel_tol=AGREES):
        return None
    first, second = (significant(a, 5) for a in weights)
    c_first, c_second = (fixed(c, 4) for c in values)
    return numbers.words.weighted(
        c_first, first, c_second, second, fixed(mean, 4), tuple(str(g.n - 1) for g in pair)
    )


def _quantile(result: CharacteristicResult, group: GroupResult) -> float:
    if result.procedure == "dunnett_c":
        q = studentized_range_isf(result.alpha, n_compared(result), group.n - 1)
        return float(q) / math.sqrt(2)
    level = 1 - (1 - result.alpha) ** (1 / len(result.pairs))
    return t_two_sided_quantile(level, group.n - 1)
