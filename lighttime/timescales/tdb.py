"""TDB and TT: a clock on the Earth, its rate changed by orbit, potential and daily motion."""

from __future__ import annotations

from typing import Any

import erfa
import numpy as np
from numpy.typing import ArrayLike

from lighttime.errors import InputError
from lighttime.timescales.inputs import Place, Rotation, TwoPart, date_pair
from lighttime.timescales.twopart import Array, Pair, add, divide, pair, plain, subtract
from lighttime.timescales.uniform import DAY_PAIR
from lighttime.timescales.ut1 import ut1_day_fraction

KILOMETRE = 1.0e3


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
        constant in a day; its differences over seconds are good to 1e-16 s.

    Notes
    -----
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
    return float(seconds) if np.ndim(seconds) == 0 else seconds


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

    Notes
    -----
    Source: `tdb_minus_tt`. Its slope is below 6e-10 and its size below 2 ms, so that the second
    of two steps towards its argument, TDB, leaves 1e-21 s.
    """
    tt = date_pair("tt", tt1, tt2)
    xyz_m = _xyz_m(place)
    ut1 = 0.0 if xyz_m is None else ut1_day_fraction(tt, earth_orientation)
    tdb = tt
    for _ in range(2):
        tdb = add(tt, _days(tdb_minus_tt(*tdb, ut1, xyz_m)))
    return plain(tdb)


def tdb_to_tt(
    tdb1: ArrayLike,
    tdb2: ArrayLike,
    place: Place | None = None,
    earth_orientation: Rotation | None = None,
) -> TwoPart:
    """TT of a clock at a place on the Earth (at the geocentre when none is given) from TDB.

    The inverse of `tt_to_tdb`, with the same arguments. The argument of the series is at hand;
    with a place, UT1 is found from TT, to which TDB itself is the first approximation: its
    2 milliseconds move the daily term by 3e-13 s, those by nothing.
    """
    tdb = date_pair("tdb", tdb1, tdb2)
    xyz_m = _xyz_m(place)
    if xyz_m is None:
        return plain(subtract(tdb, _days(tdb_minus_tt(*tdb))))
    tt = tdb
    for _ in range(2):
        ut1 = ut1_day_fraction(tt, earth_orientation)
        tt = subtract(tdb, _days(tdb_minus_tt(*tdb, ut1, xyz_m)))
    return plain(tt)
