"""The weather at the station, and the water vapour that is in it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.errors import InputError
from lighttime.inputs import broadcast_shape, first_outside, numbers

__all__ = ["Weather", "saturation_pressure_hpa"]

Array = NDArray[np.float64]

PRESSURE_HPA = (300.0, 1100.0)
TEMPERATURE_K = (180.0, 340.0)
HUMIDITY = (0.0, 1.0)
"""What weather on the ground can be, from the highest summits to the deepest shores."""


@dataclass(frozen=True, eq=False)
class Weather:
    """Pressure, temperature and humidity at the station.

    Parameters
    ----------
    pressure_hpa : float or array
        Total pressure, 300 to 1100 hPa.
    temperature_k : float or array
        Air temperature, 180 to 340 K.
    relative_humidity : float or array
        Over liquid water (also below freezing, as weather services report it), 0 to 1.

    Raises
    ------
    InputError
        If a value is not finite or not within its range (the message guesses the unit it is
        in), or the shapes do not go together.

    Examples
    --------
    >>> weather = Weather(pressure_hpa=724.0, temperature_k=268.0, relative_humidity=0.3)
    >>> round(float(weather.vapour_pressure_hpa), 2)
    1.25
    >>> Weather(724.0, 268.0, 30.0)
    Traceback (most recent call last):
        ...
    lighttime.errors.InputError: relative_humidity is 30.0; allowed: 0 to 1 (in percent? then 0.3)
    """

    pressure_hpa: float | Array
    temperature_k: float | Array
    relative_humidity: float | Array

    def __post_init__(self) -> None:
        for name, (low, high), unit, slips in (
            ("pressure_hpa", PRESSURE_HPA, " hPa", _PRESSURE_SLIPS),
            ("temperature_k", TEMPERATURE_K, " K", _TEMPERATURE_SLIPS),
            ("relative_humidity", HUMIDITY, "", _HUMIDITY_SLIPS),
        ):
            value = numbers(name, getattr(self, name))
            bad = first_outside(value, low, high)
            if bad is not None:
                where, found = bad
                allowed = f"{low:g} to {high:g}{unit}{_guess(found, slips, low, high)}"
                raise InputError(f"{name}{where}", found, allowed)
            object.__setattr__(self, name, float(value) if value.ndim == 0 else _frozen(value))
        broadcast_shape(
            pressure_hpa=self.pressure_hpa,
            temperature_k=self.temperature_k,
            relative_humidity=self.relative_humidity,
        )

    @property
    def shape(self) -> tuple[int, ...]:
        """The common shape of the three."""
        return np.broadcast_shapes(
            np.shape(self.pressure_hpa),
            np.shape(self.temperature_k),
            np.shape(self.relative_humidity),
        )

    @property
    def vapour_pressure_hpa(self) -> Array:
        """Partial pressure of water vapour.

        Relative humidity times the saturation pressure, enhanced by the presence of the air.

        Source: Giacomo 1982, Metrologia 18, 33, with the constants of Davis 1992, Metrologia
        29, 67 (the equation of BIPM/CIPM for moist air, from memory); Ciddor 1996, on whose
        refractivity the zenith delay stands, takes the same.
        """
        pressure, temperature = np.asarray(self.pressure_hpa), np.asarray(self.temperature_k)
        celsius = temperature - 273.15
        one, of_pressure, of_warmth = _ENHANCEMENT
        enhancement = one + of_pressure * pressure + of_warmth * celsius**2
        vapour: Array = (
            np.asarray(self.relative_humidity) * enhancement * saturation_pressure_hpa(temperature)
        )
        return vapour

    @property
    def vapour_pressure_slopes(self) -> tuple[Array, Array, Array]:
        """Derivatives of `vapour_pressure_hpa` by pressure, temperature and relative humidity."""
        pressure, temperature = np.asarray(self.pressure_hpa), np.asarray(self.temperature_k)
        humidity = np.asarray(self.relative_humidity)
        celsius = temperature - 273.15
        one, of_pressure, of_warmth = _ENHANCEMENT
        enhancement = one + of_pressure * pressure + of_warmth * celsius**2
        saturation = saturation_pressure_hpa(temperature)
        warmer = enhancement * saturation_pressure_slope(temperature)
        warmer = warmer + 2.0 * of_warmth * celsius * saturation
        return humidity * of_pressure * saturation, humidity * warmer, enhancement * saturation

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Weather):
            return NotImplemented
        return all(np.array_equal(a, b) for a, b in zip(self._key(), other._key(), strict=True))

    def __hash__(self) -> int:
        return hash(tuple((np.shape(value), np.asarray(value).tobytes()) for value in self._key()))

    def _key(self) -> tuple[float | Array, ...]:
        return self.pressure_hpa, self.temperature_k, self.relative_humidity


def saturation_pressure_hpa(temperature_k: ArrayLike) -> Array:
    """Saturation pressure of water vapour over liquid water.

    Parameters
    ----------
    temperature_k : array_like, shape (...)

    Returns
    -------
    ndarray, shape (...)
        hPa.

    Notes
    -----
    Source: Davis 1992, Metrologia 29, 67, equation 22 with appendix (from memory): in pascals,
    exp(A T^2 + B T + C + D / T).

    Examples
    --------
    >>> round(float(saturation_pressure_hpa(293.15)), 2)  # 20 C
    23.39
    """
    t = np.asarray(temperature_k, dtype=float)
    a, b, c, d = _SATURATION
    pascal: Array = np.exp(a * t**2 + b * t + c + d / t)
    return pascal / 100.0


def saturation_pressure_slope(temperature_k: ArrayLike) -> Array:
    """Derivative of `saturation_pressure_hpa` with respect to the temperature, hPa/K."""
    t = np.asarray(temperature_k, dtype=float)
    a, b, _, d = _SATURATION
    slope: Array = saturation_pressure_hpa(t) * (2.0 * a * t + b - d / t**2)
    return slope


_SATURATION = (1.2378847e-5, -1.9121316e-2, 33.93711047, -6.3431645e3)
_ENHANCEMENT = (1.00062, 3.14e-6, 5.6e-7)


# -- units given by mistake ----------------------------------------------------------------

Slip = tuple[float, float, str]
"""A factor and an offset that bring a value home, and the unit it then was in."""

_PRESSURE_SLIPS: tuple[Slip, ...] = (
    (0.01, 0.0, "in pascals"),
    (10.0, 0.0, "in kilopascals"),
    (33.86389, 0.0, "in inches of mercury"),
)
_TEMPERATURE_SLIPS: tuple[Slip, ...] = ((1.0, 273.15, "in degrees Celsius"),)
_HUMIDITY_SLIPS: tuple[Slip, ...] = ((0.01, 0.0, "in percent"),)


def _guess(value: float, slips: tuple[Slip, ...], low: float, high: float) -> str:
    """The unit a value out of range is likely to be in, as an addition to the message."""
    for factor, offset, unit in slips:
        home = value * factor + offset
        if low <= home <= high:
            return f" ({unit}? then {home:.6g})"
    return ""


def _frozen(value: Array) -> Array:
    copy = value.copy()
    copy.flags.writeable = False
    return copy
