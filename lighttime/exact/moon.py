"""A reflector's event: where it is when a pulse meets it, at extended precision."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass
from typing import Any

from lighttime.constants import L_B, L_C, MOON_MEAN_RADIUS
from lighttime.exact.bodies import PLANETS, State, Tables
from lighttime.exact.numbers import Context, Matrix, Real, Vector, decimal
from lighttime.moon.tide import permanent_lunar_tide

__all__ = ["ReflectorEvent", "Target", "to_principal_axes"]

C = 299792458
H2, L2 = "0.0476", "0.0107"
"""Love and Shida numbers of the Moon. Source: Williams, Boggs & Folkner 2013 (from memory)."""


@dataclass(frozen=True, slots=True)
class ReflectorEvent:
    """A reflector at one instant; m, m/s, rad."""

    tdb: Real
    """Julian date."""
    earth: State
    moon: State
    sun: State
    librations: Vector
    """phi, theta, psi."""
    tide: Vector
    """Displacement along the principal axes."""
    principal: Vector
    """Position along the principal axes, tide included."""
    icrs: Vector
    """The same turned to the axes of the ICRS."""
    bcrs: Vector


class Target:
    """One reflector with the tables that say where it is.

    Parameters
    ----------
    ctx : context
    reflector : Reflector
        Its numbers are taken as they stand, without loss.
    ephemeris : Tables
    omit : collection of str
        Terms to leave out.
    """

    def __init__(
        self, ctx: Context, reflector: Any, ephemeris: Tables, omit: Collection[str]
    ) -> None:
        self.ctx = ctx
        self.reflector = reflector
        self.ephemeris = ephemeris
        self.omit = omit
        self.xyz = Vector.of(ctx, reflector.xyz_m)

    def event(self, tdb: Real) -> ReflectorEvent:
        """The reflector at a Julian date of TDB."""
        earth, moon = self.ephemeris.earth_and_moon(tdb)
        sun = self.ephemeris.sun(tdb)
        angles = self.ephemeris.librations(tdb)
        to_principal = to_principal_axes(self.ctx, angles)
        tide = self._tide(
            to_principal @ (earth.position - moon.position),
            to_principal @ (sun.position - moon.position),
        )
        principal = self.xyz * self._scale(tdb, moon) + tide
        g = to_principal.transposed @ principal
        return ReflectorEvent(
            tdb=tdb,
            earth=earth,
            moon=moon,
            sun=sun,
            librations=angles,
            tide=tide,
            principal=principal,
            icrs=g,
            bcrs=moon.position + self._contracted(g, moon.velocity),
        )

    def _contracted(self, g: Vector, v: Vector) -> Vector:
        """A selenocentric position in the BCRS: g - (V.g) V/(2 c^2). Source: Moyer 2000, 4.3.1."""
        if "reflector_contraction" in self.omit:
            return g
        return g - v * (v @ g / (2 * C**2))

    def _scale(self, tdb: Real, moon: State) -> Real:
        """What makes the coordinates TDB-compatible.

        1 for those of an ephemeris; 1 - U/c^2 - L_C for those scaled as terrestrial ones;
        1 - U/c^2 - L_B for unscaled ones, U the potential of the other bodies at the Moon.
        """
        ctx = self.ctx
        if self.reflector.scale == "tdb":
            return ctx.one
        bodies = self.ephemeris.all(tdb)
        potential = sum(
            self.ephemeris.gm[name] / (bodies[name].position - moon.position).norm()
            for name in ("sun", "earth", *PLANETS)
        )
        return 1 - potential / C**2 - decimal(ctx, L_C if self.reflector.scale == "tt" else L_B)

    def _tide(self, earth: Vector, sun: Vector) -> Vector:
        """Displacement by the tide that Earth and Sun raise, principal axes.

        GM_j R^4/(GM_M r_j^3) { h2 (3 c^2 - 1)/2 u + 3 l2 c (u_j - c u) }, c = u.u_j,
        u the direction of the reflector, u_j that of the body.

        Source: IERS Conventions (2010), TN36, equation 7.5, for the Moon.
        """
        ctx = self.ctx
        total = Vector(ctx.zero, ctx.zero, ctx.zero)
        if "lunar_tide" in self.omit:
            return total
        gm = self.ephemeris.gm
        up = self.xyz.unit()
        radius = decimal(ctx, MOON_MEAN_RADIUS)
        for body, position in (("earth", earth), ("sun", sun)):
            distance = position.norm()
            towards = position / distance
            c = up @ towards
            radial = up * (ctx.mpf(H2) * (3 * c * c - 1) / 2)
            tangential = (towards - up * c) * (3 * ctx.mpf(L2) * c)
            size = gm[body] / gm["moon"] * radius**4 / distance**3
            total = total + (radial + tangential) * size
        if self.reflector.contains_permanent_tide:
            masses = (float(gm[name]) for name in ("moon", "earth", "sun"))
            total = total - Vector.of(ctx, permanent_lunar_tide(self.reflector.xyz_m, *masses))
        return total


def to_principal_axes(ctx: Context, angles: Vector) -> Matrix:
    """Rz(psi) Rx(theta) Rz(phi). Source: Newhall & Williams 1997, Celest. Mech. 66, 21."""
    phi, theta, psi = angles
    return (
        Matrix.rotation(ctx, 3, psi) * Matrix.rotation(ctx, 1, theta) * Matrix.rotation(ctx, 3, phi)
    )
