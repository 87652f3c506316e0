"""One leg: the time light takes between a station's event and a reflector's."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass
from typing import Any

from lighttime.exact.bodies import BODIES, PLANETS, Tables
from lighttime.exact.gravity import Ray, delay, oblate_delay
from lighttime.exact.moon import ReflectorEvent
from lighttime.exact.numbers import Real
from lighttime.exact.station import Site, StationEvent
from lighttime.exact.times import DAY
from lighttime.exact.troposphere import boosted, mapping, zenith_delay

__all__ = ["Leg", "Path"]

C = 299792458


@dataclass(frozen=True, slots=True)
class Leg:
    """The time light takes on one leg, TDB seconds, and what it is made of."""

    seconds: Real
    geometry: Real
    gravity: dict[str, Real]
    """By body; that of the Earth contains its oblateness."""
    troposphere: Real
    elevation_deg: Real
    """Of the aberrated ray, in the rest frame of the station."""
    earth_oblateness: Real
    """The part of the Earth's gravity that is due to J2."""


class Path:
    """What lies between a station and a reflector.

    Parameters
    ----------
    site : Site
    ephemeris : Tables
    weather : Weather or None
        None: no troposphere.
    wavelength_nm : float
    gamma : mpf
        Curvature of space by unit mass, 1 in general relativity.
    omit : collection of str
    """

    def __init__(
        self,
        site: Site,
        ephemeris: Tables,
        weather: Any,
        wavelength_nm: float,
        gamma: Real,
        omit: Collection[str],
    ) -> None:
        self.site = site
        self.ephemeris = ephemeris
        self.weather = None if "troposphere" in omit else weather
        self.gamma = gamma
        self.omit = omit
        if self.weather is not None:
            self.zenith = zenith_delay(site.latitude, site.height, weather, wavelength_nm)

    def leg(self, station: StationEvent, reflector: ReflectorEvent) -> Leg:
        """Up when the station's event is the earlier one, down when it is the later."""
        ctx = station.tdb.context
        line = reflector.bcrs - station.bcrs
        geometry = line.norm() / C
        gravity, oblateness = self._gravity(station, reflector)
        sine = self._sine_of_elevation(station, reflector)
        troposphere = ctx.zero
        if self.weather is not None:
            temperature = self.weather.temperature_k
            factor = mapping(sine, self.site.latitude, self.site.height, temperature)
            troposphere = self.zenith * factor / C
        return Leg(
            seconds=geometry + sum(gravity.values()) + troposphere,
            geometry=geometry,
            gravity=gravity,
            troposphere=troposphere,
            elevation_deg=ctx.asin(sine) * 180 / ctx.pi,
            earth_oblateness=oblateness,
        )

    def _gravity(
        self, station: StationEvent, reflector: ReflectorEvent
    ) -> tuple[dict[str, Real], Real]:
        """Delay by each body, and what the Earth's J2 has in it."""
        ctx = station.tdb.context
        after = (reflector.tdb - station.tdb) * DAY
        delays = dict.fromkeys(BODIES, ctx.zero)
        oblateness = ctx.zero
        for name in BODIES:
            if f"{'planet' if name in PLANETS else name}_gravity" in self.omit:
                continue
            ray = Ray.past(station.bodies[name], station.bcrs, reflector.bcrs, after)
            delays[name] = delay(ray, self.ephemeris.gm[name], self.gamma)
            if name == "earth":
                figure = self.ephemeris.figure_of_earth(station.earth.cip)
                oblateness = oblate_delay(ray, self.ephemeris.gm[name], self.gamma, figure)
                delays[name] += oblateness
        return delays, oblateness

    @staticmethod
    def _sine_of_elevation(station: StationEvent, reflector: ReflectorEvent) -> Real:
        """Of the ray as it leaves or reaches the moving station."""
        towards = (reflector.bcrs - station.bcrs).unit()
        if station.tdb < reflector.tdb:
            seen = boosted(towards, station.velocity)
        else:
            seen = -boosted(-towards, station.velocity)
        return seen @ station.zenith
