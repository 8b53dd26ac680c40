"""The judgement of spread, for many tables at once: the same conditions as `rules.spread` asks of one."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from qcreport.rates.draw import Array
from qcreport.rates.rejections import Found
from qcreport.stats.distributions.student import f_upper_quantile


def ratio_within(dfs: Sequence[float], variances: Array, *, limit: float, confidence: float) -> Found:
    """Return whether the upper limit of the largest spread ratio is at most `limit`."""
    k = len(dfs)
    level = (1.0 - confidence) / (k * (k - 1))
    pairs = [(i, j) for i in range(k) for j in range(k) if i != j]
    most = {(i, j): limit * limit / f_upper_quantile(level, dfs[j], dfs[i]) for i, j in pairs}
    within = np.zeros(variances.shape[1], dtype=bool)
    if any(most[i, j] * most[j, i] < 1.0 for i, j in pairs):
        return within  # a ratio and its inverse cannot both be this small
    within[:] = True
    for i, j in pairs:
        within &= variances[i] <= most[i, j] * variances[j]
    return within


def conflicts(dfs: Sequence[float], variances: Array, *, level: float) -> Found:
    """Return whether some group's variance exceeds the pooled rest."""
    k, weights = len(dfs), np.array(dfs)
    sums = variances * weights[:, None]
    total = sums.sum(axis=0)
    found = np.zeros(variances.shape[1], dtype=bool)
    for i, df in enumerate(dfs):
        df_rest = float(weights.sum()) - df
        critical = f_upper_quantile(level / k, df, df_rest)
        found |= variances[i] * df_rest > critical * (total - sums[i])
    return found


def levene_objects(dfs: Sequence[float], levene: Array, *, level: float) -> Found:
    """Return whether median-centred Levene's F lies beyond its critical value."""
    k = len(dfs)
    return np.asarray(levene > f_upper_quantile(level, k - 1.0, float(sum(dfs))))
