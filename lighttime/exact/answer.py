"""What the twin answers: seconds, legs, and every rung on the way to them."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from types import MappingProxyType

import mpmath

from lighttime.exact.bodies import BODIES
from lighttime.exact.leg import Leg
from lighttime.exact.moon import ReflectorEvent
from lighttime.exact.numbers import Real, Vector, plain
from lighttime.exact.station import StationEvent
from lighttime.exact.times import tt_to_tai

__all__ = ["ExactAnswer", "ExactLeg"]


@dataclass(frozen=True)
class ExactLeg:
    """One leg: TDB seconds as mpf.

    Attributes
    ----------
    seconds : mpf
        The sum of the following.
    geometry : mpf
        Distance in barycentric space over c.
    gravity : mapping of str to mpf
        By body.
    troposphere : mpf
        Zero when no weather was given.
    elevation_deg : mpf
        Of the aberrated ray in the rest frame of the station, degrees.
    earth_oblateness : mpf
        What J2 has in the Earth's gravity.
    """

    seconds: Real
    geometry: Real
    gravity: Mapping[str, Real]
    troposphere: Real
    elevation_deg: Real
    earth_oblateness: Real

    @classmethod
    def of(cls, leg: Leg) -> ExactLeg:
        """From the working numbers."""
        return cls(
            seconds=plain(leg.seconds),
            geometry=plain(leg.geometry),
            gravity=MappingProxyType({body: plain(leg.gravity[body]) for body in BODIES}),
            troposphere=plain(leg.troposphere),
            elevation_deg=plain(leg.elevation_deg),
            earth_oblateness=plain(leg.earth_oblateness),
        )


@dataclass(frozen=True)
class ExactAnswer:
    """A light time at extended precision.

    Attributes
    ----------
    seconds : mpf
        Round trip: seconds of the station's clock (TT, UTC) from transmission to reception.
        One way: TDB seconds from one event to the other.
    uplink, downlink : ExactLeg or None
    clock : mpf
        What the change from TDB to the station's TT adds, s.
    digits : int
        Decimal digits that hold.
    """

    seconds: Real
    uplink: ExactLeg | None
    downlink: ExactLeg | None
    clock: Real
    digits: int
    _rungs: Mapping[str, Real] = field(repr=False)

    def worksheet(self) -> Mapping[str, Real]:
        """Every intermediate number, in order, by a name that ends in its unit.

        ``t1``, ``t2``, ``t3`` are transmission, bounce and reception. Vectors are three entries.
        Numbers are mpf with all their digits; `text` prints them.
        """
        return self._rungs

    def text(self, digits: int | None = None) -> str:
        """The worksheet for people, one number a line."""
        shown = digits or self.digits
        width = max(map(len, self._rungs))
        return "\n".join(
            f"{name:<{width}}  {mpmath.nstr(value, shown)}" for name, value in self._rungs.items()
        )

    def __str__(self) -> str:
        return f"{mpmath.nstr(self.seconds, self.digits)} s"


def rungs_of_station(tag: str, event: StationEvent) -> Iterator[tuple[str, Real]]:
    """Of a station's event: scales, rotation, positions."""
    earth = event.earth
    yield f"{tag}_tai_jd", tt_to_tai(earth.tt)
    yield f"{tag}_tt_jd", earth.tt
    yield f"{tag}_ut1_jd", earth.ut1
    yield f"{tag}_tdb_jd", event.tdb
    yield f"{tag}_tdb_minus_tt_s", event.tdb_minus_tt
    yield f"{tag}_series_ut1_minus_tai_s", earth.pole.ut1_minus_tai
    yield f"{tag}_series_xp_rad", earth.pole.xp
    yield f"{tag}_series_yp_rad", earth.pole.yp
    yield f"{tag}_series_dx_rad", earth.pole.dx
    yield f"{tag}_series_dy_rad", earth.pole.dy
    yield f"{tag}_xp_rad", earth.xp
    yield f"{tag}_yp_rad", earth.yp
    yield f"{tag}_cip_x_rad", earth.cip.x
    yield f"{tag}_cip_y_rad", earth.cip.y
    yield f"{tag}_s_rad", earth.s
    yield f"{tag}_era_rad", earth.era
    for name, displacement in event.displacements.items():
        yield from _components(f"{tag}_{name}", displacement, "m")
    yield from _components(f"{tag}_station_itrf", event.itrf, "m")
    yield from _components(f"{tag}_station_gcrs", event.gcrs, "m")
    yield from _components(f"{tag}_station_bcrs", event.bcrs, "m")
    yield from _components(f"{tag}_station_velocity", event.velocity, "m_per_s")
    yield from _components(f"{tag}_earth", event.bodies["earth"].position, "m")
    yield from _components(f"{tag}_earth_velocity", event.bodies["earth"].velocity, "m_per_s")
    yield from _components(f"{tag}_sun", event.bodies["sun"].position, "m")


def rungs_of_reflector(event: ReflectorEvent) -> Iterator[tuple[str, Real]]:
    """Of the reflector's event: Moon, libration, positions."""
    yield "t2_tdb_jd", event.tdb
    yield from _components("t2_earth", event.earth.position, "m")
    yield from _components("t2_moon", event.moon.position, "m")
    yield from _components("t2_moon_velocity", event.moon.velocity, "m_per_s")
    for name, angle in zip(("phi", "theta", "psi"), event.librations, strict=True):
        yield f"t2_{name}_rad", angle
    yield from _components("t2_lunar_tide", event.tide, "m")
    yield from _components("t2_reflector_principal", event.principal, "m")
    yield from _components("t2_reflector_icrs", event.icrs, "m")
    yield from _components("t2_reflector_bcrs", event.bcrs, "m")


def rungs_of_leg(name: str, leg: Leg) -> Iterator[tuple[str, Real]]:
    """Of one leg: what its seconds are made of."""
    yield f"{name}_geometry_s", leg.geometry
    for body, delay in leg.gravity.items():
        yield f"{name}_{body}_gravity_s", delay
    yield f"{name}_earth_oblateness_s", leg.earth_oblateness
    yield f"{name}_elevation_deg", leg.elevation_deg
    yield f"{name}_troposphere_s", leg.troposphere
    yield f"{name}_s", leg.seconds


def _components(name: str, vector: Vector, unit: str) -> Iterator[tuple[str, Real]]:
    for axis, component in zip("xyz", vector, strict=True):
        yield f"{name}_{axis}_{unit}", component
