"""Chebyshev records at extended precision, from their raw coefficients."""

from __future__ import annotations

from functools import lru_cache
from typing import Any

from lighttime.errors import CoverageError
from lighttime.exact.numbers import Context, Real, Vector

__all__ = ["Records"]


class Records:
    """Equal spans of time, with one polynomial in each for every component.

    Parameters
    ----------
    ctx : context
        Working precision.
    name : str
        What the records hold, for messages.
    start, end : float
        Julian dates (TDB) of the first and last instant covered.
    coefficients : ndarray (records, 3, coefficients)
        As in the file; memory-mapped arrays are read record by record.
    """

    def __init__(
        self, ctx: Context, name: str, start: float, end: float, coefficients: Any
    ) -> None:
        self.ctx = ctx
        self.name = name
        self.start = ctx.mpf(start)
        self.end = ctx.mpf(end)
        self.coefficients = coefficients
        self.span = (self.end - self.start) / len(coefficients)
        self._record = lru_cache(maxsize=8)(self._read)

    def _read(self, index: int) -> tuple[tuple[Real, ...], ...]:
        mpf = self.ctx.mpf
        return tuple(tuple(mpf(c) for c in row) for row in self.coefficients[index].tolist())

    def at(self, tdb: Real) -> tuple[Vector, Vector]:
        """Value, and rate per day, at the Julian date `tdb`.

        Records are closed on the left, and the last one on the right too:
        sum of c_k T_k(x), with x = -1 to 1 over the record.
        """
        ctx = self.ctx
        if not self.start <= tdb <= self.end:
            raise CoverageError(
                f"Julian date (TDB) of {self.name}",
                ctx.nstr(tdb, 20),
                f"{ctx.nstr(self.start, 12)} to {ctx.nstr(self.end, 12)}",
            )
        index = min(int(ctx.floor((tdb - self.start) / self.span)), len(self.coefficients) - 1)
        x = 2 * (tdb - self.start - index * self.span) / self.span - 1
        components = self._record(index)
        value, slope = _basis(ctx, x, len(components[0]))
        scale = 2 / self.span
        return (
            Vector(*(ctx.fdot(c, value) for c in components)),
            Vector(*(ctx.fdot(c, slope) * scale for c in components)),
        )


def _basis(ctx: Context, x: Real, count: int) -> tuple[list[Real], list[Real]]:
    """T_0 .. T_(count-1) at x, and their derivatives: T'_k = k U_(k-1)."""
    twice = 2 * x
    first, second = [ctx.one, x], [ctx.one, twice]
    for _ in range(2, count):
        first.append(twice * first[-1] - first[-2])
        second.append(twice * second[-1] - second[-2])
    return first, [ctx.zero] + [k * second[k - 1] for k in range(1, count)]
