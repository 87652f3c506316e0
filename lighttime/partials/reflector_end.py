"""What moves the reflector at one event, and what that does to the leg."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from lighttime.constants import MOON_MEAN_RADIUS, SPEED_OF_LIGHT
from lighttime.model import Model
from lighttime.moon.libration import angular_velocity, principal_axes
from lighttime.moon.motion import ReflectorEvent
from lighttime.moon.reflector import Reflector
from lighttime.moon.tide import permanent_tensor
from lighttime.partials.leg import LegSlopes
from lighttime.partials.tide import Tide, source
from lighttime.vectors import Array, column, cross, dot, norm

c = SPEED_OF_LIGHT


@dataclass(frozen=True, eq=False)
class ReflectorEnd:
    """One end of a leg, a reflector on the Moon. Rows are along ICRS axes unless said.

    Parameters
    ----------
    model : Model
    reflector : Reflector
    event : ReflectorEvent
    slopes : LegSlopes
        Of the leg that ends there.
    """

    model: Model
    reflector: Reflector
    event: ReflectorEvent
    slopes: LegSlopes

    @cached_property
    def axes(self) -> Array:
        """The principal axes of the Moon in the ICRS, (3, 3, n)."""
        return principal_axes(self.event.ladder["libration_rad"])

    @cached_property
    def tide(self) -> Tide | None:
        """The tide of the solid Moon less what the coordinates contain, principal axes."""
        if "lunar_tide" in self.model.omit:
            return None
        rung, gm = self.event.ladder, self.model.ephemeris.gm
        masses = gm("moon"), gm("earth"), gm("sun")
        xyz = np.asarray(self.reflector.xyz_m)
        bodies = -rung["moon_geocentric_m"], rung["sun_from_moon_m"]
        contained = self.reflector.contains_permanent_tide
        return Tide(
            column(xyz / norm(xyz), self.event.seconds) + np.zeros_like(self.event.position),
            tuple(
                source(mass / masses[0], MOON_MEAN_RADIUS, self.to_principal(body))
                for mass, body in zip(masses[1:], bodies, strict=True)
            ),
            self.model.moon_h2,
            self.model.moon_l2,
            permanent_tensor(*masses) if contained else None,
        )

    def to_principal(self, row: Array) -> Array:
        """From ICRS axes to principal axes."""
        turned: Array = np.einsum("ij...,i...->j...", self.axes, row)
        return turned

    def to_icrs(self, row: Array) -> Array:
        """From principal axes to ICRS axes."""
        turned: Array = np.einsum("ij...,j...->i...", self.axes, row)
        return turned

    # -- rows: derivatives of the leg, s/m -----------------------------------------------------

    @cached_property
    def by_icrs(self) -> Array:
        """By the position from the Moon's centre before contraction."""
        row, event = self.slopes.far, self.event
        if "reflector_contraction" in self.model.omit:
            return row
        v = event.moon_velocity
        return (1.0 + event.ladder["scale_change"]) * row - v * (dot(v, row) / (2.0 * c**2))

    @cached_property
    def by_principal(self) -> Array:
        """The same row along principal axes."""
        return self.to_principal(self.by_icrs)

    @cached_property
    def by_place(self) -> Array:
        """By the coordinates of the reflector, principal axes: the tide changes with them."""
        row = self.by_principal
        if self.tide is None:
            return row
        return row + self.tide.by_place(row, math.hypot(*self.reflector.xyz_m))

    @cached_property
    def by_rotation(self) -> Array:
        """By a rotation of the Moon about the axes of the ICRS, s/rad.

        Its tide stays with Earth and Sun, and changes only with the direction of the place.
        """
        row, fixed = self.by_principal, self.event.ladder["principal_axes_m"]
        turn = np.zeros_like(row)
        if self.tide is not None:
            moving = Tide(self.tide.u, self.tide.sources, self.tide.h, self.tide.l)
            fixed = fixed - moving.displacement()
            turn = cross(moving.u, moving.by_direction(row))
        return self.to_icrs(turn + cross(fixed, row))

    @cached_property
    def by_earth(self) -> Array:
        """By the position of the Earth as seen from the Moon, through the tide."""
        if self.tide is None:
            return np.zeros_like(self.by_icrs)
        distance = norm(self.event.ladder["moon_geocentric_m"])
        return self.to_icrs(self.tide.by_source(self.by_principal, 0, distance))

    # -- axes of rotation ----------------------------------------------------------------------

    @cached_property
    def libration_axes(self) -> tuple[Array, Array, Array]:
        """Rotations of the Moon, ICRS, that phi, theta and psi bring about, per radian."""
        angles = self.event.ladder["libration_rad"]
        unit = np.eye(3)
        phi, theta, psi = (
            angular_velocity(angles, column(rate, self.event.seconds)) + 0.0 * angles
            for rate in unit
        )
        return phi, theta, psi
