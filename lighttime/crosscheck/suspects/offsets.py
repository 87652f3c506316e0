"""Suspects without a choice behind them: free offsets of whatever is measured or fitted."""

from __future__ import annotations

from collections.abc import Sequence
from functools import partial

import numpy as np

from lighttime.constants import EARTH_ROTATION_RATE, J2000, MILLIARCSECOND, TURN
from lighttime.crosscheck.scene import PS, Scene
from lighttime.crosscheck.suspects.frame import celestial_pole_moved
from lighttime.crosscheck.suspects.suspect import Suspect
from lighttime.crosscheck.suspects.terms import lunar_tide_of, years_since_2000
from lighttime.crosscheck.suspects.time import ephemeris_shifted
from lighttime.earth.local import east_north_up
from lighttime.path.delays import GRAVITY_TERMS
from lighttime.path.troposphere import mapping
from lighttime.vectors import Array, cross, norm

MM = 1.0e-3
US = 1.0e-6
LIBRATION_AXES = ("x", "y", "z")

# -- the measurement -------------------------------------------------------------------------------


def bias(scene: Scene, station: str | None = None, array: str | None = None) -> Array:
    """A picosecond, on all ranges or on those of one station or array."""
    here = station in (None, scene.station.name) and array in (None, scene.reflector.name)
    return scene.zero + float(here)


def drift(scene: Scene, middle_year: float) -> Array:
    """A picosecond more every year."""
    return years_since_2000(scene.t1) + (2000.0 - middle_year)


def scale(scene: Scene) -> Array:
    """A part in 10^9 of the range."""
    return PS * 1e-9 * scene.seconds[0]


def late_epoch(scene: Scene) -> Array:
    """Epochs a microsecond late: the rate of the range."""
    return scene.moved(
        at1=US * scene.t1.velocity, at2=US * scene.t2.velocity, at3=US * scene.t3.velocity
    )


# -- the Earth -------------------------------------------------------------------------------------


def late_ut1(scene: Scene) -> Array:
    """UT1 a microsecond more."""
    return scene.turned_itrf(scene.zero, scene.zero, scene.zero + EARTH_ROTATION_RATE * US)


def ut1_drift(scene: Scene, middle_year: float) -> Array:
    """UT1 a microsecond more every year."""
    years = years_since_2000(scene.t1) + (2000.0 - middle_year)
    return scene.turned_itrf(scene.zero, scene.zero, EARTH_ROTATION_RATE * US * years)


def pole_offset(scene: Scene, x: float, y: float) -> Array:
    """A milliarcsecond in x_p or y_p."""
    mas = scene.zero + MILLIARCSECOND
    return scene.turned_itrf(x * mas, y * mas, scene.zero)


def celestial_pole_offset(scene: Scene, x: float, y: float) -> Array:
    """A milliarcsecond in X or Y."""
    mas = scene.zero + MILLIARCSECOND
    return celestial_pole_moved(scene, x * mas, y * mas)


def station_offset(scene: Scene, station: str, axis: int) -> Array:
    """A millimetre of the station to the east, north or up."""
    if scene.station.name != station:
        return scene.zero
    at1, at3 = scene.itrf(MM * np.asarray(east_north_up(scene.station.xyz_m)[axis]))
    return scene.moved(at1=at1, at3=at3)


def tide_in_height(scene: Scene, station: str, period_h: float, quarter: float) -> Array:
    """A millimetre of height with the period of a tide, of unknown phase."""
    if scene.station.name != station:
        return scene.zero
    rung = scene.t1.ladder
    hours = ((rung["tt1"] - J2000) + rung["tt2"]) * 24.0
    wave = MM * np.cos(TURN * (hours / period_h - quarter))
    at1, at3 = scene.itrf(east_north_up(scene.station.xyz_m)[2])
    return scene.moved(at1=wave * at1, at3=wave * at3)


def zenith_delay_offset(scene: Scene, station: str) -> Array:
    """A millimetre of zenith delay."""
    if scene.station.name != station or not scene.has_troposphere or scene.query.weather is None:
        return scene.zero
    place = scene.station
    temperature = scene.query.weather.temperature_k
    up, down = (
        MM * mapping(np.arcsin(s), place.latitude_rad, place.height_m, temperature) / 299792458.0
        for s in scene.sines
    )
    return scene.delayed(up, down)


# -- the Moon --------------------------------------------------------------------------------------


def array_offset(scene: Scene, array: str, axis: int) -> Array:
    """A millimetre of the array along a principal axis."""
    if scene.reflector.name != array:
        return scene.zero
    return scene.moved(at2=scene.lunar(MM * np.eye(3)[axis]))


def libration_offset(scene: Scene, axis: int) -> Array:
    """The Moon turned by a milliarcsecond about a principal axis."""
    turned = MILLIARCSECOND * np.cross(np.eye(3)[axis], scene.reflector.xyz_m)
    return scene.moved(at2=scene.lunar(turned))


def orbit_along(scene: Scene) -> Array:
    """The Moon a millimetre ahead in its orbit."""
    speed = scene.t2.moon_velocity - scene.frame.earth(scene.t2.seconds)[1]
    return scene.moved(at2=MM * speed / norm(speed))


def orbit_across(scene: Scene) -> Array:
    """The Moon a millimetre to the north of its orbit."""
    place = -scene.selenocentric("earth")
    speed = scene.t2.moon_velocity - scene.frame.earth(scene.t2.seconds)[1]
    pole = cross(place, speed)
    return scene.moved(at2=MM * pole / norm(pole))


def orbit_radial(scene: Scene) -> Array:
    """The Moon a millimetre further away."""
    place = -scene.selenocentric("earth")
    return scene.moved(at2=MM * place / norm(place))


def late_ephemeris(scene: Scene) -> Array:
    """The argument of the ephemeris a microsecond late."""
    late = scene.zero + US
    return ephemeris_shifted(scene, late, late, late)


def love_number(scene: Scene, **derivative: float) -> Array:
    """A thousandth in h2 or l2 of the Moon."""
    tide = sum(lunar_tide_of(scene, body, **derivative) for body in ("earth", "sun"))
    return scene.moved(at2=1e-3 * scene.lunar(tide))


def gamma(scene: Scene) -> Array:
    """A thousandth in the parameter gamma."""
    up, down = (
        sum((d for b, d in leg.delays.items() if b in GRAVITY_TERMS), scene.zero)
        for leg in (scene.legs.up, scene.legs.down)
    )
    factor = 1e-3 / (1.0 + scene.model.gamma)
    return scene.delayed(factor * up, factor * down)


# -- the list --------------------------------------------------------------------------------------


def _offset(name: str, says: str, look_for: str, effect, unit: str, plausible: float) -> Suspect:  # type: ignore[no-untyped-def]
    return Suspect(name, "offset", says, look_for, effect, unit=unit, plausible=plausible)


TIDES_H = {"M2": 12.4206012, "S2": 12.0, "K1": 23.9344696, "O1": 25.8193417}
"""Periods of the main tides, hours. Source: Doodson 1921."""


def free_offsets(
    stations: Sequence[str],
    arrays: Sequence[str],
    unloaded: Sequence[str],
    middle_year: float = 2000.0,
) -> tuple[Suspect, ...]:
    """The free offsets of some stations and arrays.

    Parameters
    ----------
    stations, arrays : sequence of str
        Their names.
    unloaded : sequence of str
        Stations without coefficients of ocean loading.
    middle_year : float
        From where drifts are counted.
    """
    found = [
        _offset("bias", "constant", "a calibration constant; the reference point", bias, "ps", 1e3),
        _offset("drift", "drift", "a quantity that is not moved in time",
                partial(drift, middle_year=middle_year), "ps/yr", 100.0),
        _offset("scale", "scale", "the unit of length or of time", scale, "1e-9", 10.0),
        _offset("epoch_offset", "offset of the epochs", "the clock, or the tagged instant within "
                "the pulse", late_epoch, "us", 100.0),
        _offset("ephemeris_time", "offset of the time of the ephemeris",
                "TDB-TT, and its constant", late_ephemeris, "us", 1e3),
        _offset("ut1_offset", "offset of UT1", "the series of UT1", late_ut1, "us", 100.0),
        _offset("ut1_drift", "drift of UT1", "the series of UT1",
                partial(ut1_drift, middle_year=middle_year), "us/yr", 10.0),
        _offset("pole_x_offset", "offset of x_p", "the series of the pole",
                partial(pole_offset, x=1.0, y=0.0), "mas", 10.0),
        _offset("pole_y_offset", "offset of y_p", "the series of the pole",
                partial(pole_offset, x=0.0, y=1.0), "mas", 10.0),
        _offset("celestial_x_offset", "offset of X of the celestial pole",
                "the frame of the ephemeris, and dX",
                partial(celestial_pole_offset, x=1.0, y=0.0), "mas", 1.0),
        _offset("celestial_y_offset", "offset of Y of the celestial pole",
                "the frame of the ephemeris, and dY",
                partial(celestial_pole_offset, x=0.0, y=1.0), "mas", 1.0),
        *(
            _offset(f"libration_{axis}", f"the Moon turned about its {axis} axis",
                    "the libration angles and their axes", partial(libration_offset, axis=k),
                    "mas", 100.0)
            for k, axis in enumerate(LIBRATION_AXES)
        ),
        _offset("orbit_radial", "the Moon further away", "the ephemeris", orbit_radial, "mm", 100.0),
        _offset("orbit_along", "the Moon ahead in its orbit", "the ephemeris", orbit_along, "mm", 1e3),
        _offset("orbit_across", "the Moon north of its orbit", "the ephemeris", orbit_across,
                "mm", 1e3),
        _offset("moon_h2", "Love number h2 of the Moon", "h2 of the lunar tide",
                partial(love_number, h2=1.0, l2=0.0), "1e-3", 10.0),
        _offset("moon_l2", "Shida number l2 of the Moon", "l2 of the lunar tide",
                partial(love_number, h2=0.0, l2=1.0), "1e-3", 10.0),
        _offset("gamma", "parameter gamma", "gamma of the gravity delay", gamma, "1e-3", 1.0),
    ]  # fmt: skip
    for name in stations:
        for k, axis in enumerate(("east", "north", "up")):
            found.append(
                _offset(f"{_key(name)}_{axis}", f"{name} displaced {axis}",
                        f"the coordinates of {name}",
                        partial(station_offset, station=name, axis=k), "mm", 100.0)
            )  # fmt: skip
        found.append(
            _offset(f"{_key(name)}_zenith_delay", f"zenith delay at {name}",
                    "the zenith delay, the pressure", partial(zenith_delay_offset, station=name),
                    "mm", 10.0)
        )  # fmt: skip
        if len(stations) > 1:
            found.append(
                _offset(f"{_key(name)}_bias", f"constant of {name} alone",
                        f"what is different in the records of {name}",
                        partial(bias, station=name), "ps", 1e3)
            )  # fmt: skip
    for name in unloaded:
        for tide, period in TIDES_H.items():
            for quarter, part in ((0.0, "cosine"), (0.25, "sine")):
                found.append(
                    _offset(f"{_key(name)}_{tide.lower()}_{part}",
                            f"height of {name} at the period of {tide} ({part})",
                            f"ocean loading: ours has no coefficients for {name}",
                            partial(tide_in_height, station=name, period_h=period, quarter=quarter),
                            "mm", 10.0)
                )  # fmt: skip
    for name in arrays:
        for k, axis in enumerate(LIBRATION_AXES):
            found.append(
                _offset(f"{_key(name)}_{axis}", f"{name} displaced along {axis}",
                        f"the coordinates of {name} and their axes",
                        partial(array_offset, array=name, axis=k), "mm", 1e3)
            )  # fmt: skip
        if len(arrays) > 1:
            found.append(
                _offset(f"{_key(name)}_bias", f"constant of {name} alone",
                        f"what is different for {name}", partial(bias, array=name), "ps", 1e3)
            )  # fmt: skip
    return tuple(found)


def _key(name: str) -> str:
    """A name fit to be part of the name of a suspect."""
    words = "".join(ch if ch.isalnum() else " " for ch in name.lower()).split()
    return "_".join(words)
