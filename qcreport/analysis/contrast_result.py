"""A declared contrast as reported."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from qcreport.canonical import finite_or_none


@dataclass(frozen=True, slots=True, kw_only=True)
class ContrastResult:
    """One weighted sum of group means, with an interval that holds for all contrasts together."""

    name: str
    """As the plan names it."""
    procedure: str
    """`scheffe`, or `brown_forsythe` where the groups' own variances are used."""
    weights: tuple[tuple[str, float], ...]
    """(group label, weight), plan order."""
    estimate: float | None
    """In the unit; a ratio on the log scale."""
    se: float
    """Standard error, in the unit (of natural logarithms on the log scale)."""
    statistic: float
    """estimate / se, signed."""
    df: float
    """Degrees of freedom of the standard error."""
    critical_value: float
    """What |statistic| must exceed."""
    p: float
    """Adjusted for all contrasts that there are."""
    lower: float | None
    """Lower end of the simultaneous interval."""
    upper: float | None
    """Upper end of the simultaneous interval."""

    def to_json(self) -> dict[str, Any]:
        """Return the form of `result.json`."""
        return {
            "name": self.name,
            "procedure": self.procedure,
            "weights": dict(self.weights),
            "estimate": finite_or_none(self.estimate),
            "se": finite_or_none(self.se),
            "statistic": finite_or_none(self.statistic),
            "df": finite_or_none(self.df),
            "critical_value": finite_or_none(self.critical_value),
            "p": finite_or_none(self.p),
            "lower": finite_or_none(self.lower),
            "upper": finite_or_none(self.upper),
        }
