"""Where a station is at an instant: from its ITRF coordinates to the BCRS.

    ITRF position + velocity + displacements  --rotation-->  GCRS  --contraction-->  BCRS

Everything is evaluated once per event and kept with it, so that terms, worksheet and solver
speak of the same numbers.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np

from lighttime.constants import ARCSECOND, DAY, EARTH_ROTATION_RATE, L_C, SPEED_OF_LIGHT
from lighttime.earth import rotation, subdaily
from lighttime.earth.displacement import displacements
from lighttime.earth.series import EarthOrientation
from lighttime.earth.station import Station
from lighttime.earth.subdaily import subdaily
from lighttime.ephemeris.frame import EarthFrame
from lighttime.timescales.scales import tt_to_tai
from lighttime.timescales.tdb import tdb_minus_tt
from lighttime.vectors import Array, column, cross, dot, norm

c = SPEED_OF_LIGHT


@dataclass(frozen=True, eq=False)
class StationEvent:
    """A station at an instant; vectors are (3, n) along BCRS axes, in metres.

    Attributes
    ----------
    seconds : ndarray
        TDB seconds after the tagged instant.
    position, velocity : ndarray
        In the working frame; velocity is barycentric, m/s.
    earth, earth_velocity : ndarray
        The geocentre in the working frame, and its barycentric velocity.
    up : ndarray
        Unit vector to the geodetic zenith.
    axis : ndarray
        Unit vector to the celestial intermediate pole: the Earth's axis of figure and rotation.
    tdb_minus_tt : ndarray
        At the station, s.
    displacement : mapping of str to ndarray
        What each term adds to `position`.
    ladder : mapping of str to ndarray
        Every intermediate value, in the order in which it was found.
    """

    seconds: Array
    position: Array
    velocity: Array
    earth: Array
    earth_velocity: Array
    up: Array
    axis: Array
    tdb_minus_tt: Array
    displacement: Mapping[str, Array]
    ladder: Mapping[str, Array]


@dataclass(frozen=True, eq=False)
class PredictedEvent:
    """A station carried along from a known event by the Earth's motion and steady rotation."""

    seconds: Array
    position: Array
    velocity: Array


@dataclass(frozen=True, eq=False)
class StationMotion:
    """A station as an end of the ray, around one tagged instant.

    Parameters
    ----------
    station : Station
    frame : EarthFrame
    tt1, tt2 : ndarray, shape (n,)
        The tagged instant, TT.
    tdb_minus_tt : ndarray, shape (n,)
        At the station at the tagged instant, s.
    earth_orientation : EarthOrientation
    omit : frozenset of str
        Terms to leave out.
    """

    station: Station
    frame: EarthFrame
    tt1: Array
    tt2: Array
    tdb_minus_tt: Array
    earth_orientation: EarthOrientation
    omit: frozenset[str] = frozenset()

    def at(self, seconds: Array) -> StationEvent:
        """The station `seconds` (TDB, shape (n,)) after the tagged instant."""
        frame, station = self.frame, self.station
        # -- time: TT runs as TDB does but for (TDB - TT) at the station --------------------
        tai1, tai2 = tt_to_tai(self.tt1, self.tt2 + seconds / DAY)  # a nanosecond off at most
        pole = self.earth_orientation.at(tai1, tai2)
        ut1_fraction = day_fraction(tai1, tai2 + pole.ut1_tai_s / DAY)
        tdb_tt = tdb_minus_tt(frame.tdb1, frame.tdb2 + seconds / DAY, ut1_fraction, station.xyz_m)
        tt1, tt2 = self.tt1, self.tt2 + (seconds - (tdb_tt - self.tdb_minus_tt)) / DAY
        tai1, tai2 = tt_to_tai(tt1, tt2)
        # -- orientation of the Earth ---------------------------------------------------------
        if "subdaily_rotation" in self.omit:
            dx = dy = dut1 = np.zeros_like(seconds)
        else:
            dx, dy, dut1 = subdaily(tai1, tai2 + pole.ut1_tai_s / DAY, tt1, tt2)
        ut1_2 = tai2 + (pole.ut1_tai_s + dut1) / DAY
        xp, yp = pole.xp_rad + dx, pole.yp_rad + dy
        x, y, s = rotation.celestial_pole(tt1, tt2)
        x, y = x + pole.dx_rad, y + pole.dy_rad
        era = rotation.earth_rotation_angle(tai1, ut1_2)
        to_gcrs = rotation.terrestrial_to_celestial(x, y, s, era, xp, yp, tt1, tt2)
        # -- the station in the ITRF ----------------------------------------------------------
        earth, earth_velocity = frame.earth(seconds)
        moon, _ = frame.moon_geocentric(seconds)
        sun = frame.distant("sun", seconds)[0] - earth
        to_itrf = np.swapaxes(to_gcrs, 0, 1)
        moved = displacements(
            station,
            sun_itrf_m=rotation.rotate(to_itrf, sun),
            moon_itrf_m=rotation.rotate(to_itrf, moon),
            tt1=tt1,
            tt2=tt2,
            ut1_fraction=ut1_fraction,
            xp_arcsec=pole.xp_rad / ARCSECOND,
            yp_arcsec=pole.yp_rad / ARCSECOND,
            omit=self.omit,
        )
        years = station.years_since_epoch(tt1, tt2)
        itrf = column(station.xyz_m, years) + column(station.velocity_m_per_yr, years) * years
        for displacement in moved.values():
            itrf = itrf + displacement
        # -- GCRS -----------------------------------------------------------------------------
        gcrs = rotation.rotate(to_gcrs, itrf)
        axis = np.stack([x, y, np.sqrt(1.0 - x * x - y * y)])
        gcrs_velocity = EARTH_ROTATION_RATE * cross(axis, gcrs)
        shifts = {name: rotation.rotate(to_gcrs, d) for name, d in moved.items()}
        if "subdaily_rotation" not in self.omit:
            turned = _turn(itrf, dx, dy, dut1 * EARTH_ROTATION_RATE)
            shifts["subdaily_rotation"] = rotation.rotate(to_gcrs, turned)
        # -- BCRS -----------------------------------------------------------------------------
        potential = self._potential(earth, moon, seconds)
        position = earth + gcrs
        if "station_contraction" not in self.omit:
            contraction = -gcrs * (potential / c**2 + L_C) - earth_velocity * (
                dot(earth_velocity, gcrs) / (2.0 * c**2)
            )
            shifts["station_contraction"] = contraction
            position = earth + (gcrs + contraction)
        ladder = {
            "tai1": tai1, "tai2": tai2, "tt1": tt1, "tt2": tt2, "ut1_1": tai1, "ut1_2": ut1_2,
            "tdb_minus_tt_s": tdb_tt, "xp_rad": xp, "yp_rad": yp, "x_rad": x, "y_rad": y,
            "s_rad": s, "era_rad": era, "itrf_m": itrf, "gcrs_m": gcrs,
            "earth_velocity_m_per_s": earth_velocity, "potential_m2_per_s2": potential,
            "sun_geocentric_m": sun, "moon_geocentric_m": moon,
        }  # fmt: skip
        return StationEvent(
            seconds=seconds,
            position=position,
            velocity=earth_velocity + gcrs_velocity,
            earth=earth,
            earth_velocity=earth_velocity,
            up=rotation.rotate(to_gcrs, column(tuple(station.up), seconds)),
            axis=axis,
            tdb_minus_tt=tdb_tt,
            displacement=shifts,
            ladder=ladder,
        )

    def predicted_from(self, event: StationEvent) -> Callable[[Array], PredictedEvent]:
        """The station some seconds from a known event, good to 1e-14 s of light time.

        Over the seconds of a round trip the Earth turns steadily about its axis; tides and the
        contraction move with the station to some nanometres.
        """
        local = event.position - event.earth
        along = event.axis * dot(event.axis, local)
        across, aside = local - along, cross(event.axis, local)

        def at(seconds: Array) -> PredictedEvent:
            angle = EARTH_ROTATION_RATE * (seconds - event.seconds)
            turned = along + across * np.cos(angle) + aside * np.sin(angle)
            earth, earth_velocity = self.frame.earth(seconds)
            spin = EARTH_ROTATION_RATE * cross(event.axis, turned)
            return PredictedEvent(seconds, earth + turned, earth_velocity + spin)

        return at

    def _potential(self, earth: Array, moon: Array, seconds: Array) -> Array:
        """Potential of Sun, Moon and planets at the geocentre, m^2/s^2."""
        ephemeris = self.frame.ephemeris
        total = ephemeris.gm("moon") / norm(moon)
        for body in self.frame.distant_bodies:
            position, _ = self.frame.distant(body, seconds)
            total = total + ephemeris.gm(body) / norm(position - earth)
        return total


def day_fraction(jd1: Array, jd2: Array) -> Array:
    """Fraction of the day, from midnight, of a Julian date in two parts."""
    half = (jd1 - np.floor(jd1)) + 0.5
    fraction: Array = np.mod(half + jd2, 1.0)
    return fraction


def _turn(r: Array, dxp: Array, dyp: Array, dera: Array) -> Array:
    """What small changes of the pole and of the rotation angle do to an ITRF vector."""
    x, y, z = r
    return np.stack([-dera * y - dxp * z, dera * x + dyp * z, dxp * x - dyp * y])
