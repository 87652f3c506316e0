"""Extended-precision numbers, three-vectors and rotations.

Every number carries its mpmath context, and a context is made once for each number of digits:
`mpmath.mp`, which belongs to the user, is never touched.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache
from typing import Any, TypeVar, cast

import mpmath

from lighttime.errors import ConvergenceError, InputError
from lighttime.exact.protocols import Context, Real

__all__ = [
    "GUARD_DIGITS",
    "Context",
    "Matrix",
    "Real",
    "Vector",
    "context",
    "decimal",
    "exact",
    "fixed_point",
    "plain",
    "split_day",
]

Event = TypeVar("Event")

GUARD_DIGITS = 15
"""Digits carried beyond those asked for: a barycentric coordinate is 1e12 times a micrometre."""


@lru_cache(maxsize=16)
def context(digits: int) -> Context:
    """Arithmetic that keeps `digits` decimal digits, guard digits apart.

    Examples
    --------
    >>> arithmetic = context(30)
    >>> print(arithmetic.nstr(arithmetic.mpf(2) / 3, 30))
    0.666666666666666666666666666667
    """
    if isinstance(digits, bool) or not isinstance(digits, int) or not 20 <= digits <= 1000:
        raise InputError("digits", digits, "20 to 1000, a whole number")
    arithmetic = mpmath.MPContext()
    arithmetic.dps = digits + GUARD_DIGITS
    return cast(Context, arithmetic)


def plain(value: Real) -> Real:
    """The same number, all its digits kept, as an ordinary `mpmath.mpf`."""
    return cast(Real, mpmath.mp.make_mpf(cast(Any, value)._mpf_))


def exact(ctx: Context, *parts: float | Fraction) -> Real:
    """The sum of `parts` without loss (rounded once, to the working precision)."""
    total = sum((Fraction(part) for part in parts), Fraction(0))
    return ctx.mpf(total.numerator) / total.denominator


def decimal(ctx: Context, value: float) -> Real:
    """The decimal number that a published constant was, before it became a float64."""
    return ctx.mpf(repr(float(value)))


def split_day(jd: Real) -> tuple[float, float]:
    """A Julian date as float64 for functions in float64: 0 h of its day, and the fraction."""
    half = jd.context.mpf(0.5)
    day = jd.context.floor(jd - half) + half
    return float(day), float(jd - day)


@dataclass(frozen=True, slots=True)
class Vector:
    """Three components of a vector; `a @ b` is the scalar product."""

    x: Real
    y: Real
    z: Real

    @classmethod
    def of(cls, ctx: Context, xyz: Any) -> Vector:
        """From three float64, without loss."""
        x, y, z = (ctx.mpf(float(component)) for component in xyz)
        return cls(x, y, z)

    def __iter__(self) -> Any:
        return iter((self.x, self.y, self.z))

    def __add__(self, other: Vector) -> Vector:
        return Vector(self.x + other.x, self.y + other.y, self.z + other.z)

    def __sub__(self, other: Vector) -> Vector:
        return Vector(self.x - other.x, self.y - other.y, self.z - other.z)

    def __neg__(self) -> Vector:
        return Vector(-self.x, -self.y, -self.z)

    def __mul__(self, factor: Real | int) -> Vector:
        return Vector(self.x * factor, self.y * factor, self.z * factor)

    def __truediv__(self, divisor: Real | int) -> Vector:
        return Vector(self.x / divisor, self.y / divisor, self.z / divisor)

    def __matmul__(self, other: Vector) -> Real:
        return self.x.context.fdot(self, other)

    def norm(self) -> Real:
        """Length."""
        return self.x.context.sqrt(self @ self)

    def unit(self) -> Vector:
        """Direction."""
        return self / self.norm()

    def floats(self) -> tuple[float, float, float]:
        """The nearest three float64."""
        return float(self.x), float(self.y), float(self.z)


@dataclass(frozen=True, slots=True)
class Matrix:
    """Three rows of a 3 x 3 matrix."""

    rows: tuple[Vector, Vector, Vector]

    @classmethod
    def rotation(cls, ctx: Context, axis: int, angle: Real) -> Matrix:
        """R1, R2 or R3: the frame turned by `angle` (rad) about its axis 1, 2 or 3."""
        cosine, sine = ctx.cos_sin(angle)
        i, j, k = axis - 1, axis % 3, (axis + 1) % 3
        entries = [[ctx.zero] * 3 for _ in range(3)]
        entries[i][i] = ctx.one
        entries[j][j] = entries[k][k] = cosine
        entries[j][k], entries[k][j] = sine, -sine
        return cls((Vector(*entries[0]), Vector(*entries[1]), Vector(*entries[2])))

    @property
    def transposed(self) -> Matrix:
        """The inverse, when this is a rotation."""
        a, b, c = self.rows
        return Matrix((Vector(a.x, b.x, c.x), Vector(a.y, b.y, c.y), Vector(a.z, b.z, c.z)))

    def __mul__(self, other: Matrix) -> Matrix:
        columns = other.transposed.rows
        a, b, c = (Vector(*(row @ column for column in columns)) for row in self.rows)
        return Matrix((a, b, c))

    def __matmul__(self, vector: Vector) -> Vector:
        return Vector(*(row @ vector for row in self.rows))


def fixed_point(
    predict: Callable[[Real], tuple[Real, Event]], start: Real, tolerance: Real
) -> Event:
    """The event at which a light time is what the geometry predicts, by secants.

    Parameters
    ----------
    predict : callable
        Takes a light time t; gives that from the geometry, g(t), and the event it belongs to.
        The root of t - g(t) is looked for, whose slope is near 1.
    start : mpf
        First guess.
    tolerance : mpf
        The step that would follow is shorter than this.

    Raises
    ------
    ConvergenceError
        After 30 steps.
    """
    before, (predicted, event) = start, predict(start)
    f_before = before - predicted
    now = predicted
    for _ in range(30):
        predicted, event = predict(now)
        f_now = now - predicted
        step = f_now * (now - before) / (f_now - f_before) if f_now != f_before else f_now
        if abs(step) < tolerance:
            return event
        before, f_before, now = now, f_now, now - step
    raise ConvergenceError(f"the light-time equation still moves by {step} s after 30 steps")
