"""Time scales at extended precision: UTC, TAI, TT, TDB and their kin.

Every instant is one Julian date in the working precision.
"""

from __future__ import annotations

from datetime import date
from fractions import Fraction
from functools import cache
from typing import Any

import erfa

from lighttime.constants import L_B, L_G, SCALES_ORIGIN, TDB_0
from lighttime.data import table
from lighttime.errors import CoverageError, InputError
from lighttime.exact.numbers import Context, Real, Vector, decimal, exact, split_day

__all__ = [
    "DAY",
    "SCALES",
    "instant",
    "tai_minus_utc",
    "tai_of_utc",
    "tai_to_tt",
    "tdb_minus_tt",
    "tt_to_tai",
]

DAY = 86400
"""Seconds in a day."""

_SATELLITES = 19
"""TAI minus the system times of GPS and Galileo, s. Source: IS-GPS-200, 3.3.4."""
_MJD_ZERO = Fraction(4800001, 2)

SCALES = ("utc", "tai", "gps", "gst", "tt", "tdb", "tcg", "tcb")
"""Scales in which an instant may be given."""


# --- UTC and TAI ----------------------------------------------------------------------------


@cache
def _utc_table() -> tuple[tuple[int, Fraction, int, Fraction], ...]:
    """From which MJD on TAI - UTC is how many seconds, from which reference MJD, per day."""
    early = table("utc_1960_1971")
    rows = [
        (_mjd(y, m), Fraction(repr(float(offset))), int(reference), Fraction(repr(float(drift))))
        for y, m, offset, reference, drift in zip(*early.values(), strict=True)
    ]
    for year, month, seconds in erfa.leap_seconds.get().tolist():
        if year >= 1972:
            rows.append((_mjd(year, month), Fraction(int(seconds)), 0, Fraction(0)))
    return tuple(rows)


def _mjd(year: float, month: float) -> int:
    return date(int(year), int(month), 1).toordinal() - date(1858, 11, 17).toordinal()


@cache
def tai_minus_utc_at_midnight(mjd: int) -> Fraction:
    """TAI - UTC, s, at 0 h UTC of a day. Source: USNO/IERS, table tai-utc; Bulletin C."""
    rows = [row for row in _utc_table() if row[0] <= mjd]
    if not rows or mjd > _mjd(2100, 1):
        raise CoverageError("UTC, modified Julian date", mjd, "36934 (1960-01-01) to 88069 (2100)")
    _, offset, reference, drift = rows[-1]
    return offset + (mjd - reference) * drift


def tai_of_utc(ctx: Context, mjd: int, fraction: Real) -> Real:
    """Julian date, TAI, when `fraction` of a day of UTC has gone.

    TAI runs evenly over the day, which is as long as TAI - UTC makes it: a leap second at its
    end, or the drift of 1960 to 1971, is spread over the fraction as in a quasi-Julian date.
    """
    start = tai_minus_utc_at_midnight(mjd)
    length = DAY + tai_minus_utc_at_midnight(mjd + 1) - start
    midnight = exact(ctx, mjd + _MJD_ZERO + start / DAY)
    return midnight + fraction * exact(ctx, length / DAY)


def tai_minus_utc(tai: Real) -> Real:
    """TAI - UTC, s, at a Julian date of TAI; from 1960 to 1971 it grows within the day."""
    ctx = tai.context
    mjd = int(ctx.floor(tai - exact(ctx, _MJD_ZERO)))
    if tai < tai_of_utc(ctx, mjd, ctx.zero):
        mjd -= 1
    elapsed = tai - tai_of_utc(ctx, mjd, ctx.zero)
    drift = [row[3] for row in _utc_table() if row[0] <= mjd][-1]
    of_tai = exact(ctx, drift / (1 + drift / DAY))
    return exact(ctx, tai_minus_utc_at_midnight(mjd)) + elapsed * of_tai


# --- TAI, TT, TCG, TDB, TCB -----------------------------------------------------------------


def tai_to_tt(tai: Real) -> Real:
    """TT = TAI + 32.184 s. Source: IAU 1991 A4."""
    return tai + tai.context.mpf(32184) / (1000 * DAY)


def tt_to_tai(tt: Real) -> Real:
    """TAI = TT - 32.184 s."""
    return tt - tt.context.mpf(32184) / (1000 * DAY)


def tcg_to_tt(tcg: Real) -> Real:
    """TT = TCG - L_G (TCG - T0). Source: IAU 2000 B1.9."""
    ctx = tcg.context
    return tcg - decimal(ctx, L_G) * (tcg - _scales_origin(ctx))


def tcb_to_tdb(tcb: Real) -> Real:
    """TDB = TCB - L_B (TCB - T0) + TDB0. Source: IAU 2006 B3."""
    ctx = tcb.context
    rate = decimal(ctx, L_B) * (tcb - _scales_origin(ctx))
    return tcb - rate + decimal(ctx, TDB_0) / DAY


def _scales_origin(ctx: Context) -> Real:
    return decimal(ctx, SCALES_ORIGIN[0]) + decimal(ctx, SCALES_ORIGIN[1])


# --- TDB - TT -------------------------------------------------------------------------------


def tdb_minus_tt(tdb: Real, ut1: Real, xyz_m: Vector) -> Real:
    """TDB - TT of a clock at an ITRF place, seconds.

    The series is summed in float64, in which its first and largest term (annual, 1.7 ms) is good
    to 1e-16 s only: its argument is some hundred radians. That term is taken out and put in again
    at full precision; what is left of rounding is below 1e-18 s.

    Source: Fairhead & Bretagnon 1990, Astron. Astrophys. 229, 240, as in IAU SOFA/ERFA, dtdb.
    """
    ctx = tdb.context
    x, y, z = xyz_m
    longitude = ctx.atan2(y, x) if x or y else ctx.zero
    u, v = ctx.hypot(x, y) / 1000, z / 1000
    _, fraction = split_day(ut1)
    day, part = split_day(tdb)
    seconds = erfa.dtdb(day, part, fraction, float(longitude), float(u), float(v))
    in_float64 = _ANNUAL_RATE * (((day - 2451545.0) + part) / 365250.0) + _ANNUAL_PHASE
    exactly = ctx.mpf(_ANNUAL_RATE) * ((tdb - 2451545) / 365250) + ctx.mpf(_ANNUAL_PHASE)
    rounding = ctx.sin(exactly) - ctx.sin(ctx.mpf(in_float64))
    return ctx.mpf(float(seconds)) + ctx.mpf("1656.674564e-6") * rounding


_ANNUAL_RATE, _ANNUAL_PHASE = 6283.075849991, 6.240054195
"""Of the first term: rad per Julian millennium, rad. Source: Fairhead & Bretagnon 1990, table 1."""


# --- an instant as handed in ----------------------------------------------------------------


def instant(ctx: Context, when: Any) -> tuple[str, Real]:
    """What an `Epoch` says: ``("tt", JD)`` or ``("tdb", JD)``.

    Parameters
    ----------
    when : Epoch
        Scalar: two float64, ``jd1`` and ``jd2``, and ``scale``.
    """
    jd1, jd2, scale = when.jd1, when.jd2, str(when.scale)
    if getattr(jd1, "shape", ()) != ():
        raise InputError("when", f"an array of shape {jd1.shape}", "one instant")
    jd = exact(ctx, float(jd1), float(jd2))
    if scale == "utc":
        days = jd - exact(ctx, _MJD_ZERO)
        mjd = int(ctx.floor(days))
        return "tt", tai_to_tt(tai_of_utc(ctx, mjd, days - mjd))
    match scale:
        case "tai":
            return "tt", tai_to_tt(jd)
        case "gps" | "gst":
            return "tt", tai_to_tt(jd + ctx.mpf(_SATELLITES) / DAY)
        case "tt":
            return "tt", jd
        case "tcg":
            return "tt", tcg_to_tt(jd)
        case "tdb":
            return "tdb", jd
        case "tcb":
            return "tdb", tcb_to_tdb(jd)
    raise InputError("scale of when", scale, f"one of {', '.join(SCALES)}")
