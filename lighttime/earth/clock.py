"""A clock at rest on the Earth: its rate against TT, by its height."""

from __future__ import annotations

from typing import Any, Final

import numpy as np
from numpy.typing import ArrayLike

from lighttime.constants import (
    DAY,
    GRS80_INVERSE_FLATTENING,
    L_G,
    SCALES_ORIGIN,
    SPEED_OF_LIGHT,
    WGS84_SEMI_MAJOR_AXIS,
)
from lighttime.earth.station import Station

c = SPEED_OF_LIGHT

U0: Final = 62636860.850
"""m^2/s^2: normal potential on the ellipsoid of GRS80. Source: Moritz 2000, J. Geod. 74, 128."""

EQUATORIAL_GRAVITY: Final = 9.7803267715
"""m/s^2. Source: Moritz 2000."""

GRAVITY_K: Final = 0.001931851353
"""Constant of Somigliana's formula. Source: Moritz 2000."""

GRAVITY_M: Final = 0.00344978600308
"""Centrifugal over gravitational acceleration. Source: Moritz 2000."""

RATE_SIGMA: Final = 3e-15
"""One sigma of `faster_than_tt`: the geoid lies 30 m (rms; 107 m at most) from the ellipsoid."""


def faster_than_tt(station: Station) -> float:
    """d(proper time)/dTT - 1 of a clock at rest on the Earth.

    Parameters
    ----------
    station : Station
        Its height is that above the ellipsoid, in whose place the geoid is meant: see
        `RATE_SIGMA`.

    Returns
    -------
    float
        1.09e-16 for each metre of height: 9.4 ns a day for 1000 m.

    Notes
    -----
    (W0 - W)/c^2, with W0 = L_G c^2 the potential of TT and W the normal potential of GRS80:
    Somigliana's gravity times the height, with its decrease. Tides, 1e-17 or so, left out.

    Source: IAU 2000 B1.9; Moritz 2000, J. Geod. 74, 128.
    """
    h = station.height_m
    s2 = float(np.sin(station.latitude_rad)) ** 2
    f = 1.0 / GRS80_INVERSE_FLATTENING
    e2 = f * (2.0 - f)
    gravity = EQUATORIAL_GRAVITY * (1.0 + GRAVITY_K * s2) / np.sqrt(1.0 - e2 * s2)
    decrease = (1.0 + f + GRAVITY_M - 2.0 * f * s2) * h / WGS84_SEMI_MAJOR_AXIS
    potential = U0 - gravity * h * (1.0 - decrease)
    return float((L_G * c**2 - potential) / c**2)


def earth_clock_minus_tt(station: Station, tt1: ArrayLike, tt2: ArrayLike) -> Any:
    """What a clock on the Earth has gained on TT since 1977-01-01 0h TAI, s.

    Parameters
    ----------
    station : Station
    tt1, tt2 : float or array
        Julian date, TT, in two parts.
    """
    days = (np.asarray(tt1) - SCALES_ORIGIN[0]) + (np.asarray(tt2) - SCALES_ORIGIN[1])
    seconds = faster_than_tt(station) * days * DAY
    return float(seconds) if np.ndim(seconds) == 0 else seconds
