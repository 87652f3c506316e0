"""Celestial pole, rotation angle and the whole rotation of the Earth against astropy.

    python validation/rotation_against_astropy.py

Both sides read the same series (IERS 20 C04 of astropy-iers-data) at 2,000 instants of 1972 to
2026, half of them spread evenly and half at 0h UTC; nothing is downloaded. Astropy's model of the
pole and of the rotation angle is that of this library, so that with the same numbers put in both
must agree below 1 microarcsecond. Astropy leaves out dX and dY and the sub-daily terms, and
interpolates in straight lines: each of these is switched on in turn, and what the steps leave
unexplained of the whole difference must be below 1 microarcsecond too.

Exits non-zero when a bar is missed.
"""

from __future__ import annotations

import sys
from dataclasses import dataclass
from itertools import pairwise
from typing import Any

import numpy as np
from astropy import units
from astropy.coordinates import EarthLocation
from astropy.coordinates.builtin_frames.utils import get_cip
from astropy.time import Time
from astropy.utils import iers

from lighttime.constants import DAY, MICROARCSECOND
from lighttime.earth.rotation import (
    celestial_pole,
    earth_rotation_angle,
    product,
    terrestrial_to_celestial,
    transpose,
)
from lighttime.earth.series import EarthOrientation
from lighttime.earth.subdaily import subdaily
from lighttime.timescales.scales import tai_to_tt, utc_to_tai

COUNT = 2_000
FIRST_MJD, END_MJD = 41317, 61300  # 1972-01-01 to 2026-09-16, within the final values of the C04
BAR_UAS = 1.0
EARTH_RADIUS_MM = 6.378e9


@dataclass(frozen=True)
class Row:
    """One line of the table: angles in microarcseconds, and the bar it must keep, if any."""

    what: str
    angle_uas: Any
    why: str
    bar_uas: float | None = None

    @property
    def missed(self) -> bool:
        return self.bar_uas is not None and not np.max(self.angle_uas) < self.bar_uas

    def __str__(self) -> str:
        largest, rms = np.max(self.angle_uas), np.sqrt(np.mean(self.angle_uas**2))
        bar = "" if self.bar_uas is None else f"< {self.bar_uas:g}"
        verdict = "MISS" if self.missed else ""
        surface = largest * MICROARCSECOND * EARTH_RADIUS_MM
        return (
            f"{self.what:44s}{largest:13.3g}{rms:13.3g}{surface:12.2e}  {bar:6s}{verdict:5s}"
            f"{self.why}"
        )


def instants() -> Time:
    """UTC: half at any time of the day, half at 0h."""
    random = np.random.default_rng(20260101)
    day = random.integers(FIRST_MJD, END_MJD, COUNT)
    fraction = np.where(np.arange(COUNT) % 2, random.uniform(0.0, 1.0, COUNT), 0.0)
    return Time(2400000.5 + day, fraction, format="jd", scale="utc")


def theirs(when: Time) -> Any:
    """The matrix from the ITRF to the GCRS, (3, 3, n), by where it takes three axes."""
    columns = []
    for axis in np.eye(3) * 6.4e6:
        position, _ = EarthLocation(*(axis * units.m)).get_gcrs_posvel(when)
        columns.append(position.xyz.to_value(units.m) / 6.4e6)
    return np.stack(columns, axis=1)


def between(a: Any, b: Any) -> Any:
    """The angle between two rotations, microarcseconds."""
    return np.sqrt(np.sum(rotation_vector(a, b) ** 2, axis=0))


def rotation_vector(a: Any, b: Any) -> Any:
    """Small rotation from b to a, microarcseconds, (3, n)."""
    turn = product(a, transpose(b))
    vector = (turn[2, 1] - turn[1, 2], turn[0, 2] - turn[2, 0], turn[1, 0] - turn[0, 1])
    return np.stack(vector) / 2.0 / MICROARCSECOND


def table(when: Time) -> list[Row]:
    """Every comparison."""
    series = EarthOrientation.bundled()
    tai = utc_to_tai(when.jd1, when.jd2)
    tt = tai_to_tt(*tai)
    pole = series.at(*tai)
    midnight = when.jd2 == np.rint(when.jd2 * 2.0) / 2.0

    # With astropy's numbers for UT1 and the pole.
    iers_table = iers.earth_orientation_table.get()
    xp, yp = (p.to_value(units.rad) for p in iers_table.pm_xy(when))
    ut1 = when.ut1
    X, Y, s = celestial_pole(*tt)
    era = earth_rotation_angle(ut1.jd1, ut1.jd2)
    X_theirs, Y_theirs, s_theirs = get_cip(when.tt.jd1, when.tt.jd2)
    turned = when.earth_rotation_angle("tio").to_value(units.rad)
    off = np.abs(np.mod(era - turned + np.pi, 2.0 * np.pi) - np.pi)

    # Step by step to the whole of ours.
    same = terrestrial_to_celestial(X, Y, s, era, xp, yp, *tt)
    X, Y = X + pole.dx_rad, Y + pole.dy_rad
    with_dxdy = terrestrial_to_celestial(X, Y, s, era, xp, yp, *tt)
    with_pole = terrestrial_to_celestial(X, Y, s, era, pole.xp_rad, pole.yp_rad, *tt)
    era = earth_rotation_angle(tai[0], tai[1] + pole.ut1_tai_s / DAY)
    with_ut1 = terrestrial_to_celestial(X, Y, s, era, pole.xp_rad, pole.yp_rad, *tt)
    dx, dy, dut1 = subdaily(tai[0], tai[1] + pole.ut1_tai_s / DAY, *tt)
    era = earth_rotation_angle(tai[0], tai[1] + (pole.ut1_tai_s + dut1) / DAY)
    whole = terrestrial_to_celestial(X, Y, s, era, pole.xp_rad + dx, pole.yp_rad + dy, *tt)

    astropy = theirs(when)
    steps = [same, with_dxdy, with_pole, with_ut1, whole]
    explained = sum(rotation_vector(after, before) for before, after in pairwise(steps))
    rest = np.sqrt(np.sum((rotation_vector(whole, astropy) - explained) ** 2, axis=0))
    u = MICROARCSECOND
    X, Y, s = celestial_pole(*tt)
    return [
        Row("X of the celestial pole", np.abs(X - X_theirs) / u, "same model", BAR_UAS),
        Row("Y of the celestial pole", np.abs(Y - Y_theirs) / u, "same model", BAR_UAS),
        Row("locator s", np.abs(s - s_theirs) / u, "same model", BAR_UAS),
        Row(
            "Earth rotation angle",
            off / u,
            "same model; ERFA's product of days and rate rounds at 1e-13 rad",
            BAR_UAS,
        ),
        Row("whole matrix, same numbers put in", between(same, astropy), "same model", BAR_UAS),
        Row(
            "pole and UT1 of the series at 0h UTC",
            between(with_ut1, with_dxdy)[midnight],
            "at the days of the series no interpolation",
            BAR_UAS,
        ),
        Row("step: dX, dY", between(with_dxdy, same), "astropy leaves them out"),
        Row(
            "step: pole by cubics",
            between(with_pole, with_dxdy),
            "astropy interpolates in straight lines",
        ),
        Row(
            "step: UT1-TAI by cubics without zonal tides",
            between(with_ut1, with_pole),
            "astropy interpolates UT1-UTC in straight lines",
        ),
        Row("step: sub-daily terms", between(whole, with_ut1), "astropy leaves them out"),
        Row("whole matrix, each its own way", between(whole, astropy), "the sum of the steps"),
        Row("whole matrix less the steps", rest, "unexplained", BAR_UAS),
    ]


def main() -> int:
    iers.conf.auto_download = False
    with iers.earth_orientation_table.set(iers.IERS_B.open(iers.IERS_B_FILE)):
        rows = table(instants())
    print(f"{COUNT} instants, 1972 to 2026; angles in microarcseconds, lengths at the equator")
    print(f"{'':44s}{'largest':>13s}{'rms':>13s}{'mm':>12s}  {'bar':6s}{'':5s}why")
    for row in rows:
        print(row)
    return int(any(row.missed for row in rows))


if __name__ == "__main__":
    sys.exit(main())
