"""The facts of one characteristic, each with what was seen and what it rests on."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

from qcreport.analysis.comparable import Comparable, all_equal
from qcreport.analysis.history import within_batches
from qcreport.plan.model import ComparisonPlan, Scale
from qcreport.rules.evidence import Check, FactEvidence
from qcreport.rules.facts import CANNOT_BE_JUDGED, EVERY_PAIR, WITH_THE_REFERENCE, Facts
from qcreport.rules.history import SpreadHistory
from qcreport.rules.spread import judge_spread
from qcreport.rules.table import RulesTable


@dataclass(frozen=True, slots=True, kw_only=True)
class Gathered:
    """Facts, their evidence and the checks behind them."""

    facts: Facts
    """As the decision table sees them."""
    evidence: tuple[FactEvidence, ...]
    """One for each fact."""
    checks: tuple[Check, ...]
    """Variance checks as computed; empty where there was nothing to check."""


def gather(
    ready: Comparable,
    plan: ComparisonPlan,
    rules: RulesTable,
    earliest: dt.date | None,
    history: SpreadHistory | None = None,
) -> Gathered:
    """Return the facts of the comparable groups; `history` is the spread of earlier exports."""
    sizes = [g.n for g in ready.groups]
    smallest = min(sizes, default=0)
    evidence = [
        _comparison(plan),
        _groups(ready),
        _smallest(ready, smallest),
        _sizes(sizes),
        _variation(ready),
    ]
    evidence.append(_censored(ready))
    spread, checks = _spread(ready, plan, rules, earliest, history)
    evidence.extend(
        (
            spread,
            FactEvidence(
                fact="scale",
                value=plan.scale.value,
                observed="The plan compares ratios of geometric means."
                if plan.scale is Scale.LOG
                else "The plan compares differences of means.",
                source="Comparison plan",
            ),
        )
    )
    facts = Facts(
        comparison=evidence[0].value,
        groups=len(sizes),
        smallest_n=smallest,
        sizes=evidence[3].value,
        variation=evidence[4].value,
        censored=evidence[5].value,
        spread=spread.value,
        scale=plan.scale.value,
    )
    return Gathered(facts=facts, evidence=tuple(evidence), checks=checks)


def _comparison(plan: ComparisonPlan) -> FactEvidence:
    if plan.reference is None:
        value, observed = EVERY_PAIR, "The plan names no reference."
    else:
        value, observed = WITH_THE_REFERENCE, f"The plan names {plan.reference} as the reference."
    return FactEvidence(fact="comparison", value=value, observed=observed, source="Comparison plan")


def _groups(ready: Comparable) -> FactEvidence:
    left = len(ready.not_compared)
    observed = f"{left} more cannot be compared." if left else "Every group in the export can be compared."
    return FactEvidence(fact="groups", value=str(len(ready.groups)), observed=observed, source="Export")


def _smallest(ready: Comparable, smallest: int) -> FactEvidence:
    labels = [g.label for g in ready.groups if g.n == smallest]
    if not labels:
        observed = "No group can be compared."
    elif len(labels) == len(ready.groups):
        observed = "All groups have this size."
    else:
        observed = f"Smallest: {', '.join(labels[:3])}{' and others' if len(labels) > 3 else ''}."
    return FactEvidence(fact="smallest_n", value=str(smallest), observed=observed, source="Export")


def _sizes(sizes: list[int]) -> FactEvidence:
    value = "equal" if len(set(sizes)) <= 1 else "unequal"
    observed = f"n = {', '.join(map(str, sizes))}." if sizes else ""
    return FactEvidence(fact="sizes", value=value, observed=observed, source="Export")


def _variation(ready: Comparable) -> FactEvidence:
    value = "some" if ready.varies else "none"
    still = [g.label for g, v in zip(ready.groups, ready.values, strict=True) if all_equal(v)]
    observed = (
        f"All values are equal in {', '.join(still)}." if still else "The values of every group differ."
    )
    return FactEvidence(fact="variation", value=value, observed=observed, source="Export")


def _censored(ready: Comparable) -> FactEvidence:
    count = sum(g.censored for g in ready.groups)
    observed = f"{count} results are known only by a limit." if count else "Every result is a number."
    return FactEvidence(
        fact="censored", value="some" if count else "none", observed=observed, source="Export"
    )


def _spread(
    ready: Comparable,
    plan: ComparisonPlan,
    rules: RulesTable,
    earliest: dt.date | None,
    history: SpreadHistory | None,
) -> tuple[FactEvidence, tuple[Check, ...]]:
    if len(ready.groups) < 2 or not ready.varies or ready.censored:
        nothing = FactEvidence(
            fact="spread",
            value=CANNOT_BE_JUDGED,
            observed="There is no scatter of numbers to judge.",
            source="Export",
        )
        return nothing, ()
    judged = judge_spread(
        ready.summaries,
        ready.values,
        rules.spread,
        plan.spread,
        earliest,
        history,
        within_batches(ready, plan),
    )
    evidence = FactEvidence(fact="spread", value=judged.value, observed=judged.observed, source=judged.source)
    return evidence, judged.checks
