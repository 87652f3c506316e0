"""Suspects: other constants, another troposphere, another ephemeris."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import partial

import numpy as np

from lighttime.constants import SPEED_OF_LIGHT
from lighttime.crosscheck.scene import Scene
from lighttime.crosscheck.suspects.suspect import Suspect
from lighttime.crosscheck.suspects.terms import standard_weather
from lighttime.crosscheck.suspects.time import AS_DESCRIBED
from lighttime.ephemeris import Ephemeris
from lighttime.path.troposphere import zenith_delay
from lighttime.path.weather import Weather
from lighttime.vectors import Array

c = SPEED_OF_LIGHT

# -- speed of light, masses ------------------------------------------------------------------------

C_1964 = 299_792_500.0
"""m/s. Source: IAU system of astronomical constants of 1964."""

EMRAT_DE405 = 81.30056
"""Earth-Moon mass ratio. Source: Standish 1998, JPL IOM 312.F-98-048 (DE405), from memory."""


def other_speed_of_light(scene: Scene, theirs: float) -> Array:
    """Distances divided by another speed of light."""
    up, down = scene.legs.up.geometry, scene.legs.down.geometry
    factor = c / theirs - 1.0
    return scene.delayed(factor * up, factor * down)


def other_mass_ratio(scene: Scene, theirs: float) -> Array:
    """Earth put at EMB - moon/(1 + EMRAT) of another ephemeris, the Moon where it belongs."""
    offset = scene.model.ephemeris.earth_from_barycentre
    if not isinstance(offset, float):
        return scene.zero
    change = -1.0 / (1.0 + theirs) - offset
    at1, at3 = (change * scene.geocentric("moon", e) for e in (scene.t1, scene.t3))
    return scene.moved(at1=at1, at3=at3)


def gravity_of_earth_and_moon(scene: Scene) -> Array:
    """GM of Earth and Moon together in the Earth's gravity delay."""
    gm = scene.model.ephemeris.gm
    more = gm("moon") / gm("earth")
    up, down = (
        leg.delays["earth"] * more if "earth" in leg.delays else scene.zero
        for leg in (scene.legs.up, scene.legs.down)
    )
    return scene.delayed(up, down)


# -- troposphere -----------------------------------------------------------------------------------


def _air(
    scene: Scene, slant: Callable[[Array, Array, Weather, Scene], Array], weather: Weather | None
) -> Array:
    """The effect of slant delays (m) by another formula of sine, zenith delay, weather, place."""
    if not scene.has_troposphere:
        return scene.zero
    air = scene.query.weather if weather is None else weather
    assert air is not None
    station = scene.station
    zenith = sum(
        zenith_delay(station.latitude_rad, station.height_m, air, scene.query.wavelength_nm)
    )
    up, down = (slant(sine, np.asarray(zenith), air, scene) / c for sine in scene.sines)
    return scene.air(up, down)


def cosecant(scene: Scene) -> Array:
    """The zenith delay over the sine of the elevation."""
    return _air(scene, lambda sine, zenith, *_: zenith / sine, None)


def marini_murray(scene: Scene) -> Array:
    """The whole troposphere of Marini and Murray."""
    return _air(scene, _marini_murray, None)


def _marini_murray(sine: Array, zenith: Array, weather: Weather, scene: Scene) -> Array:
    """Slant delay, m.

    Source: Marini & Murray 1973, NASA X-591-73-351, as in IERS Conventions (2003), TN32, chapter 9.
    """
    pressure, kelvin = np.asarray(weather.pressure_hpa), np.asarray(weather.temperature_k)
    cos_2lat = np.cos(2.0 * scene.station.latitude_rad)
    celsius = kelvin - 273.15
    vapour = (
        np.asarray(weather.relative_humidity) * 6.11 * 10.0 ** (7.5 * celsius / (237.3 + celsius))
    )
    k = 1.163 - 0.00968 * cos_2lat - 0.00104 * kelvin + 0.00001435 * pressure
    a = 0.002357 * pressure + 0.000141 * vapour
    b = 1.084e-8 * pressure * kelvin * k + 4.734e-8 * pressure**2 / kelvin * 2.0 / (3.0 - 1.0 / k)
    um = scene.query.wavelength_nm * 1.0e-3
    dispersion = 0.9650 + 0.0164 / um**2 + 0.000228 / um**4
    gravity = 1.0 - 0.0026 * cos_2lat - 0.00031e-3 * scene.station.height_m
    slant: Array = dispersion / gravity * (a + b) / (sine + b / (a + b) / (sine + 0.01))
    return slant


def standard_air(scene: Scene) -> Array:
    """The standard atmosphere in the place of the weather given."""
    if not scene.has_troposphere:
        return scene.zero
    return scene.air(*scene.slant(*scene.sines, weather=standard_weather(scene)))


def pressure_at_sea_level(scene: Scene) -> Array:
    """The pressure reduced to sea level, as weather services report it."""
    if not scene.has_troposphere or scene.query.weather is None:
        return scene.zero
    height = scene.station.height_m
    standard = (288.15 / (288.15 - 0.0065 * height)) ** 5.25588
    up, down = (leg.delays["troposphere"] for leg in (scene.legs.up, scene.legs.down))
    return scene.delayed((standard - 1.0) * up, (standard - 1.0) * down)


def dry_air(scene: Scene) -> Array:
    """No water vapour."""
    weather = scene.query.weather
    if not scene.has_troposphere or weather is None:
        return scene.zero
    dry = Weather(weather.pressure_hpa, weather.temperature_k, 0.0 * weather.relative_humidity)
    return scene.air(*scene.slant(*scene.sines, weather=dry))


def other_wavelength(scene: Scene, halved: bool) -> Array:
    """The fundamental wavelength for the doubled one, or the other way round."""
    ours = scene.query.wavelength_nm
    theirs = 0.5 * ours if halved else 2.0 * ours
    if not scene.has_troposphere or not 355.0 <= theirs <= 1064.0:
        return scene.zero
    return scene.air(*scene.slant(*scene.sines, wavelength_nm=theirs))


def without_gravity_of_place(scene: Scene) -> Array:
    """Without the dependence of the zenith delay on latitude and height.

    Source: f(phi, H) of IERS Conventions (2010), TN36, equation 9.5.
    """
    station = scene.station
    factor = (1.0 - 0.00266 * np.cos(2.0 * station.latitude_rad) - 0.28e-6 * station.height_m) - 1.0
    if not scene.has_troposphere:
        return scene.zero
    up, down = (leg.delays["troposphere"] for leg in (scene.legs.up, scene.legs.down))
    return scene.delayed(factor * up, factor * down)


# -- another ephemeris -----------------------------------------------------------------------------


def by_ephemeris(scene: Scene, ephemeris: Ephemeris) -> Array:
    """Everything the same, but for the ephemeris."""
    model = scene.variant(
        ("ephemeris", ephemeris.name), lambda ours: replace(ours, ephemeris=ephemeris)
    )
    return scene.as_if(model)


def other_ephemeris(ephemeris: Ephemeris) -> Suspect:
    """The suspect that the other program uses this ephemeris."""
    return Suspect(
        f"ephemeris_{ephemeris.name.lower()}",
        "ephemeris",
        f"ephemeris {ephemeris.name}",
        "which ephemeris the other program reads, for Earth and Moon and for the libration",
        partial(by_ephemeris, ephemeris=ephemeris),
        AS_DESCRIBED,
    )


# -- the list --------------------------------------------------------------------------------------

SUSPECTS: tuple[Suspect, ...] = (
    Suspect(
        "speed_of_light_1964", "constant", "speed of light of 1964 (299792.5 km/s)",
        "the constant c", partial(other_speed_of_light, theirs=C_1964), AS_DESCRIBED,
    ),
    Suspect(
        "mass_ratio_de405", "constant", "mass ratio of DE405 with another ephemeris",
        "EMRAT where the Earth is found from the Earth-Moon barycentre",
        partial(other_mass_ratio, theirs=EMRAT_DE405), AS_DESCRIBED,
    ),
    Suspect(
        "gm_earth_and_moon", "constant", "GM of Earth and Moon together in the Earth's gravity",
        "the GM in the Earth's Shapiro delay", gravity_of_earth_and_moon, AS_DESCRIBED,
    ),
    Suspect(
        "mapping_cosecant", "constant", "mapping function 1/sin(elevation)",
        "the mapping function of the troposphere", cosecant, AS_DESCRIBED,
    ),
    Suspect(
        "marini_murray", "constant", "troposphere of Marini and Murray (1973)",
        "which tropospheric model is used", marini_murray, AS_DESCRIBED,
    ),
    Suspect(
        "weather_standard", "constant", "standard atmosphere in the place of the weather",
        "whether the weather of the record reaches the troposphere", standard_air, AS_DESCRIBED,
    ),
    Suspect(
        "pressure_at_sea_level", "constant", "pressure reduced to sea level",
        "the pressure: at the station, or at sea level?", pressure_at_sea_level, AS_DESCRIBED,
    ),
    Suspect(
        "humidity", "constant", "water vapour in the troposphere",
        "the humidity: a fraction, or percent?", dry_air,
        {
            1.0: "left out", 0.99: "a fraction taken as percent",
            -99.0: "percent taken as a fraction", -1.0: "counted twice",
        },
    ),
    Suspect(
        "wavelength_doubled", "constant", "twice the wavelength in the troposphere",
        "the wavelength: fundamental or doubled laser", partial(other_wavelength, halved=False),
        AS_DESCRIBED,
    ),
    Suspect(
        "wavelength_halved", "constant", "half the wavelength in the troposphere",
        "the wavelength: fundamental or doubled laser", partial(other_wavelength, halved=True),
        AS_DESCRIBED,
    ),
    Suspect(
        "gravity_of_place", "constant", "latitude and height in the zenith delay",
        "the factor f(phi, H) of the zenith delay", without_gravity_of_place,
        {1.0: "ignored", 2.0: "on the wrong side of the fraction"},
    ),
)  # fmt: skip
"""Constants and the troposphere."""
