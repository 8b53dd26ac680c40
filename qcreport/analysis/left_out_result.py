"""What a comparison would have said with the values that a person left out."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from qcreport.canonical import finite_or_none

if TYPE_CHECKING:
    from qcreport.analysis.result import ChangedAnswer, PairResult

Json = dict[str, Any]


@dataclass(frozen=True, slots=True, kw_only=True)
class LeftOutValue:
    """One value that a person left out."""

    cell: str
    """Where it stands."""
    group: str
    """Batch or line label."""
    sample: str | None
    """Sample id, where the layout gives one."""
    value: float | None
    """In the characteristic's unit; None where not detected."""
    text: str
    """As stored in the export."""

    def to_json(self) -> Json:
        """Return the form of `result.json`."""
        return {
            "cell": self.cell,
            "group": self.group,
            "sample": self.sample,
            "value": finite_or_none(self.value),
            "text": self.text,
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class LeftOutResult:
    """The values left out of one characteristic, and the answers with them."""

    values: tuple[LeftOutValue, ...]
    """Export order."""
    procedure: str
    """The procedure that the rules choose with them; `none` where nothing is compared."""
    answer: str
    """The characteristic's answer with them."""
    pairs: tuple[PairResult, ...]
    """Every pair with them."""
    changed: tuple[ChangedAnswer, ...]
    """Pairs whose answer with them is another one, or which exist only with them."""

    def to_json(self) -> Json:
        """Return the form of `result.json`."""
        return {
            "values": [v.to_json() for v in self.values],
            "with_them": {
                "procedure": self.procedure,
                "answer": self.answer,
                "pairs": [p.to_json() for p in self.pairs],
                "changed": [c.to_json() for c in self.changed],
            },
        }
