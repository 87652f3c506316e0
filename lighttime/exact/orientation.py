"""How the Earth is turned: from the ITRF to the GCRS at extended precision."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import erfa

from lighttime.earth.subdaily import subdaily
from lighttime.errors import CoverageError
from lighttime.exact.numbers import Context, Matrix, Real, Vector, split_day
from lighttime.exact.times import DAY, tai_minus_utc, tai_of_utc, tai_to_tt, tt_to_tai
from lighttime.exact.zonal import zonal_tides_ut1

__all__ = ["Orientation", "Pole", "Series", "earth_rotation_angle"]


@dataclass(frozen=True, slots=True)
class Pole:
    """The series of Earth orientation at an instant, without sub-daily terms; s and rad."""

    ut1_minus_tai: Real
    xp: Real
    yp: Real
    dx: Real
    dy: Real


@dataclass(frozen=True, slots=True)
class Orientation:
    """One instant of the Earth's rotation."""

    tt: Real
    ut1_of_series: Real
    """Julian date, UT1, without sub-daily terms."""
    ut1: Real
    pole: Pole
    xp: Real
    yp: Real
    """Coordinates of the pole with sub-daily terms, rad."""
    cip: Vector
    """Unit vector of the celestial intermediate pole: X, Y and Z."""
    s: Real
    era: Real
    """Earth rotation angle, 0 to 2 pi."""
    matrix: Matrix
    """Takes ITRF coordinates to the GCRS."""


class Series:
    """Pole and UT1 between the daily values of an `EarthOrientation`.

    Four-point Lagrange interpolation in the fraction of the interval between two nodes, which
    lie at 0 h UTC; UT1 - TAI is freed of zonal tides at the nodes and given them back after.
    """

    def __init__(self, ctx: Context, tables: Any) -> None:
        self.ctx = ctx
        self.tables = tables
        self._node = lru_cache(maxsize=64)(self._read)
        self._tai = lru_cache(maxsize=64)(self._tai_of)

    def _tai_of(self, index: int) -> Real:
        return tai_of_utc(self.ctx, int(self.tables.mjd[index]), self.ctx.zero)

    def _read(self, index: int) -> tuple[Real, ...]:
        """UT1 - TAI without zonal tides (s), xp, yp, dX, dY (rad) of a node."""
        ctx, t = self.ctx, self.tables
        tides = zonal_tides_ut1(tai_to_tt(self._tai(index)))
        arcsecond = ctx.pi / 648000
        return (
            ctx.mpf(float(t.ut1_tai_s[index])) - tides,
            ctx.mpf(float(t.xp_arcsec[index])) * arcsecond,
            ctx.mpf(float(t.yp_arcsec[index])) * arcsecond,
            ctx.mpf(float(t.dx_mas[index])) * arcsecond / 1000,
            ctx.mpf(float(t.dy_mas[index])) * arcsecond / 1000,
        )

    def at(self, tt: Real) -> Pole:
        """The series at an instant of TT (Julian date)."""
        tai = tt_to_tai(tt)
        if self.tables.constant is not None:
            return self._constant(tai)
        index = self._interval(tai)
        x = (tai - self._tai(index)) / (self._tai(index + 1) - self._tai(index))
        first = min(max(index - 1, 0), len(self.tables.mjd) - 4)
        weights = _lagrange(x, [first + k - index for k in range(4)])
        rows = [self._node(first + k) for k in range(4)]
        ut1, xp, yp, dx, dy = (self.ctx.fdot(weights, column) for column in zip(*rows, strict=True))
        return Pole(ut1 + zonal_tides_ut1(tt), xp, yp, dx, dy)

    def _constant(self, tai: Real) -> Pole:
        """A fixed orientation: UT1 - UTC and the pole are the same at all times."""
        ctx = self.ctx
        ut1_minus_utc, xp, yp, dx, dy = (ctx.mpf(float(v)) for v in self.tables.constant)
        arcsecond = ctx.pi / 648000
        return Pole(
            ut1_minus_utc - tai_minus_utc(tai),
            xp * arcsecond,
            yp * arcsecond,
            dx * arcsecond / 1000,
            dy * arcsecond / 1000,
        )

    def _interval(self, tai: Real) -> int:
        """The node at or before an instant."""
        mjd = self.tables.mjd
        last = len(mjd) - 1
        if not self._tai(0) <= tai <= self._tai(last):
            raise CoverageError(
                "Julian date (TAI) in the series of Earth orientation",
                self.ctx.nstr(tai, 20),
                f"MJD {mjd[0]} to {mjd[last]} UTC",
            )
        guess = min(int(self.ctx.floor(tai - self.ctx.mpf(2400000.5) - int(mjd[0]))), last - 1)
        return guess if self._tai(guess) <= tai else guess - 1

    def orientation(self, tt: Real, with_subdaily: bool) -> Orientation:
        """Everything about the Earth's rotation at an instant of TT.

        GCRS = Q(X, Y, s) R3(-ERA) R3(-s') R2(xp) R1(yp) ITRF.
        Source: IERS Conventions (2010), TN36, 5.4.1 to 5.4.4, equations 5.2 to 5.13.
        """
        ctx = self.ctx
        pole = self.at(tt)
        ut1_of_series = tt_to_tai(tt) + pole.ut1_minus_tai / DAY
        xp, yp, ut1 = pole.xp, pole.yp, ut1_of_series
        if with_subdaily:
            dx, dy, dut1 = subdaily(*split_day(ut1_of_series), *split_day(tt))
            xp, yp = xp + ctx.mpf(float(dx)), yp + ctx.mpf(float(dy))
            ut1 = ut1 + ctx.mpf(float(dut1)) / DAY

        x06, y06, s = (ctx.mpf(float(angle)) for angle in erfa.xys06a(*split_day(tt)))
        x, y = x06 + pole.dx, y06 + pole.dy
        cip = Vector(x, y, ctx.sqrt(1 - x * x - y * y))
        era = earth_rotation_angle(ut1)
        s_prime = -47 * ctx.pi / 648000 / 10**6 * (tt - 2451545) / 36525
        wobble = (
            Matrix.rotation(ctx, 3, -s_prime)
            * Matrix.rotation(ctx, 2, xp)
            * Matrix.rotation(ctx, 1, yp)
        )
        matrix = _celestial(cip, s) * Matrix.rotation(ctx, 3, -era) * wobble
        return Orientation(tt, ut1_of_series, ut1, pole, xp, yp, cip, s, era, matrix)


def _lagrange(x: Real, nodes: list[int]) -> list[Real]:
    """Weights of the nodes in the polynomial through all of them, at x."""
    weights = []
    for node in nodes:
        weight = x.context.one
        for other in nodes:
            if other != node:
                weight = weight * (x - other) / (node - other)
        weights.append(weight)
    return weights


def earth_rotation_angle(ut1: Real) -> Real:
    """2 pi (0.7790572732640 + 1.00273781191135448 Tu), 0 to 2 pi. Source: IAU 2000 B1.8."""
    ctx = ut1.context
    turns = ctx.mpf("0.7790572732640") + ctx.mpf("1.00273781191135448") * (ut1 - 2451545)
    return 2 * ctx.pi * (turns - ctx.floor(turns))


def _celestial(cip: Vector, s: Real) -> Matrix:
    """Q: from the celestial intermediate frame to the GCRS. Source: TN36, equation 5.10."""
    ctx = s.context
    x, y, z = cip
    a = 1 / (1 + z)
    tilt = Matrix(
        (
            Vector(1 - a * x * x, -a * x * y, x),
            Vector(-a * x * y, 1 - a * y * y, y),
            Vector(-x, -y, z),
        )
    )
    return tilt * Matrix.rotation(ctx, 3, s)
