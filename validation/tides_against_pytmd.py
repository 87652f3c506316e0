"""Solid Earth tide and pole tides against pyTMD at 20 sites over a year.

    python validation/tides_against_pytmd.py

Prints the largest difference of each displacement, explains it by what the two do differently,
and exits with 1 if one is above its bar. The Sun and the Moon are those of astropy; the pole is
that of pyTMD's own series, given to both.
"""

from __future__ import annotations

import sys
from dataclasses import dataclass

import erfa
import numpy as np
import pyTMD.predict
import timescale.eop
import xarray as xr
from astropy import units as u
from astropy.coordinates import ITRS, get_body
from astropy.time import Time
from astropy.utils import iers

from lighttime.earth.loading import OceanPoleTide, ocean_pole_tide_loading
from lighttime.earth.local import east_north_up, from_geodetic
from lighttime.earth.tides import pole_tide, solid_earth_tide

SITES = 20
MJD_OF_PYTMD = 48622.0  # its days are counted from 1992-01-01
TIMES = Time("2019-01-01") + np.linspace(0.0, 365.0, 2921) * u.day  # every three hours
BAR_MM = 0.5


@dataclass
class Comparison:
    """Two opinions of one displacement at all sites and instants, mm."""

    name: str
    largest_mm: float
    size_mm: float
    bar_mm: float
    why: str

    @property
    def good(self) -> bool:
        """Below the bar, and of something that is not zero."""
        return self.largest_mm < self.bar_mm < self.size_mm


def sites() -> np.ndarray:
    """Places spread evenly over the sphere, (3, 20), at heights up to 4 km; one near each pole."""
    k = np.arange(SITES)
    latitude = np.arcsin(np.linspace(-0.999, 0.999, SITES))
    return from_geodetic(latitude, (2.399963 * k) % (2.0 * np.pi) - np.pi, 200.0 * k)


def dataset(xyz: np.ndarray) -> xr.Dataset:
    """Components as pyTMD takes them."""
    dims = ("time",) if xyz.ndim > 1 else ()
    return xr.Dataset({name: (dims, row) for name, row in zip("XYZ", xyz, strict=True)})


def components(result: xr.Dataset) -> np.ndarray:
    return np.stack([np.asarray(result[name]) for name in "XYZ"])


def bodies() -> tuple[np.ndarray, np.ndarray]:
    """Sun and Moon in ITRF, (3, n), metres."""
    sun, moon = (
        get_body(name, TIMES).transform_to(ITRS(obstime=TIMES)).cartesian.xyz.to_value("m")
        for name in ("sun", "moon")
    )
    return sun, moon


def compare_solid_tide() -> list[Comparison]:
    """Twice: pyTMD counting the phases of step 2 in TT, as it does, and in UT1."""
    sun, moon = bodies()
    tt, ut1 = TIMES.tt, TIMES.ut1
    fraction = (ut1.jd1 - 0.5) % 1.0 + ut1.jd2
    days = ut1.mjd - MJD_OF_PYTMD
    delta = tt.mjd - ut1.mjd
    largest = {"TT": 0.0, "UT1": 0.0}
    size = 0.0
    for xyz in sites().T:
        ours = solid_earth_tide(xyz, sun, moon, tt.jd1, tt.jd2, fraction)
        size = max(size, np.linalg.norm(ours, axis=0).max())
        for counted, deltat in (("TT", delta), ("UT1", 0.0 * delta)):
            theirs = components(
                pyTMD.predict.solid_earth_tide(
                    days, dataset(xyz), dataset(sun), dataset(moon), deltat=deltat
                )
            )
            difference = np.linalg.norm(ours - theirs, axis=0).max()
            largest[counted] = max(largest[counted], difference)
    name = "solid Earth tide, its step 2 in"
    return [
        Comparison(
            f"{name} TT",
            1e3 * largest["TT"],
            1e3 * size,
            BAR_MM,
            "pyTMD turns the Earth by TT for the phases of step 2: 69 s, 12 mm x 0.005 rad",
        ),
        Comparison(
            f"{name} UT1",
            1e3 * largest["UT1"],
            1e3 * size,
            0.001,
            "the same with UT1; what is left is 69 s of the Moon, and other polynomials for it",
        ),
    ]


def compare_pole_tides() -> list[Comparison]:
    """Pole tide, and ocean pole tide loading with made-up coefficients, daily."""
    tt = TIMES.tt[::8]
    x, y = timescale.eop.iers_polar_motion(tt.mjd, k=3, s=0)
    years = ((tt.jd1 - 2451545.0) + tt.jd2) / 365.25
    days = tt.mjd - MJD_OF_PYTMD
    load = OceanPoleTide(0.11 - 0.07j, -0.03 + 0.02j, 0.015 + 0.04j)
    largest, rounding, size = np.zeros(2), 0.0, np.zeros(2)
    for xyz in sites().T:
        ours = pole_tide(xyz, x, y, years)
        # gravity of pyTMD's default, then the one on which the 33 and 9 mm of TN36 rest
        gravity = normal_gravity(xyz)
        theirs = components(pyTMD.predict.load_pole_tide(days, dataset(xyz)))
        same = components(pyTMD.predict.load_pole_tide(days, dataset(xyz), gamma_0=gravity))
        largest[0] = max(largest[0], np.linalg.norm(ours - theirs, axis=0).max())
        rounding = max(rounding, np.linalg.norm(ours - same, axis=0).max())
        size[0] = max(size[0], np.linalg.norm(ours, axis=0).max())

        ours = ocean_pole_tide_loading(xyz, load, x, y, years)
        east, north, up = east_north_up(xyz)
        uxyz = load.east * east + load.north * north + load.up * up
        grid = xr.Dataset(dict(zip("XYZ", uxyz, strict=True)))
        theirs = components(pyTMD.predict.ocean_pole_tide(days, grid))
        largest[1] = max(largest[1], np.linalg.norm(ours - theirs, axis=0).max())
        size[1] = max(size[1], np.linalg.norm(ours, axis=0).max())
    return [
        Comparison(
            "pole tide", 1e3 * largest[0], 1e3 * size[0], BAR_MM,
            "TN36 rounds its coefficients to 33 and 9 mm (33.2 and 9.0); same gravity: "
            f"{1e3 * rounding:.4f} mm",
        ),
        Comparison(
            "ocean pole tide loading", 1e3 * largest[1], 1e3 * size[1], 0.001,
            "constants of gravitation, 6.67428 and 6.67430, and radii in the last digits",
        ),
    ]  # fmt: skip


def normal_gravity(xyz: np.ndarray) -> float:
    """Normal gravity at a place (Somigliana), m/s^2. Source: GRS80, Moritz 2000 (from memory)."""
    _, latitude, _ = erfa.gc2gd(2, xyz)
    sine2 = np.sin(latitude) ** 2
    return float(
        9.7803267715 * (1.0 + 0.001931851353 * sine2) / np.sqrt(1.0 - 0.00669438002290 * sine2)
    )


def main() -> int:
    iers.conf.auto_download = False
    results = [*compare_solid_tide(), *compare_pole_tides()]
    print(f"{SITES} sites, {len(TIMES)} instants of 2019; millimetres")
    print(f"{'displacement':36s}{'size':>9s}{'largest difference':>20s}{'bar':>8s}")
    for result in results:
        print(
            f"{result.name:36s}{result.size_mm:9.3f}{result.largest_mm:20.6f}"
            f"{result.bar_mm:8.3f}  {'ok' if result.good else 'MISS'}"
        )
        print(f"    {result.why}")
    return 0 if all(result.good for result in results) else 1


if __name__ == "__main__":
    sys.exit(main())
