"""The probability that noise alone would have done it."""

from __future__ import annotations

from math import erfc, expm1, isinf, log1p, sqrt


def tail(t: float, degrees: float) -> float:
    """Probability of a value beyond -t or +t.

    Parameters
    ----------
    t : float
        In units of its sigma.
    degrees : float
        Degrees of freedom from which sigma was estimated; ``inf`` for a known sigma (normal
        distribution, else Student's).

    Examples
    --------
    >>> round(tail(1.959964, float("inf")), 6)  # the normal distribution
    0.05
    >>> round(tail(2.228139, 10.0), 6)  # Student's, tabulated
    0.05
    """
    size = abs(t)
    if isinf(degrees):
        return erfc(size / sqrt(2.0))
    if degrees < 1.0:
        return 1.0
    from mpmath import betainc

    x = degrees / (degrees + size * size)
    return float(betainc(degrees / 2.0, 0.5, 0.0, x, regularized=True))


def of_any(probability: float, tried: int) -> float:
    """Probability that at least one of several tries does as well (Sidak 1967).

    Examples
    --------
    >>> round(of_any(0.01, 100), 4)
    0.634
    """
    if probability >= 1.0:
        return 1.0
    return -expm1(tried * log1p(-probability))
