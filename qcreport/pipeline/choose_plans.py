"""Which plans an export is compared by."""

from __future__ import annotations

from collections.abc import Sequence

from qcreport.intake.matching import matching_plans
from qcreport.settings.plans import PlanSettings


def fitting_plans(name: str, plans: Sequence[PlanSettings]) -> tuple[PlanSettings, ...]:
    """Return the plans whose `exports` patterns fit a file name.

    Raises
    ------
    ExportRefusedError
        `no_plan` where none does.
    """
    names = matching_plans(name, {p.plan.name: p.plan.exports for p in plans})
    return tuple(p for p in plans if p.plan.name in names)
