"""Why each characteristic is compared as it is, and which fact would lead to another procedure."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from qcreport.analysis.analyse import earliest_date, require_answerable
from qcreport.analysis.comparable import comparable
from qcreport.analysis.facts import Gathered, gather
from qcreport.analysis.outcome import chosen_by
from qcreport.analysis.screen import groups_of
from qcreport.measurements import MeasurementSet
from qcreport.plan.model import ComparisonPlan
from qcreport.rules import Choice, RulesTable
from qcreport.rules.alternatives import Alternative, alternatives
from qcreport.rules.history import SpreadHistory


@dataclass(frozen=True, slots=True, kw_only=True)
class Explained:
    """The choice for one characteristic."""

    name: str
    """As the layout calls it."""
    gathered: Gathered
    """Facts, evidence, checks."""
    choice: Choice
    """The row that applies, with the trace."""
    alternatives: tuple[Alternative, ...]
    """What a change of one fact alone would lead to; empty where the plan fixes the procedure."""

    def to_json(self) -> dict[str, Any]:
        """Return the form that `rules explain --json` prints."""
        facts = self.gathered.facts
        return {
            "name": self.name,
            "procedure": self.choice.procedure,
            "rule": self.choice.rule.to_json(),
            "facts": {e.fact: facts.value(e.fact) for e in self.gathered.evidence},
            "facts_evidence": [e.to_json() for e in self.gathered.evidence],
            "checks": [c.to_json() for c in self.gathered.checks],
            "trace": [t.to_json() for t in self.choice.trace],
            "alternatives": [a.to_json() for a in self.alternatives],
        }


def explain(
    measurements: MeasurementSet,
    plan: ComparisonPlan,
    rules: RulesTable,
    history: Sequence[SpreadHistory],
) -> tuple[Explained, ...]:
    """Return the choice for every characteristic of the plan, as `analyse` would make it.

    Raises
    ------
    ExportRefusedError
        Where the export cannot be compared by the plan.
    """
    require_answerable(measurements, plan)
    earliest = earliest_date(measurements)
    known = {h.characteristic: h for h in history}
    explained = []
    for c in plan.characteristics:
        ready = comparable(groups_of(measurements, plan, c), plan)
        gathered = gather(ready, plan, rules, earliest, known.get(c.name))
        choice = chosen_by(rules, gathered.facts, plan)
        fixed = choice.rule.table == "plan"
        others = () if fixed else alternatives(rules, gathered.facts)
        explained.append(Explained(name=c.name, gathered=gathered, choice=choice, alternatives=others))
    return tuple(explained)
