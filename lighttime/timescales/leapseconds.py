"""How long each day of UTC is, and how far TAI is ahead when it begins.

From 1972 on UTC keeps a whole number of seconds from TAI, changed by leap seconds; from 1960 to
1971 it ran at a rate of its own and was stepped by fractions of a second. Both are one rule: at
0h of every UTC day TAI - UTC is a whole multiple of 100 ns, A; TAI runs uniformly over the day,
which lasts 86400 s + A(next day) - A(this day). All is done in whole numbers of 100 ns, exactly.

Beyond its last entry the leap-second table is continued without a leap second: no one knows of
one today, and when one is announced a newer table brings it. That the table has passed its
date of expiry is no error. UTC is taken from 1960-01-01 up to 2100-01-01.

The table is the longer of two: the one in ERFA, and the IERS list that comes with the series of
Earth orientation (`astropy-iers-data`), so that the two can never be a leap second apart.

Source: USNO/IERS, table tai-utc; IERS Bulletin C, list Leap_Second.dat.
"""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from fractions import Fraction
from functools import cache
from importlib.resources import files
from typing import Any, Final

import erfa
import numpy as np
from numpy.typing import NDArray

from lighttime.constants import DAY, MJD_ZERO
from lighttime.data import table
from lighttime.errors import CoverageError, LighttimeError
from lighttime.timescales.twopart import Array

Whole = NDArray[np.int64]

TICK: Final = 10_000_000
"""Units of 100 ns in a second."""

DAY_TICKS: Final = int(DAY) * TICK
"""Units of 100 ns in 86400 s."""

MJD_OF_ORDINAL: Final = 678576
"""Python's proleptic Gregorian ordinal of a day minus its modified Julian date."""

FIRST_MJD: Final = date(1960, 1, 1).toordinal() - MJD_OF_ORDINAL
END_MJD: Final = date(2100, 1, 1).toordinal() - MJD_OF_ORDINAL
"""UTC days from the first to before the end."""


@dataclass(frozen=True)
class UtcTable:
    """TAI - UTC = offset + (MJD - reference) * drift from each `mjd` on, all in 100 ns, days."""

    mjd: Whole
    offset: Whole
    reference: Whole
    drift: Whole

    def row(self, mjd: Whole) -> Whole:
        """The row in force on each day."""
        found: Whole = np.searchsorted(self.mjd, mjd, side="right") - 1
        return found

    def at(self, mjd: Whole) -> Whole:
        """TAI - UTC at 0h UTC of each day, 100 ns."""
        row = self.row(mjd)
        ticks: Whole = self.offset[row] + (mjd - self.reference[row]) * self.drift[row]
        return ticks


def _leap_seconds() -> Whole:
    """Year, month and TAI - UTC (s) of each step from 1972 on, shape (steps, 3)."""
    erfas = erfa.leap_seconds.get()
    known = np.array([(r["year"], r["month"], r["tai_utc"]) for r in erfas if r["year"] >= 1972])
    text = files("astropy_iers_data").joinpath("data", "Leap_Second.dat").read_text("ascii")
    rows = (line.split() for line in text.splitlines() if line.strip() and line[0] != "#")
    listed = np.array([(int(year), int(month), int(offset)) for _, _, month, year, offset in rows])
    shorter, longer = sorted((known.astype(np.int64), listed.astype(np.int64)), key=len)
    if not np.array_equal(longer[: len(shorter)], shorter):
        raise LighttimeError(
            "the leap seconds of pyerfa and of astropy-iers-data contradict each other "
            f"(they end in {known[-1].tolist()} and {listed[-1].tolist()})"
        )
    return longer


@cache
def utc_table() -> UtcTable:
    """The table, read once in a process: what UTC means does not change under a running user."""
    early = table("utc_1960_1971")
    late = _leap_seconds()

    def joined(before: NDArray[Any], after: NDArray[Any], unit: float) -> Whole:
        whole: Whole = np.rint(np.concatenate([before, after]) * unit).astype(np.int64)
        whole.flags.writeable = False
        return whole

    none = np.zeros(len(late))
    year = np.concatenate([early["year"], late[:, 0]]).astype(int)
    month = np.concatenate([early["month"], late[:, 1]]).astype(int)
    days = [
        date(y, m, 1).toordinal() - MJD_OF_ORDINAL
        for y, m in zip(year.tolist(), month.tolist(), strict=True)
    ]
    mjd = np.array(days, dtype=np.int64)
    mjd.flags.writeable = False
    return UtcTable(
        mjd,
        joined(early["tai_minus_utc_s"], late[:, 2], TICK),
        joined(early["reference_mjd"], none, 1.0),
        joined(early["drift_s_per_day"], none, TICK),
    )


def utc_days(day: Array) -> Whole:
    """Modified Julian dates of days of UTC, given by the Julian dates (x.5) of their 0h.

    Raises
    ------
    CoverageError
        When one is before 1960-01-01 or not before 2100-01-01.
    """
    mjd = np.asarray(day - MJD_ZERO)
    outside = ~((mjd >= FIRST_MJD) & (mjd < END_MJD))
    if np.any(outside):
        worst = float(mjd[outside].flat[0])
        raise CoverageError("UTC date", day_text(worst), "1960-01-01 to 2099-12-31")
    return mjd.astype(np.int64)


def day_text(mjd: float) -> str:
    """The calendar date of a day, for people."""
    try:
        return date.fromordinal(int(mjd) + MJD_OF_ORDINAL).isoformat()
    except (ValueError, OverflowError):
        return f"MJD {mjd}"


def day_growth(mjd: Whole) -> Whole:
    """TAI seconds in each day of UTC beyond 86400, in 100 ns."""
    known = utc_table()
    growth: Whole = known.at(mjd + 1) - known.at(mjd)
    return growth


@cache
def utc_day_seconds(mjd: int) -> Fraction:
    """UTC seconds in a day: 86400, or 86401 when it ends in a leap second; exact.

    On days that end in one of the small steps of 1961-1971 the last minute is longer or shorter
    by the step (in UTC seconds, which then were longer than a second of TAI by the drift).
    """
    known = utc_table()
    day = np.array(mjd)
    drift = int(known.drift[known.row(day)])
    return Fraction(DAY_TICKS + int(day_growth(day)), DAY_TICKS + drift) * int(DAY)
