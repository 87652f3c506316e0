"""Derivatives of the delay in the troposphere with respect to everything it depends on.

Source: the equations of `lighttime.path.troposphere`, differentiated by hand.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.path.troposphere import (
    _GRAVITY_OF_HEIGHT,
    _GRAVITY_OF_LATITUDE,
    FCULA,
    _fractions,
    zenith_delay,
    zenith_delay_of_vapour,
)
from lighttime.path.weather import Weather

__all__ = ["SlantSlopes", "slant_slopes"]

Array = NDArray[np.float64]


class SlantSlopes(NamedTuple):
    """Derivatives of a slant delay, each of shape (...): metres per unit of the argument."""

    sine: Array
    """Sine of the elevation."""
    zenith_m: Array
    """The zenith delay, metres: the value of the mapping function."""
    latitude_rad: Array
    height_m: Array
    pressure_hpa: Array
    temperature_k: Array
    relative_humidity: Array


def slant_slopes(
    sine: ArrayLike,
    latitude_rad: float,
    height_m: float,
    weather: Weather,
    wavelength_nm: float,
) -> SlantSlopes:
    """Derivatives of `lighttime.path.troposphere.slant_delay`.

    Parameters
    ----------
    sine : array_like, shape (...)
        Sine of the elevation.
    latitude_rad, height_m, weather, wavelength_nm
        As in `slant_delay`.

    Returns
    -------
    SlantSlopes
    """
    sine = np.asarray(sine, dtype=float)
    temperature = weather.temperature_k
    dry, wet = zenith_delay(latitude_rad, height_m, weather, wavelength_nm)
    zenith = dry + wet
    a = _fractions(latitude_rad, height_m, temperature, np.arcsin(sine))
    factor, of_sine, of_a = _mapping_slopes(sine, a)
    warm, south, high = (
        sum(slope * row[k] for slope, row in zip(of_a, FCULA, strict=True)) for k in (1, 2, 3)
    )
    # -- zenith delay: both parts are divided by the mean gravity in the column of air -------
    gravity = (
        1.0 - _GRAVITY_OF_LATITUDE * np.cos(2.0 * latitude_rad) - _GRAVITY_OF_HEIGHT * height_m
    )
    north = -zenith * 2.0 * _GRAVITY_OF_LATITUDE * np.sin(2.0 * latitude_rad) / gravity
    upward = zenith * _GRAVITY_OF_HEIGHT / gravity
    of_vapour = _zenith_delay_per_hpa_of_vapour(latitude_rad, height_m, wavelength_nm)
    by_pressure, by_temperature, by_humidity = weather.vapour_pressure_slopes
    return SlantSlopes(
        sine=zenith * of_sine,
        zenith_m=factor,
        latitude_rad=factor * north - zenith * south * np.sin(latitude_rad),
        height_m=factor * upward + zenith * high,
        pressure_hpa=factor * (dry / weather.pressure_hpa + of_vapour * by_pressure),
        temperature_k=factor * of_vapour * by_temperature + zenith * warm,
        relative_humidity=factor * of_vapour * by_humidity,
    )


def _zenith_delay_per_hpa_of_vapour(
    latitude_rad: ArrayLike, height_m: ArrayLike, wavelength_nm: ArrayLike
) -> Array:
    """What 1 hPa of water vapour adds to the zenith delay, metres (it is proportional to it)."""
    return zenith_delay_of_vapour(latitude_rad, height_m, 1000.0, 1.0, wavelength_nm).wet_m


def _mapping_slopes(
    sine: Array, a: tuple[Array, Array, Array]
) -> tuple[Array, Array, tuple[Array, Array, Array]]:
    """The mapping function f(1)/f(sine), its slope in the sine and in the coefficients."""
    top, _, top_a = _fraction_slopes(np.ones_like(sine), a)
    bottom, bottom_sine, bottom_a = _fraction_slopes(sine, a)
    factor = top / bottom
    of_a1, of_a2, of_a3 = ((t - factor * b) / bottom for t, b in zip(top_a, bottom_a, strict=True))
    return factor, -factor * bottom_sine / bottom, (of_a1, of_a2, of_a3)


def _fraction_slopes(
    x: Array, a: tuple[Array, Array, Array]
) -> tuple[Array, Array, tuple[Array, Array, Array]]:
    """f = x + a1/(x + a2/(x + a3)), df/dx and df/da. Source: TN36, equation 9.9."""
    a1, a2, a3 = a
    inner = x + a3
    middle = x + a2 / inner
    f = x + a1 / middle
    outer = -a1 / middle**2  # df/d(middle)
    of_a3 = -outer * a2 / inner**2
    return f, 1.0 + outer + of_a3, (1.0 / middle, outer / inner, of_a3)
