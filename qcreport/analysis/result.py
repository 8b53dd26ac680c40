"""The frozen result of an analysis and its JSON form `qcreport/result/1`.

Every number is kept at full double precision; rounding happens in the report and nowhere else.
"""

from __future__ import annotations

from dataclasses import dataclass

from qcreport.analysis.contrast_result import ContrastResult
from qcreport.analysis.left_out_result import LeftOutResult
from qcreport.analysis.provenance import NO_PROVENANCE, Provenance
from qcreport.analysis.result_parts import (
    ChangedAnswer,
    EffectSize,
    Flagged,
    GroupResult,
    Json,
    NotCompared,
    Overall,
    PairResult,
    Sensitivity,
    UnitValue,
)
from qcreport.canonical import finite_or_none
from qcreport.measurements import Notice
from qcreport.rates.at_hand import ErrorRate
from qcreport.rules.evidence import Check, FactEvidence, RuleApplied, TraceStep
from qcreport.rules.facts import NUMBERS

__all__ = [
    "ChangedAnswer",
    "CharacteristicResult",
    "Check",
    "ContrastResult",
    "EffectSize",
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
    """Standard deviation of a result by plan or history, which `detectable` rests on; None: as seen here."""
    known_scatter_from: str | None = None
    """`plan` or `history`; None: as seen here."""
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
            "known_scatter_from": self.known_scatter_from,
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
