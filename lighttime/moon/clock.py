"""A clock at rest on the Moon: its proper time, TCL, and the clocks of the Earth.

proper time --potential and rotation of the Moon--> TCL at the place
            --its velocity times the Moon's-------> TCL at the Moon's centre --> TCB --> TT
"""

from __future__ import annotations

from typing import Any, Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.constants import DAY, L_B, L_G, SCALES_ORIGIN, SPEED_OF_LIGHT, TDB_0
from lighttime.ephemeris.bodies import Ephemeris
from lighttime.ephemeris.time_integral import TimeEphemeris
from lighttime.ephemeris.time_rate import place_term
from lighttime.inputs import triple
from lighttime.moon.libration import principal_axes
from lighttime.timescales.tcl import TCL_RATE
from lighttime.vectors import dot, norm

Array = NDArray[np.float64]

c = SPEED_OF_LIGHT

ROTATION_RATE: Final = 2.6616995e-6
"""rad/s: one turn in a sidereal month of 27.321661 days. Source: the month, from memory."""

RATE_SIGMA: Final = 5e-15
"""One sigma of `slower_than_tcl`: masses below the surface that degree 2 does not see move the
level surface by some 300 m (order of magnitude, from memory); tides are 2e-16."""


def slower_than_tcl(xyz_m: ArrayLike, ephemeris: Ephemeris) -> float:
    """1 - d(proper time)/dTCL of a clock at rest on the Moon.

    Parameters
    ----------
    xyz_m : 3 floats
        Its place in the principal axes of the Moon, metres.
    ephemeris : Ephemeris
        For GM, J2 and C22 of the Moon and their radius.

    Returns
    -------
    float
        About 3.14e-11: 2.7 microseconds a day. See `RATE_SIGMA`.

    Notes
    -----
    ``(GM/r [1 + (a/r)^2 (J2 (1 - 3 sin^2 b)/2 + 3 C22 cos^2 b cos 2l)] + omega^2 rho^2/2)/c^2``,
    the tides of Earth and Sun left out.

    Source: Soffel et al. 2003, Astron. J. 126, 2687, for the Moon; GM/c^2 of higher order, 1e-21,
    left out.
    """
    x, y, z = triple("xyz_m", xyz_m)
    r2, rho2 = x * x + y * y + z * z, x * x + y * y
    constants = ephemeris.constants
    a = constants["file:AM"] * 1e3
    degree2 = 0.5 * constants["file:J2M"] * (1.0 - 3.0 * z * z / r2)
    degree2 += 3.0 * constants["file:C22M"] * (x * x - y * y) / r2
    potential = ephemeris.gm("moon") / np.sqrt(r2) * (1.0 + a * a / r2 * degree2)
    return float((potential + 0.5 * ROTATION_RATE**2 * rho2) / c**2)


def lunar_clock_minus_tt(
    time: TimeEphemeris, xyz_m: ArrayLike | None, tdb1: ArrayLike, tdb2: ArrayLike
) -> Any:
    """The reading of a clock at rest on the Moon minus TT at the geocentre, at one instant of TDB.

    Parameters
    ----------
    time : TimeEphemeris
    xyz_m : 3 floats or None
        The clock's place in the principal axes of the Moon; None for TCL at its centre.
    tdb1, tdb2 : float or array
        Julian date, TDB, in two parts.

    Returns
    -------
    float or array
        Seconds, for a clock that read as TCL there on 1977-01-01 0h TAI. What counts is how it
        changes: by 56.0 microseconds a day on the surface, and a microsecond to and fro.

    Notes
    -----
    TDB is the time in which the two readings are simultaneous. In TCG, which is what a signal
    exchanged with the Earth leads to, they differ by ``v.r/c^2`` of the Moon, up to 128
    microseconds to and fro in a month, and not in the mean rate.
    """
    since_origin = _tcb_since_origin(tdb1, tdb2)
    periodic = time.tcb_minus_tcl_periodic(tdb1, tdb2)
    tcl_minus_tt = time.tdb_minus_tt(tdb1, tdb2) - TDB_0 + (L_B - TCL_RATE) * since_origin
    tcl_minus_tt = tcl_minus_tt - periodic
    if xyz_m is None:
        return tcl_minus_tt
    xyz = np.array(triple("xyz_m", xyz_m))
    axes = principal_axes(time.ephemeris.libration(tdb1, tdb2)[0])
    r = np.einsum("ij...,j->i...", axes, xyz)
    velocity = time.ephemeris.barycentric_body("moon", tdb1, tdb2)[1]
    at_place = tcl_minus_tt - place_term(r, velocity)
    elapsed = (1.0 - TCL_RATE) * since_origin - periodic
    seconds = at_place - slower_than_tcl(xyz, time.ephemeris) * elapsed
    return float(seconds) if np.ndim(seconds) == 0 else seconds


def tcl_minus_tcg(time: TimeEphemeris, tdb1: ArrayLike, tdb2: ArrayLike) -> Any:
    """TCL - TCG of one event, at the centre of the Moon.

    Parameters
    ----------
    time : TimeEphemeris
    tdb1, tdb2 : float or array
        Julian date, TDB, in two parts.

    Returns
    -------
    float or array
        Seconds since both agreed with TCB at their centres, on 1977-01-01 0h TAI.

    Notes
    -----
    (TCB - TCG at the geocentre) + v.r/c^2 + (3 w + v^2/2) v.r/c^4 - (TCB - TCL): the Earth's
    velocity and the way from the Earth to the Moon carry TCG from the geocentre to the Moon.

    Source: IAU 2000 B1.5.
    """
    ephemeris = time.ephemeris
    moon = ephemeris.moon_geocentric(tdb1, tdb2)[0]
    earth, velocity = ephemeris.earth(tdb1, tdb2)
    sun = ephemeris.gm("sun") / norm(ephemeris.barycentric_body("sun", tdb1, tdb2)[0] - earth)
    tcl_minus_tt = lunar_clock_minus_tt(time, None, tdb1, tdb2)
    since = (1.0 - TCL_RATE) * _tcb_since_origin(tdb1, tdb2)
    tcg_minus_tt = L_G / (1.0 - L_G) * (since - tcl_minus_tt)  # of TT since the origin
    more = (3.0 * sun + 0.5 * dot(velocity, velocity)) / c**2 + L_B  # r as TCB has it
    to_moon = dot(velocity, moon) / c**2 * (1.0 + more)
    seconds = tcl_minus_tt - tcg_minus_tt + to_moon
    return float(seconds) if np.ndim(seconds) == 0 else seconds


def mean_rate_minus_tt(time: TimeEphemeris, xyz_m: ArrayLike | None) -> float:
    """Mean of d(proper time)/dTT - 1 of a clock at rest on the Moon.

    Parameters
    ----------
    time : TimeEphemeris
        The mean is that over all its span: in 10 years the Moon's ups and downs leave 4e-15, in
        300 years 1e-16.
    xyz_m : 3 floats or None
        The clock's place in the principal axes of the Moon; None for TCL itself.

    Returns
    -------
    float
        About 6.48e-10: 56.02 microseconds a day.
    """
    first, last = time.coverage
    gained = tcl_minus_tcg(time, last, 0.0) - tcl_minus_tcg(time, first, 0.0)
    lunar = 0.0 if xyz_m is None else slower_than_tcl(xyz_m, time.ephemeris)
    return float(L_G + gained / ((last - first) * DAY) - lunar)


def _tcb_since_origin(tdb1: ArrayLike, tdb2: ArrayLike) -> Any:
    """TCB seconds since 1977-01-01 0h TAI, to a microsecond: for products with small rates."""
    days = (np.asarray(tdb1) - SCALES_ORIGIN[0]) + (np.asarray(tdb2) - SCALES_ORIGIN[1])
    return (days * DAY - TDB_0) / (1.0 - L_B)
