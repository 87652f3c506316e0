"""Defining constants and unit factors, each with its source.

SI units. What belongs to an ephemeris (GMs, the astronomical unit, the Earth-Moon mass ratio,
Love numbers of the Moon) is read from that ephemeris and is not here.
"""

from __future__ import annotations

from math import pi
from typing import Final

SPEED_OF_LIGHT: Final = 299792458.0
"""m/s, exact. Source: SI."""

DAY: Final = 86400.0
"""Seconds in a day. Source: SI."""

JULIAN_YEAR: Final = 365.25
"""Days in a Julian year. Source: IAU."""

JULIAN_CENTURY: Final = 36525.0
"""Days in a Julian century. Source: IAU."""

J2000: Final = 2451545.0
"""Julian date of the epoch J2000.0. Source: IAU."""

MJD_ZERO: Final = 2400000.5
"""Julian date at which the modified Julian date is zero. Source: IAU."""

TT_MINUS_TAI: Final = 32.184
"""s, exact. Source: IAU 1991 A4, recommendation IV."""

L_G: Final = 6.969290134e-10
"""1 - d(TT)/d(TCG), exact. Source: IAU 2000 B1.9."""

L_B: Final = 1.550519768e-8
"""1 - d(TDB)/d(TCB), exact. Source: IAU 2006 B3."""

TDB_0: Final = -6.55e-5
"""s, exact: TDB at the origin of TCB. Source: IAU 2006 B3."""

SCALES_ORIGIN: Final = (2443144.5, 0.0003725)
"""Julian date (two parts) at which TT, TCG and TCB agree: 1977-01-01 0h TAI.

Source: IAU 1991 A4; IAU 2006 B3."""

L_C: Final = 1.48082686741e-8
"""Average of 1 - d(TCG)/d(TCB). Source: IAU 2000 B1.5, note; IERS TN36, table 1.1."""

EARTH_ROTATION_RATE: Final = 2.0 * pi * 1.00273781191135448 / DAY
"""rad/s of UT1: the rate of the Earth rotation angle. Source: IAU 2000 B1.8."""

EARTH_EQUATORIAL_RADIUS: Final = 6378136.6
"""m. Source: IERS TN36, table 1.1."""

WGS84_SEMI_MAJOR_AXIS: Final = 6378137.0
"""m. Source: GRS80/WGS84."""

GRS80_INVERSE_FLATTENING: Final = 298.257222101
"""Source: GRS80, the ellipsoid of geodetic coordinates in the ITRF (IERS TN36, 4.2.6)."""

MOON_MEAN_RADIUS: Final = 1737400.0
"""m. Source: IAU working group on cartographic coordinates, 2015 (from memory)."""

DEGREE: Final = pi / 180.0
ARCSECOND: Final = pi / 648000.0
MILLIARCSECOND: Final = ARCSECOND / 1.0e3
MICROARCSECOND: Final = ARCSECOND / 1.0e6
TURN: Final = 2.0 * pi
"""Radians in one of each."""
