"""Vectors as arrays of shape (3, ...), components first."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


def dot(a: Array, b: Array) -> Array:
    """a . b"""
    product: Array = a[0] * b[0] + a[1] * b[1] + a[2] * b[2]
    return product


def norm2(a: Array) -> Array:
    """|a|^2"""
    return dot(a, a)


def norm(a: Array) -> Array:
    """|a|"""
    length: Array = np.sqrt(dot(a, a))
    return length


def cross(a: Array, b: Array) -> Array:
    """a x b"""
    return np.stack(
        [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]]
    )


def unit(a: Array) -> Array:
    """a / |a|"""
    return a / norm(a)


def column(values: tuple[float, float, float] | Array, like: Array) -> Array:
    """Three numbers as a vector array that broadcasts against the instants `like`."""
    return np.asarray(values, dtype=float).reshape(3, *([1] * np.ndim(like)))
