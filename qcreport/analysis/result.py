"""The frozen result of an analysis and its JSON form `qcreport/result/1`.

Every number is kept at full double precision; rounding happens in the report and nowhere else.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from qcreport.analysis.contrast_result import ContrastResult
from qcreport.analysis.left_out_result import LeftOutResult
from qcreport.analysis.provenance import NO_PROVENANCE, Provenance
from qcreport.canonical import finite_or_none
from qcreport.measurements import Censoring, Notice
from qcreport.rates.at_hand import ErrorRate
from qcreport.rules.evidence import Check, FactEvidence, RuleApplied, TraceStep
from qcreport.rules.facts import NUMBERS

__all__ = [
    "ChangedAnswer",
    "CharacteristicResult",
    "Check",
    "ContrastResult",
    "FactEvidence",
    "Flagged",
    "GroupResult",
    "NotCompared",
    "Overall",
    "PairResult",
    "Result",
    "RuleApplied",
    "Sensitivity",
    "TraceStep",
    "UnitValue",
]

RESULT_SCHEMA = "qcreport/result/1"

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


@dataclass(frozen=True, slots=True, kw_only=True)
class CharacteristicResult:
    """Everything about one characteristic."""

    name: str
    """As the layout calls it."""
    title: str
    """As the report prints it."""
    unit: str
    """Unit of values, means and differences."""
    alpha: float
    """Family-wise error rate used."""
    margin: tuple[float | None, float | None]
    """Smallest difference that matters, below (≤ 0) and above (≥ 0); (None, None) where none is set."""
    scale: str
    """`as measured` or `log`."""
    direction: str
    """both, lower_matters or higher_matters."""
    lower_limit: float | None
    """Specification limit, for orientation."""
    upper_limit: float | None
    """Specification limit, for orientation."""
    known_scatter: float | None = None
    """Standard deviation of a result by the plan, which `detectable` rests on; None: as seen here."""
    independent_unit: str
    """reading, sample or batch."""
    reference: str | None
    """Label of the reference group, or None for every pair."""
    groups: tuple[GroupResult, ...]
    """Every group that holds a value, order of first appearance."""
    not_compared: tuple[NotCompared, ...]
    """Those of them (and groups without any value) that are not compared, with the reason."""
    checks: tuple[Check, ...]
    """Checks as computed."""
    facts: tuple[FactEvidence, ...]
    """Facts with their evidence."""
    rule: RuleApplied
    """The row that chose."""
    trace: tuple[TraceStep, ...]
    """Rows tried, in order."""
    overall: Overall | None
    """The overall test, following the spread fact."""
    analysis_of_variance: Overall | None
    """One-way analysis of variance, always, as description; None where nothing can be computed."""
    procedure: str
    """Procedure name, `none` where nothing is compared."""
    critical_value: float | None
    """Common critical value on the scale of |statistic|; None unless common."""
    hsd: float | None
    """Tukey's honestly significant difference; None where sizes differ."""
    all_within_margin: bool | None
    """Two one-sided tests for every pair; None without a margin or pairs."""
    pairs: tuple[PairResult, ...]
    """i < j in group order; with a reference each group with it."""
    sensitivity: Sensitivity | None
    """One alternative, or None."""
    law: str | None = None
    """For ranks `exact` or `asymptotic`; None otherwise."""
    letters: tuple[str, ...] = ()
    """Compact letters of the compared groups, group order; empty with a reference."""
    pair_effects: tuple[EffectSize | None, ...] = ()
    """Hedges' g of the pairs, pair order; empty where not given."""
    overall_effect: EffectSize | None = None
    """Omega squared; None where not given."""
    contrasts: tuple[ContrastResult, ...] = ()
    """The plan's contrasts that could be estimated, plan order."""
    flagged: tuple[Flagged, ...]
    """Outlying values."""
    answer: str
    """Code of the most serious pair."""
    error_rate: ErrorRate | None = None
    """Simulated error rate of the choice at these sizes; None in results of versions before."""
    left_out: LeftOutResult | None = None
    """What a person left out, and the answers with it; None where nothing was."""

    def fact_values(self) -> dict[str, str | int]:
        """Return the facts as the decision table saw them."""
        return {f.fact: int(f.value) if f.fact in NUMBERS else f.value for f in self.facts}

    def to_json(self) -> Json:
        """Return the form of `result.json`."""
        return {
            "name": self.name,
            "title": self.title,
            "unit": self.unit,
            "alpha": self.alpha,
            "margin": [finite_or_none(self.margin[0]), finite_or_none(self.margin[1])],
            "scale": self.scale,
            "direction": self.direction,
            "lower_limit": finite_or_none(self.lower_limit),
            "upper_limit": finite_or_none(self.upper_limit),
            "known_scatter": finite_or_none(self.known_scatter),
            "independent_unit": self.independent_unit,
            "reference": self.reference,
            "groups": [g.to_json() for g in self.groups],
            "not_compared": [g.to_json() for g in self.not_compared],
            "checks": [c.to_json() for c in self.checks],
            "facts": self.fact_values(),
            "facts_evidence": [f.to_json() for f in self.facts],
            "rule": self.rule.to_json(),
            "trace": [t.to_json() for t in self.trace],
            "overall": None if self.overall is None else self.overall.to_json(),
            "analysis_of_variance": (
                None if self.analysis_of_variance is None else self.analysis_of_variance.to_json()
            ),
            "procedure": self.procedure,
            "critical_value": finite_or_none(self.critical_value),
            "hsd": finite_or_none(self.hsd),
            "all_within_margin": self.all_within_margin,
            "pairs": self._pairs_json(),
            "law": self.law,
            "letters": list(self.letters),
            "overall_effect": None if self.overall_effect is None else self.overall_effect.to_json(),
            "components": None,
            "sensitivity": None if self.sensitivity is None else self.sensitivity.to_json(),
            "contrasts": [c.to_json() for c in self.contrasts],
            "flagged": [f.to_json() for f in self.flagged],
            "answer": self.answer,
            "error_rate": None if self.error_rate is None else self.error_rate.to_json(),
            "left_out": None if self.left_out is None else self.left_out.to_json(),
        }

    def _pairs_json(self) -> list[Json]:
        effects = self.pair_effects or (None,) * len(self.pairs)
        return [
            {**pair.to_json(), "effect": None if effect is None else effect.to_json()}
            for pair, effect in zip(self.pairs, effects, strict=True)
        ]


@dataclass(frozen=True, slots=True, kw_only=True)
class Result:
    """The result of one export compared by one plan."""

    export_name: str
    """File name as dropped."""
    export_sha256: str
    """Digest of its bytes."""
    plan_name: str
    """Name in the plan."""
    plan_sha256: str
    """Digest of the plan file's bytes."""
    run_k: int
    """This is run k …"""
    run_n: int
    """… of n over this export."""
    notices: tuple[Notice, ...]
    """Notices of the reading and of the analysis."""
    characteristics: tuple[CharacteristicResult, ...]
    """In plan order."""
    versions: tuple[tuple[str, str], ...]
    """(package, version) that computed it."""
    run_reason: str = ""
    """Why it was run again; empty for run 1."""
    provenance: Provenance = NO_PROVENANCE
    """What the records add."""

    def to_json(self) -> Json:
        """Return the document `qcreport/result/1`."""
        return {
            "schema": RESULT_SCHEMA,
            "export": {"name": self.export_name, "sha256": self.export_sha256},
            "plan": {"name": self.plan_name, "sha256": self.plan_sha256},
            "run": {"k": self.run_k, "n": self.run_n},
            "runs": {"reason": self.run_reason, **self.provenance.run_json()},
            **self.provenance.decisions_json(),
            "notices": [{"code": n.code, "cells": list(n.cells), "text": n.text} for n in self.notices],
            "characteristics": [c.to_json() for c in self.characteristics],
            "versions": dict(self.versions),
        }
