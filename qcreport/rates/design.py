"""What is fixed before any result is there: sizes, reference and level."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class Design:
    """Groups of a comparison by their sizes."""

    sizes: tuple[int, ...]
    """Independent results of each group, two or more."""
    reference: int | None
    """Position of the reference; None where every pair is compared."""
    alpha: float
    """Family-wise error rate asked for."""
    one_sided: bool = False
    """Whether only one direction from the reference counts."""

    @property
    def dfs(self) -> tuple[float, ...]:
        """Degrees of freedom of each group's variance."""
        return tuple(n - 1.0 for n in self.sizes)

    @property
    def pairs(self) -> tuple[tuple[int, int], ...]:
        """Pairs compared: every one, or each group with the reference."""
        k = len(self.sizes)
        if self.reference is not None:
            return tuple((i, self.reference) for i in range(k) if i != self.reference)
        return tuple((i, j) for i in range(k) for j in range(i + 1, k))

    @property
    def size_ratio(self) -> float:
        """Largest over smallest size."""
        return max(self.sizes) / min(self.sizes)
