"""Arithmetic on numbers carried as the unevaluated sum of two float64.

A Julian date in one float64 is a grid of 40 microseconds; as a sum of two it is a grid of
1e-21 s. Every function here works element by element on arrays of any broadcastable shape, and
keeps the pair normalised: the first part is the float64 nearest to the sum, the second what
that rounding left over.

Source: Dekker 1971, Numer. Math. 18, 224 (product and pairs); Knuth, The Art of Computer
Programming, vol. 2, 4.2.2 (error-free sum).
"""

from __future__ import annotations

from fractions import Fraction
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array: TypeAlias = NDArray[np.float64]
Pair: TypeAlias = tuple[Array, Array]

_SPLITTER = 2.0**27 + 1.0


def pair(first: ArrayLike, second: ArrayLike = 0.0) -> Pair:
    """Two numbers, broadcast to one shape, as a normalised pair."""
    return two_sum(np.asarray(first, dtype=np.float64), np.asarray(second, dtype=np.float64))


def exact(value: Fraction | float) -> Pair:
    """A rational number, or the decimal that a float prints as, to the precision of a pair."""
    number = value if isinstance(value, Fraction) else Fraction(repr(float(value)))
    high, low = split(number)
    return np.float64(high), np.float64(low)  # type: ignore[return-value]


def split(number: Fraction) -> tuple[float, float]:
    """A rational number as the nearest float64 and the rest, rounded."""
    high = float(number)
    return high, float(number - Fraction(high))


def plain(value: Pair) -> tuple[Any, Any]:
    """Hand a pair to a caller: Python floats when it is scalar."""
    high, low = value
    return (float(high), float(low)) if np.ndim(high) == 0 else (high, low)


def two_sum(a: Array, b: Array) -> Pair:
    """a + b and the error of that sum, exactly."""
    s = a + b
    t = s - a
    return s, (a - (s - t)) + (b - t)


def two_product(a: Array, b: Array) -> Pair:
    """a * b and the error of that product, exactly."""
    p = a * b
    a1, a2 = _halves(a)
    b1, b2 = _halves(b)
    return p, ((a1 * b1 - p) + a1 * b2 + a2 * b1) + a2 * b2


def _halves(a: Array) -> Pair:
    """Two numbers of 26 bits whose sum is a."""
    t = _SPLITTER * a
    high = t - (t - a)
    return high, a - high


def add(x: Pair, y: Pair) -> Pair:
    """x + y, relative error below 2**-104 (2**-53 of the smaller where they cancel)."""
    s, e = two_sum(x[0], y[0])
    t, f = two_sum(x[1], y[1])
    s, e = two_sum(s, e + t)
    return two_sum(s, e + f)


def negate(x: Pair) -> Pair:
    """-x."""
    return -x[0], -x[1]


def subtract(x: Pair, y: Pair) -> Pair:
    """x - y."""
    return add(x, negate(y))


def multiply(x: Pair, y: Pair) -> Pair:
    """x * y, relative error below 2**-102."""
    p, e = two_product(x[0], y[0])
    return two_sum(p, e + (x[0] * y[1] + x[1] * y[0]))


def divide(x: Pair, y: Pair) -> Pair:
    """x / y by two steps of long division and a correction, relative error below 2**-101."""
    zero = 0.0 * y[0]
    q1 = x[0] / y[0]
    r = subtract(x, multiply((q1, zero), y))
    q2 = r[0] / y[0]
    r = subtract(r, multiply((q2, zero), y))
    q3 = r[0] / y[0]
    s, e = two_sum(q1, q2)
    return two_sum(s, e + q3)


def whole_and_fraction(x: Pair) -> tuple[Array, Pair]:
    """The greatest whole number not above x, and x minus it as a pair in [0, 1)."""
    whole = np.floor(x[0])
    fraction = two_sum(x[0] - whole, x[1])
    below = fraction[0] < 0.0
    whole = whole - below
    return whole, add(fraction, (np.where(below, 1.0, 0.0), np.zeros(np.shape(below))))


def day_and_fraction(jd: Pair) -> tuple[Array, Pair]:
    """The Julian date (x.5) at which the day of `jd` began, and the part of the day since."""
    half = np.float64(0.5), np.float64(0.0)
    whole, fraction = whole_and_fraction(subtract(jd, half))  # type: ignore[arg-type]
    return whole + 0.5, fraction
