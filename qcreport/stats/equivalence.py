"""Answers: an interval against 0 and the smallest difference that matters."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from qcreport.errors import DegenerateDataError, TooFewObservationsError
from qcreport.stats.comparison import PairwiseComparison, require_alpha
from qcreport.stats.distributions.student import t_upper_quantile

SERIOUSNESS = (
    "matters",
    "different",
    "not_settled",
    "not_shown",
    "within_margin",
    "equivalent",
    "not_compared",
)
"""Answer codes, the most serious first."""


@dataclass(frozen=True, slots=True, kw_only=True)
class MarginInterval:
    """The interval of one pair for two one-sided tests, results in u."""

    first: str
    """Label of the first group."""
    second: str
    """Label of the second group."""
    df: float | None
    """Degrees of freedom; None where infinite."""
    lower: float
    """Lower end of the interval at 1 - 2 alpha, in u."""
    upper: float
    """Upper end, in u."""
    within: bool
    """Whether the interval lies inside the margin, ends included."""


@dataclass(frozen=True, slots=True, kw_only=True)
class AllWithinMargin:
    """Two one-sided tests for every pair, joined by intersection and union."""

    alpha: float
    """Level of the joint statement, and of each one-sided test."""
    intervals: tuple[MarginInterval, ...]
    """One for each pair, input order."""
    all_within: bool
    """Whether every interval lies inside the margin."""


def judge(
    lower: float | None, upper: float | None, margin_below: float | None, margin_above: float | None
) -> str:
    """Return the answer code of an interval.

    Parameters
    ----------
    lower, upper : float or None, in u
        Ends of the simultaneous interval; None for an infinite end.
    margin_below : float < 0 or None, in u
        Smallest difference that matters downwards; None where no lower difference matters.
    margin_above : float > 0 or None, in u
        The same upwards. Both None: no margin was set.

    Returns
    -------
    str
        `matters` (wholly beyond the margin), `different` (excludes 0 and reaches beyond; or excludes 0
        without a margin), `not_settled` (includes 0 and reaches beyond), `within_margin` (excludes 0,
        wholly inside), `equivalent` (includes 0, wholly inside), `not_shown` (includes 0 without a margin).
        An end exactly on 0 or on the margin counts as not beyond it.

    Raises
    ------
    DegenerateDataError
        Ends out of order or not numbers, or a margin on the wrong side of 0.

    Examples
    --------
    >>> judge(-0.4, 1.2, -1.5, 1.5)
    'equivalent'
    >>> judge(0.0, 1.6, -1.5, 1.5)
    'not_settled'
    """
    low = -math.inf if lower is None else lower
    high = math.inf if upper is None else upper
    if not low <= high:
        raise DegenerateDataError("The ends of an interval are out of order.")
    below, above = _margin(margin_below, margin_above)
    excludes_zero = low > 0.0 or high < 0.0
    if margin_below is None and margin_above is None:
        return "different" if excludes_zero else "not_shown"
    if low > above or high < below:
        return "matters"
    reaches_beyond = high > above or low < below
    if excludes_zero:
        return "different" if reaches_beyond else "within_margin"
    return "not_settled" if reaches_beyond else "equivalent"


def most_serious(codes: Sequence[str]) -> str:
    """Return the answer of a characteristic: that of its most serious pair.

    With a group that was not compared the best possible answer is `not_settled`; where nothing was compared
    it is `not_compared`.

    Raises
    ------
    TooFewObservationsError
        No code at all.
    DegenerateDataError
        A code that is none of `SERIOUSNESS`.
    """
    if not codes:
        raise TooFewObservationsError("There is no answer to choose from.")
    unknown = set(codes) - set(SERIOUSNESS)
    if unknown:
        raise DegenerateDataError(f"Unknown answer: {', '.join(sorted(unknown))}.")
    worst = min(codes, key=SERIOUSNESS.index)
    if worst == "not_compared" or "not_compared" not in codes:
        return worst
    return min(worst, "not_settled", key=SERIOUSNESS.index)


def all_within_margin(
    comparisons: Sequence[PairwiseComparison],
    *,
    alpha: float,
    margin_below: float | None,
    margin_above: float | None,
    own_df: Sequence[float] | None = None,
) -> AllWithinMargin:
    """Ask whether all differences lie within the margin: two one-sided tests for every pair.

    Each pair is tested at level alpha [1]_; the joint statement needs every test to succeed and so keeps
    level alpha without adjustment (intersection-union, [2]_).

    Parameters
    ----------
    comparisons : sequence of PairwiseComparison, not empty
        With `se`; the same standard errors and df serve here.
    alpha : float in (0, 0.5)
        Level of the statement; the intervals have confidence 1 - 2 alpha.
    margin_below, margin_above : float or None, in u
        As for `judge`; at least one is set.
    own_df : sequence of float, optional
        Degrees of freedom for pairs whose procedure has none (`df` None), e.g. Welch-Satterthwaite; without
        it such a pair counts as known scatter.

    Returns
    -------
    AllWithinMargin

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        No pair, or a pair without standard error; no margin, or a level that is not below 0.5.

    References
    ----------
    .. [1] Schuirmann (1987), J. Pharmacokinet. Biopharm. 15, 657-680. doi:10.1007/BF01068419
    .. [2] Berger (1982), Technometrics 24(4), 295-300. doi:10.1080/00401706.1982.10487790
    """
    require_alpha(2.0 * alpha)
    if not comparisons:
        raise TooFewObservationsError("There is no pair to test against the margin.")
    if margin_below is None and margin_above is None:
        raise DegenerateDataError("No margin is set.")
    below, above = _margin(margin_below, margin_above)
    intervals = []
    for position, pair in enumerate(comparisons):
        if pair.se is None:
            raise TooFewObservationsError(f"{pair.first} and {pair.second} have no standard error.")
        df = pair.df if pair.df is not None or own_df is None else own_df[position]
        half = t_upper_quantile(alpha, math.inf if df is None else df) * pair.se
        lower, upper = pair.difference - half, pair.difference + half
        intervals.append(
            MarginInterval(
                first=pair.first,
                second=pair.second,
                df=df,
                lower=lower,
                upper=upper,
                within=below <= lower and upper <= above,
            )
        )
    return AllWithinMargin(
        alpha=alpha, intervals=tuple(intervals), all_within=all(i.within for i in intervals)
    )


def _margin(margin_below: float | None, margin_above: float | None) -> tuple[float, float]:
    """Return the two ends of the margin, infinite where not set."""
    below = -math.inf if margin_below is None else margin_below
    above = math.inf if margin_above is None else margin_above
    if not (below < 0.0 < above):
        raise DegenerateDataError("The margin below must be negative and the margin above positive.")
    return below, above
