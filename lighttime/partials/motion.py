"""How fast everything moves while the light is on its way.

The Earth turns, precesses and wobbles, its tides rise, the air is looked at under another
elevation: the duration of a leg changes with the instants of its events. What moves slowly at
the station is differenced between transmission and reception.

Two derivatives follow. With n and f the change of a leg per second of its near and far event,

    dt2 (1 - f_up) = dt1 (1 + n_up) + d_up,     dt3 (1 - n_down) = dt2 (1 + f_down) + d_down

and the tagged event stands still for delays d (the response to a delay), or moves by one second
without any (the derivative by the epoch).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from lighttime.constants import DAY, SPEED_OF_LIGHT, TURN
from lighttime.earth import rotation
from lighttime.moon.libration import angular_velocity
from lighttime.partials.side import Side
from lighttime.path.legs import Tag
from lighttime.vectors import Array, cross, dot

c = SPEED_OF_LIGHT


@dataclass(frozen=True, eq=False)
class Motion:
    """Changes of both legs per second of their events, s/s.

    Attributes
    ----------
    n_up, f_up, n_down, f_down : ndarray, shape (n,)
        By the near and the far event of the way up and the way down.
    clock_rate : ndarray, shape (n,)
        Rate of TDB - TT from transmission to reception; zero where there is no clock.
    clock_slope : ndarray, shape (n,)
        Change of (TDB - TT) from transmission to reception per second of the epoch.
    """

    n_up: Array
    f_up: Array
    n_down: Array
    f_down: Array
    clock_rate: Array
    clock_slope: Array

    @classmethod
    def of(cls, up: Side, down: Side) -> Motion:
        """Of a solved block."""
        ground = _ground(up, down)
        rate, slope = _clock(up, down, ground)
        return cls(_near(up, ground), _far(up), _near(down, ground), _far(down), rate, slope)

    def response(self, tag: Tag) -> tuple[Array, Array]:
        """What a second more on either leg adds to the round trip, in seconds of the timer.

        `Legs.response` but for the delays' own change, 1e-12 of it, and the timer's rate.
        """
        leaves, arrives = 1.0 + self.n_up, 1.0 - self.f_up
        departs, returns = 1.0 + self.f_down, 1.0 - self.n_down
        if tag == "transmit":
            up, down = departs / (arrives * returns), 1.0 / returns
        elif tag == "bounce":
            up, down = 1.0 / leaves, 1.0 / returns
        else:
            up, down = 1.0 / leaves, arrives / (leaves * departs)
        timer = 1.0 - self.clock_rate
        return up * timer, down * timer

    def by_epoch(self, tag: Tag) -> Array:
        """d(round trip)/d(tagged epoch), s/s. The ones are taken out of the sums: 1e-6 is left."""
        n_up, f_up, n_down, f_down = self.n_up, self.f_up, self.n_down, self.f_down
        gain = n_up + f_up + n_down + f_down + n_up * f_down - f_up * n_down
        if tag == "transmit":
            slope = gain / ((1.0 - f_up) * (1.0 - n_down))
        elif tag == "bounce":
            slope = gain / ((1.0 - n_down) * (1.0 + n_up))
        else:
            slope = gain / ((1.0 + n_up) * (1.0 + f_down))
        return slope - self.clock_slope


Ground = tuple[Array, Array] | None
"""The Earth's angular velocity in the GCRS (rad/s), and how fast the station moves in the ITRF."""


def _ground(up: Side, down: Side) -> Ground:
    """The same for both events: their difference is 1e-9 of it."""
    if up.station is None or down.station is None:
        return None
    first, last = up.station.event.ladder, down.station.event.ladder
    seconds = ((last["tt1"] - first["tt1"]) + (last["tt2"] - first["tt2"])) * DAY

    def rate(name: str) -> Array:
        change: Array = last[name] - first[name]
        return change / seconds

    end = up.station
    turned = np.mod(last["era_rad"] - first["era_rad"], TURN) / seconds
    (by_xp, by_yp), (by_x, by_y) = end.pole_axes, end.celestial_axes
    omega = (
        (turned - rate("s_rad")) * end.event.axis  # s turns backwards about the pole
        + rate("x_rad") * by_x
        + rate("y_rad") * by_y
        + rate("xp_rad") * by_xp
        + rate("yp_rad") * by_yp
    )
    return omega, rate("itrf_m")


def _near(side: Side, ground: Ground) -> Array:
    """Change of a leg per second of its near event."""
    end, slopes = side.station, side.slopes
    if end is None or ground is None:
        return dot(slopes.near, side.leg.near.velocity)
    omega, moving = ground
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


def _clock(up: Side, down: Side, ground: Ground) -> tuple[Array, Array]:
    """Rate of TDB - TT, and V.a/c^2: how its change over the round trip changes with time."""
    nothing = np.zeros_like(up.leg.distance)
    if up.station is None or down.station is None or ground is None or not up.station.clock:
        return nothing, nothing
    omega, _ = ground
    first, last = up.station.event, down.station.event
    rate = (last.tdb_minus_tt - first.tdb_minus_tt) / (last.seconds - first.seconds)
    slopes = (
        dot(event.earth_velocity, cross(omega, event.ladder["gcrs_m"])) / c**2
        for event in (first, last)
    )
    before, after = slopes
    return rate, after - before
