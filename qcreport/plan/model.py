"""The comparison plan: frozen, as a person approved it."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from enum import StrEnum


class Groups(StrEnum):
    """What is compared."""

    BATCH = "batch"
    LINE = "line"


class Unit(StrEnum):
    """The independent unit: what counts as n."""

    READING = "reading"
    SAMPLE = "sample"
    BATCH = "batch"


class Scale(StrEnum):
    """The scale of the comparison."""

    AS_MEASURED = "as measured"
    LOG = "log"


class Direction(StrEnum):
    """Which differences matter."""

    BOTH = "both"
    LOWER_MATTERS = "lower_matters"
    HIGHER_MATTERS = "higher_matters"


class Family(StrEnum):
    """Over what the family-wise error rate is kept."""

    CHARACTERISTIC = "characteristic"
    EXPORT = "export"


BY_RULES = "by rules"

PROCEDURES: tuple[str, ...] = (
    "tukey_hsd",
    "tukey_kramer",
    "games_howell",
    "dunnett_c",
    "dunnett_t3",
    "tamhane_t2",
    "dunnett",
    "dunnett_unequal",
    "dunnett_weighted",
    "steel_dwass",
    "steel",
    "nested",
    "none",
)
"""Procedure names as plan, rules, result and report spell them."""

WITH_REFERENCE: frozenset[str] = frozenset({"dunnett", "dunnett_unequal", "dunnett_weighted", "steel"})
"""Procedures that compare each group with the reference."""

POOLED: frozenset[str] = frozenset({"tukey_hsd", "tukey_kramer", "dunnett"})
"""Procedures that pool the scatter of all groups."""

RANKS: frozenset[str] = frozenset({"steel_dwass", "steel"})
"""Procedures on ranks."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Approval:
    """Who approved the plan, and when."""

    by: str
    """Name as written."""
    on: dt.date
    """Date."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SpreadDeclaration:
    """A person's statement that the groups scatter alike."""

    similar: bool
    """True: similar; false: declared different."""
    by: str
    """Who declares it."""
    on: dt.date
    """Date, to lie before the data."""
    reason: str
    """Why it may be declared."""
    accept_unequal_sizes: bool
    """Needed where largest/smallest n exceeds 1.5."""


@dataclass(frozen=True, slots=True, kw_only=True)
class CharacteristicPlan:
    """How one characteristic is judged."""

    name: str
    """As the layout calls it."""
    title: str
    """As the report prints it."""
    unit: str
    """Unit the export must come in."""
    margin_below: float | None
    """Smallest difference that matters downwards, ≤ 0, in the unit (a ratio below 1 on the log scale)."""
    margin_above: float | None
    """Smallest difference that matters upwards, ≥ 0, in the unit (a ratio above 1 on the log scale)."""
    margin_text: str
    """The margin as the plan writes it, for the page; empty where none is set."""
    target: float | None
    """Target value, in the unit; what a percent margin refers to."""
    direction: Direction
    """Which differences matter."""
    lower_limit: float | None
    """Specification limit, for orientation."""
    upper_limit: float | None
    """Specification limit, for orientation."""
    scatter: float | None = None
    """Known standard deviation of a result of the independent unit, in the unit (of natural logarithms on the
    log scale); what can be detected rests on it. None: on the scatter of the export."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ContrastPlan:
    """A weighted sum of group means that the plan asks about."""

    name: str
    """As the report prints it, unique in the plan."""
    weights: tuple[tuple[str, float], ...]
    """(group label, weight), no weight 0, summing to 0."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ComparisonPlan:
    """What is compared, against which margins, on which unit."""

    name: str
    """Short name, unique in a site."""
    title: str
    """Title of the report."""
    exports: tuple[str, ...]
    """File-name patterns of the exports it applies to."""
    layout: str
    """Name in config/layouts, or a .toml path relative to the plan."""
    rules: str
    """Name in config/rules."""
    product: str
    """Product or item, for the page; may be blank."""
    method: str
    """Test method, for the page; may be blank."""
    approved: Approval | None
    """None where nobody has approved it: the report says so."""
    groups: Groups
    """What is compared."""
    reference: str | None
    """Label each group is compared with; None: every pair."""
    independent_unit: Unit
    """What counts as n."""
    alpha: float
    """Family-wise error rate, in (0, 0.5)."""
    family: Family
    """Over what alpha is kept."""
    scale: Scale
    """Scale of the comparison."""
    procedure: str
    """`by rules`, or one procedure fixed in advance."""
    smallest_group: int
    """Groups with fewer units are described, not compared."""
    spread: SpreadDeclaration | None
    """The declaration, if any."""
    characteristics: tuple[CharacteristicPlan, ...]
    """In the order printed."""
    contrasts: tuple[ContrastPlan, ...] = ()
    """Asked of every characteristic, in the order printed."""
