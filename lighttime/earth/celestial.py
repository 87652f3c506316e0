"""Precession-nutation and the geocentric TDB - TT: series of thousands of terms, tabulated."""

from __future__ import annotations

import numpy as np

from lighttime.constants import DAY, DEGREE, J2000, MJD_ZERO
from lighttime.earth import rotation
from lighttime.ephemeris.bodies import PLANETS, Ephemeris
from lighttime.ephemeris.piecewise import EqualSpans, PiecewiseSeries
from lighttime.timescales.inputs import Relation
from lighttime.timescales.tdb import tdb_minus_tt
from lighttime.vectors import Array, norm

SPAN_DAYS = 128.0
TERMS = 134
"""The shortest nutations have periods of 4 days: 128 days hold 32 of them. With 134 terms, one a
day and few more, the error is 7e-16 rad in X and Y (measured), of which the last coefficients
show 2e-15. Shorter spans need more samples a day, longer ones more terms than they save."""

MOST_SPANS = 512
"""180 years."""


def celestial(
    ephemeris: Ephemeris, tt1: Array, tt2: Array, relation: Relation | None = None
) -> Array:
    """What varies over days: precession-nutation, TDB - TT, potential.

    Parameters
    ----------
    ephemeris : Ephemeris
        For the potential.
    tt1, tt2 : ndarray, shape (n,)
        TT in two parts.
    relation : TimeEphemeris, optional
        What TDB - TT is from; the series when not given.

    Returns
    -------
    ndarray, shape (5, n)
        X, Y, s of IAU 2006/2000A (rad), TDB - TT at the geocentre (s), potential of the Sun and
        the planets at the geocentre (m^2/s^2).
    """
    x, y, s = rotation.celestial_pole(tt1, tt2)
    tdb2 = tt2 + _rough_tdb_minus_tt(tt1, tt2) / DAY
    potential = _potential(ephemeris, tt1, tdb2)
    difference = tdb_minus_tt if relation is None else relation.tdb_minus_tt
    return np.stack([x, y, s, difference(tt1, tdb2), potential])


def _potential(ephemeris: Ephemeris, tdb1: Array, tdb2: Array) -> Array:
    earth, _ = ephemeris.earth(tdb1, tdb2)
    total = np.zeros_like(tdb2)
    for body in ("sun", *(p for p in PLANETS if p in ephemeris.barycentric)):
        position, _ = ephemeris.barycentric_body(body, tdb1, tdb2)
        total += ephemeris.gm(body) / norm(position - earth)
    return total


def _rough_tdb_minus_tt(tt1: Array, tt2: Array) -> Array:
    """TDB - TT to 50 microseconds, s: as an argument of the series it need be no better.

    The series changes by 3e-10 s a second at most, so 2e-14 s of it are left open, which are the
    same for all events of a round trip.
    """
    anomaly = DEGREE * (357.53 + 0.98560028 * ((tt1 - J2000) + tt2))
    rough: Array = 0.001658 * np.sin(anomaly) + 0.000014 * np.sin(2.0 * anomaly)
    return rough


def celestial_series(ephemeris: Ephemeris, relation: Relation | None = None) -> PiecewiseSeries:
    """`celestial`, to be asked often."""

    def function(tt1: Array, tt2: Array) -> Array:
        return celestial(ephemeris, tt1, tt2, relation)

    return PiecewiseSeries(function, EqualSpans(MJD_ZERO, SPAN_DAYS), TERMS, MOST_SPANS)
