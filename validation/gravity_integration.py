"""The gravitational delay in closed form against an integration along the ray.

The first post-Minkowskian delay of light that passes a moving mass, from the retarded field,

    delay = (1 + gamma) GM/c^2 integral of G (1 - k.v/c)^2 / (R - R.v/c) dt,

k the direction of the ray, R(t) = x(t) - X(s) from where the body was at the retarded time s,
c (t - s) = |R|, v its velocity then, G = (1 - v^2/c^2)^(-1/2). Source: Kopeikin & Schaefer 1999,
Phys. Rev. D 60, 124002 (field of Lienard and Wiechert); Klioner 2003, Astron.
Astrophys. 404, 783. For gamma other than 1 the same, since the field in the body's rest frame is
2U/c^2 (1, gamma, gamma, gamma) and the ray sees it by the square of the frequency there.

The body moves as the ephemeris has it, accelerated; the closed form (`lighttime.exact.gravity`)
takes a straight line from its state at the station's event. Along the ray the variable is u,
with sinh(u) the distance from the closest approach over the impact parameter: 1/R becomes nearly
constant, and Gauss-Legendre quadrature in mpmath converges at once.

Exits with 1 when closed form and integral differ by 0.1 fs or more anywhere.
"""

from __future__ import annotations

import random
import sys
from collections.abc import Callable
from dataclasses import dataclass

from lighttime.exact.bodies import BODIES, State, Tables, de421
from lighttime.exact.gravity import Oblateness, Ray, delay, oblate_delay
from lighttime.exact.numbers import Context, Real, Vector

C = 299792458
DAY = 86400
DIGITS = 25
FEMTOSECOND = 1e-15
LIMIT = 0.1 * FEMTOSECOND
GEOMETRIES = 500
PIECE = 2
"""Range of u that is given one set of nodes."""
GRAZING = 60
AU = 149597870700
RADIUS = {"sun": 695_700_000, "earth": 6_378_137, "moon": 1_737_400, "jupiter": 71_492_000}
EARTH_SPIN = 5.86e33
"""Angular momentum, kg m^2/s (from memory)."""
NEWTON = 6.674e-11
"""m^3/(kg s^2)."""

Worldline = Callable[[Real], tuple[Vector, Vector]]
"""Barycentric position (m) and velocity (m/s) of a body, by seconds after the station's event."""


@dataclass(frozen=True)
class Light:
    """A straight ray between a station's event (time 0) and a far one."""

    station: Vector
    far: Vector
    far_after: Real
    """Seconds, negative on a downlink."""


# --- the integral ---------------------------------------------------------------------------


def integrate(
    ctx: Context, light: Light, worldline: Worldline, weight: Callable[[Vector, Real], Real]
) -> tuple[Real, Real]:
    """Integral over the ray of the retarded field, and the quadrature's own estimate of error.

    `weight` gives the potential over GM, 1/m, of a body at rest from the position relative to
    it and the retarded distance R - R.v/c (times G: the distance in the body's rest frame).
    """
    early, late = (light.station, light.far) if light.far_after > 0 else (light.far, light.station)
    start = light.far_after if light.far_after < 0 else ctx.zero
    length = (late - early).norm()
    k = (late - early) / length
    duration = abs(light.far_after)

    def field(along: Real) -> Real:
        t = start + duration * along / length
        x = early + k * along
        retarded = t
        for _ in range(7):  # Newton's method
            position, velocity = worldline(retarded)
            separation = x - position
            apart = separation.norm()
            step = (t - retarded - apart / C) / (1 - separation @ velocity / (apart * C))
            if abs(step) < 1e-12:
                break
            retarded += step
        beta = velocity / C
        g = 1 / ctx.sqrt(1 - beta @ beta)
        distance = g * (separation.norm() - separation @ beta)
        return g**2 * (1 - k @ beta) ** 2 * weight(separation, distance)

    nearest = length / 2
    for _ in range(3):  # the closest approach to where the body is when the light is there
        passing = start + duration * min(max(nearest / length, ctx.zero), ctx.one)
        centre = worldline(passing)[0]
        nearest = (centre - early) @ k
    impact = max((early + k * nearest - centre).norm(), length / 10**9)

    def in_u(u: Real) -> Real:
        return field(nearest + impact * ctx.sinh(u)) * impact * ctx.cosh(u)

    first, last = (ctx.asinh((limit - nearest) / impact) for limit in (ctx.zero, length))
    pieces = 1 + int((last - first) / PIECE)
    ends = [first + (last - first) * n / pieces for n in range(pieces + 1)]
    degree = 2 if impact > length else 3  # 6 or 12 nodes
    value, error = ctx.quad(in_u, ends, method="gauss-legendre", maxdegree=degree, error=True)
    return value, error


def monopole(_: Vector, distance: Real) -> Real:
    """1/r in the rest frame."""
    return 1 / distance


def quadrupole(shape: Oblateness) -> Callable[[Vector, Real], Real]:
    """-J2 a^2 (3 (s.x)^2 - r^2)/(2 r^5); here motion does not matter (1e-4 of 16 fs)."""

    def weight(x: Vector, _: Real) -> Real:
        r = x.norm()
        return -shape.j2 * shape.radius**2 * (3 * (shape.axis @ x) ** 2 - r * r) / (2 * r**5)

    return weight


# --- geometries -----------------------------------------------------------------------------


def direction(ctx: Context, rng: random.Random) -> Vector:
    """Any direction."""
    return Vector(*(ctx.mpf(rng.gauss(0.0, 1.0)) for _ in range(3))).unit()


def tilted(ctx: Context, rng: random.Random, axis: Vector, cosine: float) -> Vector:
    """A direction at that angle from an axis."""
    other = direction(ctx, rng)
    across = (other - axis * (other @ axis)).unit()
    return axis * ctx.mpf(cosine) + across * ctx.sqrt(1 - ctx.mpf(cosine) ** 2)


def earth_to_moon(tables: Tables, rng: random.Random, index: int) -> tuple[Real, Light]:
    """A ray between the ground and the near side of the Moon, and the TDB of its station's event.

    In one of eight the ray grazes the Earth, in one the Moon, in one both; one is vertical.
    """
    ctx = tables.ctx
    grazes_earth, grazes_moon = index % 8 in (0, 2), index % 8 in (1, 2)
    tdb = ctx.mpf(2440222.5) + ctx.mpf(rng.uniform(0.0, 81 * 365.25))
    way = rng.choice((1, -1))
    earth, moon = tables.earth_and_moon(tdb)
    towards = (moon.position - earth.position).unit()
    elevated = 0.0 if grazes_earth else 1.0 if index % 8 == 3 else rng.random()
    ground = tilted(ctx, rng, towards, elevated) * ctx.mpf(RADIUS["earth"] + rng.uniform(0, 4000))
    facing = 0.0 if grazes_moon else rng.random()
    on_moon = tilted(ctx, rng, -towards, facing) * ctx.mpf(RADIUS["moon"])
    station = earth.position + ground
    after = ctx.mpf(way) * ctx.mpf("1.28")
    for _ in range(8):
        far = tables.state("moon", tdb + after / DAY).position + on_moon
        after = way * (far - station).norm() / C
    return tdb, Light(station, far, after)


def past_a_body(ctx: Context, rng: random.Random, body: str) -> tuple[State, Light]:
    """A long ray that passes a body in uniform motion at 1 to 3 of its radii."""
    line = direction(ctx, rng)
    across = tilted(ctx, rng, line, 0.0)
    near, far = (
        (AU, rng.uniform(0.1, 10) * AU)
        if body in ("sun", "jupiter")
        else (4e8, rng.uniform(1, 9) * 4e8)
    )
    miss = across * ctx.mpf(RADIUS[body] * rng.uniform(1.0, 3.0))
    velocity = direction(ctx, rng) * ctx.mpf(rng.uniform(0.0, 60e3))
    after = ctx.mpf(near + far) / C * rng.choice((1, -1))
    # The body is where the ray passes when the light is there.
    position = Vector(ctx.zero, ctx.zero, ctx.zero) - velocity * (after * near / (near + far))
    station, target = miss - line * ctx.mpf(near), miss + line * ctx.mpf(far)
    return State(position, velocity), Light(station, target, after)


# --- the rest of gravity: sizes ---------------------------------------------------------------


def second_order(gm: Real, x1: Vector, x2: Vector) -> Real:
    """Second post-Minkowskian delay of a mass at rest, s, gamma = 1, isotropic coordinates.

    (GM)^2/c^5 r12/(r1 r2) [15/4 arccos(n1.n2)/|n1 x n2| - 4/(1 + n1.n2)]
    Source: Teyssandier & Le Poncin-Lafitte 2008, Class. Quantum Grav. 25, 145020 (from memory;
    on a radial ray it is 7/4, as the metric itself gives).
    """
    n1, n2 = x1.unit(), x2.unit()
    cosine = n1 @ n2
    ctx = gm.context
    angle = 2 * ctx.asin((n1 - n2).norm() / 2)
    ratio = angle / ctx.sin(angle) if angle else ctx.one
    bracket = ctx.mpf(15) / 4 * ratio - 4 / (1 + cosine)
    return gm**2 / C**5 * (x2 - x1).norm() / (x1.norm() * x2.norm()) * bracket


def spin_delay(x1: Vector, x2: Vector) -> float:
    """Largest delay by the Earth's rotation dragging the field, s: 2GS/c^4 |x1 x k| int dl/r^3."""
    r1, r2 = x1.norm(), x2.norm()
    along = (x2 - x1).norm()
    k = (x2 - x1) / along
    lever = (x1 - k * (x1 @ k)).norm()
    integral = along * (r1 + r2) / (r1 * r2 * (r1 * r2 + x1 @ x2))
    return 2 * NEWTON * EARTH_SPIN / C**4 * float(lever * integral)


# --- the comparison -------------------------------------------------------------------------


@dataclass
class Row:
    """What was seen of one body, seconds."""

    least: float = 1.0
    most: float = 0.0
    off: float = 0.0
    error: float = 0.0
    count: int = 0

    def add(self, closed: Real, integral: Real, error: Real) -> None:
        """One more geometry."""
        self.least = min(self.least, abs(float(closed)))
        self.most = max(self.most, abs(float(closed)))
        self.off = max(self.off, abs(float(closed - integral)))
        self.error = max(self.error, float(error))
        self.count += 1

    def line(self, name: str) -> str:
        """For the table."""
        return (
            f"{name:<26}{self.count:>6}{self.least / 1e-12:>18.6f}{self.most / 1e-12:>18.6f}"
            f"{self.off / FEMTOSECOND:>14.1e}{self.error / FEMTOSECOND:>14.1e}"
        )


HEAD = (
    f"{'body':<26}{'rays':>6}{'least / ps':>18}{'most / ps':>18}"
    f"{'differ / fs':>14}{'quad / fs':>14}"
)


def compare_moon_rays(tables: Tables, count: int) -> tuple[dict[str, Row], dict[str, float]]:
    """Rays between Earth and Moon, every body, bodies as the ephemeris moves them."""
    ctx = tables.ctx
    rng = random.Random(20080330)
    rows = {name: Row() for name in (*BODIES, "earth, J2 alone")}
    sizes = dict.fromkeys(("sun, second order", "earth, second order", "earth, spin"), 0.0)
    for index in range(count):
        tdb, light = earth_to_moon(tables, rng, index)
        gamma = ctx.mpf(rng.choice((1.0, 1.0, 0.5, 1.5, rng.uniform(0.9, 1.1))))
        for body in BODIES:
            worldline = _as_in(tables, body, tdb)
            ray = Ray.past(tables.state(body, tdb), light.station, light.far, light.far_after)
            scale = (1 + gamma) * tables.gm[body] / C**3
            value, error = integrate(ctx, light, worldline, monopole)
            rows[body].add(delay(ray, tables.gm[body], gamma), scale * value, scale * error)
            if body == "earth":
                figure = tables.figure_of_earth(Vector(ctx.zero, ctx.zero, ctx.one))
                value, error = integrate(ctx, light, worldline, quadrupole(figure))
                closed = oblate_delay(ray, tables.gm[body], gamma, figure)
                rows["earth, J2 alone"].add(closed, scale * value, scale * error)
                _larger(sizes, "earth, spin", spin_delay(ray.near, ray.far))
            if body in ("earth", "sun"):
                second = second_order(tables.gm[body], ray.near, ray.far)
                _larger(sizes, f"{body}, second order", float(second))
    return rows, sizes


def _as_in(tables: Tables, body: str, tdb: Real) -> Worldline:
    def worldline(after: Real) -> tuple[Vector, Vector]:
        state = tables.state(body, tdb + after / DAY)
        return state.position, state.velocity

    return worldline


def _larger(sizes: dict[str, float], name: str, value: float) -> None:
    sizes[name] = max(sizes[name], abs(value))


def compare_grazing_rays(tables: Tables, count: int) -> dict[str, Row]:
    """Long rays at 1 to 3 radii from a body in uniform motion."""
    ctx = tables.ctx
    rng = random.Random(19690721)
    rows = {f"{body}, grazing": Row() for body in RADIUS}
    for body in RADIUS:
        for _ in range(count):
            state, light = past_a_body(ctx, rng, body)
            gamma = ctx.mpf(rng.uniform(0.5, 1.5))

            def uniform(after: Real, state: State = state) -> tuple[Vector, Vector]:
                return state.position + state.velocity * after, state.velocity

            ray = Ray.past(state, light.station, light.far, light.far_after)
            scale = (1 + gamma) * tables.gm[body] / C**3
            value, error = integrate(ctx, light, uniform, monopole)
            closed = delay(ray, tables.gm[body], gamma)
            rows[f"{body}, grazing"].add(closed, scale * value, scale * error)
    return rows


def main(count: int = GEOMETRIES) -> int:
    """Print the tables; 0 when all is within the limit."""
    tables = de421(DIGITS)
    rows, sizes = compare_moon_rays(tables, count)
    print(f"Rays between Earth and Moon, one way, 1969 to 2050, gamma 0.5 to 1.5: {count} each")
    print(HEAD)
    for name, row in rows.items():
        print(row.line(name))
    grazing = compare_grazing_rays(tables, GRAZING)
    print(f"\nLong rays at 1 to 3 radii from a body in uniform motion (to 60 km/s): {GRAZING} each")
    print(HEAD)
    for name, row in grazing.items():
        print(row.line(name))
    print("\nWhat the closed form leaves out, largest of the rays between Earth and Moon, fs")
    for name, size in sizes.items():
        print(f"{name:<26}{size / FEMTOSECOND:>12.1e}")
    off = max(row.off for row in (*rows.values(), *grazing.values()))
    ok = off < LIMIT
    print(f"\nlargest difference {off / FEMTOSECOND:.1e} fs, limit 0.1: {'ok' if ok else 'MISS'}")
    return 0 if ok else 1


if __name__ == "__main__":
    sys.exit(main(*map(int, sys.argv[1:2])))
