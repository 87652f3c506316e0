"""TDB - TT: the relativistic rate of a clock on the Earth, by the series for the Earth's orbit."""

from __future__ import annotations

from typing import Any

import erfa
import numpy as np
from numpy.typing import ArrayLike

from lighttime.errors import InputError

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
        2 microseconds of daily variation at a place on the surface.

    Returns
    -------
    float or array
        Seconds. The series holds its 787 terms to some nanoseconds against a numerical
        integration; its differences over seconds are good to 1e-16 s.

    Notes
    -----
    Source: Fairhead & Bretagnon 1990, Astron. Astrophys. 229, 240; terms of the place: Moyer
    1981, Celest. Mech. 23, 33; both as in IAU SOFA/ERFA, routine dtdb.

    Examples
    --------
    >>> round(tdb_minus_tt(2448939.5, 0.123, 0.76543), 9)
    -0.001279984
    """
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
