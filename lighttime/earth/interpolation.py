"""Four-point Lagrange interpolation between equally spaced nodes.

Source: IERS Gazette 13 (1997), the recommended interpolation of Earth orientation.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]


def lagrange(t: Floats) -> Floats:
    """Weights of nodes -1, 0, 1, 2 at t, shape (4, ...)."""
    return np.stack(
        [
            -t * (t - 1.0) * (t - 2.0) / 6.0,
            (t + 1.0) * (t - 1.0) * (t - 2.0) / 2.0,
            -(t + 1.0) * t * (t - 2.0) / 2.0,
            (t + 1.0) * t * (t - 1.0) / 6.0,
        ]
    )


def lagrange_slope(t: Floats) -> Floats:
    """Derivatives of `lagrange` with respect to t."""
    return np.stack(
        [
            -(3.0 * t * t - 6.0 * t + 2.0) / 6.0,
            (3.0 * t * t - 4.0 * t - 1.0) / 2.0,
            -(3.0 * t * t - 2.0 * t - 2.0) / 2.0,
            (3.0 * t * t - 1.0) / 6.0,
        ]
    )


def combine(weights: Floats, values: Callable[[Any], Floats], first: Any) -> Floats:
    """Sum of the weights, shape (4, ...), times the values of nodes `first` to `first` + 3."""
    total: Floats = sum(
        (weights[k] * values(first + k) for k in range(1, 4)), weights[0] * values(first)
    )
    return total
