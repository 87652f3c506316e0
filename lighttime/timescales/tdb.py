"""TDB and TT: a clock on the Earth, its rate changed by orbit, potential and daily motion."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import erfa
import numpy as np
from numpy.typing import ArrayLike

from lighttime.constants import DEGREE, J2000, JULIAN_CENTURY, TURN
from lighttime.errors import InputError
from lighttime.timescales.inputs import Place, Rotation, TwoPart, date_pair
from lighttime.timescales.relation import Choice, chosen
from lighttime.timescales.twopart import (
    Array,
    Pair,
    add,
    divide,
    pair,
    plain,
    subtract,
    two_product,
    two_sum,
)
from lighttime.timescales.uniform import DAY_PAIR
from lighttime.timescales.ut1 import ut1_day_fraction

KILOMETRE = 1.0e3


def topocentric(tdb1: ArrayLike, tdb2: ArrayLike, ut1_fraction: ArrayLike, xyz_m: ArrayLike) -> Any:
    """What the place of a clock on the Earth adds to TDB - TT at the geocentre.

    Parameters
    ----------
    tdb1, tdb2, ut1_fraction, xyz_m
        As for `tdb_minus_tt`.

    Returns
    -------
    float or array
        Seconds, up to 2.1e-6: the place's velocity times the Earth's, over c^2, with its largest
        perturbations.

    Notes
    -----
    Source: Moyer 1981, Celest. Mech. 23, 33, as in IAU SOFA/ERFA, routine dtdb, whose sum with
    these terms less that without them this is, to 1e-21 s.
    """
    x, y, z = np.asarray(xyz_m, dtype=np.float64)
    u, v = np.hypot(x, y) / KILOMETRE, z / KILOMETRE
    millennia = ((np.asarray(tdb1, dtype=np.float64) - J2000) + np.asarray(tdb2)) / (
        10.0 * JULIAN_CENTURY
    )
    solar = TURN * np.asarray(ut1_fraction) + np.arctan2(y, x)  # local mean solar time
    sun, anomaly, elongation, jupiter, saturn = (
        DEGREE * np.fmod(at_j2000 + rate / 3600.0 * millennia, 360.0)
        for at_j2000, rate in _ARGUMENTS
    )
    around_the_axis = (
        3.17679 * np.sin(solar)
        - 0.13677 * np.sin(solar + 2.0 * sun)
        + 0.05312 * np.sin(solar - anomaly)
        - 0.00229 * np.sin(solar + 2.0 * sun + anomaly)
        + 0.00133 * (np.sin(solar + sun - jupiter) + np.sin(solar - elongation))
        + 0.00100 * np.sin(solar - 2.0 * anomaly)
        + 0.00029 * np.sin(solar + sun - saturn)
    )
    along_the_axis = -1.31840 * np.cos(sun) - 0.02200 * np.cos(sun + anomaly)
    return 1.0e-10 * (u * around_the_axis + v * along_the_axis)


_ARGUMENTS = (
    (280.46645683, 1296027711.03429),
    (357.52910918, 1295965810.481),
    (297.85019547, 16029616012.090),
    (34.35151874, 109306899.89453),
    (50.07744430, 44046398.47038),
)
"""Mean longitude of the Sun, its anomaly, elongation of the Moon, longitudes of Jupiter and Saturn:
degrees at J2000.0, and arcseconds per Julian millennium. Source: Simon et al. 1994."""


def tdb_minus_tt(
    tdb1: ArrayLike,
    tdb2: ArrayLike,
    ut1_fraction: ArrayLike = 0.0,
    xyz_m: ArrayLike | None = None,
) -> Any:
    """TDB - TT at a place on the Earth, or at the geocentre.

    Parameters
    ----------
    tdb1, tdb2 : float or array
        Julian date, TDB, in two parts.
    ut1_fraction : float or array, optional
        UT1 as a fraction of the day since midnight. Has no effect at the geocentre.
    xyz_m : array of shape (3,) or (3, ...), optional
        ITRF position of the clock, metres; the geocentre when not given, which leaves out up to
        2 microseconds of daily variation at a place on the surface, and 0.8 of annual.

    Returns
    -------
    float or array
        Seconds. Against a numerical integration the series is off by some nanoseconds, nearly
        constant in a day; its differences over seconds are good to 1e-17 s.

    Notes
    -----
    The annual term is 70 times any other, and its argument some hundred radians: what float64
    rounds off that argument, up to 1e-16 s of the term, is given back.

    Source: Fairhead & Bretagnon 1990, Astron. Astrophys. 229, 240; terms of the place: Moyer
    1981, Celest. Mech. 23, 33; both as in IAU SOFA/ERFA, routine dtdb.

    Examples
    --------
    >>> round(tdb_minus_tt(2448939.5, 0.123, 0.76543), 9)
    -0.001279984
    """
    date_pair("tdb", tdb1, tdb2)
    if xyz_m is None:
        longitude, u_km, v_km = 0.0, 0.0, 0.0
    else:
        xyz = np.asarray(xyz_m, dtype=np.float64)
        if xyz.ndim == 0 or xyz.shape[0] != 3 or not np.all(np.isfinite(xyz)):
            raise InputError("xyz_m", xyz_m, "three finite coordinates, metres, shape (3, ...)")
        x, y, z = xyz
        longitude, u_km, v_km = np.arctan2(y, x), np.hypot(x, y) / KILOMETRE, z / KILOMETRE
    seconds = erfa.dtdb(tdb1, tdb2, ut1_fraction, longitude, u_km, v_km)
    seconds = seconds + _rounded_off(np.asarray(tdb1), np.asarray(tdb2))
    return float(seconds) if np.ndim(seconds) == 0 else seconds


_ANNUAL = (1656.674564e-6, 6283.075849991, 6.240054195)
"""Amplitude (s), rate (rad per Julian millennium) and phase (rad) of the largest term.

Source: Fairhead & Bretagnon 1990, table 1."""

_MILLENNIUM = 10.0 * JULIAN_CENTURY


def _rounded_off(tdb1: Array, tdb2: Array) -> Array:
    """What the annual term of the series lost by the rounding of time and argument, s."""
    amplitude, rate, phase = _ANNUAL
    days, lost_days = two_sum(tdb1 - J2000, tdb2)
    millennia = days / _MILLENNIUM
    product, lost_product = two_product(millennia, np.asarray(_MILLENNIUM))
    lost_time = ((days - product) - lost_product + lost_days) / _MILLENNIUM
    turned, lost_turned = two_product(millennia, np.asarray(rate))
    argument, lost_argument = two_sum(turned, np.asarray(phase))
    lost = lost_turned + lost_argument + rate * lost_time
    return amplitude * np.cos(argument) * lost


def _difference(tdb: Choice) -> Callable[..., Any]:
    relation = chosen(tdb)
    return tdb_minus_tt if relation is None else relation.tdb_minus_tt


def _days(seconds: Any) -> Pair:
    return divide(pair(seconds), DAY_PAIR)


def _xyz_m(place: Place | None) -> Array | None:
    if place is None:
        return None
    if not hasattr(place, "xyz_m"):
        raise InputError("place", place, "an object with xyz_m, its ITRF position in metres")
    return np.asarray(place.xyz_m, dtype=np.float64)


def tt_to_tdb(
    tt1: ArrayLike,
    tt2: ArrayLike,
    place: Place | None = None,
    earth_orientation: Rotation | None = None,
    tdb: Choice = None,
) -> TwoPart:
    """TDB from TT of a clock at a place on the Earth (at the geocentre when none is given).

    Parameters
    ----------
    tt1, tt2 : float or array
        Julian date, TT, in two parts.
    place : object with ``xyz_m``, optional
        Where the clock is. Without one the daily term of up to 2 microseconds is left out.
    earth_orientation : object with ``at``, optional
        Gives UT1, needed with a place; the bundled series when not given.
    tdb : {"series", "integrated"} or TimeEphemeris, optional
        What TDB - TT is from: the series of `tdb_minus_tt` when not given.

    Notes
    -----
    Source: `tdb_minus_tt`. Its slope is below 6e-10 and its size below 2 ms, so that the second
    of two steps towards its argument, TDB, leaves 1e-21 s.
    """
    tt = date_pair("tt", tt1, tt2)
    xyz_m = _xyz_m(place)
    ut1 = 0.0 if xyz_m is None else ut1_day_fraction(tt, earth_orientation)
    difference = _difference(tdb)
    found = tt
    for _ in range(2):
        found = add(tt, _days(difference(*found, ut1, xyz_m)))
    return plain(found)


def tdb_to_tt(
    tdb1: ArrayLike,
    tdb2: ArrayLike,
    place: Place | None = None,
    earth_orientation: Rotation | None = None,
    tdb: Choice = None,
) -> TwoPart:
    """TT of a clock at a place on the Earth (at the geocentre when none is given) from TDB.

    The inverse of `tt_to_tdb`, with the same arguments. The argument of the series is at hand;
    with a place, UT1 is found from TT, to which TDB itself is the first approximation: its
    2 milliseconds move the daily term by 3e-13 s, those by nothing.
    """
    date = date_pair("tdb", tdb1, tdb2)
    xyz_m = _xyz_m(place)
    difference = _difference(tdb)
    if xyz_m is None:
        return plain(subtract(date, _days(difference(*date, 0.0, None))))
    tt = date
    for _ in range(2):
        ut1 = ut1_day_fraction(tt, earth_orientation)
        tt = subtract(date, _days(difference(*date, ut1, xyz_m)))
    return plain(tt)
