"""Tables drawn at random, many at once, as the group means and variances that procedures look at."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any, Final, Protocol

import numpy as np
from numpy.typing import NDArray

from qcreport.rates.design import Design

Array = NDArray[np.float64]


class Source(Protocol):
    """A seeded generator; numpy's `RandomState`, whose streams never change, is one."""

    def standard_normal(self, size: Any = ...) -> Any:
        """Draw from the standard normal law."""

    def chisquare(self, df: Any, size: Any = ...) -> Any:
        """Draw from a chi-squared law."""

    def standard_t(self, df: Any, size: Any = ...) -> Any:
        """Draw from a t law."""

    def random_sample(self, size: Any = ...) -> Any:
        """Draw uniformly from [0, 1)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Draws:
    """Replicates of one design; all true means are equal."""

    means: Array
    """(groups, replicates)."""
    variances: Array
    """(groups, replicates)."""
    levene: Array | None
    """(replicates,) median-centred Levene's F; None where values were not drawn."""


def draw_moments(source: Source, design: Design, sds: Sequence[float], replicates: int) -> Draws:
    """Draw means and variances of normal results directly: independent normal and chi-squared."""
    shape = (len(design.sizes), replicates)
    n, sd = np.array(design.sizes, dtype=float)[:, None], np.array(sds, dtype=float)[:, None]
    means = source.standard_normal(shape) * (sd / np.sqrt(n))
    variances = source.chisquare(n - 1.0, shape) * (sd * sd / (n - 1.0))
    return Draws(means=means, variances=variances, levene=None)


def draw_values(
    source: Source, design: Design, sds: Sequence[float], replicates: int, shape: str = "normal"
) -> Draws:
    """Draw results of a shape (each with mean 0 and the group's standard deviation) and summarise them."""
    draw = SHAPES[shape]
    return summarised([draw(source, (replicates, n)) * sd for n, sd in zip(design.sizes, sds, strict=True)])


def summarised(groups: Sequence[Array]) -> Draws:
    """Return the summaries of groups of results, each (replicates, n)."""
    means, variances, deviations = [], [], []
    for values in groups:
        mean = values.mean(axis=-1)
        means.append(mean)
        variances.append(((values - mean[:, None]) ** 2).sum(axis=-1) / (values.shape[-1] - 1))
        deviations.append(np.abs(values - np.median(values, axis=-1)[:, None]))
    return Draws(means=np.stack(means), variances=np.stack(variances), levene=_one_way_f(deviations))


def _one_way_f(groups: Sequence[Array]) -> Array:
    """Return the F of a one-way analysis of variance over (replicates, n) groups."""
    total = sum(g.shape[-1] for g in groups)
    means = [g.mean(axis=-1) for g in groups]
    grand = sum(g.shape[-1] * m for g, m in zip(groups, means, strict=True)) / total
    between = sum(g.shape[-1] * (m - grand) ** 2 for g, m in zip(groups, means, strict=True))
    within = sum(((g - m[:, None]) ** 2).sum(axis=-1) for g, m in zip(groups, means, strict=True))
    return np.asarray((between / (len(groups) - 1)) / (within / (total - len(groups))))


def _normal(source: Source, size: tuple[int, int]) -> Array:
    return np.asarray(source.standard_normal(size))


def _lognormal(source: Source, size: tuple[int, int]) -> Array:
    variance = math.expm1(_SIGMA**2) * math.exp(_SIGMA**2)
    skewed = np.exp(_SIGMA * source.standard_normal(size)) - math.exp(0.5 * _SIGMA**2)
    return np.asarray(skewed / math.sqrt(variance))


def _t3(source: Source, size: tuple[int, int]) -> Array:
    return np.asarray(source.standard_t(3.0, size) / math.sqrt(3.0))


def _uniform(source: Source, size: tuple[int, int]) -> Array:
    return np.asarray((source.random_sample(size) - 0.5) * math.sqrt(12.0))


_SIGMA: Final = 0.5
SHAPES: Final[dict[str, Callable[[Source, tuple[int, int]], Array]]] = {
    "normal": _normal,
    "lognormal": _lognormal,
    "t3": _t3,
    "uniform": _uniform,
}
"""Shapes of results: normal, lognormal with sigma 0.5, t with 3 df, uniform; all of variance 1."""
