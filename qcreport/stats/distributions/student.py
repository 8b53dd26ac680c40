"""Tails and quantiles of Student's t and of F, accurate far out, df possibly infinite.

All through the incomplete beta and gamma functions of scipy.special, scalars in and out.
"""

from __future__ import annotations

import math

from scipy import special


def t_two_sided(t: float, df: float) -> float:
    """Return P(|T| > |t|) for Student's t on df degrees of freedom (df > 0 or infinite)."""
    size = abs(t)
    if math.isinf(size):
        return 0.0
    if math.isinf(df):
        return float(special.erfc(size / math.sqrt(2.0)))
    ratio = size / math.sqrt(df)
    if ratio <= 1.0:
        return float(special.betaincc(0.5, 0.5 * df, ratio * ratio / (1.0 + ratio * ratio)))
    inverse = 1.0 / ratio
    if inverse < 1e-150:  # the square would be lost: first term of the series of the incomplete beta function
        return math.exp(df * math.log(inverse) - float(special.betaln(0.5 * df, 0.5))) / (0.5 * df)
    return float(special.betainc(0.5 * df, 0.5, inverse * inverse / (1.0 + inverse * inverse)))


def t_upper(t: float, df: float) -> float:
    """Return P(T > t) for Student's t."""
    half = 0.5 * t_two_sided(t, df)
    return half if t >= 0.0 else 1.0 - half


def t_two_sided_quantile(p: float, df: float) -> float:
    """Return t >= 0 with P(|T| > t) = p, 0 < p <= 1."""
    if math.isinf(df):
        return math.sqrt(2.0) * float(special.erfcinv(p))
    t = -float(special.stdtrit(df, 0.5 * p))
    return _polished(t, p, df)


def t_upper_quantile(p: float, df: float) -> float:
    """Return t with P(T > t) = p, 0 < p < 1."""
    if p <= 0.5:
        return t_two_sided_quantile(2.0 * p, df)
    return -t_two_sided_quantile(2.0 * (1.0 - p), df)


def _polished(t: float, p: float, df: float) -> float:
    """Take Newton steps in (log t, log p) so that the tail agrees to rounding."""
    if not 0.0 < t < 1e150:  # beyond, the square is lost and the start is the asymptote
        return max(t, 0.0)
    log_constant = float(special.gammaln(0.5 * (df + 1.0)) - special.gammaln(0.5 * df))
    log_constant -= 0.5 * math.log(df * math.pi)
    for _ in range(3):
        area = t_two_sided(t, df)
        slope = 2.0 * t * math.exp(log_constant - 0.5 * (df + 1.0) * math.log1p(t / df * t))
        t *= math.exp(math.log(area / p) * area / slope)
    return t


def f_upper(f: float, df_between: float, df_within: float) -> float:
    """Return P(F > f) for F on (df_between, df_within), f >= 0; df_within may be infinite."""
    if math.isinf(f):
        return 0.0
    if math.isinf(df_within):
        return float(special.gammaincc(0.5 * df_between, 0.5 * df_between * f))
    scaled = df_between * f / df_within
    if scaled <= 1.0:
        return float(special.betaincc(0.5 * df_between, 0.5 * df_within, scaled / (1.0 + scaled)))
    return float(special.betainc(0.5 * df_within, 0.5 * df_between, 1.0 / (1.0 + scaled)))


def f_upper_quantile(p: float, df_between: float, df_within: float) -> float:
    """Return f with P(F > f) = p, 0 < p < 1, finite df."""
    x = float(special.betaincinv(0.5 * df_within, 0.5 * df_between, p))
    if x > 0.5:
        y = float(special.betainccinv(0.5 * df_between, 0.5 * df_within, p))
        return df_within / df_between * y / (1.0 - y)
    return df_within / df_between * (1.0 - x) / x


def chi_squared_upper(x: float, df: float) -> float:
    """Return P(chi-squared > x) on df degrees of freedom."""
    return float(special.gammaincc(0.5 * df, 0.5 * x))


def chi_squared_upper_quantile(p: float, df: float) -> float:
    """Return x with P(chi-squared > x) = p."""
    return 2.0 * float(special.gammainccinv(0.5 * df, p))


def is_far(t: float, df: float) -> bool:
    """Return whether `far_noncentrality` serves.

    General series for the noncentral t get slow there, then lose digits, and end in no number at t = 1e6.
    """
    return t >= 1e3 * math.sqrt(1.0 + df / 100.0)


def far_noncentrality(t: float, df: float, below: float) -> float:
    """Return the noncentrality nc with P(T <= t) = below, where `is_far`; relative error below 1e-8.

    T <= t means nc <= t S - Z with S**2 chi-squared over its df and Z standard normal: nc is a quantile of
    t S, moved by what the small Z adds, -f'/(2 f) for the density f of t S.
    """
    nc = t * math.sqrt(chi_squared_upper_quantile(below, df) / df)
    return nc - 0.5 * ((df - 1.0) / nc - df * nc / (t * t))
