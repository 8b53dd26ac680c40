"""The parts of a characteristic's result: units, groups, pairs, tests, and what stands beside them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from qcreport.canonical import finite_or_none
from qcreport.measurements import Censoring

Json = dict[str, Any]


@dataclass(frozen=True, slots=True, kw_only=True)
class UnitValue:
    """One value of the independent unit: a reading, or the mean of the readings below it."""

    value: float
    """In the characteristic's unit; the limit itself where censored."""
    text: str
    """Stored text of the reading; empty where several readings were averaged."""
    decimals: int
    """Most decimals the export shows among its readings."""
    sample: str | None
    """Sample id, where the layout gives one."""
    cells: tuple[str, ...]
    """Cells of its readings."""
    censored: Censoring | None
    """None for a plain number."""
    marks: tuple[str, ...]
    """Marks of its cells: struck, commented, hidden."""
    placed: bool = True
    """False for a mean of readings that has no place among the others, not even by rank."""
    batch: str = ""
    """Batch of its readings."""


@dataclass(frozen=True, slots=True, kw_only=True)
class GroupResult:
    """One group (batch or line) that holds a value, compared or only described."""

    label: str
    """Batch or line label."""
    n: int
    """Independent units with a value."""
    n_readings: int
    """Readings behind them."""
    mean: float | None
    """Arithmetic mean, in the unit; None where a value is known only by a limit."""
    sd: float | None
    """Standard deviation (n − 1), in the unit; None for n = 1 or where a value is known only by a limit."""
    minimum: float | None
    """Lowest value, in the unit; None where a value is known only by a limit."""
    maximum: float | None
    """Highest value, in the unit; None where a value is known only by a limit."""
    median: float | None
    """Median, in the unit; None where a value is known only by a limit."""
    censored: int
    """Units known only by a limit."""
    missing: int
    """Cells that hold a marker for a missing value."""
    cells: tuple[str, ...]
    """Cells of every reading used, export order."""
    units: tuple[UnitValue, ...]
    """The values, export order (for figure and data section; not in the JSON)."""

    def to_json(self) -> Json:
        """Return the form of `result.json`."""
        return {
            "label": self.label,
            "n": self.n,
            "n_readings": self.n_readings,
            "mean": finite_or_none(self.mean),
            "sd": finite_or_none(self.sd),
            "median": finite_or_none(self.median),
            "minimum": finite_or_none(self.minimum),
            "maximum": finite_or_none(self.maximum),
            "censored": self.censored,
            "missing": self.missing,
            "cells": list(self.cells),
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class NotCompared:
    """A group that is described but not compared."""

    label: str
    """Batch or line label."""
    n: int
    """Independent units with a value."""
    reason: str
    """One sentence."""

    def to_json(self) -> Json:
        """Return the form of `result.json`."""
        return {"label": self.label, "n": self.n, "reason": self.reason}


@dataclass(frozen=True, slots=True, kw_only=True)
class Overall:
    """The overall test; never a gate for the pairs."""

    name: str
    """anova, welch or kruskal_wallis."""
    statistic: float | None
    """F or H."""
    df: tuple[float, ...]
    """Numerator and denominator degrees of freedom."""
    p: float | None
    """Tail probability."""
    ms_within: float | None
    """Mean square within groups, unit squared; None where not pooled."""
    ms_between: float | None
    """Mean square between groups, unit squared; None where not pooled."""
    ss_within: float | None
    """Sum of squares within groups; None where not pooled."""
    ss_between: float | None
    """Sum of squares between groups; None where not pooled."""
    supported_digits: int
    """Significant digits of the statistic that the data support."""

    def to_json(self) -> Json:
        """Return the form of `result.json`."""
        return {
            "name": self.name,
            "statistic": finite_or_none(self.statistic),
            "df": [finite_or_none(d) for d in self.df],
            "p": finite_or_none(self.p),
            "ms_within": finite_or_none(self.ms_within),
            "ms_between": finite_or_none(self.ms_between),
            "ss_within": finite_or_none(self.ss_within),
            "ss_between": finite_or_none(self.ss_between),
            "supported_digits": self.supported_digits,
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class EffectSize:
    """A dimensionless size of an effect; description only."""

    name: str
    """`hedges_g` (of a pair) or `omega_squared` (of all groups)."""
    value: float
    """Estimate."""
    lower: float
    """Lower confidence limit."""
    upper: float
    """Upper confidence limit."""
    confidence: float
    """Confidence of the two limits together; not simultaneous over pairs."""

    def to_json(self) -> Json:
        """Return the form of `result.json`."""
        return {
            "name": self.name,
            "value": finite_or_none(self.value),
            "lower": finite_or_none(self.lower),
            "upper": finite_or_none(self.upper),
            "confidence": self.confidence,
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class PairResult:
    """One compared pair; `difference` is first minus second."""

    first: str
    """Label; with a reference the group."""
    second: str
    """Label; with a reference the reference."""
    difference: float
    """first − second in the unit; a ratio of geometric means on the log scale; for ranks the Hodges–Lehmann
    shift, not finite where limits leave none."""
    se: float | None
    """Standard error of the difference (natural log units on the log scale)."""
    statistic: float | None
    """difference / se, signed."""
    df: float | None
    """Degrees of freedom; None for C, `dunnett_weighted` and ranks."""
    critical_value: float | None
    """Critical value on the scale of |statistic|."""
    p: float
    """Adjusted for all pairs."""
    lower: float | None
    """Lower end of the simultaneous interval; None for a one-sided bound's open end."""
    upper: float | None
    """Upper end of the simultaneous interval."""
    detectable: float | None
    """Difference that would be shown with probability 0.80 by this design, in the unit."""
    detectable_limits: tuple[float | None, float | None] | None = None
    """The same at the 90 % limits of the scatter seen here; None where the plan gives the scatter."""
    needed_n: int | None
    """Results a group that would settle an open pair, if the scatter is as seen; None where settled, or not
    searched since there are very many pairs."""
    answer: str
    """Code of the answer."""

    def to_json(self) -> Json:
        """Return the form of `result.json`."""
        return {
            "first": self.first,
            "second": self.second,
            "difference": finite_or_none(self.difference),
            "se": finite_or_none(self.se),
            "statistic": finite_or_none(self.statistic),
            "df": finite_or_none(self.df),
            "critical_value": finite_or_none(self.critical_value),
            "p": finite_or_none(self.p),
            "lower": finite_or_none(self.lower),
            "upper": finite_or_none(self.upper),
            "detectable": finite_or_none(self.detectable),
            "detectable_limits": (
                None
                if self.detectable_limits is None
                else [finite_or_none(end) for end in self.detectable_limits]
            ),
            "needed_n": self.needed_n,
            "answer": self.answer,
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class ChangedAnswer:
    """A pair whose answer another variance policy would change."""

    first: str
    """Label."""
    second: str
    """Label."""
    answer: str
    """The answer it would get."""

    def to_json(self) -> Json:
        """Return the form of `result.json`."""
        return {"first": self.first, "second": self.second, "answer": self.answer}


@dataclass(frozen=True, slots=True, kw_only=True)
class Sensitivity:
    """Exactly one alternative: the procedure of the other variance policy."""

    procedure: str
    """Procedure name."""
    changed: tuple[ChangedAnswer, ...]
    """Pairs whose answer would change."""

    def to_json(self) -> Json:
        """Return the form of `result.json`."""
        return {"procedure": self.procedure, "changed": [c.to_json() for c in self.changed]}


@dataclass(frozen=True, slots=True, kw_only=True)
class Flagged:
    """An outlying value: flagged, never dropped."""

    group: str
    """Batch or line label."""
    cell: str
    """Cell of the value (first cell where readings were averaged)."""
    value: float
    """In the unit."""
    test: str
    """grubbs."""
    statistic: float
    """The test's statistic."""
    p: float
    """Upper bound of the tail probability."""
    changes_answer: bool | None
    """Whether any pair's answer would change without it; None where that cannot be computed."""

    def to_json(self) -> Json:
        """Return the form of `result.json`."""
        return {
            "group": self.group,
            "cell": self.cell,
            "value": finite_or_none(self.value),
            "test": self.test,
            "statistic": finite_or_none(self.statistic),
            "p": finite_or_none(self.p),
            "changes_answer": self.changes_answer,
        }
