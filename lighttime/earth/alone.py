"""One displacement of a station at a time, for people: arrays, where it comes from, its origin."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any, Final, Literal

import numpy as np

from lighttime.constants import ARCSECOND, DAY
from lighttime.earth import rotation
from lighttime.earth.displacement import (
    DISPLACEMENTS,
    displacements,
    modelled,
    residual_motion,
)
from lighttime.earth.local import itrf_to_enu
from lighttime.earth.series import EarthOrientation, PoleAndUT1
from lighttime.earth.station import Station
from lighttime.ephemeris import Ephemeris
from lighttime.errors import InputError, UnknownNameError
from lighttime.timescales import Epoch
from lighttime.timescales.scales import tt_to_tai
from lighttime.timescales.tdb import tdb_minus_tt
from lighttime.vectors import Array

if TYPE_CHECKING:
    from lighttime.earth.loading import OceanLoading

NAMES: Final = (*DISPLACEMENTS, "residual_motion")
FRAMES: Final = ("itrf", "enu")

SOURCES: Final = {
    "solid_earth_tide": "IERS Conventions (2010), TN36, 7.1.1, steps 1 and 2, tide-free",
    "pole_tide": "IERS Conventions (2010), TN36, 7.1.4, secular pole of 2018",
    "ocean_loading": "IERS Conventions (2010), TN36, 7.1.2, 11 constituents over 342 lines",
    "ocean_pole_tide": "IERS Conventions (2010), TN36, 7.1.5",
    "atmosphere_loading": "IERS Conventions (2010), TN36, 7.1.3, S1 and S2",
    "residual_motion": "supplied by the user, linear between its instants",
}
"""The model of each displacement."""


def has(station: Station, name: str) -> bool:
    """Whether a station has what a displacement needs."""
    if name not in NAMES:
        raise UnknownNameError("name", name, NAMES)
    if name == "residual_motion":
        return station.residual_motion is not None
    return name in modelled(station)


def displacement(
    station: Station,
    when: Any,
    name: str,
    frame: Literal["itrf", "enu"] = "itrf",
    earth_orientation: EarthOrientation | None = None,
    ephemeris: Ephemeris | None = None,
) -> Array:
    """See `Station.displacement`."""
    if not has(station, name):
        allowed = f"given to the Station; without it {name} is not modelled"
        raise InputError(name, None, allowed)
    if frame not in FRAMES:
        raise UnknownNameError("frame", frame, FRAMES)
    series = EarthOrientation.bundled() if earth_orientation is None else earth_orientation
    epoch = Epoch.parse(when)
    tt = epoch.to("tt", place=station, earth_orientation=series)
    tt1, tt2 = np.ravel(tt.jd1), np.ravel(tt.jd2)
    if name == "residual_motion":
        moved = residual_motion(station, tt1, tt2)[name]
    else:
        moved = _modelled(station, name, tt1, tt2, series, ephemeris)
    if frame == "enu":
        moved = itrf_to_enu(moved, station.xyz_m)
    return moved.T.reshape(*epoch.shape, 3)


def _modelled(
    station: Station,
    name: str,
    tt1: Array,
    tt2: Array,
    series: EarthOrientation,
    ephemeris: Ephemeris | None,
) -> Array:
    """A displacement of the model, evaluated: ITRF, (3, n)."""
    tai1, tai2 = tt_to_tai(tt1, tt2)
    pole = series.at(tai1, tai2)
    ut1_2 = tai2 + pole.ut1_tai_s / DAY
    sun = moon = np.zeros((3, tt1.size))
    if name == "solid_earth_tide":
        to_itrf = rotation.transpose(_to_gcrs(tt1, tt2, tai1, ut1_2, pole))
        bodies = Ephemeris.default() if ephemeris is None else ephemeris
        tdb2 = tt2 + tdb_minus_tt(tt1, tt2) / DAY
        earth, _ = bodies.earth(tt1, tdb2)
        sun = rotation.rotate(to_itrf, bodies.barycentric_body("sun", tt1, tdb2)[0] - earth)
        moon = rotation.rotate(to_itrf, bodies.moon_geocentric(tt1, tdb2)[0])
    return displacements(
        station,
        sun_itrf_m=sun,
        moon_itrf_m=moon,
        tt1=tt1,
        tt2=tt2,
        ut1_fraction=np.mod((tai1 - np.floor(tai1)) + 0.5 + ut1_2, 1.0),
        xp_arcsec=pole.xp_rad / ARCSECOND,
        yp_arcsec=pole.yp_rad / ARCSECOND,
        omit=frozenset(DISPLACEMENTS).difference((name,)),
    )[name]


def _to_gcrs(tt1: Array, tt2: Array, ut1_1: Array, ut1_2: Array, pole: PoleAndUT1) -> Array:
    """From the ITRF, without sub-daily terms: they turn a tide by a nanometre."""
    x, y, s = rotation.celestial_pole(tt1, tt2)
    x, y = x + pole.dx_rad, y + pole.dy_rad
    era = rotation.earth_rotation_angle(ut1_1, ut1_2)
    return rotation.terrestrial_to_celestial(x, y, s, era, pole.xp_rad, pole.yp_rad, tt1, tt2)


def source(station: Station, name: str) -> str:
    """See `Station.displacement_source`."""
    if not has(station, name):
        return f"{SOURCES[name]}; not modelled: nothing was given"
    said = [SOURCES[name]]
    given = getattr(station, name, None)
    if given is not None:
        what = "series" if name == "residual_motion" else "coefficients"
        said.append(f"{what}: {given.source or 'their source was not given'}")
    if name == "ocean_loading":
        said.append(f"motion of the geocentre: {_ocean_tide_of_geocentre(station.ocean_loading)}")
    return "; ".join(said)


def geocentre(station: Station) -> tuple[str, ...]:
    """What a station's place is reckoned from, and what moves that; a line for each fact."""
    supplied = "" if station.residual_motion is None else ", but for what the residual motion has"
    tides = _ocean_tide_of_geocentre(station.ocean_loading)
    return (
        "origin: the centre of mass of the whole Earth, as of the ephemeris; coordinates in the "
        "ITRF refer to its mean over years",
        f"motion of the geocentre by ocean tides: {tides}",
        f"its motion by seasons and weather, some millimetres: not modelled{supplied}",
    )


def _ocean_tide_of_geocentre(ocean: OceanLoading | None) -> str:
    if ocean is None:
        return "not modelled, up to 1 cm"
    return {
        True: "contained in the coefficients of ocean loading",
        False: "not contained in the coefficients of ocean loading, up to 1 cm is missing",
        None: "the coefficients of ocean loading do not say whether they contain it, up to 1 cm",
    }[ocean.centre_of_mass]
