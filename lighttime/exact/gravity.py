"""Delay of light in the field of a moving body, in closed form.

In the rest frame of a body the delay is that of a field at rest; the interval between two
events is the same in every frame, and ties the delay there to the delay in barycentric time.
"""

from __future__ import annotations

from dataclasses import dataclass

from lighttime.exact.numbers import Real, Vector

__all__ = ["Oblateness", "Ray", "State", "delay", "in_rest_frame", "oblate_delay"]

C = 299792458


@dataclass(frozen=True, slots=True)
class State:
    """Barycentric position (m) and velocity (m/s), axes of the ICRS."""

    position: Vector
    velocity: Vector


@dataclass(frozen=True, slots=True)
class Ray:
    """Two events that light joins, seen from one body.

    Parameters
    ----------
    near, far : Vector
        Positions of the events relative to the body at the reference instant, m.
    near_after, far_after : mpf
        Time of the events after the reference instant, s.
    velocity : Vector
        Of the body, m/s: it moves on a straight line from where it is at that instant.
    """

    near: Vector
    far: Vector
    near_after: Real
    far_after: Real
    velocity: Vector

    @classmethod
    def past(cls, body: State, station: Vector, reflector: Vector, after: Real) -> Ray:
        """From a station's event, where the body's `State` is taken, to the reflector's."""
        return cls(
            station - body.position, reflector - body.position, after * 0, after, body.velocity
        )


@dataclass(frozen=True, slots=True)
class Oblateness:
    """J2, the equatorial radius it goes with (m), and the direction of the axis."""

    j2: Real
    radius: Real
    axis: Vector


def in_rest_frame(ray: Ray) -> tuple[Vector, Vector]:
    """Positions of the two events in the body's rest frame, m.

    x' = x + ((g - 1) (x.v)/v^2 - g t) v, g = (1 - v^2/c^2)^(-1/2)
    """
    v = ray.velocity
    squared = v @ v
    ctx = squared.context
    g = 1 / ctx.sqrt(1 - squared / C**2)
    stretch = g**2 / (1 + g) / C**2  # (g - 1)/v^2, which holds for a body at rest too

    def boosted(x: Vector, t: Real) -> Vector:
        return x + v * (stretch * (x @ v) - g * t)

    return boosted(ray.near, ray.near_after), boosted(ray.far, ray.far_after)


def delay(ray: Ray, gm: Real, gamma: Real) -> Real:
    """Delay by a spherical body, s.

    (1 + gamma) GM/c^3 ln[(r1 + r2 + r12)/(r1 + r2 - r12)] in the rest frame, times r12'/r12.

    Source: Shapiro 1964, Phys. Rev. Lett. 13, 789; in a moving frame Klioner 2003, Astron.
    Astrophys. 404, 783 (a body in uniform motion by a Lorentz transformation).
    """
    x1, x2 = in_rest_frame(ray)
    along = (x2 - x1).norm()
    both = x1.norm() + x2.norm()
    log = gm.context.log((both + along) / (both - along))
    return (1 + gamma) * gm / C**3 * log * along / (ray.far - ray.near).norm()


def oblate_delay(ray: Ray, gm: Real, gamma: Real, shape: Oblateness) -> Real:
    """What the second zonal harmonic of the body adds to `delay`, s.

    Its potential is -(J2 a^2/2) times the second derivative of GM/r along the axis s, and so is
    its delay of the logarithm in `delay`, r12 staying as it is. With S = r1 + r2,
    S' = s.(x1/r1 + x2/r2), S'' = (1 - (s.x1/r1)^2)/r1 + (1 - (s.x2/r2)^2)/r2:

    (1 + gamma) GM/c^3 J2 a^2 r12 [ S''/(S^2 - r12^2) - 2 S S'^2/(S^2 - r12^2)^2 ]
    """
    x1, x2 = in_rest_frame(ray)
    r1, r2, along = x1.norm(), x2.norm(), (x2 - x1).norm()
    sine1, sine2 = shape.axis @ x1 / r1, shape.axis @ x2 / r2
    both = r1 + r2
    slope = sine1 + sine2
    bend = (1 - sine1**2) / r1 + (1 - sine2**2) / r2
    denominator = both**2 - along**2
    bracket = bend / denominator - 2 * both * slope**2 / denominator**2
    scale = (1 + gamma) * gm / C**3 * shape.j2 * shape.radius**2
    return scale * along * bracket * along / (ray.far - ray.near).norm()
