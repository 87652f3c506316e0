"""What varies slowly at a station: the Earth's orientation, TDB - TT, displacements, potential.

All are smooth functions of TT between one midnight UTC and the next, the days of the series of
Earth orientation. They are found here for any instants; `tables` keeps them as Chebyshev series
for the days in which many epochs lie.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from lighttime.constants import ARCSECOND, DAY
from lighttime.earth import rotation, subdaily
from lighttime.earth.days import UtcDays
from lighttime.earth.displacement import displacements, modelled
from lighttime.earth.series import EarthOrientation
from lighttime.earth.station import Station
from lighttime.ephemeris.bodies import Ephemeris
from lighttime.ephemeris.piecewise import PiecewiseSeries
from lighttime.ephemeris.time_rate import place_term
from lighttime.timescales.scales import tt_to_tai
from lighttime.timescales.tdb import topocentric
from lighttime.vectors import Array, column, norm

SCALARS = (
    "x", "y", "s", "tdb_minus_tt", "ut1_minus_tai", "xp", "yp",
    "subdaily_xp", "subdaily_yp", "subdaily_ut1", "potential",
)  # fmt: skip
"""Rows of a state before the displacements: radians, seconds, m^2/s^2."""


@dataclass(frozen=True, eq=False)
class StationState:
    """Slowly varying quantities at some instants.

    Parameters
    ----------
    names : tuple of str
        The displacements that are in it.
    rows : ndarray, shape (len(SCALARS) + 3 len(names), n)
        `SCALARS`, then x, y, z of each displacement in the ITRF (m). Pole and UT1 contain
        their sub-daily terms, x and y the corrections dX, dY.
    """

    names: tuple[str, ...]
    rows: Array

    def __getitem__(self, name: str) -> Array:
        row: Array = self.rows[SCALARS.index(name)]
        return row

    @cached_property
    def displacement(self) -> dict[str, Array]:
        """Displacements by name, ITRF, each (3, n)."""
        first = len(SCALARS)
        return {n: self.rows[first + 3 * k : first + 3 * k + 3] for k, n in enumerate(self.names)}


TERMS = 22
"""Of the series of a day. Twice-daily tides of 0.3 m leave out some nanometres (measured)."""

MOST_DAYS = 4000
"""Days that are kept of one station: some 20 MB."""


@dataclass(frozen=True)
class Plan:
    """Which series a query is to use: spans of `celestial`, and days."""

    spans: frozenset[int]
    days: frozenset[int]


@dataclass(frozen=True, eq=False)
class StateModel:
    """The choices that a station's state depends on.

    Parameters
    ----------
    station : Station
    ephemeris : Ephemeris
    earth_orientation : EarthOrientation
    omit : frozenset of str
    celestial : PiecewiseSeries
        Of `celestial.celestial`.
    exact_place : bool
        Whether the station's term of TDB - TT is from the ephemeris too, not from the series.
    """

    station: Station
    ephemeris: Ephemeris
    earth_orientation: EarthOrientation
    omit: frozenset[str]
    celestial: PiecewiseSeries
    exact_place: bool = False

    @cached_property
    def names(self) -> tuple[str, ...]:
        """The displacements that are modelled."""
        return modelled(self.station, self.omit)

    @cached_property
    def daily(self) -> PiecewiseSeries:
        """The state as series of a day each."""

        def rows(tt1: Array, tt2: Array) -> Array:
            return self.evaluated(tt1, tt2, self.celestial.worth(tt1, tt2))

        return PiecewiseSeries(rows, UtcDays(), TERMS, MOST_DAYS)

    def at(self, tt1: Array, tt2: Array, plan: Plan) -> StationState:
        """The state at instants (n,) of TT."""
        if not plan.days:
            return StationState(self.names, self.evaluated(tt1, tt2, plan.spans))
        return StationState(self.names, self.daily.at(tt1, tt2, plan.days))

    def plan(self, tt1: Array, tt2: Array) -> Plan:
        """Which series are worth building for a query, whose epochs are asked twice each."""
        return Plan(self.celestial.worth(tt1, tt2, 2), self.daily.worth(tt1, tt2, 2))

    def evaluated(self, tt1: Array, tt2: Array, spans: frozenset[int]) -> Array:
        """The rows of a state, everything evaluated but what `celestial` keeps."""
        tai1, tai2 = tt_to_tai(tt1, tt2)
        pole = self.earth_orientation.at(tai1, tai2)
        ut1_2 = tai2 + pole.ut1_tai_s / DAY
        fraction = day_fraction(tai1, ut1_2)
        x, y, s, tdb_tt, potential = self.celestial.at(tt1, tt2, spans)
        if "subdaily_rotation" in self.omit:
            dx = dy = dut1 = np.zeros_like(tt2)
        else:
            dx, dy, dut1 = subdaily.subdaily(tai1, ut1_2, tt1, tt2)
        x, y = x + pole.dx_rad, y + pole.dy_rad
        xp, yp, ut1_tai = pole.xp_rad + dx, pole.yp_rad + dy, pole.ut1_tai_s + dut1
        era = rotation.earth_rotation_angle(tai1, tai2 + ut1_tai / DAY)
        to_gcrs = rotation.terrestrial_to_celestial(x, y, s, era, xp, yp, tt1, tt2)
        to_itrf = rotation.transpose(to_gcrs)
        if self.exact_place:
            gcrs = rotation.rotate(to_gcrs, column(self.station.xyz_m, tt2))
            velocity = self.ephemeris.earth(tt1, tt2 + tdb_tt / DAY)[1]
            tdb_tt = tdb_tt + place_term(gcrs, velocity, potential)
        else:
            tdb_tt = tdb_tt + topocentric(tt1, tt2 + tdb_tt / DAY, fraction, self.station.xyz_m)
        sun, moon = self._sun_and_moon(tt1, tt2 + tdb_tt / DAY)
        potential = potential + self.ephemeris.gm("moon") / norm(moon)
        moved = displacements(
            self.station,
            sun_itrf_m=rotation.rotate(to_itrf, sun),
            moon_itrf_m=rotation.rotate(to_itrf, moon),
            tt1=tt1,
            tt2=tt2,
            ut1_fraction=fraction,
            xp_arcsec=pole.xp_rad / ARCSECOND,
            yp_arcsec=pole.yp_rad / ARCSECOND,
            omit=self.omit,
        )
        scalars = (x, y, s, tdb_tt, ut1_tai, xp, yp, dx, dy, dut1, potential)
        return np.concatenate([np.stack(scalars), *(moved[name] for name in self.names)])

    def _sun_and_moon(self, tdb1: Array, tdb2: Array) -> tuple[Array, Array]:
        """Geocentric Sun and Moon."""
        ephemeris = self.ephemeris
        moon, _ = ephemeris.moon_geocentric(tdb1, tdb2)
        return ephemeris.barycentric_body("sun", tdb1, tdb2)[0] - ephemeris.earth(tdb1, tdb2)[
            0
        ], moon


def day_fraction(jd1: Array, jd2: Array) -> Array:
    """Fraction of the day, from midnight, of a Julian date in two parts."""
    half = (jd1 - np.floor(jd1)) + 0.5
    fraction: Array = np.mod(half + jd2, 1.0)
    return fraction
