"""The same range as most people assemble it: jplephem, ERFA and astropy in plain float64.

The model is the same (series of Earth orientation, tides, gravity, contraction); the arithmetic
is the usual one: instants are Julian dates in two parts with a day fraction, records of the
ephemeris are found by jplephem, positions are barycentric, light times are found by iteration.
It is correct, vectorised, and not slowed on purpose. What it loses is what this library is about:
the other scripts here set the two side by side.
"""

from __future__ import annotations

import de421
import erfa
import numpy as np
from astropy.time import Time
from jplephem.ephem import Ephemeris

import lighttime as lt
from lighttime.earth.subdaily import subdaily
from lighttime.earth.tides import pole_tide, solid_earth_tide
from lighttime.moon.tide import lunar_tide
from lighttime.path.troposphere import slant_delay

c = 299792458.0
L_C = 1.48082686741e-8
DAY = 86400.0
KM = 1000.0

PLANETS = ("mercury", "venus", "mars", "jupiter", "saturn", "uranus", "neptune")


class PlainModel:
    """Range by general-purpose libraries; `round_trip` takes UTC in two parts."""

    def __init__(self) -> None:
        self.ephemeris = Ephemeris(de421)
        self.series = lt.EarthOrientation.bundled()
        e = self.ephemeris
        au = e.AU * KM
        unit = au**3 / DAY**2
        numbers = dict(zip(PLANETS, ("GM1", "GM2", "GM4", "GM5", "GM6", "GM7", "GM8"), strict=True))
        self.gm = {body: getattr(e, name) * unit for body, name in numbers.items()}
        self.gm["sun"] = e.GMS * unit
        self.gm["earth"] = e.GMB * unit * e.EMRAT / (1.0 + e.EMRAT)
        self.gm["moon"] = e.GMB * unit / (1.0 + e.EMRAT)

    # -- bodies ------------------------------------------------------------------------------

    def _state(self, name: str, jd1: np.ndarray, jd2: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        position, velocity = self.ephemeris.position_and_velocity(name, jd1, jd2)
        return position * KM, velocity * (KM / DAY)

    def bodies(self, jd1: np.ndarray, jd2: np.ndarray) -> dict[str, tuple]:
        barycentre, moon = self._state("earthmoon", jd1, jd2), self._state("moon", jd1, jd2)
        share = self.ephemeris.earth_share
        earth = tuple(b - share * m for b, m in zip(barycentre, moon, strict=True))
        found = {"earth": earth}
        found["moon"] = tuple(a + b for a, b in zip(earth, moon, strict=True))
        for name in ("sun", *PLANETS):
            found[name] = self._state(name, jd1, jd2)
        return found

    # -- ends --------------------------------------------------------------------------------

    def station(self, station: lt.Station, jd1: np.ndarray, jd2: np.ndarray) -> dict:
        """Barycentric position and velocity of the station at TDB, and TDB - TT."""
        x, y, z = station.xyz_m
        longitude, u, v = np.arctan2(y, x), np.hypot(x, y) / KM, z / KM
        tt2 = jd2 - erfa.dtdb(jd1, jd2, 0.0, 0.0, 0.0, 0.0) / DAY
        tai1, tai2 = erfa.tttai(jd1, tt2)
        pole = self.series.at(tai1, tai2)
        ut1_2 = tai2 + pole.ut1_tai_s / DAY
        offset = erfa.dtdb(jd1, jd2, np.mod(jd1 + 0.5 + ut1_2, 1.0), longitude, u, v)
        tt2 = jd2 - offset / DAY
        tai1, tai2 = erfa.tttai(jd1, tt2)
        pole = self.series.at(tai1, tai2)
        ut1_2 = tai2 + pole.ut1_tai_s / DAY
        dx, dy, dut1 = subdaily(tai1, ut1_2, jd1, tt2)
        cip_x, cip_y, s = erfa.xys06a(jd1, tt2)
        intermediate = erfa.c2ixys(cip_x + pole.dx_rad, cip_y + pole.dy_rad, s)
        era = erfa.era00(jd1, ut1_2 + dut1 / DAY)
        wobble = erfa.pom00(pole.xp_rad + dx, pole.yp_rad + dy, erfa.sp00(jd1, tt2))
        to_itrf = erfa.c2tcio(intermediate, era, wobble)
        to_gcrs = np.swapaxes(to_itrf, 1, 2)
        bodies = self.bodies(jd1, jd2)
        earth, earth_velocity = bodies["earth"]
        sun = np.einsum("nij,jn->in", to_itrf, bodies["sun"][0] - earth)
        moon = np.einsum("nij,jn->in", to_itrf, bodies["moon"][0] - earth)
        years = ((jd1 - 2451545.0) + tt2) / 365.25
        fraction = np.mod(jd1 + 0.5 + ut1_2, 1.0)
        arcsec = np.pi / 648000.0
        itrf = (
            np.array(station.xyz_m)[:, None]
            + np.array(station.velocity_m_per_yr)[:, None] * (years - (station.epoch - 2000.0))
            + solid_earth_tide(station.xyz_m, sun, moon, jd1, tt2, fraction)
            + pole_tide(station.xyz_m, pole.xp_rad / arcsec, pole.yp_rad / arcsec, years)
        )
        r = np.einsum("nij,jn->in", to_gcrs, itrf)
        spin = np.einsum("nij,j->in", to_gcrs, np.array([0.0, 0.0, 7.292115146706979e-5]))
        potential = sum(self.gm[b] / _norm(bodies[b][0] - earth) for b in ("sun", "moon", *PLANETS))
        contracted = r * (1.0 - potential / c**2 - L_C) - earth_velocity * (
            np.sum(earth_velocity * r, axis=0) / (2.0 * c**2)
        )
        return {
            "position": earth + contracted,
            "velocity": earth_velocity + np.cross(spin, r, axis=0),
            "offset": offset,
            "up": np.einsum("nij,j->in", to_gcrs, station.up),
            "bodies": bodies,
        }

    def reflector(self, array: lt.Reflector, jd1: np.ndarray, jd2: np.ndarray) -> np.ndarray:
        """Barycentric position of the reflector at TDB."""
        bodies = self.bodies(jd1, jd2)
        moon, moon_velocity = bodies["moon"]
        phi, theta, psi = self.ephemeris.position("librations", jd1, jd2)
        turn = erfa.rz(psi, erfa.rx(theta, erfa.rz(phi, np.eye(3))))
        earth_pa = np.einsum("nij,jn->in", turn, bodies["earth"][0] - moon)
        sun_pa = np.einsum("nij,jn->in", turn, bodies["sun"][0] - moon)
        local = np.array(array.xyz_m)[:, None]
        gm = self.gm
        local = local + lunar_tide(local, earth_pa, sun_pa, gm["moon"], gm["earth"], gm["sun"])
        r = np.einsum("nij,in->jn", turn, local)
        dot = np.sum(moon_velocity * r, axis=0)
        return moon + r - moon_velocity * dot / (2.0 * c**2)

    # -- the range ---------------------------------------------------------------------------

    def delay(
        self, near: dict, far: np.ndarray, upward: bool, station: lt.Station, weather, wavelength
    ) -> np.ndarray:
        """Gravity of every body, where it is at the station's event, and the troposphere."""
        total = 0.0
        r12 = _norm(far - near["position"])
        for body, gm in self.gm.items():
            position = near["bodies"][body][0]
            r1, r2 = _norm(near["position"] - position), _norm(far - position)
            total = total + 2.0 * gm / c**3 * np.log((r1 + r2 + r12) / (r1 + r2 - r12))
        if weather is not None:
            sense = 1.0 if upward else -1.0
            ray = sense * (far - near["position"]) / r12
            seen = ray - near["velocity"] / c
            sine = sense * np.sum(seen * near["up"], axis=0) / _norm(seen)
            slant = slant_delay(
                np.arcsin(sine), station.latitude_rad, station.height_m, weather, wavelength
            )
            total = total + slant / c
        return total

    def round_trip(
        self,
        utc1: np.ndarray,
        utc2: np.ndarray,
        station: lt.Station,
        array: lt.Reflector,
        weather: lt.Weather | None = None,
        wavelength_nm: float = 532.0,
    ) -> np.ndarray:
        """Round-trip times (s) of pulses transmitted at UTC."""
        tt = Time(utc1, utc2, format="jd", scale="utc").tt
        x, y, z = station.xyz_m
        rough = erfa.dtdb(tt.jd1, tt.jd2, 0.0, 0.0, 0.0, 0.0)
        tai1, tai2 = erfa.tttai(tt.jd1, tt.jd2)
        ut1 = np.mod(tai1 + 0.5 + tai2 + self.series.at(tai1, tai2).ut1_tai_s / DAY, 1.0)
        place = np.arctan2(y, x), np.hypot(x, y) / KM, z / KM
        offset = erfa.dtdb(tt.jd1, tt.jd2 + rough / DAY, ut1, *place)
        jd1, jd2 = tt.jd1, tt.jd2 + offset / DAY
        start = self.station(station, jd1, jd2)
        up = np.full(jd1.shape, 1.28)
        for _ in range(3):
            far = self.reflector(array, jd1, jd2 + up / DAY)
            late = self.delay(start, far, True, station, weather, wavelength_nm)
            up = _norm(far - start["position"]) / c + late
        down = up
        for _ in range(3):
            end = self.station(station, jd1, jd2 + (up + down) / DAY)
            late = self.delay(end, far, False, station, weather, wavelength_nm)
            down = _norm(end["position"] - far) / c + late
        return (up + down) - (end["offset"] - start["offset"])


def _norm(r: np.ndarray) -> np.ndarray:
    return np.sqrt(np.sum(r * r, axis=0))
