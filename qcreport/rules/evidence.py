"""What the rules layer hands on: checks, facts with their evidence, the row that chose, the rows tried."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from qcreport.canonical import finite_or_none
from qcreport.plan.model import Approval

Json = dict[str, Any]


@dataclass(frozen=True, slots=True, kw_only=True)
class Check:
    """One check of an assumption, as computed."""

    name: str
    """brown_forsythe, bartlett, cochran_c, spread_ratio_limit, spread_conflict."""
    statistic: float | None
    """The check's statistic, dimensionless."""
    df: tuple[float, ...]
    """Degrees of freedom, empty where the check has none."""
    p: float | None
    """Tail probability, None where the check has none."""
    threshold: float | None
    """What statistic or p is held against."""
    met: bool | None
    """Whether the assumption stands by this check; None where it is description only."""
    note: str = ""
    """Group concerned or other detail."""

    def to_json(self) -> Json:
        """Return the form of `result.json`."""
        return {
            "name": self.name,
            "statistic": finite_or_none(self.statistic),
            "df": [finite_or_none(d) for d in self.df],
            "p": finite_or_none(self.p),
            "threshold": finite_or_none(self.threshold),
            "met": self.met,
            "note": self.note,
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class FactEvidence:
    """Why a fact has its value."""

    fact: str
    """comparison, sizes, smallest_n, groups, spread, censored, scale."""
    value: str
    """The fact's value as the decision table sees it."""
    observed: str
    """What was seen or declared, one sentence."""
    source: str
    """Plan, export, or the published check."""

    def to_json(self) -> Json:
        """Return the form of `result.json`."""
        return {"fact": self.fact, "value": self.value, "observed": self.observed, "source": self.source}


@dataclass(frozen=True, slots=True, kw_only=True)
class TraceStep:
    """One row of the decision table as tried."""

    id: str
    """Row id."""
    applied: bool
    """True for the row that decided (the last one tried)."""
    why: str
    """Why it did not apply, or that it did."""

    def to_json(self) -> Json:
        """Return the form of `result.json`."""
        return {"id": self.id, "applied": self.applied, "why": self.why}


@dataclass(frozen=True, slots=True, kw_only=True)
class RuleApplied:
    """The row that chose the procedure."""

    table: str
    """default, textbook, a lab's own, or `plan` for a procedure fixed in the plan."""
    id: str
    """Row id; `fixed_by_plan` where the plan fixes the procedure."""
    reason: str
    """The row's reason, one sentence."""
    source: str
    """Publication or measurement the row rests on."""
    approved: Approval | None = None
    """Who approved the table, as its file says; None where it says nothing."""

    def to_json(self) -> Json:
        """Return the form of `result.json`."""
        approved = self.approved
        return {
            "table": self.table,
            "id": self.id,
            "reason": self.reason,
            "source": self.source,
            "approved": None if approved is None else {"by": approved.by, "on": approved.on.isoformat()},
        }
