"""Whether a procedure finds any difference, for many tables at once."""

from __future__ import annotations

from collections.abc import Callable
from typing import Final

import numpy as np
from numpy.typing import NDArray

from qcreport.rates.critical import by_inverse_df, exact, read
from qcreport.rates.design import Design
from qcreport.rates.draw import Array, Draws
from qcreport.stats.distributions import many_to_one_isf

Found = NDArray[np.bool_]

_BY_PAIR_DF: Final = {
    "games_howell": "range",
    "dunnett_t3": "modulus",
    "tamhane_t2": "sidak",
    "dunnett_unequal": "sidak",
}
_WEIGHTED: Final = {"dunnett_c": "range", "dunnett_weighted": "sidak"}


def any_rejected(procedure: str, design: Design, draws: Draws) -> Found:
    """Return for each replicate whether any comparison of the procedure excludes 0.

    Raises
    ------
    KeyError
        For a procedure that does not compare means.
    """
    return PROCEDURES[procedure](procedure, design, draws)


def _pooled(procedure: str, design: Design, draws: Draws) -> Found:
    k, dfs = len(design.sizes), np.array(design.dfs)
    df = float(dfs.sum())
    ms_within = (draws.variances * dfs[:, None]).sum(axis=0) / df
    if procedure == "dunnett":
        reference, two_sided = design.reference or 0, not design.one_sided
        others = [n for i, n in enumerate(design.sizes) if i != reference]
        critical = float(
            many_to_one_isf(design.alpha, design.sizes[reference], others, df, two_sided=two_sided)
        )
    else:
        critical = float(exact("range", k, design.alpha, np.array([df]))[0])
    found = np.zeros(draws.means.shape[1], dtype=bool)
    for i, j in design.pairs:
        limit = critical * critical * (1.0 / design.sizes[i] + 1.0 / design.sizes[j])
        found |= _squared(draws, i, j, one_sided=design.one_sided) > limit * ms_within
    return found


def _by_pair_df(procedure: str, design: Design, draws: Draws) -> Found:
    law, count = _law(_BY_PAIR_DF[procedure], design)
    dfs = design.dfs
    table = by_inverse_df(law, count, design.alpha, min(dfs))
    found = np.zeros(draws.means.shape[1], dtype=bool)
    for i, j in design.pairs:
        squared, a, b = _pair(design, draws, i, j)
        least = read(table, np.array([1.0 / (dfs[i] + dfs[j])]))[0]
        rows = np.flatnonzero(~found & (squared > least * least * (a + b)))
        share = a[rows] / (a[rows] + b[rows])
        inverse = share * share / dfs[i] + (1.0 - share) ** 2 / dfs[j]
        critical = read(table, inverse)
        found[rows] = squared[rows] > critical * critical * (a[rows] + b[rows])
    return found


def _weighted(procedure: str, design: Design, draws: Draws) -> Found:
    law, count = _law(_WEIGHTED[procedure], design)
    critical = exact(law, count, design.alpha, np.array(design.dfs))
    found = np.zeros(draws.means.shape[1], dtype=bool)
    for i, j in design.pairs:
        squared, a, b = _pair(design, draws, i, j)
        between = critical[i] * a + critical[j] * b  # times 1 / (a + b), the weighted critical value
        found |= squared * (a + b) > between * between
    return found


def _nothing(procedure: str, design: Design, draws: Draws) -> Found:
    return np.zeros(draws.means.shape[1], dtype=bool)


def _law(law: str, design: Design) -> tuple[str, int]:
    if law == "range":
        return law, len(design.sizes)
    return (f"{law} one-sided" if design.one_sided else law), len(design.pairs)


def _pair(design: Design, draws: Draws, i: int, j: int) -> tuple[Array, Array, Array]:
    """Return the squared difference and both groups' squared standard errors."""
    a = draws.variances[i] / design.sizes[i]
    b = draws.variances[j] / design.sizes[j]
    return _squared(draws, i, j, one_sided=design.one_sided), a, b


def _squared(draws: Draws, i: int, j: int, *, one_sided: bool) -> Array:
    """Return the squared difference; 0 for one in a direction that does not count."""
    difference = draws.means[i] - draws.means[j]
    if one_sided:
        difference = np.maximum(difference, 0.0)
    return np.asarray(difference * difference)


PROCEDURES: Final[dict[str, Callable[[str, Design, Draws], Found]]] = {
    **dict.fromkeys(("tukey_hsd", "tukey_kramer", "dunnett"), _pooled),
    **dict.fromkeys(_BY_PAIR_DF, _by_pair_df),
    **dict.fromkeys(_WEIGHTED, _weighted),
    "none": _nothing,
}
"""Procedures that compare means, and the one that compares nothing."""
