"""What a person asks beside the comparison itself."""

from __future__ import annotations

from dataclasses import dataclass

from qcreport.errors import UsageError
from qcreport.measurements import MeasurementSet
from qcreport.plan.model import ComparisonPlan


@dataclass(frozen=True, slots=True, kw_only=True)
class Wish:
    """How one export is to be answered."""

    reason: str = ""
    """Why it is run again, with values left out, or in place of another report."""
    leave_out: tuple[str, ...] = ()
    """Cells to leave out, as the person wrote them."""
    replaces: str = ""
    """Number of the report that this one replaces."""
    report: bool = True
    """False: compute and record only."""

    def require_reason(self) -> None:
        """Raise UsageError where a decision is not explained."""
        for asked, option in ((self.leave_out, "--leave-out"), (self.replaces, "--replaces")):
            if asked and not self.reason.strip():
                raise UsageError(f'{option} needs a reason, which the report prints: --reason "…".')
        if self.replaces and not self.report:
            raise UsageError("Only a report can replace a report: leave out --no-report.")


PLAIN_WISH = Wish()


def cells_to_leave_out(
    asked: tuple[str, ...], measurements: MeasurementSet, plan: ComparisonPlan
) -> tuple[tuple[str, str], ...]:
    """Return (cell, stored text) of the values asked for, export order.

    Raises
    ------
    UsageError
        Where a cell holds no value that the plan compares.
    """
    compared = {c.name for c in plan.characteristics}
    used = {
        str(m.cell): m.text
        for m in measurements.measurements
        if m.characteristic in compared and not m.missing
    }
    plain = {_plain(cell): cell for cell in used}
    if len(sheets := {cell.rpartition("!")[0] for cell in used}) == 1:
        only = next(iter(sheets))
        plain |= {_plain(cell).removeprefix(f"{_plain(only)}!"): cell for cell in used}
    found = []
    for cell in asked:
        if _plain(cell) not in plain:
            raise UsageError(_not_used(cell, tuple(used), measurements), key=cell)
        found.append(plain[_plain(cell)])
    return tuple((cell, text) for cell, text in used.items() if cell in found)


def _plain(cell: str) -> str:
    """Return a cell without what spreadsheets add to its name: quotes, dollar signs, case."""
    sheet, mark, place = cell.strip().rpartition("!")
    return f"{sheet.strip(chr(39)).casefold()}{mark}{place.replace('$', '').casefold()}"


def _not_used(cell: str, used: tuple[str, ...], measurements: MeasurementSet) -> str:
    shown = ", ".join(used[:3])
    return (
        f"{cell} holds no value that is compared in {measurements.export_name}. Values stand in {shown}"
        f"{', …' if len(used) > 3 else ''}; qcreport layout try shows each with its cell."
    )
