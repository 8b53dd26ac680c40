"""Which plans an export belongs to, by its file name alone.

Capitals do not count, and composed and decomposed accents are one: the instrument PCs and shares from which
exports come do not tell them apart, so neither may the answer to "which plan".
"""

from __future__ import annotations

import unicodedata
from collections.abc import Iterable, Mapping
from fnmatch import fnmatchcase

from qcreport.errors import ExportRefusedError
from qcreport.intake.names import one_line


def matches(name: str, pattern: str) -> bool:
    """Return whether a file name fits a pattern with `*`, `?` and `[…]`."""
    return fnmatchcase(_folded(name), _folded(pattern))


def matching_plans(name: str, patterns: Mapping[str, Iterable[str]]) -> tuple[str, ...]:
    """Return the names of the plans of which a pattern fits, in the order given.

    Parameters
    ----------
    name : str
        File name of the export.
    patterns : mapping of str to iterable of str
        The `exports` patterns of each plan by its name.

    Raises
    ------
    ExportRefusedError
        With code `no_plan` where no pattern fits.
    """
    found = tuple(plan for plan, own in patterns.items() if any(matches(name, one) for one in own))
    if found:
        return found
    known = "; ".join(f"{', '.join(own)} (plan {plan})" for plan, own in patterns.items())
    raise ExportRefusedError(
        "no_plan",
        file=one_line(name),
        where="the file name",
        found="No plan's `exports` pattern fits this name.",
        expected=f"A name that fits one of: {known}." if known else "A plan; this site has none yet.",
        next_step="Rename the file, or add the pattern to the plan it belongs to, and drop the file again.",
    )


def _folded(text: str) -> str:
    return unicodedata.normalize("NFC", text).casefold()
