"""How much the spread itself varies from batch to batch, from past batches."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from scipy import special

from qcreport.errors import DegenerateDataError, TooFewObservationsError
from qcreport.stats.comparison import require_alpha
from qcreport.stats.distributions.student import chi_squared_upper_quantile


@dataclass(frozen=True, slots=True, kw_only=True)
class SpreadVariation:
    """Variation of ln sigma over batches."""

    n_batches: int
    """Number of batches."""
    smallest_df: float
    """Fewest degrees of freedom of a batch."""
    sd_log_sigma: float
    """Estimated standard deviation of ln sigma, dimensionless; 0 where sampling explains all variation."""
    upper_limit: float
    """One-sided upper confidence limit of it."""
    confidence: float
    """Confidence of the limit."""


def spread_variation(
    dfs: Sequence[float], variances: Sequence[float], confidence: float = 0.95
) -> SpreadVariation:
    """Estimate how much ln sigma varies between batches, beyond what sampling explains.

    Parameters
    ----------
    dfs : sequence of float >= 1, length B >= 3
        Degrees of freedom of each batch's variance.
    variances : sequence of B floats > 0, in u**2
        Variance of each batch.
    confidence : float in (0, 1)
        Confidence of the upper limit.

    Returns
    -------
    SpreadVariation

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        B < 3 or a df below 1; a variance that is not positive and finite.

    Notes
    -----
    For normal results var(ln s**2) = 4 var(ln sigma) + psi1(df/2) [1]_. The limit treats the sample
    variance of ln s**2 as chi-squared on the degrees of freedom that give it its own variance, 2/(B - 1) +
    kurtosis/B with the excess kurtosis psi3/psi1**2 of ln chi-squared.

    References
    ----------
    .. [1] Bartlett & Kendall (1946), Suppl. J. R. Stat. Soc. 8(1), 128-138. doi:10.2307/2983618
    """
    require_alpha(confidence)
    b = len(dfs)
    if b < 3 or min(dfs) < 1.0:
        raise TooFewObservationsError("The variation of spread needs three batches with degrees of freedom.")
    if not all(math.isfinite(v) and v > 0.0 for v in variances):
        raise DegenerateDataError("The variation of spread needs positive, finite variances.")
    logs = [math.log(v) for _, v in zip(dfs, variances, strict=True)]
    mean = math.fsum(logs) / b
    observed = math.fsum((x - mean) ** 2 for x in logs) / (b - 1)
    sampling = math.fsum(float(special.polygamma(1, 0.5 * df)) for df in dfs) / b
    kurtosis = math.fsum(float(special.polygamma(3, 0.5 * df)) for df in dfs) / b / sampling**2
    effective = 2.0 / (2.0 / (b - 1) + kurtosis / b)
    limit = observed * effective / chi_squared_upper_quantile(confidence, effective)
    return SpreadVariation(
        n_batches=b,
        smallest_df=min(dfs),
        sd_log_sigma=0.5 * math.sqrt(max(observed - sampling, 0.0)),
        upper_limit=0.5 * math.sqrt(max(limit - sampling, 0.0)),
        confidence=confidence,
    )
