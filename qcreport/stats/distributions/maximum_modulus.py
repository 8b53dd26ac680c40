"""The studentized maximum modulus: largest |t| of k comparisons that share one scatter estimate."""

from __future__ import annotations

from typing import Any

from numpy.typing import ArrayLike

from qcreport.stats.distributions.families import by_count, upper_quantile, upper_tail
from qcreport.stats.distributions.laws import ModulusLaw


def maximum_modulus_sf(m: ArrayLike, k: ArrayLike, df: ArrayLike) -> Any:
    """Return P(M > m) for the studentized maximum modulus of k comparisons on df degrees of freedom.

    Parameters
    ----------
    m : array_like
        Statistic on the scale of |t|, dimensionless.
    k : array_like of whole numbers >= 1
        Number of comparisons.
    df : array_like >= 0.5, may be infinite
        Degrees of freedom.

    Returns
    -------
    float or ndarray
        Broadcast; relative error about 1e-13.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        k < 1 or df < 0.5; k not whole, m not a number.

    References
    ----------
    .. [1] Stoline & Ury (1979), Technometrics 21(1), 87-93. doi:10.1080/00401706.1979.10489726

    Examples
    --------
    >>> round(maximum_modulus_sf(4.302652729749462, 1, 2), 10)
    0.05
    """
    laws, index, _ = by_count(k, 1, ModulusLaw)
    return upper_tail(m, laws, index, df)


def maximum_modulus_isf(p: ArrayLike, k: ArrayLike, df: ArrayLike) -> Any:
    """Return m with P(M > m) = p for the studentized maximum modulus.

    Parameters
    ----------
    p : array_like in [0, 1]
        Tail area.
    k, df : array_like
        As for `maximum_modulus_sf`.

    Returns
    -------
    float or ndarray
        Broadcast, dimensionless.

    Raises
    ------
    TooFewObservationsError, DegenerateDataError
        k < 1 or df < 0.5; k not whole, p outside [0, 1].

    Examples
    --------
    >>> round(maximum_modulus_isf(0.05, 1, 2), 6)
    4.302653
    """
    laws, index, _ = by_count(k, 1, ModulusLaw)
    return upper_quantile(p, laws, index, df, from_law=1.0, sides=2)
