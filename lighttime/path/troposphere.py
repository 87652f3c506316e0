"""The delay of laser light in the troposphere.

Zenith delay of Mendes & Pavlis 2004 times the mapping function FCULa of Mendes et al. 2002,
as the IERS Conventions adopt them for optical ranging.

Source: Mendes & Pavlis 2004, Geophys. Res. Lett. 31, L14602; Mendes et al. 2002, Geophys. Res.
Lett. 29, 1414; IERS Conventions (2010), TN36, 9.1.1 and 9.1.2.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.constants import DEGREE
from lighttime.errors import HorizonError, InputError
from lighttime.inputs import broadcast_shape, first_outside, numbers, within
from lighttime.path.weather import PRESSURE_HPA, TEMPERATURE_K, Weather

__all__ = [
    "LOWEST_ELEVATION_DEG",
    "Weather",
    "ZenithDelay",
    "mapping",
    "mapping_rate",
    "slant_delay",
    "zenith_delay",
    "zenith_delay_of_vapour",
]

Array = NDArray[np.float64]

LOWEST_ELEVATION_DEG = 3.0
"""The mapping function holds above this. Source: TN36, 9.1.2."""

WAVELENGTH_NM = (355.0, 1064.0)
"""Range of the zenith delay. Source: TN36, 9.1.1."""

HEIGHT_M = (-1000.0, 10_000.0)


class ZenithDelay(NamedTuple):
    """The two parts of a zenith delay, metres, each of shape (...)."""

    hydrostatic_m: Array
    wet_m: Array


def zenith_delay(
    latitude_rad: ArrayLike, height_m: ArrayLike, weather: Weather, wavelength_nm: ArrayLike
) -> ZenithDelay:
    """Delay towards the zenith.

    Parameters
    ----------
    latitude_rad : array_like, shape (...)
        Geodetic latitude of the station.
    height_m : array_like, shape (...)
        Its height above the ellipsoid.
    weather : Weather
    wavelength_nm : array_like, shape (...)
        355 to 1064 nm, in vacuum.

    Returns
    -------
    hydrostatic_m, wet_m : ndarray, shape (...)

    Raises
    ------
    InputError
        If an input is outside its range, or the shapes do not go together.

    Examples
    --------
    >>> weather = Weather(1013.25, 288.15, 0.5)
    >>> hydrostatic, wet = zenith_delay(0.8, 0.0, weather, 532.0)
    >>> round(float(hydrostatic), 3), round(float(wet), 4)
    (2.448, 0.0013)
    """
    return zenith_delay_of_vapour(
        latitude_rad, height_m, weather.pressure_hpa, weather.vapour_pressure_hpa, wavelength_nm
    )


def zenith_delay_of_vapour(
    latitude_rad: ArrayLike,
    height_m: ArrayLike,
    pressure_hpa: ArrayLike,
    vapour_pressure_hpa: ArrayLike,
    wavelength_nm: ArrayLike,
) -> ZenithDelay:
    """Delay towards the zenith, from the partial pressure of water vapour.

    Parameters
    ----------
    latitude_rad, height_m, wavelength_nm
        As in `zenith_delay`.
    pressure_hpa : array_like, shape (...)
        Total pressure.
    vapour_pressure_hpa : array_like, shape (...)
        Partial pressure of water vapour, 0 to 300 hPa.

    Returns
    -------
    hydrostatic_m, wet_m : ndarray, shape (...)

    Raises
    ------
    InputError
        If an input is outside its range, or the shapes do not go together.

    Notes
    -----
    Source: TN36, equations 9.3 to 9.8 (Mendes & Pavlis 2004).
    """
    latitude = within("latitude_rad", latitude_rad, *_LATITUDE)
    height = within("height_m", height_m, *HEIGHT_M, " m")
    pressure = within("pressure_hpa", pressure_hpa, *PRESSURE_HPA, " hPa")
    vapour = within("vapour_pressure_hpa", vapour_pressure_hpa, *_VAPOUR_HPA, " hPa")
    wavelength = within("wavelength_nm", wavelength_nm, *WAVELENGTH_NM, " nm")
    broadcast_shape(
        latitude_rad=latitude,
        height_m=height,
        pressure_hpa=pressure,
        vapour_pressure_hpa=vapour,
        wavelength_nm=wavelength,
    )
    gravity = 1.0 - _GRAVITY_OF_LATITUDE * np.cos(2.0 * latitude) - _GRAVITY_OF_HEIGHT * height
    f_hydrostatic, f_wet = _dispersion(wavelength * 1.0e-3)
    return ZenithDelay(
        2.416579e-3 * f_hydrostatic * pressure / gravity,
        1.0e-4 * (5.316 * f_wet - _WET_FROM_DRY * f_hydrostatic) * vapour / gravity,
    )


_LATITUDE = (-np.pi / 2.0, np.pi / 2.0, " rad")
_VAPOUR_HPA = (0.0, 300.0)

_GRAVITY_OF_LATITUDE = 0.00266
_GRAVITY_OF_HEIGHT = 0.28e-6
_WET_FROM_DRY = 3.759
_CARBON_DIOXIDE_PPM = 375.0


def _dispersion(wavelength_um: Array) -> tuple[Array, Array]:
    """How refractivity depends on wavelength, hydrostatic and wet: TN36, equations 9.4 and 9.7."""
    s = 1.0 / wavelength_um**2  # wave number squared, um^-2
    dioxide = 1.0 + 0.534e-6 * (_CARBON_DIOXIDE_PPM - 450.0)
    hydrostatic: Array = (
        0.01
        * dioxide
        * (
            19990.975 * (238.0185 + s) / (238.0185 - s) ** 2
            + 579.55174 * (57.362 + s) / (57.362 - s) ** 2
        )
    )
    wet: Array = 0.003101 * (
        295.235 + 3.0 * 2.6422 * s - 5.0 * 0.032380 * s**2 + 7.0 * 0.004028 * s**3
    )
    return hydrostatic, wet


def mapping(
    elevation_rad: ArrayLike,
    latitude_rad: ArrayLike,
    height_m: ArrayLike,
    temperature_k: ArrayLike,
) -> Array:
    """Slant delay over zenith delay: the mapping function FCULa.

    Parameters
    ----------
    elevation_rad : array_like, shape (...)
        Elevation of the ray above the horizon, outside of the atmosphere (unrefracted).
    latitude_rad : array_like, shape (...)
        Geodetic latitude of the station.
    height_m : array_like, shape (...)
        Its height above the ellipsoid.
    temperature_k : array_like, shape (...)
        Air temperature at the station.

    Returns
    -------
    ndarray, shape (...)

    Raises
    ------
    HorizonError
        If the elevation is not above 3 degrees.
    InputError
        If an input is outside its range, or the shapes do not go together.

    Notes
    -----
    Source: TN36, 9.1.2, equations 9.9 and 9.10 with table 9.1 (Mendes et al. 2002).
    """
    sine = np.sin(_elevation(elevation_rad))
    a1, a2, a3 = _fractions(latitude_rad, height_m, temperature_k, elevation_rad)
    top = 1.0 + a1 / (1.0 + a2 / (1.0 + a3))
    return top / (sine + a1 / (sine + a2 / (sine + a3)))


def mapping_rate(
    elevation_rad: ArrayLike,
    latitude_rad: ArrayLike,
    height_m: ArrayLike,
    temperature_k: ArrayLike,
) -> Array:
    """Derivative of `mapping` with respect to the elevation, per radian.

    Parameters
    ----------
    elevation_rad, latitude_rad, height_m, temperature_k
        As in `mapping`.

    Returns
    -------
    ndarray, shape (...)

    Raises
    ------
    HorizonError, InputError
        As in `mapping`.
    """
    elevation = _elevation(elevation_rad)
    sine = np.sin(elevation)
    a1, a2, a3 = _fractions(latitude_rad, height_m, temperature_k, elevation_rad)
    top = 1.0 + a1 / (1.0 + a2 / (1.0 + a3))
    inner = sine + a2 / (sine + a3)
    inner_slope = 1.0 - a2 / (sine + a3) ** 2
    bottom = sine + a1 / inner
    bottom_slope = 1.0 - a1 * inner_slope / inner**2
    return -top / bottom**2 * bottom_slope * np.cos(elevation)


def _fractions(
    latitude_rad: ArrayLike, height_m: ArrayLike, temperature_k: ArrayLike, elevation_rad: ArrayLike
) -> tuple[Array, Array, Array]:
    """The three coefficients of the continued fraction: TN36, equation 9.10 with table 9.1."""
    cosine = np.cos(within("latitude_rad", latitude_rad, *_LATITUDE))
    height = within("height_m", height_m, *HEIGHT_M, " m")
    celsius = within("temperature_k", temperature_k, *TEMPERATURE_K, " K") - 273.15
    broadcast_shape(
        elevation_rad=elevation_rad,
        latitude_rad=latitude_rad,
        height_m=height_m,
        temperature_k=temperature_k,
    )
    a1, a2, a3 = (
        one + warm * celsius + south * cosine + high * height for one, warm, south, high in FCULA
    )
    return a1, a2, a3


FCULA = (
    (12100.8e-7, 1729.5e-9, 319.1e-7, -1847.8e-11),
    (30496.5e-7, 234.6e-8, -103.5e-6, -185.6e-10),
    (6877.7e-5, 197.2e-7, -345.8e-5, 106.0e-9),
)
"""a1, a2, a3 by 1, Celsius temperature, cosine of latitude, height. Source: TN36, table 9.1."""


def slant_delay(
    elevation_rad: ArrayLike,
    latitude_rad: ArrayLike,
    height_m: ArrayLike,
    weather: Weather,
    wavelength_nm: ArrayLike,
) -> Array:
    """Delay along the ray, one way, metres.

    Parameters
    ----------
    elevation_rad : array_like, shape (...)
        Elevation of the ray in the rest frame of the station (aberrated), unrefracted.
    latitude_rad, height_m, weather, wavelength_nm
        As in `zenith_delay`.

    Returns
    -------
    ndarray, shape (...)

    Raises
    ------
    HorizonError
        If the elevation is not above 3 degrees.
    InputError
        If an input is outside its range, or the shapes do not go together.

    Examples
    --------
    >>> weather = Weather(724.4, 268.0, 0.34)
    >>> delay = slant_delay([0.5, 1.5], 0.572, 2780.0, weather, 532.0)
    >>> delay.round(3).tolist()
    [3.645, 1.758]
    """
    zenith = sum(zenith_delay(latitude_rad, height_m, weather, wavelength_nm))
    factor = mapping(elevation_rad, latitude_rad, height_m, weather.temperature_k)
    broadcast_shape(elevation_rad=elevation_rad, weather=zenith)
    return zenith * factor


def _elevation(elevation_rad: ArrayLike) -> Array:
    """The elevation, checked: radians, above the limit of the mapping function."""
    elevation = numbers("elevation_rad", elevation_rad)
    bad = first_outside(elevation, -np.pi / 2.0, np.pi / 2.0)
    if bad is not None:
        raise InputError(f"elevation_rad{bad[0]}", bad[1], "-pi/2 to pi/2, in radians")
    low = first_outside(elevation, np.nextafter(LOWEST_ELEVATION_DEG * DEGREE, 9.0), 9.0)
    if low is not None:
        where, value = low
        reason = (
            "the target is below the horizon"
            if value < 0.0
            else "the mapping function does not hold lower"
        )
        raise HorizonError(
            f"elevation_deg{where}",
            round(value / DEGREE, 6),
            f"above {LOWEST_ELEVATION_DEG:g} deg when there is a troposphere ({reason})",
        )
    return elevation
