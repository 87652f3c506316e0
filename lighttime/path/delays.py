"""What delays the light beyond geometry, between an event near the Earth and one far away."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from lighttime.constants import SPEED_OF_LIGHT
from lighttime.ephemeris.bodies import PLANETS
from lighttime.ephemeris.frame import EarthFrame
from lighttime.errors import InputError
from lighttime.path.ends import TrajectoryEvent
from lighttime.path.gravity import in_rest_frame, moving_body, oblateness
from lighttime.vectors import Array, column, dot, norm

c = SPEED_OF_LIGHT

GRAVITY_TERMS = {
    "sun": "sun_gravity",
    "earth": "earth_gravity",
    "moon": "moon_gravity",
} | dict.fromkeys(PLANETS, "planet_gravity")
"""The term under which the delay by each body is counted."""


def gravity_delays(
    frame: EarthFrame,
    near: Any,
    far: Any,
    gamma: float,
    omit: frozenset[str],
    solar_bending: bool = False,
) -> dict[str, Array]:
    """Delay by each body between two events, seconds.

    Parameters
    ----------
    frame : EarthFrame
    near, far : Event
        The event at the station (or what stands for it) and the one at the reflector. Bodies
        are taken where they are at the near event, and in uniform motion around it.
    gamma : float
        Parameter gamma of the post-Newtonian formalism.
    omit : frozenset of str
        Terms to leave out.
    solar_bending : bool
        Moyer's (1+gamma) GM/c^2 in the Sun's logarithm.

    Returns
    -------
    dict of str to ndarray, shape (n,)
    """
    later = far.seconds - near.seconds
    distance = norm(far.position - near.position)
    delays: dict[str, Array] = {}
    for body in ("sun", "earth", "moon", *PLANETS):
        if GRAVITY_TERMS[body] in omit:
            continue
        if body not in ("earth", "moon") and body not in frame.distant_bodies:
            continue
        position, velocity = _body_at(frame, body, near)
        x1, x2 = near.position - position, far.position - position
        _check_outside(body, near, x1)
        _check_outside(body, far, x2, later, velocity)
        bending = solar_bending and body == "sun"
        gm = frame.ephemeris.gm(body)
        delays[body] = moving_body(gm, x1, 0.0, x2, later, velocity, gamma, bending, distance)
        if body == "earth":
            near_at_rest = in_rest_frame(x1, 0.0, velocity)
            far_at_rest = in_rest_frame(x2, later, velocity)
            flattened = oblateness(
                gm * _j2_radius2(frame), near_at_rest, far_at_rest, _axis(near), gamma
            )
            delays[body] += flattened * (norm(far_at_rest - near_at_rest) / distance)
    return delays


INSIDE_M = 1.0e6
"""Every body that is counted is larger: nearer to its centre the field is another one."""


def _check_outside(
    body: str, event: Any, x: Array, t: ArrayLike = 0.0, velocity: Array | None = None
) -> None:
    """Refuse a trajectory that goes through the middle of a body."""
    if not isinstance(event, TrajectoryEvent):
        return
    at_rest = x if velocity is None else in_rest_frame(x, t, velocity)
    nearest = float(np.min(norm(at_rest), initial=np.inf))
    if nearest < INSIDE_M:
        raise InputError(
            f"distance from the centre of {body}",
            nearest,
            f"above {INSIDE_M:g} m, or a Model that omits {GRAVITY_TERMS[body]}",
        )


def _j2_radius2(frame: EarthFrame) -> float:
    constants = frame.ephemeris.constants
    return constants["j2_earth"] * constants["radius_earth_m"] ** 2


def _axis(near: Any) -> Array:
    """The Earth's axis; where no station tells it, the pole of the ICRS (within 0.3 degrees)."""
    if hasattr(near, "axis"):
        axis: Array = near.axis
        return axis
    return column((0.0, 0.0, 1.0), near.seconds)


def _body_at(frame: EarthFrame, body: str, near: Any) -> tuple[Array, Array]:
    if body not in ("earth", "moon"):
        return frame.distant(body, near.seconds)
    known = hasattr(near, "earth")
    earth, velocity = (near.earth, near.earth_velocity) if known else frame.earth(near.seconds)
    if body == "earth":
        return earth, velocity
    moon, moon_velocity = frame.moon_geocentric(near.seconds)
    return earth + moon, velocity + moon_velocity


def sine_of_elevation(near: Any, far: Any, upward: bool) -> Array:
    """Sine of the elevation of the ray in the rest frame of the station.

    The photon's direction is carried into that frame by the Lorentz transformation; for light
    that comes down, elevation is where it comes from.

    Parameters
    ----------
    near : StationEvent
    far : Event
    upward : bool
        True for the uplink.
    """
    seen = seen_from_station(near, far, upward)
    sine: Array = (1.0 if upward else -1.0) * dot(seen, near.up) / norm(seen)
    return sine


def seen_from_station(near: Any, far: Any, upward: bool) -> Array:
    """Direction in which the light flies in the rest frame of the station, not of unit length."""
    sense = 1.0 if upward else -1.0
    ray = sense * (far.position - near.position)
    ray = ray / norm(ray)
    beta = near.velocity / c
    lorentz = 1.0 / np.sqrt(1.0 - dot(beta, beta))
    seen: Array = ray + lorentz * (lorentz / (1.0 + lorentz) * dot(beta, ray) - 1.0) * beta
    return seen


def elevation(near: Any, far: Any, upward: bool) -> Array | None:
    """Elevation of the ray at the station, rad; None where no station is at the near end."""
    if not hasattr(near, "up"):
        return None
    angle: Array = np.arcsin(sine_of_elevation(near, far, upward))
    return angle
