"""Where a reflector is at an instant: from the Moon's principal axes to the BCRS."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from lighttime.constants import SPEED_OF_LIGHT
from lighttime.ephemeris.frame import EarthFrame
from lighttime.moon.libration import angular_velocity, principal_axes
from lighttime.moon.reflector import Reflector
from lighttime.moon.tide import lunar_tide, permanent_lunar_tide
from lighttime.vectors import Array, column, cross, dot, norm

c = SPEED_OF_LIGHT


@dataclass(frozen=True, eq=False)
class ReflectorEvent:
    """A reflector at an instant; vectors are (3, n) along BCRS axes, in metres.

    Attributes
    ----------
    seconds : ndarray
        TDB seconds after the tagged instant.
    position, velocity : ndarray
        In the working frame; velocity is barycentric, m/s.
    moon, moon_velocity : ndarray
        The Moon's centre in the working frame, and its barycentric velocity.
    displacement : mapping of str to ndarray
        What each term adds to `position`.
    ladder : mapping of str to ndarray
        Every intermediate value, in the order in which it was found.
    """

    seconds: Array
    position: Array
    velocity: Array
    moon: Array
    moon_velocity: Array
    displacement: Mapping[str, Array]
    ladder: Mapping[str, Array]


@dataclass(frozen=True, eq=False)
class RoughEvent:
    """A reflector before it is known well; see `path.solver.Event`."""

    seconds: Array
    position: Array
    velocity: Array


@dataclass(frozen=True, eq=False)
class ReflectorMotion:
    """A reflector as an end of the ray, around one tagged instant.

    Parameters
    ----------
    reflector : Reflector
    frame : EarthFrame
    h2, l2 : float
        Love and Shida number of the Moon.
    omit : frozenset of str
        Terms to leave out.
    """

    reflector: Reflector
    frame: EarthFrame
    h2: float
    l2: float
    omit: frozenset[str] = frozenset()

    def at(self, seconds: Array) -> ReflectorEvent:
        """The reflector `seconds` (TDB, shape (n,)) after the tagged instant."""
        frame = self.frame
        earth, earth_velocity = frame.earth(seconds)
        geocentric, geocentric_velocity = frame.moon_geocentric(seconds)
        moon, moon_velocity = earth + geocentric, earth_velocity + geocentric_velocity
        angles, rates = frame.libration(seconds)
        axes = principal_axes(angles)
        sun = frame.distant("sun", seconds)[0] - moon
        # -- principal axes -------------------------------------------------------------------
        nominal = column(self.reflector.xyz_m, seconds)
        local = nominal
        shifts: dict[str, Array] = {}
        if "lunar_tide" not in self.omit:
            tide = self._tide(nominal, _to(axes, -geocentric), _to(axes, sun))
            shifts["lunar_tide"] = _from(axes, tide)
            local = nominal + tide
        # -- BCRS -----------------------------------------------------------------------------
        icrs = _from(axes, local)
        position = moon + icrs
        scale_change = np.zeros_like(seconds)
        if "reflector_contraction" not in self.omit:
            scale_change = self._scale(seconds, moon)
            contraction = scale_change * icrs - moon_velocity * (
                dot(moon_velocity, icrs) / (2.0 * c**2)
            )
            shifts["reflector_contraction"] = contraction
            position = moon + (icrs + contraction)
        velocity = moon_velocity + cross(angular_velocity(angles, rates), icrs)
        ladder = {
            "libration_rad": angles, "libration_rate_rad_per_s": rates,
            "principal_axes_m": local, "icrs_m": icrs,
            "moon_geocentric_m": geocentric, "moon_velocity_m_per_s": moon_velocity,
            "earth_velocity_m_per_s": earth_velocity,
            "sun_from_moon_m": sun, "scale_change": scale_change,
        }  # fmt: skip
        return ReflectorEvent(seconds, position, velocity, moon, moon_velocity, shifts, ladder)

    def jumps(self, before: Array, after: Array) -> bool:
        """Whether records of the ephemeris meet between two instants; see `path.solver`."""
        return self.frame.crosses_seam(before, after)

    def rough(self, seconds: Array) -> RoughEvent:
        """The reflector without tide and contraction, turned on from the tagged instant.

        Good to a metre; its rate is good enough to find the instant of the bounce to 1e-8 s.
        """
        r, turn = self._rough_start
        frame = self.frame
        earth, earth_velocity = frame.earth(seconds)
        moon, moon_velocity = frame.moon_geocentric(seconds)
        spin = cross(turn, r)
        local = r + seconds * (spin + (0.5 * seconds) * cross(turn, spin))
        velocity = earth_velocity + moon_velocity + spin
        return RoughEvent(seconds, earth + moon + local, velocity)

    @cached_property
    def _rough_start(self) -> tuple[Array, Array]:
        """Reflector from the Moon's centre, and the Moon's angular velocity, when tagged."""
        angles, rates = self.frame.libration(np.zeros_like(self.frame.tdb2))
        r = _from(principal_axes(angles), column(self.reflector.xyz_m, self.frame.tdb2))
        return r, angular_velocity(angles, rates)

    def _tide(self, r: Array, earth: Array, sun: Array) -> Array:
        """Degree-2 tide in principal axes, less what the coordinates already contain."""
        gm = self.frame.ephemeris.gm
        tide = lunar_tide(r, earth, sun, gm("moon"), gm("earth"), gm("sun"), h2=self.h2, l2=self.l2)
        if self.reflector.contains_permanent_tide:
            tide = tide - permanent_lunar_tide(
                r, gm("moon"), gm("earth"), gm("sun"), h2=self.h2, l2=self.l2
            )
        return tide

    def _scale(self, seconds: Array, moon: Array) -> Array:
        """What the coordinates are multiplied by to become TDB-compatible, minus one."""
        if self.reflector.scale == "tdb":
            return np.zeros_like(seconds)
        frame = self.frame
        gm = frame.ephemeris.gm
        potential = gm("earth") / norm(frame.moon_geocentric(seconds)[0])
        for body in frame.distant_bodies:
            potential = potential + gm(body) / norm(frame.distant(body, seconds)[0] - moon)
        return self.reflector.scale_change(potential)


def _from(axes: Array, r: Array) -> Array:
    """Principal axes to ICRS."""
    x, y, z = r
    return np.stack([a[0] * x + a[1] * y + a[2] * z for a in axes])


def _to(axes: Array, r: Array) -> Array:
    """ICRS to principal axes."""
    return _from(axes.swapaxes(0, 1), r)
