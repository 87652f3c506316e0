"""Integrals of functions that are sampled at fixed places of equal panels, as Chebyshev series."""

from __future__ import annotations

from functools import cache

import numpy as np
from numpy.polynomial import chebyshev
from numpy.typing import NDArray

Array = NDArray[np.float64]


@cache
def nodes(count: int) -> Array:
    """Where a panel is sampled: the zeros of U_count, in (-1, 1).

    Every second one of ``2 n + 1`` of them is one of n: samples for an integral are also samples
    for the same integral by half the order.
    """
    x: Array = -np.cos(np.pi * np.arange(1, count + 1) / (count + 1))
    x.flags.writeable = False
    return x


@cache
def antiderivative(count: int) -> Array:
    """The matrix from samples at `nodes` to the series of the integral from -1 on.

    Returns
    -------
    ndarray, shape (count + 1, count)
        Times half the length of a panel, its product with samples is a Chebyshev series whose
        value at -1 is zero.

    Notes
    -----
    The polynomial through the samples, integrated term by term (Abramowitz & Stegun 22.13).
    """
    through = np.linalg.inv(chebyshev.chebvander(nodes(count), count - 1))
    matrix: Array = chebyshev.chebint(through, lbnd=-1.0, axis=0)
    matrix.flags.writeable = False
    return matrix
