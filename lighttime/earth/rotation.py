"""From the terrestrial frame (ITRF) to the celestial frame of the Earth (GCRS).

    r_GCRS = Q(X, Y, s) R3(-ERA) W(x_p, y_p, s') r_ITRF

with precession and nutation of IAU 2006/2000A, based on the celestial intermediate origin.
Matrices are arrays of shape (3, 3, ...), vectors of shape (3, ...).

Source: IERS Conventions (2010), TN36, chapter 5; IAU 2000 B1.7, B1.8, IAU 2006 B1.
"""

from __future__ import annotations

from fractions import Fraction
from typing import Any, Final

import erfa
import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.constants import DAY, J2000, MICROARCSECOND
from lighttime.earth.arguments import centuries
from lighttime.timescales.twopart import add, exact, multiply, pair, subtract, whole_and_fraction

Floats = NDArray[np.float64]

ERA_AT_J2000: Final = Fraction("0.7790572732640")
"""Earth rotation angle at J2000.0 UT1, turns. Source: IAU 2000 B1.8."""

TURNS_PER_UT1_DAY: Final = Fraction("1.00273781191135448")
"""Source: IAU 2000 B1.8."""

TWO_PI: Final = Fraction("6.28318530717958647692528676655900576839")

S_PRIME_RATE: Final = -47.0 * MICROARCSECOND
"""Drift of the terrestrial intermediate origin, rad per Julian century. Source: TN36, 5.13."""


def earth_rotation_angle(ut1_1: ArrayLike, ut1_2: ArrayLike) -> Any:
    """Earth rotation angle.

    Parameters
    ----------
    ut1_1, ut1_2 : array_like, shape (...)
        Two-part Julian date, UT1.

    Returns
    -------
    float or ndarray, shape (...)
        Radians, 0 to 2 pi. Turns are counted in pairs of float64 and whole ones dropped before
        anything is rounded: the error is that of the last rounding, below 4.5e-16 rad.

    Notes
    -----
    Source: IAU 2000 B1.8; IERS Conventions (2010), TN36, equation 5.15.

    Examples
    --------
    >>> round(earth_rotation_angle(2400000.5, 54388.0), 15)  # ERFA test value of era00
    0.402283724002816
    """
    days = subtract(pair(ut1_1, ut1_2), exact(J2000))
    turns = add(exact(ERA_AT_J2000), multiply(exact(TURNS_PER_UT1_DAY), days))
    _, fraction = whole_and_fraction(turns)
    angle, _ = multiply(fraction, exact(TWO_PI))
    return float(angle) if np.ndim(angle) == 0 else angle


def celestial_pole(tt1: ArrayLike, tt2: ArrayLike) -> tuple[Any, Any, Any]:
    """Celestial intermediate pole X, Y and the locator s of its origin, IAU 2006/2000A.

    Parameters
    ----------
    tt1, tt2 : array_like, shape (...)
        Two-part Julian date, TT.

    Returns
    -------
    X, Y, s : shape (...)
        Radians; the corrections dX, dY of a series are for the caller to add.

    Notes
    -----
    Source: IAU 2006 B1; Wallace & Capitaine 2006, Astron. Astrophys. 459, 981; as in ERFA.
    """
    X, Y, s = erfa.xys06a(tt1, tt2)
    return X, Y, s


def celestial_pole_rates(tt1: ArrayLike, tt2: ArrayLike) -> tuple[Any, Any]:
    """dX/dt and dY/dt of the celestial intermediate pole, rad/s.

    Central differences over 0.2 days of the abridged model IAU 2000B; against the full one the
    error is below 4e-14 rad/s, which is 0.3 micrometres per second at the surface.
    """
    step = 0.1
    X2, Y2, _ = erfa.xys00b(tt1, np.asarray(tt2, dtype=float) + step)
    X1, Y1, _ = erfa.xys00b(tt1, np.asarray(tt2, dtype=float) - step)
    interval = 2.0 * step * DAY
    return (X2 - X1) / interval, (Y2 - Y1) / interval


def terrestrial_origin(tt1: ArrayLike, tt2: ArrayLike) -> Any:
    """Locator s' of the terrestrial intermediate origin, rad. Source: TN36, equation 5.13."""
    return S_PRIME_RATE * centuries(tt1, tt2)


def terrestrial_to_celestial(
    X: ArrayLike,
    Y: ArrayLike,
    s: ArrayLike,
    era: ArrayLike,
    xp: ArrayLike,
    yp: ArrayLike,
    tt1: ArrayLike,
    tt2: ArrayLike,
) -> Floats:
    """The matrix from the ITRF to the GCRS.

    Parameters
    ----------
    X, Y, s : array_like, shape (...)
        Celestial intermediate pole (corrected by dX, dY) and its origin's locator, rad.
    era : array_like, shape (...)
        Earth rotation angle, rad.
    xp, yp : array_like, shape (...)
        Pole in the ITRF, rad.
    tt1, tt2 : array_like, shape (...)
        Two-part Julian date, TT, for s'.

    Returns
    -------
    ndarray, shape (3, 3, ...)
        Q R3(-ERA) W. The three turns about the intermediate pole are one: R3(s), R3(-ERA) and
        R3(-s').

    Notes
    -----
    Source: IERS Conventions (2010), TN36, equations 5.1, 5.3, 5.5, 5.10.
    """
    turn = np.asarray(era, dtype=float) - np.asarray(s) + terrestrial_origin(tt1, tt2)
    return product(product(celestial_tilt(X, Y), turned(turn)), polar_motion(xp, yp))


def celestial_tilt(X: ArrayLike, Y: ArrayLike) -> Floats:
    """Q(X, Y, s = 0): from axes at the intermediate pole to the GCRS. Source: TN36, 5.10."""
    X, Y = np.broadcast_arrays(np.asarray(X, dtype=float), np.asarray(Y, dtype=float))
    Z = np.sqrt(1.0 - (X * X + Y * Y))
    a = 1.0 / (1.0 + Z)
    return _matrix(
        [1.0 - a * X * X, -a * X * Y, X],
        [-a * X * Y, 1.0 - a * Y * Y, Y],
        [-X, -Y, Z],
    )


def turned(angle: ArrayLike) -> Floats:
    """R3(-angle): from axes turned forward by an angle about z to those not turned."""
    c, s = np.cos(angle), np.sin(angle)
    zero, one = np.zeros_like(c), np.ones_like(c)
    return _matrix([c, -s, zero], [s, c, zero], [zero, zero, one])


def polar_motion(xp: ArrayLike, yp: ArrayLike) -> Floats:
    """W without s': R2(x_p) R1(y_p), from the ITRF to axes at the intermediate pole.

    Source: TN36, equation 5.3.
    """
    xp, yp = np.broadcast_arrays(np.asarray(xp, dtype=float), np.asarray(yp, dtype=float))
    cx, sx, cy, sy = np.cos(xp), np.sin(xp), np.cos(yp), np.sin(yp)
    return _matrix(
        [cx, sx * sy, -sx * cy],
        [np.zeros_like(cx), cy, sy],
        [sx, -cx * sy, cx * cy],
    )


def angular_velocity(
    X: ArrayLike, Y: ArrayLike, X_rate: ArrayLike, Y_rate: ArrayLike, era_rate: ArrayLike
) -> Floats:
    """Angular velocity of the Earth in the GCRS, without that of polar motion.

    The intermediate origin is non-rotating: about the pole p = (X, Y, Z) the Earth turns by
    ERA and nothing else, and the pole itself moves by p x dp/dt. The velocity of a point fixed
    to the Earth is the vector product of the result and r_GCRS. What polar motion adds is
    `polar_motion_velocity`, rotated to the GCRS: up to 2e-6 m/s at the surface.

    Parameters
    ----------
    X, Y : array_like, shape (...)
        Celestial intermediate pole, rad.
    X_rate, Y_rate : array_like, shape (...)
        Its rates, rad/s.
    era_rate : array_like, shape (...)
        `EARTH_ROTATION_RATE` times dUT1/dt, rad/s.

    Returns
    -------
    ndarray, shape (3, ...)
        rad/s.

    Notes
    -----
    Source: the definition of the non-rotating origin, IAU 2000 B1.8; Guinot 1979.
    """
    X, Y, X_rate, Y_rate, era_rate = np.broadcast_arrays(
        *(np.asarray(a, dtype=float) for a in (X, Y, X_rate, Y_rate, era_rate))
    )
    Z = np.sqrt(1.0 - (X * X + Y * Y))
    Z_rate = -(X * X_rate + Y * Y_rate) / Z
    return np.stack(
        [
            era_rate * X + Y * Z_rate - Z * Y_rate,
            era_rate * Y + Z * X_rate - X * Z_rate,
            era_rate * Z + X * Y_rate - Y * X_rate,
        ]
    )


def polar_motion_velocity(xp_rate: ArrayLike, yp_rate: ArrayLike) -> Floats:
    """Angular velocity due to the motion of the pole, rad/s in the ITRF, shape (3, ...).

    To first order in the pole's coordinates: W turns about -y by x_p and about -x by y_p.
    """
    xp_rate, yp_rate = np.broadcast_arrays(np.asarray(xp_rate, float), np.asarray(yp_rate, float))
    return np.stack([-yp_rate, -xp_rate, np.zeros_like(xp_rate)])


def rotate(matrix: Floats, vector: ArrayLike) -> Floats:
    """matrix . vector, shapes (3, 3, ...) and (3, ...) with broadcastable rest."""
    x, y, z = np.asarray(vector, dtype=float)
    return np.stack([row[0] * x + row[1] * y + row[2] * z for row in matrix])


def product(left: Floats, right: Floats) -> Floats:
    """The matrix product of two arrays of shape (3, 3, ...)."""
    result: Floats = np.einsum("ij...,jk...->ik...", left, right)
    return result


def transpose(matrix: Floats) -> Floats:
    """The inverse of a rotation, shape (3, 3, ...)."""
    return matrix.swapaxes(0, 1)


def _matrix(*rows: list[Any]) -> Floats:
    """Rows of elements of one shape, as an array of shape (3, 3, ...)."""
    return np.array(rows, dtype=np.float64)
