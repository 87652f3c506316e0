"""Fitting Chebyshev series to functions, with the error that was made."""

from __future__ import annotations

from functools import cache

import numpy as np
from numpy.typing import NDArray

from lighttime.ephemeris.chebyshev import polynomials

Array = NDArray[np.float64]


@cache
def nodes(terms: int) -> Array:
    """Where a function is sampled for a series of so many terms: zeros of T_terms, in (-1, 1)."""
    x: Array = np.cos(np.pi * (np.arange(terms)[::-1] + 0.5) / terms)
    x.flags.writeable = False
    return x


@cache
def _to_series(terms: int) -> Array:
    """The matrix from samples at `nodes` to coefficients (discrete orthogonality)."""
    matrix = polynomials(nodes(terms), terms) * (2.0 / terms)
    matrix[0] *= 0.5
    matrix.flags.writeable = False
    return matrix


def series(samples: Array) -> Array:
    """Coefficients of the series through samples at `nodes`.

    Parameters
    ----------
    samples : ndarray, shape (..., terms)

    Returns
    -------
    ndarray, shape (..., terms)

    Notes
    -----
    The middle sample is taken out before and put back after: what is fitted is how the function
    varies, and its rounding is relative to that.

    Source: discrete orthogonality of Chebyshev polynomials, Abramowitz & Stegun 22.
    """
    terms = samples.shape[-1]
    middle = samples[..., terms // 2 : terms // 2 + 1]
    coefficients: Array = (samples - middle) @ _to_series(terms).T
    coefficients[..., :1] += middle
    return coefficients


def truncation(coefficients: Array) -> Array:
    """How much a series has left out, judged by its last three coefficients, shape (...)."""
    largest: Array = np.max(np.abs(coefficients[..., -3:]), axis=-1)
    return largest
