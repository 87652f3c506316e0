"""Station positions in the GCRS, without displacements, against astropy over 10,000 epochs.

Both sides are given the same UT1 and pole at every epoch (those of this library's series, dX and
dY zero, since astropy leaves them out). Also printed: the same with astropy's own straight-line
interpolation of the same series, and what dX and dY are worth. Nothing is downloaded.

Exits non-zero if a position differs by 1 mm with the same numbers put in.
"""

from __future__ import annotations

import sys
from dataclasses import replace
from typing import Any

import numpy as np
from astropy import units
from astropy.coordinates import EarthLocation
from astropy.time import Time
from astropy.utils import iers

import lighttime as lt
from lighttime.timescales.scales import tai_minus_utc, utc_to_tai

iers.conf.auto_download = False

COUNT = 10_000
FIRST_MJD, END_MJD = 41317, 61300  # 1972-01-01 to 2026-09-16
BAR_MM = 1.0
STATION = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
STILL = (
    "solid_earth_tide", "pole_tide", "subdaily_rotation", "station_contraction", "clock",
)  # fmt: skip


class SameNumbers(iers.IERS):
    """Stands for astropy's table: the pole is that of this library's series."""

    series: lt.EarthOrientation

    def pm_xy(self, jd1: Any, jd2: Any = 0.0, return_status: bool = False) -> Any:
        if isinstance(jd1, Time):
            jd1, jd2 = jd1.utc.jd1, jd1.utc.jd2
        pole = self.series.at(*utc_to_tai(jd1, jd2))
        xy = pole.xp_rad * units.rad, pole.yp_rad * units.rad
        return (*xy, np.zeros(np.shape(pole.xp_rad), int)) if return_status else xy


def ours(when: Time, series: lt.EarthOrientation) -> np.ndarray:
    """GCRS positions at transmission, (3, n), from the worksheet of a round trip."""
    model = lt.Model(earth_orientation=series, omit=STILL)
    epochs = lt.Epoch(when.jd1, when.jd2, "utc")
    sheet = model.round_trip(epochs, STATION, lt.reflector("Apollo 15")).worksheet()
    return np.asarray(sheet["t1.gcrs_m"])


def theirs(when: Time) -> np.ndarray:
    position, _ = EarthLocation(*(v * units.m for v in STATION.xyz_m)).get_gcrs_posvel(when)
    return np.asarray(position.xyz.to_value(units.m))


def main() -> int:
    random = np.random.default_rng(20260102)
    day = np.sort(random.integers(FIRST_MJD, END_MJD, COUNT)).astype(float)
    when = Time(2400000.5 + day, random.uniform(0.0, 1.0, COUNT), format="jd", scale="utc")
    series = lt.EarthOrientation.bundled()
    zero = np.zeros_like(series.dx_mas)
    plain = replace(series, dx_mas=zero, dy_mas=zero, name="without dX, dY")
    mine = ours(when, plain)
    with iers.earth_orientation_table.set(iers.IERS_B.open()):
        straight = theirs(Time(when, copy=True))
    tai = utc_to_tai(when.jd1, when.jd2)
    same = Time(when, copy=True)
    same.delta_ut1_utc = series.at(*tai).ut1_tai_s + tai_minus_utc(when.jd1, when.jd2)
    table = SameNumbers()
    table.series = plain
    with iers.earth_orientation_table.set(table):
        given = theirs(same)
    rows = (
        ("same UT1 and pole put in", mine - given, BAR_MM, "same model, float64 on both sides"),
        ("astropy's straight lines", mine - straight, None, "interpolation of UT1 and pole"),
        ("with dX, dY", ours(when, series) - mine, None, "left out by astropy"),
    )
    missed = False
    print(f"{COUNT} epochs of 1972 to 2026, station position in the GCRS\n")
    print(f"{'':28}{'largest, mm':>14}{'rms, mm':>12}  why")
    for name, difference, bar, why in rows:
        length = np.sqrt(np.sum(difference**2, axis=0)) * 1e3
        over = bar is not None and not length.max() < bar
        missed |= over
        rms = np.sqrt(np.mean(length**2))
        print(f"{name:28}{length.max():14.6f}{rms:12.6f}  {why}{'  MISSED' if over else ''}")
    return int(missed)


if __name__ == "__main__":
    sys.exit(main())
