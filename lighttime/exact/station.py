"""A station's event: where it is when a pulse leaves or arrives, at extended precision."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass
from typing import Any

import numpy as np

from lighttime.constants import GRS80_INVERSE_FLATTENING, L_C, WGS84_SEMI_MAJOR_AXIS
from lighttime.earth.displacement import displacements, residual_motion
from lighttime.earth.tides import solid_earth_tide
from lighttime.exact.bodies import PLANETS, State, Tables
from lighttime.exact.numbers import Context, Real, Vector, decimal, split_day
from lighttime.exact.orientation import Orientation, Series
from lighttime.exact.times import DAY, tdb_minus_tt

__all__ = ["Site", "StationEvent", "geodetic"]

C = 299792458


@dataclass(frozen=True, slots=True)
class StationEvent:
    """A station at one instant; positions in m, velocities in m/s."""

    tdb: Real
    """Julian date."""
    tdb_minus_tt: Real
    """Seconds."""
    earth: Orientation
    displacements: dict[str, Vector]
    """ITRF, by name of the term."""
    itrf: Vector
    gcrs: Vector
    bcrs: Vector
    velocity: Vector
    """BCRS."""
    zenith: Vector
    """Unit vector to the geodetic zenith, GCRS."""
    bodies: dict[str, State]
    """Every body that delays light, BCRS, at this instant."""


def geodetic(xyz: Vector) -> tuple[Real, Real]:
    """Geodetic latitude (rad) and height (m) on the GRS80 ellipsoid.

    tan(latitude) = (z + e^2 N sin(latitude))/p, repeated until it stands still.
    """
    ctx = xyz.x.context
    flattening = 1 / decimal(ctx, GRS80_INVERSE_FLATTENING)
    a = decimal(ctx, WGS84_SEMI_MAJOR_AXIS)
    e2 = flattening * (2 - flattening)
    p = ctx.hypot(xyz.x, xyz.y)
    sine = xyz.z / xyz.norm()
    while True:
        n = a / ctx.sqrt(1 - e2 * sine**2)
        north = xyz.z + e2 * n * sine
        before, sine = sine, north / ctx.hypot(p, north)
        if abs(sine - before) < 8 * ctx.eps:
            break
    cosine = ctx.sqrt(1 - sine**2)
    height = p * cosine + xyz.z * sine - a * ctx.sqrt(1 - e2 * sine**2)
    return ctx.atan2(north, p), height


class Site:
    """One station with the tables that say where it goes.

    Parameters
    ----------
    ctx : context
    station : Station
        Its numbers are taken as they stand, without loss.
    ephemeris : Tables
    series : Series
        Pole and UT1.
    omit : collection of str
        Terms to leave out.
    """

    def __init__(
        self, ctx: Context, station: Any, ephemeris: Tables, series: Series, omit: Collection[str]
    ) -> None:
        self.ctx = ctx
        self.station = station
        self.ephemeris = ephemeris
        self.series = series
        self.omit = omit
        self.xyz = Vector.of(ctx, station.xyz_m)
        self.drift = Vector.of(ctx, station.velocity_m_per_yr)
        self.latitude, self.height = geodetic(self.xyz)
        at_pole = not (self.xyz.x or self.xyz.y)
        longitude = ctx.zero if at_pole else ctx.atan2(self.xyz.y, self.xyz.x)
        self.cos_lon, self.sin_lon = ctx.cos_sin(longitude)
        flat, steep = ctx.cos_sin(self.latitude)
        self.up = Vector(flat * self.cos_lon, flat * self.sin_lon, steep)

    # -- the clock ---------------------------------------------------------------------------

    def tdb_of_tt(self, tt: Real) -> Real:
        """Julian date, TDB, when a clock at the station shows TT."""
        ut1 = tt + self._ut1_minus_tt(tt)
        tdb = tt
        for _ in range(5):
            tdb = tt + tdb_minus_tt(tdb, ut1, self.xyz) / DAY
        return tdb

    def tdb_minus_tt(self, tdb: Real) -> Real:
        """TDB - TT at the station at a Julian date of TDB, seconds.

        It depends on UT1, and this on TT. From the value at the geocentre, wrong by up to
        2 microseconds, each pass gains ten digits. UT1 - TT is found once: it changes by 1e-14 s
        in that time, and the series takes UT1 as a float64 fraction of a day, to 1e-11 s.
        """
        centre = Vector(self.ctx.zero, self.ctx.zero, self.ctx.zero)
        difference = tdb_minus_tt(tdb, tdb, centre)
        turned = self._ut1_minus_tt(tdb - difference / DAY)
        for _ in range(3):
            difference = tdb_minus_tt(tdb, tdb - difference / DAY + turned, self.xyz)
        return difference

    def _ut1_minus_tt(self, tt: Real) -> Real:
        """UT1 - TT without sub-daily terms, days."""
        return (self.series.at(tt).ut1_minus_tai - self.ctx.mpf("32.184")) / DAY

    # -- the ground --------------------------------------------------------------------------

    def event(self, tdb: Real) -> StationEvent:
        """The station at a Julian date of TDB."""
        ctx = self.ctx
        difference = self.tdb_minus_tt(tdb)
        tt = tdb - difference / DAY
        earth = self.series.orientation(tt, "subdaily_rotation" not in self.omit)
        bodies = self.ephemeris.all(tdb)
        moved = self._displacements(earth, bodies)

        years = (tt - 2451545) / decimal(ctx, 365.25) - (ctx.mpf(self.station.epoch) - 2000)
        itrf = self.xyz + self.drift * years
        for displacement in moved.values():
            itrf = itrf + displacement
        gcrs = earth.matrix @ itrf
        turning = self._turning(earth, gcrs)
        geocentre = bodies["earth"]
        return StationEvent(
            tdb=tdb,
            tdb_minus_tt=difference,
            earth=earth,
            displacements=moved,
            itrf=itrf,
            gcrs=gcrs,
            bcrs=geocentre.position + self._barycentric(gcrs, bodies),
            velocity=geocentre.velocity + turning,
            zenith=earth.matrix @ self.up,
            bodies=bodies,
        )

    def _displacements(self, earth: Orientation, bodies: dict[str, State]) -> dict[str, Vector]:
        """Tides and loading in the ITRF, by name (sums of series, in float64)."""
        ctx = self.ctx
        to_itrf = earth.matrix.transposed
        centre = bodies["earth"].position
        sun, moon = (
            np.array((to_itrf @ (bodies[name].position - centre)).floats())
            for name in ("sun", "moon")
        )
        tt1, tt2 = split_day(earth.tt)
        _, ut1_fraction = split_day(earth.ut1_of_series)
        moved: dict[str, Vector] = {}
        if "solid_earth_tide" not in self.omit:
            tide = solid_earth_tide(self.station.xyz_m, sun, moon, tt1, tt2, ut1_fraction)
            moved["solid_earth_tide"] = Vector.of(ctx, tide)
        if "pole_tide" not in self.omit:
            moved["pole_tide"] = self._pole_tide(earth)
        moved.update(self._loading(earth, sun, moon))
        for name, shift in residual_motion(self.station, tt1, tt2, frozenset(self.omit)).items():
            moved[name] = Vector.of(ctx, shift)
        return moved

    def _pole_tide(self, earth: Orientation) -> Vector:
        """The pole tide, from the pole without sub-daily terms.

        S_r = -33 sin(2 theta) (m1 cos lon + m2 sin lon) mm, S_theta = -9 cos(2 theta) (same),
        S_lon = 9 cos(theta) (m1 sin lon - m2 cos lon), theta the geocentric colatitude,
        m1 = xp - xs, m2 = -(yp - ys) in arcseconds.

        Source: IERS Conventions (2010), TN36, 7.1.4, equations 7.24 to 7.26; secular pole of
        the update of 2018, equation 7.21.
        """
        ctx = self.ctx
        years = (earth.tt - 2451545) / decimal(ctx, 365.25)
        arcseconds = 648000 / ctx.pi
        m1 = earth.pole.xp * arcseconds - (55 + ctx.mpf("1.677") * years) / 1000
        m2 = (ctx.mpf("320.5") + ctx.mpf("3.460") * years) / 1000 - earth.pole.yp * arcseconds
        radial = self.xyz.unit()
        sin_theta = ctx.hypot(radial.x, radial.y)
        cos_theta = radial.z
        cos_lon, sin_lon = self.cos_lon, self.sin_lon
        south = Vector(cos_theta * cos_lon, cos_theta * sin_lon, -sin_theta)
        east = Vector(-sin_lon, cos_lon, ctx.zero)
        toward = m1 * cos_lon + m2 * sin_lon
        across = m1 * sin_lon - m2 * cos_lon
        return (
            radial * (-33 * 2 * sin_theta * cos_theta * toward)
            + south * (-9 * (cos_theta**2 - sin_theta**2) * toward)
            + east * (9 * cos_theta * across)
        ) / 1000

    def _loading(self, earth: Orientation, sun: Any, moon: Any) -> dict[str, Vector]:
        """Loading of oceans and atmosphere, where the station has coefficients."""
        arcseconds = 648000 / self.ctx.pi
        tt1, tt2 = split_day(earth.tt)
        moved = displacements(
            self.station,
            sun_itrf_m=sun[:, None],
            moon_itrf_m=moon[:, None],
            tt1=np.array([tt1]),
            tt2=np.array([tt2]),
            ut1_fraction=np.array([split_day(earth.ut1_of_series)[1]]),
            xp_arcsec=np.array([float(earth.pole.xp * arcseconds)]),
            yp_arcsec=np.array([float(earth.pole.yp * arcseconds)]),
            omit=frozenset(self.omit) | {"solid_earth_tide", "pole_tide"},
        )
        return {name: Vector.of(self.ctx, shift[:, 0]) for name, shift in moved.items()}

    # -- into the barycentric frame ----------------------------------------------------------

    def _turning(self, earth: Orientation, gcrs: Vector) -> Vector:
        """Velocity that the turning of the Earth gives the station, GCRS, m/s."""
        ctx = self.ctx
        rate = 2 * ctx.pi * ctx.mpf("1.00273781191135448") / DAY
        x, y, z = earth.cip
        across = Vector(y * gcrs.z - z * gcrs.y, z * gcrs.x - x * gcrs.z, x * gcrs.y - y * gcrs.x)
        return across * rate

    def _barycentric(self, r: Vector, bodies: dict[str, State]) -> Vector:
        """A GCRS position as seen from the geocentre in the BCRS, TDB-compatible.

        r (1 - U/c^2 - L_C) - (V.r) V/(2 c^2)

        Source: IAU 2000 B1.3 and B1.5; Moyer 2000, 4.3.1.
        """
        if "station_contraction" in self.omit:
            return r
        earth = bodies["earth"]
        potential = sum(
            self.ephemeris.gm[name] / (bodies[name].position - earth.position).norm()
            for name in ("sun", "moon", *PLANETS)
        )
        scale = 1 - potential / C**2 - decimal(self.ctx, L_C)
        return r * scale - earth.velocity * (earth.velocity @ r / (2 * C**2))
