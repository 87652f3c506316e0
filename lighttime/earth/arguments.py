"""Angles of the Sun, the Moon and the turning Earth on which tides and nutation depend.

Source: IERS Conventions (2010), TN36, 5.7.2 (equation 5.43) for the arguments of nutation;
7.1.1 for their combinations after Doodson.
"""

from __future__ import annotations

from typing import Any, Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.constants import ARCSECOND, DAY, J2000, JULIAN_CENTURY, TURN

Floats = NDArray[np.float64]

ARCSECONDS_IN_TURN: Final = 1296000.0

FUNDAMENTAL: Final = (
    (485868.249036, 1717915923.2178, 31.8792, 0.051635, -0.00024470),
    (1287104.793048, 129596581.0481, -0.5532, 0.000136, -0.00001149),
    (335779.526232, 1739527262.8478, -12.7512, -0.001037, 0.00000417),
    (1072260.703692, 1602961601.2090, -6.3706, 0.006593, -0.00003169),
    (450160.398036, -6962890.5431, 7.4722, 0.007702, -0.00005939),
)
"""l, l', F, D, Omega: arcseconds, polynomials in Julian centuries. Source: TN36, 5.43."""

MEAN_SIDEREAL_TIME: Final = (67310.54841, 8640184.812866 + 3155760000.0, 0.093104, -6.2e-6)
"""Seconds of time, a polynomial in Julian centuries of UT1. Source: IAU 1982 expression, to
which the tables of diurnal and semidiurnal terms of TN36 are referred."""


def centuries(jd1: ArrayLike, jd2: ArrayLike) -> Floats:
    """Julian centuries since J2000.0 of a two-part Julian date, in its own scale."""
    t: Floats = ((np.asarray(jd1, float) - J2000) + np.asarray(jd2, float)) / JULIAN_CENTURY
    return t


def fundamental_arguments(t: ArrayLike) -> Floats:
    """Fundamental arguments of nutation: l, l', F, D, Omega.

    Parameters
    ----------
    t : array_like, shape (...)
        Julian centuries of TDB (TT will do) since J2000.0.

    Returns
    -------
    ndarray, shape (5, ...)
        Radians, within one turn, with the sign of the unreduced value: mean anomaly of the
        Moon, mean anomaly of the Sun, mean argument of latitude of the Moon, mean elongation
        of the Moon from the Sun, mean longitude of the Moon's ascending node.

    Notes
    -----
    Source: IERS Conventions (2010), TN36, equation 5.43 (IERS 2003 arguments).

    Examples
    --------
    >>> float(fundamental_arguments(0.0)[4].round(6))
    2.182439
    """
    t = np.asarray(t, dtype=float)
    arcseconds = np.stack([_polynomial(series, t) for series in FUNDAMENTAL])
    radians: Floats = np.fmod(arcseconds, ARCSECONDS_IN_TURN) * ARCSECOND
    return radians


def mean_sidereal_angle(ut1_1: ArrayLike, ut1_2: ArrayLike) -> Floats:
    """Greenwich mean sidereal time as an angle in radians, within one turn; shape (...).

    The expression of 1982, which is the one the tidal terms in Earth rotation were fitted
    with; for the rotation of the Earth itself see `lighttime.earth.rotation`.
    """
    seconds = np.fmod(_polynomial(MEAN_SIDEREAL_TIME, centuries(ut1_1, ut1_2)), DAY)
    angle: Floats = seconds * (TURN / DAY)
    return angle


def doodson_arguments(fundamental: ArrayLike, sidereal_angle: ArrayLike) -> Floats:
    """Doodson's arguments: tau, s, h, p, N', p_s.

    Parameters
    ----------
    fundamental : array_like, shape (5, ...)
        Fundamental arguments, rad.
    sidereal_angle : array_like, shape (...)
        Greenwich mean sidereal time, rad.

    Returns
    -------
    ndarray, shape (6, ...)
        Radians: mean lunar time, mean longitudes of the Moon, of the Sun, of the lunar
        perigee, of the ascending node with its sign changed, and of the solar perigee.

    Notes
    -----
    Source: IERS Conventions (2010), TN36, 7.1.1 (relations under equation 7.12).
    """
    l, l_sun, f, d, omega = np.asarray(fundamental, dtype=float)  # noqa: E741
    s = f + omega
    theta = np.asarray(sidereal_angle, dtype=float)
    arguments: Floats = np.stack(
        np.broadcast_arrays(theta + 0.5 * TURN - s, s, s - d, s - l, -omega, s - d - l_sun)
    )
    return arguments


def _polynomial(coefficients: tuple[float, ...], t: Any) -> Any:
    value = coefficients[-1]
    for coefficient in reversed(coefficients[:-1]):
        value = coefficient + t * value
    return value
