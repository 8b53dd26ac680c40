"""The error rate for one design: at equal spread, and where some groups scatter twice as much as others."""

from __future__ import annotations

from dataclasses import asdict, dataclass, fields, is_dataclass, replace
from functools import lru_cache
from typing import Any, Final

import numpy as np

from qcreport.canonical import sha256_hex, to_json_bytes
from qcreport.rates.draw import draw_moments, draw_values
from qcreport.rates.simulate import Asked, alarms, needs_values

REPLICATES: Final = 20_000
FEWEST: Final = 1_000
_PAIRS_AT_MOST: Final = 1_500_000
_VALUES_AT_MOST: Final = 1_500_000
WIDE: Final = 2.0
"""Standard deviation of the wide groups; the others have 1."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ErrorRate:
    """How often the choice and its checks find a difference where there is none, at the sizes at hand."""

    replicates: int
    """Simulated tables of each case; 0 where none were simulated."""
    equal: float | None
    """All groups scatter alike."""
    small_wide: float | None
    """The smaller half of the groups scatters twice as much as the others."""
    large_wide: float | None
    """The larger half scatters twice as much."""
    reason: str = ""
    """Why there is no rate; empty where there is one."""

    def to_json(self) -> dict[str, Any]:
        """Return the form of `result.json`."""
        return asdict(self)


def no_rate(reason: str) -> ErrorRate:
    """Return that no rate is given, and why."""
    return ErrorRate(replicates=0, equal=None, small_wide=None, large_wide=None, reason=reason)


def rate_at_hand(asked: Asked) -> ErrorRate:
    """Return the simulated error rate of a design; the same question gives the same answer.

    Normal results without any true difference; the seed is a digest of sizes, table and what is known of
    spread. Fewer than 20,000 tables are simulated where they are large.
    """
    return _rate(asked)


@lru_cache(maxsize=256)
def _rate(asked: Asked) -> ErrorRate:
    design = asked.design
    order = sorted(range(len(design.sizes)), key=lambda i: (design.sizes[i], i == design.reference))
    half = len(order) // 2
    values = needs_values(asked)
    most = min(
        REPLICATES,
        _PAIRS_AT_MOST // len(design.pairs),
        _VALUES_AT_MOST // sum(design.sizes) if values else REPLICATES,
    )
    replicates = max(most, FEWEST)
    rates = []
    for case, wide in enumerate((set[int](), set(order[:half]), set(order[len(order) - half :]))):
        sds = [WIDE if i in wide else 1.0 for i in range(len(order))]
        source = np.random.RandomState([*_seed(asked), case])
        draws = (draw_values if values else draw_moments)(source, design, sds, replicates)
        rates.append(float(np.count_nonzero(alarms(asked, draws, sds, source))) / replicates)
    return ErrorRate(replicates=replicates, equal=rates[0], small_wide=rates[1], large_wide=rates[2])


def _seed(asked: Asked) -> list[int]:
    table = replace(asked.table, approved=None)  # who approved it changes nothing that it does
    digest = sha256_hex(to_json_bytes(_plain(replace(asked, table=table))))
    return [int(digest[i : i + 8], 16) for i in range(0, 64, 8)]


def _plain(value: Any) -> Any:
    if is_dataclass(value):
        return {f.name: _plain(getattr(value, f.name)) for f in fields(value)}
    return [_plain(item) for item in value] if isinstance(value, tuple) else value
