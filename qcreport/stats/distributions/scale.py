"""The estimated scatter: density, step and window in u = log s, where df s**2 is chi-squared on df.

The density of u is C exp(df (u - expm1(2u)/2)) with C = sqrt(df/pi) / Gamma*(df/2), Gamma* the factor by
which Stirling's formula misses the gamma function.
"""

from __future__ import annotations

import math

import numpy as np
from scipy import special

from qcreport.stats.distributions.rows import Array, Index

LARGEST_TABLED_DF = 4096.0
"""Above, the density is so narrow that the law is evaluated at nodes of its own."""
STEPS = 2.0**-3.5 * 2.0 ** -np.arange(6.0)
"""Grid step in log r of each level."""
_LEVEL_DF = 0.15 / STEPS**2
"""Largest df that a level serves: its step is at most 0.55 / sqrt(2 df)."""
_STIRLING = (1 / 12, -1 / 360, 1 / 1260, -1 / 1680, 1 / 1188)
_LOST = 40.0
"""Natural logarithm of the factor that is left out at a window's ends, 4e-18."""


def levels(df: Array) -> Index:
    """Return the level of each df: 0 is the coarsest grid."""
    return np.searchsorted(_LEVEL_DF, df)


def density_constant(df: Array) -> Array:
    """Return C of the density of log s, relative error 1e-15."""
    x = 0.5 * df
    inverse = 1.0 / np.maximum(x, 10.0)
    square = inverse * inverse
    a, b, c, d, e = _STIRLING
    series = inverse * (a + square * (b + square * (c + square * (d + square * e))))
    result = np.sqrt(df / math.pi) * np.exp(-series)
    few = x < 10.0
    if few.any():
        small = x[few]
        result[few] = 2.0 * small**small * np.exp(-small) / special.gamma(small)
    return np.asarray(result)


def peak(df: Array, log_q: Array, decay: float | Array) -> Array:
    """Return log r near which density times far tail exp(-decay r**2) is largest."""
    with_margin = np.logaddexp(np.log(2.0 * decay / df) + 2.0 * log_q, np.log(2.0 / df))
    return np.asarray(log_q - 0.5 * np.logaddexp(0.0, with_margin))


def left_width(df: Array) -> Array:
    """Return t with df (2t - 1 + exp(-2t)) / 2 >= 40: how far below the peak the window begins."""
    share = _LOST / df
    return share + np.minimum(0.5, np.sqrt(share))


def right_width(df: Array) -> Array:
    """Return x with df (exp(2x) - 1 - 2x) / 2 >= 40: how far above log q the density is lost."""
    share = _LOST / df
    return np.minimum(np.sqrt(share), 0.5 * np.log(1.0 + 2.0 * share + 2.0 * np.log1p(2.0 * share) + 2.0))
