"""Laws of the largest standardised difference when the scatter is known: P(R > r) for r >= 0.

Each law is a frozen value with `upper_tail(r)`; every integrand is a positive complement, so that tails
keep their relative accuracy. `decay` is the c of exp(-c r**2) in the far tail and `reach` the width in r
over which a tail loses more than 17 digits; both only place the quadrature window.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Protocol

import numpy as np
from scipy import special

from qcreport.stats.distributions.rows import Array, Index, fill_by_rows

_LARGEST_BELOW_ONE = 1.0 - 2.0**-53
_SQRT_2 = math.sqrt(2.0)
_SQRT_2_PI = math.sqrt(2.0 * math.pi)
_SIGMAS = 9.0
"""Half-width of a normal window: phi(9) is 1e-18."""


class Law(Protocol):
    """What the quadrature needs to know of a law."""

    @property
    def decay(self) -> float:
        """Coefficient c of the far tail exp(-c r**2)."""

    @property
    def comparisons(self) -> int:
        """Number of standardised differences of which the largest is taken."""

    def upper_tail(self, r: Array) -> Array:
        """Return P(R > r) for a one-dimensional r >= 0."""


def reach(law: Law) -> float:
    """Return the width in r over which the tail of `law` falls by more than 17 digits."""
    return (9.5 + math.sqrt(2.0 * math.log(law.comparisons))) / math.sqrt(2.0 * law.decay)


def coarsest_level(law: Law) -> int:
    """Return the coarsest grid level that resolves the tail of `law`, steeper for more comparisons.

    Measured against grids of half the step: at most 1e-13 for up to 5,000 comparisons.
    """
    sharpness = law.comparisons if law.decay > 0.25 else 2.0 * math.sqrt(2.0 * law.comparisons)
    return sum(sharpness > limit for limit in (40.0, 600.0))


def _any_exceeds(log_none: Array) -> Array:
    """Return 1 - exp(log_none) without cancellation."""
    return np.asarray(-np.expm1(log_none))


def _log_complement(tail: Array) -> Array:
    """Return log(1 - tail), finite for tail = 1."""
    return np.asarray(np.log1p(-np.minimum(tail, _LARGEST_BELOW_ONE)))


def _range_step(k: int) -> float:
    """Return the step in z for the range of k: 0.4 up to k = 3, then finer; measured, 1e-13."""
    return math.floor(51.2 * math.pow(3.0 / max(k, 3), 0.27)) / 128.0


@dataclass(frozen=True)
class RangeLaw:
    """Range of k >= 2 independent standard normals."""

    k: int
    """Number of groups."""

    @property
    def decay(self) -> float:
        """Coefficient of the far tail: the difference of two normals has variance 2."""
        return 0.25

    @property
    def comparisons(self) -> int:
        """Number of pairs."""
        return self.k * (self.k - 1) // 2

    def upper_tail(self, r: Array) -> Array:
        """Return P(R > r), k integrals of phi(z) Phi(z)**(k-1) [1 - (1 - Phi(z-r)/Phi(z))**(k-1)]."""
        step = _range_step(self.k)
        n = math.ceil(_SIGMAS / step)
        offsets = np.arange(-n, n + 1) * step  # about r/2, the middle of the far-tail integrand

        def block(rows: Index, _: int) -> Array:
            half = 0.5 * r[rows, None]
            z = offsets + half
            below = special.ndtr(z)
            none = (self.k - 1) * _log_complement(special.ndtr(offsets - half) / below)
            weight = np.exp(-0.5 * z * z) * below ** (self.k - 1)
            return np.asarray((weight * _any_exceeds(none)).sum(axis=-1))

        total = fill_by_rows(np.full(r.shape, offsets.size), block)
        return np.asarray(np.minimum(total * (self.k * step / _SQRT_2_PI), 1.0))


@dataclass(frozen=True)
class ModulusLaw:
    """Largest absolute value of k >= 1 independent standard normals."""

    k: int
    """Number of comparisons."""

    @property
    def decay(self) -> float:
        """Coefficient of the far tail."""
        return 0.5

    @property
    def comparisons(self) -> int:
        """Number of comparisons."""
        return self.k

    def upper_tail(self, r: Array) -> Array:
        """Return P(R > r) in closed form."""
        return _any_exceeds(self.k * _log_complement(special.erfc(r / _SQRT_2)))


@dataclass(frozen=True)
class ManyToOneLaw:
    """Largest of m standardised differences from one reference, correlations lambda_i lambda_j."""

    loadings: tuple[float, ...]
    """Distinct lambda_i = sqrt(n_i / (n_reference + n_i)), ascending, each in (0, 1)."""
    counts: tuple[int, ...]
    """How many groups have each loading."""
    two_sided: bool
    """Absolute differences (True), or signed ones (False)."""

    @property
    def decay(self) -> float:
        """Coefficient of the far tail."""
        return 0.5

    @property
    def comparisons(self) -> int:
        """Number of groups beside the reference."""
        return sum(self.counts)

    def upper_tail(self, r: Array) -> Array:
        """Return P(R > r): integral of phi(z) [1 - prod_i (1 - tail_i(z))], z the reference's deviate."""
        step = self._step()
        start = np.floor((self.loadings[0] * r - _SIGMAS) / step)
        if self.two_sided:  # the integrand is even: the half line on a grid of midpoints, doubled
            start = np.maximum(start, 0.0)
        stop = np.ceil((self.loadings[-1] * r + _SIGMAS) / step)

        def block(rows: Index, length: int) -> Array:
            z = (start[rows, None] + 0.5 + np.arange(length)) * step
            none = self._log_none_exceeds(z, r[rows, None])
            return np.asarray((np.exp(-0.5 * z * z) * _any_exceeds(none)).sum(axis=-1))

        total = fill_by_rows((stop - start).astype(np.intp), block)
        return np.minimum(total * (step * (2.0 if self.two_sided else 1.0) / _SQRT_2_PI), 1.0)

    def all_below(self, r: Array) -> Array:
        """Return P(every signed difference < -r), accurate to 1e-16 absolute, for negative statistics."""
        step = self._step()
        z = (np.arange(math.ceil(2.0 * _SIGMAS / step)) + 0.5) * step - _SIGMAS
        density = np.exp(-0.5 * z * z) * (step / _SQRT_2_PI)

        def block(rows: Index, _: int) -> Array:
            product = density
            for loading, count in zip(self.loadings, self.counts, strict=True):
                width = math.sqrt(1.0 - loading * loading)
                product = product * special.ndtr((-r[rows, None] - loading * z) / width) ** count
            return np.asarray(product.sum(axis=-1))

        return fill_by_rows(np.full(r.shape, z.size), block)

    def _step(self) -> float:
        """Step in z from the narrowest conditional width, that of the highest loading; measured, 1e-13."""
        share = math.floor(64.0 * math.pow(3.0 / max(self.comparisons, 3), 0.28)) / 128.0
        return share * math.sqrt(1.0 - self.loadings[-1] ** 2)

    def _log_none_exceeds(self, z: Array, r: Array) -> Array:
        """Return the log of the probability, given z, that no difference exceeds r."""
        result = np.zeros(np.broadcast_shapes(z.shape, r.shape))
        for loading, count in zip(self.loadings, self.counts, strict=True):
            width = math.sqrt(1.0 - loading * loading)
            tail = special.ndtr((loading * z - r) / width)
            if self.two_sided:
                tail = tail + special.ndtr((-loading * z - r) / width)
            result += count * _log_complement(tail)
        return result


@dataclass(frozen=True)
class AllBelowLaw:
    """Every signed many-to-one difference below -r: the law that serves negative statistics."""

    law: ManyToOneLaw
    """The signed law."""

    @property
    def decay(self) -> float:
        """Coefficient of the far tail, a lower bound."""
        return 0.5

    @property
    def comparisons(self) -> int:
        """Number of groups beside the reference."""
        return self.law.comparisons

    def upper_tail(self, r: Array) -> Array:
        """Return P(every difference < -r)."""
        return self.law.all_below(r)
