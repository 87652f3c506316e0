"""What moves the station at one event, and what that does to the leg.

All of it is linear: the derivative of the leg by the position of the event, a row of three
numbers, is carried back through contraction, tide and rotation to the parameters.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from lighttime.constants import (
    ARCSECOND,
    EARTH_EQUATORIAL_RADIUS,
    J2000,
    JULIAN_YEAR,
    L_C,
    SPEED_OF_LIGHT,
)
from lighttime.earth import rotation, tides
from lighttime.earth.motion import StationEvent
from lighttime.earth.station import Station
from lighttime.partials.geodetic import pole_tide_slopes, turn_of_local_axes
from lighttime.partials.leg import LegSlopes
from lighttime.partials.tide import Tide, source
from lighttime.vectors import Array, column, cross, dot, norm

c = SPEED_OF_LIGHT


@dataclass(frozen=True, eq=False)
class StationEnd:
    """One end of a leg, a station.

    Parameters
    ----------
    station : Station
    event : StationEvent
    slopes : LegSlopes
        Of the leg that ends there.
    clock : int
        +1 for the transmission and -1 for the reception (TDB - TT is counted so in the range);
        0 if the clock is left out.
    omit : frozenset of str
    """

    station: Station
    event: StationEvent
    slopes: LegSlopes
    clock: int
    omit: frozenset[str]

    # -- geometry ------------------------------------------------------------------------------

    @cached_property
    def to_gcrs(self) -> Array:
        """The matrix from the ITRF to the GCRS, (3, 3, n)."""
        rung = self.event.ladder
        return rotation.terrestrial_to_celestial(
            rung["x_rad"], rung["y_rad"], rung["s_rad"], rung["era_rad"], rung["xp_rad"],
            rung["yp_rad"], rung["tt1"], rung["tt2"],
        )  # fmt: skip

    @property
    def distance(self) -> float:
        """Of the station from the geocentre, m."""
        return math.hypot(*self.station.xyz_m)

    @cached_property
    def nominal(self) -> Array:
        """The coordinates of the station turned to the GCRS, m."""
        return rotation.rotate(self.to_gcrs, column(self.station.xyz_m, self.event.seconds))

    @cached_property
    def tide(self) -> Tide | None:
        """The solid Earth tide of degree 2, along GCRS axes: all but 3 % of it."""
        if "solid_earth_tide" in self.omit:
            return None
        rung = self.event.ladder
        radius = EARTH_EQUATORIAL_RADIUS
        distance = self.distance
        p2 = 1.5 * (self.station.xyz_m[2] / distance) ** 2 - 0.5
        return Tide(
            self.nominal / distance,
            (
                source(tides.MOON_TO_EARTH_MASS, radius, rung["moon_geocentric_m"]),
                source(tides.SUN_TO_EARTH_MASS, radius, rung["sun_geocentric_m"]),
            ),
            tides.H2 + tides.H2_OF_LATITUDE * p2,
            tides.L2 + tides.L2_OF_LATITUDE * p2,
        )

    # -- rows: derivatives of the leg, s/m -----------------------------------------------------

    @cached_property
    def by_gcrs(self) -> Array:
        """By the geocentric position before contraction: r (1 - U/c^2 - L_C) - V (V.r)/(2 c^2)."""
        row = self.slopes.near
        if "station_contraction" in self.omit:
            return row
        v = self.event.earth_velocity
        scale = 1.0 - self.event.ladder["potential_m2_per_s2"] / c**2 - L_C
        return scale * row - v * (dot(v, row) / (2.0 * c**2))

    @cached_property
    def by_place(self) -> Array:
        """By the coordinates, ITRF axes: tide and loads there change with them."""
        row = self.by_gcrs
        by_itrf = self.by_itrf(row)
        total = by_itrf + self._by_place_of_loads(by_itrf)
        if self.tide is not None:
            total = total + self.by_itrf(self.tide.by_place(row, self.distance))
        return total

    def _by_place_of_loads(self, row: Array) -> Array:
        """The same through what moves the ground along local axes, which turn with the place.

        All of this is 1e-8 of the derivative.
        """
        event, station = self.event, self.station
        total = np.zeros_like(row)
        moved = [
            self.by_itrf(event.displacement[name])
            for name in ("ocean_loading", "ocean_pole_tide", "atmosphere_loading")
            if name in event.displacement
        ]
        if moved:
            turn = turn_of_local_axes(station.xyz_m)
            total = np.tensordot(turn, cross(np.sum(moved, axis=0), row), axes=1)
        if "pole_tide" in event.displacement:
            rung = event.ladder
            years = ((rung["tt1"] - J2000) + rung["tt2"]) / JULIAN_YEAR
            pole = rung["xp_rad"] / ARCSECOND, rung["yp_rad"] / ARCSECOND
            slopes = pole_tide_slopes(station.xyz_m)
            for each, m in zip(slopes, tides.wobble(*pole, years), strict=True):
                total = total + m * np.tensordot(each, row, axes=1)
        return total

    @cached_property
    def clock_by_place(self) -> Array:
        """What the clock adds to the range by its place: TDB - TT has the term V.r/c^2."""
        return self.clock / c**2 * self.event.earth_velocity

    def by_sun(self, gm_sun: float) -> Array:
        """By the geocentric position of the Sun, through the tide and the contraction."""
        sun = self.event.ladder["sun_geocentric_m"]
        distance = norm(sun)
        total = np.zeros_like(sun)
        if self.tide is not None:
            total = self.tide.by_source(self.by_gcrs, 1, distance)
        if "station_contraction" not in self.omit:
            along = dot(self.event.ladder["gcrs_m"], self.slopes.near)
            total = total + (along * gm_sun / c**2 / distance**3) * sun
        return total

    def by_itrf(self, row: Array) -> Array:
        """A row along GCRS axes as one along ITRF axes."""
        return rotation.rotate(rotation.transpose(self.to_gcrs), row)

    @cached_property
    def by_rotation(self) -> Array:
        """By a rotation of the Earth about the axes of the GCRS, s/rad.

        The ground turns but for the tide, which stays with Sun and Moon: it changes only with
        the direction of the place.
        """
        row, event = self.by_gcrs, self.event
        fixed = event.ladder["gcrs_m"]
        turn = cross(event.up, self.slopes.up)
        if self.tide is not None:
            fixed = fixed - self.tide.displacement()
            turn = turn + cross(self.tide.u, self.tide.by_direction(row))
        return turn + cross(fixed, row)

    # -- axes of rotation ----------------------------------------------------------------------

    @cached_property
    def pole_axes(self) -> tuple[Array, Array]:
        """Rotations of the Earth, GCRS, that x_p and y_p of the pole bring about, per radian.

        W = R2(x_p) R1(y_p), so that y_p turns about the x axis of the ITRF, and x_p about its
        y axis as it is after R1: both backwards, as frame rotations do.
        """
        yp = self.event.ladder["yp_rad"]
        y_axis = np.stack([np.zeros_like(yp), np.cos(yp), np.sin(yp)])
        return -rotation.rotate(self.to_gcrs, y_axis), -self.to_gcrs[:, 0]

    @cached_property
    def celestial_axes(self) -> tuple[Array, Array]:
        """Rotations of the Earth, GCRS, that X and Y of the pole bring about, per radian.

        The pole p moves by p' = (1, 0, -X/Z) or (0, 1, -Y/Z), and the turn about p is that of
        the matrix Q with s held: (Y X' - X Y')/(1 + Z).

        Source: TN36, equations 5.8 and 5.10.
        """
        x, y, z = p = self.event.axis
        zero, one = np.zeros_like(z), np.ones_like(z)
        by_x = cross(p, np.stack([one, zero, -x / z])) + y / (1.0 + z) * p
        by_y = cross(p, np.stack([zero, one, -y / z])) - x / (1.0 + z) * p
        return by_x, by_y
