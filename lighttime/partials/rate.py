"""The derivative of the round trip by the epoch: how fast the range changes.

Everything moves then: the Earth turns, precesses and wobbles, its tides rise, the air is looked
at under another elevation. What moves slowly at the station is differenced between transmission
and reception.
"""

from __future__ import annotations

import numpy as np

from lighttime.constants import DAY, SPEED_OF_LIGHT, TURN
from lighttime.earth import rotation
from lighttime.moon.libration import angular_velocity
from lighttime.partials.block import Block, Side
from lighttime.vectors import Array, cross, dot

c = SPEED_OF_LIGHT


def epoch_slope(block: Block) -> Array:
    """d(round trip)/d(tagged epoch), s/s.

    With n and f the change of a leg per second of its near and far event, an event that is
    moved by one second moves the others by

        dt2 (1 - f_up) = dt1 (1 + n_up),     dt3 (1 - n_down) = dt2 (1 + f_down),

    and the tagged one by one. The ones are taken out of the sums: what is left is 1e-6.
    """
    up, down = block.sides
    rates = _ground_rates(block)
    n_up, f_up = _near(up, rates), _far(up)
    n_down, f_down = _near(down, rates), _far(down)
    gain = n_up + f_up + n_down + f_down + n_up * f_down - f_up * n_down
    tag = block.legs.tag
    slope: Array
    if tag == "transmit":
        slope = gain / ((1.0 - f_up) * (1.0 - n_down))
    elif tag == "bounce":
        slope = gain / ((1.0 - n_down) * (1.0 + n_up))
    else:
        slope = gain / ((1.0 + n_up) * (1.0 + f_down))
    return slope - _clock(block, rates)


Rates = tuple[Array, Array] | None
"""The Earth's angular velocity in the GCRS (rad/s), and how fast the station moves in the ITRF."""


def _ground_rates(block: Block) -> Rates:
    """The same at both events, but for their difference in seconds: 1e-9 of what it is."""
    up, down = block.sides
    if up.station is None or down.station is None:
        return None
    first, last = up.station.event.ladder, down.station.event.ladder
    seconds = ((last["tt1"] - first["tt1"]) + (last["tt2"] - first["tt2"])) * DAY

    def rate(name: str) -> Array:
        change: Array = last[name] - first[name]
        return change / seconds

    turned = np.mod(last["era_rad"] - first["era_rad"], TURN)
    end = up.station
    (by_xp, by_yp), (by_x, by_y) = end.pole_axes, end.celestial_axes
    # s turns backwards about the pole
    spin = turned / seconds - rate("s_rad")
    omega = (
        spin * end.event.axis
        + rate("x_rad") * by_x
        + rate("y_rad") * by_y
        + rate("xp_rad") * by_xp
        + rate("yp_rad") * by_yp
    )
    return omega, rate("itrf_m")


def _near(side: Side, rates: Rates) -> Array:
    """Change of a leg per second of its near event."""
    end, slopes = side.station, side.slopes
    if end is None or rates is None:
        return dot(slopes.near, side.leg.near.velocity)
    omega, moving = rates
    event = end.event
    turning = cross(omega, event.ladder["gcrs_m"]) + rotation.rotate(end.to_gcrs, moving)
    return (
        dot(slopes.near - slopes.earth_near, event.earth_velocity)
        + dot(end.by_gcrs, turning)
        + dot(slopes.up, cross(omega, event.up))
    )


def _far(side: Side) -> Array:
    """Change of a leg per second of its far event."""
    end, slopes = side.reflector, side.slopes
    velocity = getattr(side.leg.near, "earth_velocity", None)
    earth = 0.0 if velocity is None else dot(slopes.earth_far, velocity)
    if end is None:
        return dot(slopes.far, side.leg.far.velocity) - earth
    event = end.event
    rung = event.ladder
    omega = angular_velocity(rung["libration_rad"], rung["libration_rate_rad_per_s"])
    away = event.moon_velocity - rung["earth_velocity_m_per_s"]
    return (
        dot(slopes.far, event.moon_velocity)
        - earth
        + dot(end.by_rotation, omega)
        - dot(end.by_earth, away)
    )


def _clock(block: Block, rates: Rates) -> Array | float:
    """Change of (TDB - TT) from transmission to reception per second: V.a/c^2."""
    up, down = block.sides
    if up.station is None or down.station is None or rates is None or not up.station.clock:
        return 0.0
    omega, _ = rates
    first, last = (
        dot(end.event.earth_velocity, cross(omega, end.event.ladder["gcrs_m"])) / c**2
        for end in (up.station, down.station)
    )
    return last - first
