"""Other people's numbers, with all their digits, as the sum of two float64.

A round trip of 2.6 s in one float64 is a grid of 0.4 fs; text may say more, and a number in
other units less. What comes out is exact to 1e-32 of the value, together with the size of the
last digit that was given.
"""

from __future__ import annotations

from collections.abc import Sequence
from decimal import Context, Decimal, InvalidOperation, localcontext
from fractions import Fraction
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from lighttime.timescales import twopart
from lighttime.vectors import Array

DIGITS = 100
"""Decimal digits that are carried; two float64 hold 32, and what they differ by some more."""

SMALLEST = 1000
"""So many decimals are taken."""


class Numbers(NamedTuple):
    """Numbers as unevaluated sums, the last digit of each, and why some could not be read."""

    high: Array
    low: Array
    last_digit: Array
    wrong: dict[int, str]


def numbers(values: Any, factor: Fraction = Fraction(1)) -> Numbers:
    """Read a column of numbers and multiply it by a factor.

    Parameters
    ----------
    values : array or sequence, shape (n,)
        float64 or longer floats, integers, decimal text, Decimal, Fraction, or mpmath numbers.
    factor : Fraction
        To the unit that is wanted.

    Returns
    -------
    Numbers
        Those that could not be read are NaN, with the reason under their index.

    Examples
    --------
    >>> found = numbers(["2617071037988.9012345678", "2.6e12"], Fraction(1, 10**12))
    >>> Fraction(found.high[0]) + Fraction(found.low[0]) - Fraction("2.6170710379889012345678") \\
    ...     < Fraction(1, 10**30)
    True
    >>> found.last_digit
    array([1.e-22, 1.e-01])
    """
    array = np.asarray(values)
    if array.dtype.kind == "f" and array.dtype.itemsize <= 8:
        return _floats(array.astype(np.float64), factor)
    if array.dtype.kind == "f":
        high = array.astype(np.float64)
        low = (array - high).astype(np.float64)
        return _scaled(high, low, np.abs(array * np.finfo(array.dtype).eps).astype(float), factor)
    if array.dtype.kind in "iu":
        whole = array.astype(np.float64)
        rest = (array - whole.astype(array.dtype)).astype(np.float64)
        return _scaled(whole, rest, np.zeros(array.shape), factor)
    return _objects(array.tolist(), factor)


def _floats(values: Array, factor: Fraction) -> Numbers:
    return _scaled(values, np.zeros(values.shape), np.spacing(np.abs(values)), factor)


def _scaled(high: Array, low: Array, digit: Array, factor: Fraction) -> Numbers:
    bad = ~np.isfinite(high)
    wrong = {int(i): f"{high[i]} is not finite" for i in np.flatnonzero(bad)}
    if bad.any():
        high, low, digit = (np.where(bad, np.nan, x) for x in (high, low, digit))
    if factor != 1:
        top, bottom = (twopart.exact(Fraction(n)) for n in (factor.numerator, factor.denominator))
        high, low = twopart.divide(twopart.multiply((high, low), top), bottom)
    return Numbers(high, low, digit * float(factor), wrong)


def _objects(values: Sequence[Any], factor: Fraction) -> Numbers:
    high, low, digit = (np.full(len(values), np.nan) for _ in range(3))
    wrong: dict[int, str] = {}
    numerator, denominator = Decimal(factor.numerator), Decimal(factor.denominator)
    decimal = _is_decimal(factor)
    with localcontext(Context(prec=DIGITS)):
        for i, value in enumerate(values):
            try:
                exact, step = _exact(value)
                if decimal and isinstance(exact, Decimal):
                    product = exact * numerator / denominator
                    high[i] = float(product)
                    low[i] = float(product - Decimal(high[i]))
                else:
                    number = Fraction(exact) * factor
                    high[i] = float(number)
                    low[i] = float(number - Fraction(high[i]))
                digit[i] = step * float(factor)
            except (ValueError, OverflowError, InvalidOperation) as error:
                high[i] = np.nan
                known = isinstance(error, ValueError)
                wrong[i] = str(error) if known else f"{value!r} is no number"
    return Numbers(high, low, digit, wrong)


def _is_decimal(factor: Fraction) -> bool:
    """Whether a division by the factor's denominator ends."""
    rest = factor.denominator
    for prime in (2, 5):
        while rest % prime == 0:
            rest //= prime
    return rest == 1


def _exact(value: Any) -> tuple[Decimal | Fraction, float]:
    """A number as it was given, and the size of its last digit."""
    if value is None or (isinstance(value, str) and not value.strip()):
        raise ValueError("is empty")
    if isinstance(value, str):
        try:
            if "_" in value or not value.isascii():
                raise InvalidOperation
            value = Decimal(value.strip().replace("D", "E").replace("d", "e"))
        except InvalidOperation:
            raise ValueError(f"{value!r} is no number") from None
    if isinstance(value, bool):
        raise ValueError(f"{value!r} is no number")
    if isinstance(value, Decimal):
        if not value.is_finite():
            raise ValueError(f"{value} is not finite")
        if not abs(value) < Decimal("1e300"):
            raise ValueError(f"{value} is too large")
        exponent = int(value.as_tuple().exponent)
        if exponent < -SMALLEST:  # as a fraction it would have as many digits
            raise ValueError(f"{value} is too small, or has too many decimals")
        return value, 10.0 ** float(exponent)
    if isinstance(value, (int, np.integer, Fraction)):
        return Fraction(value if isinstance(value, Fraction) else int(value)), 0.0
    if isinstance(value, (float, np.floating)):
        if not np.isfinite(value):
            raise ValueError(f"{value} is not finite")
        return Fraction(float(value)), float(np.spacing(abs(float(value))))
    if hasattr(value, "_mpf_"):
        sign, mantissa, exponent, bits = value._mpf_
        if not bits and mantissa == 0 and exponent:
            raise ValueError(f"{value} is not finite")
        number = Fraction(int(mantissa)) * Fraction(2) ** int(exponent)
        return -number if sign else number, float(Fraction(2) ** int(exponent))
    raise ValueError(f"{value!r} is no number")


def plain_floats(values: Any) -> tuple[Array, dict[int, str]]:
    """A column of numbers for which one float64 is enough, and why some could not be read."""
    found = numbers(values)
    return found.high, found.wrong


def texts(values: Any) -> NDArray[np.str_]:
    """A column of names."""
    return np.array([str(v).strip() for v in np.asarray(values).tolist()], dtype=np.str_)
