"""What every suspect is shown: a block of ranges, solved once, and the ways to disturb them.

Most wrong choices displace an end of the ray, turn the Earth, delay a leg or move the tagged
instant. What that does to the range follows from the solved legs; only a few choices need the
light-time equation to be solved again.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Any, Literal

import numpy as np

from lighttime.constants import DAY, SPEED_OF_LIGHT
from lighttime.earth import rotation
from lighttime.earth.station import Station
from lighttime.ephemeris.frame import EarthFrame
from lighttime.model import Model
from lighttime.moon.libration import principal_axes
from lighttime.moon.reflector import Reflector
from lighttime.path.delays import sine_of_elevation
from lighttime.path.legs import Leg, Legs
from lighttime.path.troposphere import slant_delay
from lighttime.query import Query
from lighttime.vectors import Array, cross, dot, norm

c = SPEED_OF_LIGHT
PS = 1.0e12
"""Picoseconds in a second."""

Quantity = Literal["round_trip", "uplink", "downlink"]

QUANTITIES = {
    "round_trip": ("transmit", "bounce", "receive"),
    "uplink": ("transmit", "bounce"),
    "downlink": ("bounce", "receive"),
}
"""What can be compared, and the events that may be tagged: those at an end of its legs."""


@dataclass(frozen=True, eq=False)
class Sighting:
    """A station as far as the elevation of a ray is concerned; vectors are (3, n)."""

    position: Array
    velocity: Array
    up: Array


@dataclass(frozen=True, eq=False)
class Scene:
    """A block of ranges between one station and one reflector, and all that is behind them.

    Parameters
    ----------
    model : Model
    query : Query
        Flat, with a `Station` and a `Reflector`.
    quantity : {"round_trip", "uplink", "downlink"}
        What is compared: the round trip in seconds of the station's timer, or one leg in TDB.
    variants : dict
        Models of others, kept from block to block because each builds its own tables.
    kept : dict
        What several suspects share on this block.

    Notes
    -----
    Vectors are (3, n) along BCRS axes. Effects are picoseconds, shape (n,): what the range of
    somebody who made that choice is longer than ours.
    """

    model: Model
    query: Query
    quantity: Quantity = "round_trip"
    variants: dict[Any, Model] = field(default_factory=dict, repr=False)
    kept: dict[Any, Any] = field(default_factory=dict, repr=False)

    # -- what has been solved ----------------------------------------------------------------

    @cached_property
    def legs(self) -> Legs:
        """Both legs, solved once and shared by all suspects."""
        return self.model.solve(self.query)

    @property
    def size(self) -> int:
        """Number of ranges."""
        return self.query.size

    @property
    def station(self) -> Station:
        """Where the light begins and ends."""
        station: Station = self.query.station
        return station

    @property
    def reflector(self) -> Reflector:
        """Where it turns back."""
        reflector: Reflector = self.query.reflector
        return reflector

    @property
    def t1(self) -> Any:
        """The event of transmission."""
        return self.legs.up.near

    @property
    def t2(self) -> Any:
        """The event at the reflector."""
        return self.legs.up.far

    @property
    def t3(self) -> Any:
        """The event of reception."""
        return self.legs.down.near

    @property
    def zero(self) -> Array:
        """No effect."""
        return np.zeros(self.size)

    @cached_property
    def seconds(self) -> tuple[Array, Array]:
        """The compared quantity as an unevaluated sum of two float64."""
        high, low = self.zero, self.zero
        for part in self.parts(self.legs):
            total = high + part
            low = low + ((high - (total - part)) + (part - (total - (total - part))))
            high = total
        return high, low

    def parts(self, legs: Legs) -> tuple[Array, ...]:
        """Numbers whose sum is the compared quantity, s."""
        if self.quantity == "uplink":
            return (legs.up.geometry, *legs.up.delays.values())
        if self.quantity == "downlink":
            return (legs.down.geometry, *legs.down.delays.values())
        up, down = legs.up, legs.down
        clock = () if "clock" in self.model.omit else (-_clock(legs),)
        return (
            up.geometry, down.geometry, *up.delays.values(), *down.delays.values(), *clock,
        )  # fmt: skip

    # -- the ways to disturb it --------------------------------------------------------------

    @cached_property
    def response(self) -> tuple[Array, Array]:
        """What a second more on the way up, and on the way down, adds to the compared quantity."""
        if self.quantity == "round_trip":
            return self.legs.response()
        leg = self.legs.up if self.quantity == "uplink" else self.legs.down
        near, far = leg.near.velocity, leg.far.velocity
        moves = far if self.query.tag == "transmit" else near  # the end that is not tagged
        if self.query.tag == "receive":
            moves = far
        one = 1.0 / (1.0 - dot(leg.direction, moves) / c)
        return (one, self.zero) if self.quantity == "uplink" else (self.zero, one)

    def delayed(self, up_s: Array, down_s: Array) -> Array:
        """The effect of delays of the legs, seconds each."""
        up, down = self.response
        return PS * (up * up_s + down * down_s)

    def moved(self, at1: Any = 0.0, at2: Any = 0.0, at3: Any = 0.0) -> Array:
        """The effect of displacements of the three events, metres, each (3, n) or zero.

        The change of distance is taken exactly, whatever the size of the displacement.
        """
        up, down = self.legs.up, self.legs.down
        return self.delayed(_longer(up, at1, at2) / c, _longer(down, at3, at2) / c)

    def turned(self, at1: Array, at3: Array) -> Array:
        """The effect of turning the Earth by rotation vectors at t1 and t3, rad, BCRS axes.

        The station goes along, and so does the vertical that the elevation is reckoned from. The
        solid tide stays behind: it follows Sun and Moon.
        """
        shift1, shift3 = (
            turn(w, e.position - e.earth - e.displacement.get("solid_earth_tide", 0.0))
            for w, e in ((at1, self.t1), (at3, self.t3))
        )
        air = self.zero
        if self.has_troposphere:
            up1, up3 = self.t1.up + turn(at1, self.t1.up), self.t3.up + turn(at3, self.t3.up)
            air = self.seen(
                replace_sighting(self.t1, shift1, up1), replace_sighting(self.t3, shift3, up3)
            )
        return self.moved(at1=shift1, at3=shift3) + air

    def turned_itrf(self, dxp: Array, dyp: Array, dera: Array) -> Array:
        """The effect of a changed pole (x_p, y_p) and angle of rotation, rad, shape (n,)."""
        turns = []
        for event, to_gcrs in ((self.t1, self.to_gcrs1), (self.t3, self.to_gcrs3)):
            xp, yp = event.ladder["xp_rad"], event.ladder["yp_rad"]
            axis = np.stack([xp, -yp, np.ones_like(xp)])  # of rotation, in the ITRF
            ours, theirs = rotation.polar_motion(xp, yp), rotation.polar_motion(xp + dxp, yp + dyp)
            tilt = rotation_vector(rotation.product(rotation.transpose(ours), theirs))
            turns.append(rotation.rotate(to_gcrs, tilt + dera * axis))
        return self.turned(*turns)

    def as_if(self, model: Model | None = None, query: Query | None = None) -> Array:
        """The effect of another model or another reading of the query, solved anew."""
        other = Scene(model or self.model, query or self.query, self.quantity)
        theirs, ours = other.parts(other.legs), self.parts(self.legs)
        if len(theirs) == len(ours):
            return PS * sum((a - b for a, b in zip(theirs, ours, strict=True)), self.zero)
        high, low = other.seconds
        return PS * ((high - self.seconds[0]) + (low - self.seconds[1]))

    def variant(self, key: Any, make: Callable[[Model], Model]) -> Model:
        """A changed model, made once."""
        if key not in self.variants:
            self.variants[key] = make(self.model)
        return self.variants[key]

    def shared(self, key: Any, make: Callable[[], Any]) -> Any:
        """Something that several suspects need, made once for this block."""
        if key not in self.kept:
            self.kept[key] = make()
        return self.kept[key]

    def later(self, seconds: Any) -> Query:
        """The same query for instants some seconds later."""
        return replace(self.query, when=self.query.when.shift(seconds))

    # -- troposphere -------------------------------------------------------------------------

    @property
    def has_troposphere(self) -> bool:
        """Whether ours contains a troposphere."""
        return "troposphere" in self.legs.up.delays

    def slant(self, sine1: Array, sine3: Array, **changed: Any) -> tuple[Array, Array]:
        """Tropospheric delay of both legs (s) from sines of the elevation, in this or other air."""
        station, query = self.station, self.query
        weather: Any = changed.get("weather", query.weather)
        wavelength = changed.get("wavelength_nm", query.wavelength_nm)
        up, down = (
            slant_delay(np.arcsin(s), station.latitude_rad, station.height_m, weather, wavelength)
            for s in (sine1, sine3)
        )
        return up / c, down / c

    @cached_property
    def sines(self) -> tuple[Array, Array]:
        """Sine of the elevation at t1 and t3."""
        return self.sines_of(self.t1, self.t3)

    def sines_of(self, at1: Any, at3: Any) -> tuple[Array, Array]:
        """The same as seen by somebody else at these events."""
        up, down = self.legs.up, self.legs.down
        return (
            np.asarray(sine_of_elevation(at1, up.far, True)),
            np.asarray(sine_of_elevation(at3, down.far, False)),
        )

    def seen(self, at1: Any, at3: Any) -> Array:
        """The effect on the troposphere of seeing the rays from elsewhere (see `Sighting`)."""
        return self.air(*self.slant(*self.sines_of(at1, at3)))

    def air(self, up_s: Array, down_s: Array) -> Array:
        """The effect of other tropospheric delays in the place of ours, s."""
        up, down = self.legs.up.delays, self.legs.down.delays
        return self.delayed(up_s - up["troposphere"], down_s - down["troposphere"])

    # -- axes and bodies ---------------------------------------------------------------------

    @cached_property
    def to_gcrs1(self) -> Array:
        """The matrix from the ITRF to the GCRS at t1, (3, 3, n)."""
        return _to_gcrs(self.t1)

    @cached_property
    def to_gcrs3(self) -> Array:
        """The matrix from the ITRF to the GCRS at t3, (3, 3, n)."""
        return _to_gcrs(self.t3)

    def itrf(self, xyz_m: Any) -> tuple[Array, Array]:
        """Vectors fixed to the Earth, (3,) or (3, n), in the GCRS at t1 and t3."""
        r = np.asarray(xyz_m, dtype=float)
        r = r if r.ndim == 2 else np.broadcast_to(r[:, None], (3, self.size))
        return rotation.rotate(self.to_gcrs1, r), rotation.rotate(self.to_gcrs3, r)

    @cached_property
    def lunar_axes(self) -> Array:
        """The matrix from the principal axes of the Moon to the ICRS at t2, (3, 3, n)."""
        axes: Array = principal_axes(self.t2.ladder["libration_rad"])
        return axes

    def lunar(self, r_pa: Any) -> Array:
        """A vector fixed to the Moon, (3,) or (3, n) in principal axes, in the ICRS at t2."""
        r = np.asarray(r_pa, dtype=float)
        return rotation.rotate(self.lunar_axes, r if r.ndim == 2 else r[:, None])

    @cached_property
    def tagged_tai(self) -> tuple[Array, Array]:
        """The tagged instants in TAI, Julian date in two parts."""
        tai = self.query.when.to("tai")
        return np.atleast_1d(tai.jd1), np.atleast_1d(tai.jd2)

    def geocentric(self, body: str, event: Any) -> Array:
        """The Sun or the Moon from the geocentre at an event of the station, m."""
        if body == "moon":
            return self.frame.moon_geocentric(event.seconds)[0]
        place: Array = self.frame.distant(body, event.seconds)[0] - event.earth
        return place

    def selenocentric(self, body: str) -> Array:
        """The Earth, the Sun or a planet from the centre of the Moon at t2, m."""
        if body == "earth":
            return -self.frame.moon_geocentric(self.t2.seconds)[0]
        place: Array = self.frame.distant(body, self.t2.seconds)[0] - self.t2.moon
        return place

    @cached_property
    def frame(self) -> EarthFrame:
        """Sun, Moon and planets around the tagged instants."""
        event = self.t1
        tdb2 = event.ladder["tt2"] + (event.tdb_minus_tt - event.seconds) / DAY
        return EarthFrame(self.model.ephemeris, event.ladder["tt1"], tdb2)


Effect = Callable[[Scene], Array]
"""From a scene to the effect of having made some choice, ps."""

Choice = Callable[[Scene], tuple[Model, Query]]
"""From a scene to the model and the query as somebody has them who made some choice."""


def turn(vector: Array, r: Array) -> Array:
    """By how much r changes when it is turned by a rotation vector (rad), of any size."""
    angle = norm(vector)
    once = cross(vector, r)
    changed: Array = np.sinc(angle / np.pi) * once + 0.5 * np.sinc(
        angle / (2.0 * np.pi)
    ) ** 2 * cross(vector, once)
    return changed


def rotation_vector(matrix: Array) -> Array:
    """The vector (3, n) of small rotations given as matrices (3, 3, n) that turn vectors."""
    m = matrix
    vector: Array = 0.5 * np.stack([m[2, 1] - m[1, 2], m[0, 2] - m[2, 0], m[1, 0] - m[0, 1]])
    return vector


def replace_sighting(event: Any, shift: Array, up: Array) -> Sighting:
    """A station event displaced, with another vertical."""
    return Sighting(event.position + shift, event.velocity, up)


def _longer(leg: Leg, near_shift: Any, far_shift: Any) -> Array:
    """By how much displacements of its ends lengthen a leg, m, without cancellation."""
    shift = np.asarray(far_shift) - np.asarray(near_shift)
    if shift.ndim == 0:
        return np.zeros_like(leg.distance)
    ray = leg.far.position - leg.near.position
    longer: Array = (2.0 * dot(ray, shift) + dot(shift, shift)) / (leg.distance + norm(ray + shift))
    return longer


def _clock(legs: Legs) -> Array:
    difference: Array = legs.down.near.tdb_minus_tt - legs.up.near.tdb_minus_tt
    return difference


def _to_gcrs(event: Any) -> Array:
    rung = event.ladder
    return rotation.terrestrial_to_celestial(
        rung["x_rad"], rung["y_rad"], rung["s_rad"], rung["era_rad"],
        rung["xp_rad"], rung["yp_rad"], rung["tt1"], rung["tt2"],
    )  # fmt: skip
