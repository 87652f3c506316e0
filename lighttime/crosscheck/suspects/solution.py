"""Suspects: the light-time equation solved in another way."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from lighttime.constants import SPEED_OF_LIGHT
from lighttime.crosscheck.scene import PS, Scene
from lighttime.crosscheck.suspects.suspect import Suspect
from lighttime.crosscheck.suspects.time import AS_DESCRIBED
from lighttime.ephemeris.bodies import PLANETS
from lighttime.path.delays import GRAVITY_TERMS
from lighttime.path.gravity import shapiro
from lighttime.path.legs import Leg
from lighttime.vectors import Array, dot, norm

c = SPEED_OF_LIGHT


# -- the two legs ----------------------------------------------------------------------------------


def twice_the_uplink(scene: Scene) -> Array:
    """The way down as long as the way up."""
    if scene.quantity != "round_trip":
        return scene.zero
    up, down = scene.legs.up, scene.legs.down
    ours = (down.geometry, *down.delays.values())
    theirs = (up.geometry, *up.delays.values())
    return PS * sum((a - b for a, b in zip(theirs, ours, strict=True)), scene.zero)


def station_frozen(scene: Scene) -> Array:
    """Light received where the station was at transmission, in barycentric space."""
    if scene.quantity != "round_trip":
        return scene.zero
    down = scene.legs.down
    theirs = norm(down.far.position - scene.t1.position)
    return PS * (theirs - down.distance) / c


def rotation_frozen(scene: Scene) -> Array:
    """The Earth goes on in its orbit during the flight, but does not turn."""
    if scene.quantity != "round_trip":
        return scene.zero
    down, t1, t3 = scene.legs.down, scene.t1, scene.t3
    frozen = t3.earth + (t1.position - t1.earth)
    longer = (norm(frozen - down.far.position) - down.distance) / c
    return PS * longer / (1.0 - dot(down.direction, t3.earth_velocity) / c)


def one_iteration(scene: Scene) -> Array:
    """Each leg from one iteration: the far end where it is after the instantaneous distance."""
    up, down = scene.legs.up, scene.legs.down
    up_s, down_s = _once(up, up.far.velocity, +1.0), _once(down, down.near.velocity, -1.0)
    if scene.quantity != "round_trip":
        return PS * (up_s if scene.quantity == "uplink" else down_s)
    departs = 1.0 - dot(down.direction, down.far.velocity) / c
    returns = 1.0 - dot(down.direction, down.near.velocity) / c
    return PS * (up_s * departs / returns + down_s)


def _once(leg: Leg, velocity: Array, sense: float) -> Array:
    """By how much one iteration makes a leg longer, s; the end moving with `velocity`.

    The first guess is the distance to where that end is at departure; the position used is that
    after so long.
    """
    ray = sense * (leg.far.position - leg.near.position)  # from the start to the end
    first = norm(ray - velocity * leg.seconds) / c
    late = first - leg.seconds
    shift = velocity * late
    longer: Array = (2.0 * dot(ray, shift) + dot(shift, shift)) / (leg.distance + norm(ray + shift))
    return longer / c


def delays_afterwards(scene: Scene) -> Array:
    """Delays added to a light time that was solved without them."""
    up, down = scene.response
    legs = scene.legs
    up_s = sum(legs.up.delays.values(), scene.zero)
    down_s = sum(legs.down.delays.values(), scene.zero)
    one_up, one_down = (1.0 if np.any(r) else 0.0 for r in (up, down))
    return PS * ((one_up - up) * up_s + (one_down - down) * down_s)


# -- gravity ---------------------------------------------------------------------------------------


def bodies_at_rest(scene: Scene, event_of: Callable[[Leg], Any]) -> Array:
    """Shapiro's logarithm with every body at rest where it is at one event."""
    delays = []
    for leg in (scene.legs.up, scene.legs.down):
        seconds = event_of(leg).seconds
        total = scene.zero
        for body in leg.delays:
            if body in GRAVITY_TERMS:
                total = total + _at_rest(scene, body, leg, seconds) - leg.delays[body]
        delays.append(total)
    return scene.delayed(*delays)


def _at_rest(scene: Scene, body: str, leg: Leg, seconds: Array) -> Array:
    frame, model = scene.frame, scene.model
    if body in ("sun", *PLANETS):
        place = frame.distant(body, seconds)[0]
    else:
        place = frame.earth(seconds)[0]
        if body == "moon":
            place = place + frame.moon_geocentric(seconds)[0]
    near, far = norm(leg.near.position - place), norm(leg.far.position - place)
    gm = model.ephemeris.gm(body)
    return shapiro(gm, near, far, leg.distance, model.gamma)


def at_rest_at_bounce(scene: Scene) -> Array:
    """Bodies where they are when the light turns back."""
    return bodies_at_rest(scene, lambda leg: leg.far)


def at_rest_at_station(scene: Scene) -> Array:
    """Bodies where they are when the light leaves or reaches the station."""
    return bodies_at_rest(scene, lambda leg: leg.near)


# -- elevation -------------------------------------------------------------------------------------


def elevation_without_aberration(scene: Scene) -> Array:
    """Elevation of the geometric ray, not of that seen by the moving station."""
    if not scene.has_troposphere:
        return scene.zero
    sines = []
    for leg in (scene.legs.up, scene.legs.down):
        ray = leg.far.position - leg.near.position
        sines.append(dot(ray, leg.near.up) / norm(ray))
    return scene.air(*scene.slant(*sines))


def elevation_geocentric(scene: Scene) -> Array:
    """Elevation of the array from instantaneous positions at transmission, for both legs."""
    if not scene.has_troposphere:
        return scene.zero
    up, t1 = scene.legs.up, scene.t1
    ray = up.far.position - up.far.velocity * up.seconds - t1.position
    sine = dot(ray, t1.up) / norm(ray)
    return scene.air(*scene.slant(sine, sine))


SUSPECTS: tuple[Suspect, ...] = (
    Suspect(
        "twice_the_uplink", "solution", "round trip as twice the way up",
        "whether the way down is solved on its own", twice_the_uplink,
        {1.0: "as described", -1.0: "twice the way down"},
    ),
    Suspect(
        "station_frozen", "solution", "station held in space during the flight",
        "the position of the station at reception: that of transmission?", station_frozen,
        AS_DESCRIBED,
    ),
    Suspect(
        "rotation_frozen", "solution", "rotation of the Earth stopped during the flight",
        "the rotation angle at reception: that of transmission?", rotation_frozen, AS_DESCRIBED,
    ),
    Suspect(
        "one_iteration", "solution", "light-time equation iterated once only",
        "the stopping rule of the light-time iteration", one_iteration, AS_DESCRIBED,
    ),
    Suspect(
        "delays_afterwards", "solution", "delays added after the equation is solved",
        "whether gravity and troposphere are inside the iteration", delays_afterwards, AS_DESCRIBED,
    ),
    Suspect(
        "bodies_at_bounce", "solution", "gravitating bodies at rest where they are at the bounce",
        "the instant at which Earth and Sun are taken for the Shapiro delay", at_rest_at_bounce,
        AS_DESCRIBED,
    ),
    Suspect(
        "bodies_at_rest", "solution", "gravitating bodies at rest at the station's event",
        "the velocity of the Sun and the Earth in the Shapiro delay", at_rest_at_station,
        AS_DESCRIBED,
    ),
    Suspect(
        "elevation_unaberrated", "solution", "elevation without aberration",
        "the direction that the troposphere's elevation is taken from",
        elevation_without_aberration, AS_DESCRIBED,
    ),
    Suspect(
        "elevation_instantaneous", "solution", "one elevation, of instantaneous positions",
        "where Moon and station are taken for the troposphere's elevation", elevation_geocentric,
        AS_DESCRIBED,
    ),
)  # fmt: skip
"""The way in which the light-time equation is solved."""
