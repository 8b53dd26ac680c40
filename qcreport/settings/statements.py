"""What a report must say and only the laboratory can: site.toml's [report.states] and [report.left_out]."""

from __future__ import annotations

from typing import Final

from qcreport.analysis.context import Statement
from qcreport.toml_source import TableReader

STATEMENTS: Final = ("customer", "items", "sampling", "deviations", "external", "copying")
"""ISO/IEC 17025, 7.8.2.1: customer; items and their condition; sampling; departures from the method; results
of others; and the note that copies in part need consent."""
MANDATORY: Final = ("customer", "items", "sampling", "deviations", "external")


def parse_statements(report: TableReader) -> tuple[Statement, ...]:
    """Return what the site states; a fault for every mandatory statement neither made nor left out.

    A site without either table does not ask for the content by clause: nothing is required and nothing is
    printed.
    """
    states, left_out = report.table("states"), report.table("left_out")
    texts = {name: states.text(name, "", blank=True).strip() for name in STATEMENTS}
    reasons = {name: left_out.text(name, "", blank=True).strip() for name in MANDATORY}
    if not any(texts.values()) and not any(reasons.values()):
        return ()
    for name in STATEMENTS:
        if texts[name] and reasons.get(name):
            left_out.fault(name, "is stated and left out at once; keep one of them")
        elif name in MANDATORY and not texts[name] and not reasons[name]:
            states.fault(name, f"is blank: state it, or give the reason as left_out.{name}")
    return tuple(
        Statement(name=name, text=texts[name], left_out=reasons.get(name, ""))
        for name in STATEMENTS
        if texts[name] or reasons.get(name)
    )
