"""Every time scale against astropy, over 10,000 instants of 1972 to 2026.

    python validation/scales_against_astropy.py

Prints the greatest difference of each conversion with the reason for it, and exits non-zero when
one is greater than its bar. A third of the instants are in the last minute of a day that ends in
a leap second. Astropy reads the series of Earth orientation that this library reads (IERS 20 C04
from astropy-iers-data); nothing is downloaded.
"""

from __future__ import annotations

import sys
from dataclasses import dataclass
from typing import Any

import numpy as np
from astropy.coordinates import EarthLocation
from astropy.time import Time
from astropy.utils import iers

from lighttime.earth.series import EarthOrientation
from lighttime.timescales import Epoch, scales
from lighttime.timescales.leapseconds import utc_table

COUNT = 10_000
FIRST_MJD, END_MJD = 41317, 61300  # 1972-01-01 to 2026-09-16, within the final values of C04
SITE_M = (-1463998.9, -5166632.8, 3435012.9)


@dataclass(frozen=True)
class Site:
    xyz_m: tuple[float, float, float] = SITE_M


@dataclass(frozen=True)
class Value:
    ut1_tai_s: Any


@dataclass(frozen=True)
class LinearInUtc:
    """UT1 - UTC in a straight line from 0h UTC to 0h UTC, leap second aside: astropy's way."""

    nodes: EarthOrientation

    def at(self, tai1: Any, tai2: Any) -> Value:
        utc = Epoch(tai1, tai2, "tai").to("utc")
        day, fraction = utc.day_and_fraction()
        i = np.asarray(day - 2400000.5 - self.nodes.mjd[0]).astype(int)
        ut1_tai_s = self.nodes.ut1_tai_s
        return Value(ut1_tai_s[i] + fraction * (ut1_tai_s[i + 1] - ut1_tai_s[i]))


@dataclass(frozen=True)
class UtcForUt1:
    """UTC (its quasi-Julian date) for UT1, as astropy does for the daily term of TDB."""

    def at(self, tai1: Any, tai2: Any) -> Value:
        utc1, utc2 = scales.tai_to_utc(tai1, tai2)
        return Value(86400.0 * ((utc1 - tai1) + (utc2 - tai2)))


def instants() -> Time:
    rng = np.random.default_rng(20260101)
    mjd = rng.integers(FIRST_MJD, END_MJD, COUNT)
    fraction = rng.random(COUNT)
    ends = utc_table().mjd[1:] - 1
    mjd[::3] = rng.choice(ends[ends >= FIRST_MJD], len(mjd[::3]))
    fraction[::3] = 1.0 - fraction[::3] / 1440.0
    return Time(mjd + 2400000.5, fraction, format="jd", scale="utc")


def apart(mine: Epoch, theirs: Time) -> np.ndarray:
    """Seconds, counted in the scale of both (UTC, UT1: in TAI, of each by this library)."""
    return np.asarray(mine.seconds_since(Epoch(theirs.jd1, theirs.jd2, mine.scale)))


def main() -> int:
    iers.conf.auto_download = False
    theirs = instants()
    utc = Epoch.parse(theirs)
    table = iers.IERS_B.open()
    theirs.delta_ut1_utc = theirs.get_delta_ut1_utc(table)
    series = EarthOrientation.bundled()
    at_site = Time(theirs, location=EarthLocation.from_geocentric(*SITE_M, unit="m"))
    midnight_theirs = Time(np.arange(FIRST_MJD, END_MJD) + 2400000.5, 0.0, format="jd", scale="utc")
    midnight_theirs.delta_ut1_utc = midnight_theirs.get_delta_ut1_utc(table)
    midnight = Epoch.parse(midnight_theirs)

    day = utc.day_and_fraction()[0] - 2400000.5 - series.mjd[0]
    bends = np.abs(np.diff(series.ut1_tai_s, 2))  # of the days before, at and after a node
    bend_s = np.maximum(bends[day.astype(int) - 1], bends[day.astype(int)]) / 8
    curved = apart(utc.to("ut1", None, series), theirs.ut1)

    rounding = "a fraction of a day in one float64 (astropy) is a grid of up to 10 ps"
    series_tt = rounding + "; TT for TDB in the series, 0.6 ps"
    rows = [
        ("UTC to TAI", apart(utc.to("tai"), theirs.tai), 30, rounding),
        ("TAI to UTC", apart(Epoch.parse(theirs.tai).to("utc"), theirs.tai.utc), 30, rounding),
        ("UTC to TT", apart(utc.to("tt"), theirs.tt), 30, rounding),
        ("UTC to TCG", apart(utc.to("tcg"), theirs.tcg), 30, rounding),
        ("UTC to TDB, geocentre", apart(utc.to("tdb"), theirs.tdb), 30, series_tt),
        ("UTC to TCB, geocentre", apart(utc.to("tcb"), theirs.tcb), 30, series_tt),
        ("UTC to TDB, at a site, UTC for UT1",
         apart(utc.to("tdb", Site(), UtcForUt1()), at_site.tdb), 30, series_tt),
        ("UTC to TDB, at a site",
         apart(utc.to("tdb", Site(), series), at_site.tdb), 200,
         "astropy takes UTC for UT1 in the daily term: 0.9 s * 1.4e-10 = 126 ps"),
        ("UTC to UT1 at 0h UTC", apart(midnight.to("ut1", None, series), midnight_theirs.ut1), 30,
         rounding + "; the published values themselves"),
        ("UTC to UT1, both linear",
         apart(utc.to("ut1", None, LinearInUtc(series)), theirs.ut1), 30, rounding),
        ("UTC to UT1, as it is here", curved, 60e6,
         "astropy: straight line from day to day; here: zonal tides apart, four points"),
        ("  beyond 1/8 of the second difference", np.maximum(np.abs(curved) - bend_s, 0.0), 3e6,
         "the most that a cubic can leave the line; more is the tides' own curve"),
    ]  # fmt: skip
    missed = 0
    print(f"{COUNT} instants, 1972-01-01 to 2026-09-15; differences in ps, this library - astropy")
    print(f"{'':38}{'greatest':>12}{'rms':>12}{'bar':>12}  why")
    for name, seconds, bar_ps, reason in rows:
        ps = seconds * 1e12
        miss = not np.abs(ps).max() <= bar_ps
        missed += miss
        numbers = f"{np.abs(ps).max():12.2f}{np.sqrt(np.mean(ps**2)):12.2f}{bar_ps:12.0f}"
        print(f"{name:38}{numbers}  {'MISSED: ' if miss else ''}{reason}")
    return min(missed, 1)


if __name__ == "__main__":
    sys.exit(main())
