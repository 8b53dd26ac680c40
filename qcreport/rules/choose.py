"""The choice: which row decides, and why each row before it did not apply."""

from __future__ import annotations

from dataclasses import dataclass

from qcreport.rules.evidence import RuleApplied, TraceStep
from qcreport.rules.facts import Facts
from qcreport.rules.table import RulesTable


@dataclass(frozen=True, slots=True, kw_only=True)
class Choice:
    """The procedure with the row and the trace that lead to it."""

    procedure: str
    """Procedure name."""
    rule: RuleApplied
    """The row that chose."""
    trace: tuple[TraceStep, ...]
    """Rows tried, in order; the last one applied."""


def choose(table: RulesTable, facts: Facts) -> Choice:
    """Return the first row whose conditions all hold, with the reason each earlier row did not."""
    steps: list[TraceStep] = []
    for row in table.rows:
        failed = row.fails_on(facts)
        if failed is None:
            steps.append(TraceStep(id=row.id, applied=True, why=_applies(row.when)))
            rule = RuleApplied(
                table=table.name, id=row.id, reason=row.reason, source=row.source, approved=table.approved
            )
            return Choice(procedure=row.procedure, rule=rule, trace=tuple(steps))
        why = f"needs {failed}; here it is {facts.value(failed.fact)}"
        steps.append(TraceStep(id=row.id, applied=False, why=why))
    raise AssertionError("a loaded table answers every combination")


def fixed_by_plan(table: RulesTable, facts: Facts, procedure: str) -> Choice:
    """Return the procedure the plan fixes, with what the table would have chosen."""
    by_table = choose(table, facts)
    agrees = by_table.procedure == procedure
    words = (
        f"The plan fixes this procedure in advance; the table {table.name} would choose the same."
        if agrees
        else f"The plan fixes this procedure in advance; the table {table.name} would choose "
        f"{by_table.procedure} by its row {by_table.rule.id}."
    )
    rule = RuleApplied(table="plan", id="fixed_by_plan", reason=words, source="Comparison plan")
    step = TraceStep(id="fixed_by_plan", applied=True, why=f"procedure = {procedure} in the plan")
    return Choice(procedure=procedure, rule=rule, trace=(step,))


def _applies(when: tuple[object, ...]) -> str:
    return "; ".join(str(c) for c in when) if when else "applies to everything that is left"
