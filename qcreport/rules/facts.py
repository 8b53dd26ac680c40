"""The facts on which the decision table decides, and the values each may take."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

EVERY_PAIR: Final = "every pair"
WITH_THE_REFERENCE: Final = "each with the reference"
SIMILAR: Final = "similar"
DIFFERENT: Final = "different"
CANNOT_BE_JUDGED: Final = "cannot be judged"
CONFLICT: Final = "conflict"

WORDS: Final[dict[str, tuple[str, ...]]] = {
    "comparison": (EVERY_PAIR, WITH_THE_REFERENCE),
    "sizes": ("equal", "unequal"),
    "variation": ("some", "none"),
    "censored": ("none", "some"),
    "spread": (SIMILAR, DIFFERENT, CANNOT_BE_JUDGED, CONFLICT),
    "scale": ("as measured", "log"),
}
"""Facts that are one of a few words."""

NUMBERS: Final[tuple[str, ...]] = ("groups", "smallest_n")
"""Facts that are whole numbers, 0 or more."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Facts:
    """One value for each fact."""

    comparison: str
    """`every pair` or `each with the reference`."""
    groups: int
    """Comparable groups, the reference included."""
    smallest_n: int
    """Independent results in the smallest comparable group; 0 where there is none."""
    sizes: str
    """equal or unequal."""
    variation: str
    """none where no group varies at all."""
    censored: str
    """some where a result is known only by a limit."""
    spread: str
    """similar, different, cannot be judged or conflict."""
    scale: str
    """`as measured` or `log`."""

    def value(self, fact: str) -> str | int:
        """Return one fact by its name."""
        found: str | int = getattr(self, fact)
        return found
