"""How long a leg takes, differentiated with respect to where its ends are."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from lighttime.constants import SPEED_OF_LIGHT
from lighttime.model import Model
from lighttime.path.delays import seen_from_station
from lighttime.path.legs import Leg
from lighttime.path.troposphere import Weather
from lighttime.path.troposphere_slopes import SlantSlopes, slant_slopes
from lighttime.query import Query
from lighttime.vectors import Array, dot, norm

c = SPEED_OF_LIGHT


@dataclass(frozen=True, eq=False)
class LegSlopes:
    """Derivatives of the seconds of a leg with respect to its ends, the bodies held.

    Attributes
    ----------
    near, far : ndarray, shape (3, n)
        By the position of either event, s/m.
    earth_near, earth_far : ndarray, shape (3, n)
        The part of them that is due to the Earth's gravity.
    up : ndarray, shape (3, n)
        By the direction of the zenith, s.
    velocity : ndarray, shape (3, n)
        By the velocity of the station (aberration of the ray in the troposphere), s/(m/s).
    air : SlantSlopes or None
        Of the delay in the troposphere, in metres.
    """

    near: Array
    far: Array
    earth_near: Array
    earth_far: Array
    up: Array
    velocity: Array
    air: SlantSlopes | None


def leg_slopes(model: Model, query: Query, leg: Leg, upward: bool) -> LegSlopes:
    """Differentiate geometry, the gravity of Sun and Earth, and the troposphere.

    The gravity of the Moon and the planets changes by less than 1e-10 of what the geometry does,
    and so does not count here; that of Sun and Earth is differentiated as of bodies at rest,
    which is good to 1e-4 of some 1e-8.
    """
    sense = 1.0 if upward else -1.0
    outward = sense * leg.direction
    near, far = -outward / c, outward / c
    earth_near = earth_far = up = velocity = np.zeros_like(outward)
    ladder = getattr(leg.near, "ladder", None)
    if ladder is not None:
        gm = model.ephemeris.gm
        twice = 1.0 + model.gamma
        station = leg.near.position - leg.near.earth
        later = leg.far.seconds - leg.near.seconds
        target = leg.far.position - leg.near.earth
        if "sun" in leg.delays:
            sun = ladder["sun_geocentric_m"]
            slopes = shapiro_slopes(twice * gm("sun"), station - sun, target - sun)
            near, far = near + slopes[0], far + slopes[1]
        if "earth" in leg.delays:
            moved = target - leg.near.earth_velocity * later
            earth_near, earth_far = shapiro_slopes(twice * gm("earth"), station, moved)
            near, far = near + earth_near, far + earth_far
    air = None
    if "troposphere" in leg.delays:
        assert query.weather is not None
        air, up, moved_far, velocity = _air(query, query.weather, leg, upward)
        near, far = near - moved_far, far + moved_far
    return LegSlopes(near, far, earth_near, earth_far, up, velocity, air)


def shapiro_slopes(twice_gm: float, x1: Array, x2: Array) -> tuple[Array, Array]:
    """Derivatives of (1+gamma) GM/c^3 ln[(s + r12)/(s - r12)], s = r1 + r2, by x1 and x2, s/m.

    Parameters
    ----------
    twice_gm : float
        (1+gamma) GM, m^3/s^2.
    x1, x2 : ndarray, shape (3, n)
        The events, from the body, m.
    """
    r1, r2 = norm(x1), norm(x2)
    r12 = norm(x2 - x1)
    s = r1 + r2
    size = 2.0 * twice_gm / c**3 / ((s - r12) * (s + r12))
    along = (size * s) * (x2 - x1) / r12
    return -(size * r12) * x1 / r1 - along, -(size * r12) * x2 / r2 + along


def _air(
    query: Query, weather: Weather, leg: Leg, upward: bool
) -> tuple[SlantSlopes, Array, Array, Array]:
    """Slopes of the delay in the air; by zenith, by the far position, by the velocity.

    The delay depends on the directions through the sine of the elevation, up . n with n the
    direction of the ray as the moving station sees it: unit(ray - (1 - beta.ray/2) beta), but for
    beta^3. (What is of first order in beta is opposite on both legs, so that the second counts.)
    """
    station = query.station
    sense = 1.0 if upward else -1.0
    outward = sense * leg.direction
    seen = seen_from_station(leg.near, leg.far, upward)
    length = norm(seen)
    n = sense * seen / length
    sine = dot(n, leg.near.up)
    air = slant_slopes(sine, station.latitude_rad, station.height_m, weather, query.wavelength_nm)
    seconds_per_sine = air.sine / c
    across = (seconds_per_sine / length) * (leg.near.up - sine * n)
    turn = (across - outward * dot(outward, across)) / leg.distance
    ray, beta, by_seen = leg.direction, leg.near.velocity / c, sense * across
    by_beta = 0.5 * dot(beta, by_seen) * ray - (1.0 - 0.5 * dot(beta, ray)) * by_seen
    return air, seconds_per_sine * n, turn, by_beta / c
