"""Where a station is at an instant: from its ITRF coordinates to the BCRS.

    ITRF position + velocity + displacements  --rotation-->  GCRS  --contraction-->  BCRS

Everything is evaluated once per event and kept with it, so that terms, worksheet and solver
speak of the same numbers.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np

from lighttime.constants import DAY, EARTH_ROTATION_RATE, L_C, SPEED_OF_LIGHT, TT_MINUS_TAI
from lighttime.earth import rotation
from lighttime.earth.displacement import residual_motion
from lighttime.earth.state import Plan, StateModel, StationState
from lighttime.ephemeris.frame import EarthFrame
from lighttime.vectors import Array, column, cross, dot

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
    states : StateModel
        Of this station.
    plan : Plan
        Which series its state may be read from.
    frame : EarthFrame
    tt1, tt2 : ndarray, shape (n,)
        The tagged instant, TT.
    tagged : StationState
        At the tagged instant.
    """

    states: StateModel
    plan: Plan
    frame: EarthFrame
    tt1: Array
    tt2: Array
    tagged: StationState

    def at(self, seconds: Array) -> StationEvent:
        """The station `seconds` (TDB, shape (n,)) after the tagged instant."""
        station, omit = self.states.station, self.states.omit
        state = self.tagged
        if seconds.any():
            # TT runs as TDB does, but for TDB - TT, which changes by a nanosecond at most
            state = self.states.at(self.tt1, self.tt2 + seconds / DAY, self.plan)
        tdb_tt = state["tdb_minus_tt"]
        gained = tdb_tt - self.tagged["tdb_minus_tt"]
        tt1, tt2 = self.tt1, self.tt2 + (seconds - gained) / DAY
        # -- orientation of the Earth ---------------------------------------------------------
        tai1, tai2 = tt1, tt2 - TT_MINUS_TAI / DAY
        ut1_2 = tai2 + state["ut1_minus_tai"] / DAY
        x, y, s = state["x"], state["y"], state["s"]
        era = rotation.earth_rotation_angle(tai1, ut1_2)
        to_gcrs = rotation.terrestrial_to_celestial(
            x, y, s, era, state["xp"], state["yp"], tt1, tt2
        )
        # -- from the ITRF to the GCRS --------------------------------------------------------
        years = station.years_since_epoch(tt1, tt2)
        itrf = column(station.xyz_m, years) + column(station.velocity_m_per_yr, years) * years
        moved = {**state.displacement, **residual_motion(station, tt1, tt2, omit)}
        for displacement in moved.values():
            itrf = itrf + displacement
        gcrs = rotation.rotate(to_gcrs, itrf)
        axis = np.stack([x, y, np.sqrt(1.0 - x * x - y * y)])
        gcrs_velocity = EARTH_ROTATION_RATE * cross(axis, gcrs)
        shifts = {name: rotation.rotate(to_gcrs, d) for name, d in moved.items()}
        if "subdaily_rotation" not in omit:
            turned = _turn(
                itrf,
                state["subdaily_xp"],
                state["subdaily_yp"],
                state["subdaily_ut1"] * EARTH_ROTATION_RATE,
            )
            shifts["subdaily_rotation"] = rotation.rotate(to_gcrs, turned)
        # -- from the GCRS to the BCRS --------------------------------------------------------
        earth, earth_velocity = self.frame.earth(seconds)
        if "station_contraction" in omit:
            position = earth + gcrs
        else:
            contraction = -gcrs * (state["potential"] / c**2 + L_C) - earth_velocity * (
                dot(earth_velocity, gcrs) / (2.0 * c**2)
            )
            shifts["station_contraction"] = contraction
            position = earth + (gcrs + contraction)
        ladder = {
            "tai1": tai1, "tai2": tai2, "tt1": tt1, "tt2": tt2, "ut1_1": tai1, "ut1_2": ut1_2,
            "tdb_minus_tt_s": tdb_tt, "xp_rad": state["xp"], "yp_rad": state["yp"],
            "x_rad": x, "y_rad": y, "s_rad": s, "era_rad": era, "itrf_m": itrf, "gcrs_m": gcrs,
            "earth_velocity_m_per_s": earth_velocity,
            "potential_m2_per_s2": state["potential"],
            "sun_geocentric_m": self.frame.distant("sun", seconds)[0] - earth,
            "moon_geocentric_m": self.frame.moon_geocentric(seconds)[0],
        }  # fmt: skip
        return StationEvent(
            seconds=seconds,
            position=position,
            velocity=earth_velocity + gcrs_velocity,
            earth=earth,
            earth_velocity=earth_velocity,
            up=rotation.rotate(to_gcrs, column(station.up, seconds)),
            axis=axis,
            tdb_minus_tt=tdb_tt,
            displacement=shifts,
            ladder=ladder,
        )

    def jumps(self, before: Array, after: Array) -> bool:
        """Whether records of the ephemeris meet between two instants; see `path.solver`."""
        return self.frame.crosses_seam(before, after)

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


def _turn(r: Array, dxp: Array, dyp: Array, dera: Array) -> Array:
    """What small changes of the pole and of the rotation angle do to an ITRF vector."""
    x, y, z = r
    return np.stack([-dera * y - dxp * z, dera * x + dyp * z, dxp * x - dyp * y])
