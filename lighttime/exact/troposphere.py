"""Delay of laser light in the troposphere, at extended precision.

Source: IERS Conventions (2010), TN36, 9.1: Mendes & Pavlis 2004, Geophys. Res. Lett. 31,
L14602 (zenith delay); Mendes et al. 2002, Geophys. Res. Lett. 29, 1414 (mapping, FCULa).
"""

from __future__ import annotations

from typing import Any

from lighttime.errors import HorizonError
from lighttime.exact.numbers import Real, Vector

__all__ = ["boosted", "mapping", "zenith_delay"]

C = 299792458
LOWEST_DEG = 3


def boosted(direction: Vector, velocity: Vector) -> Vector:
    """Direction in which a photon flies, in the rest frame of an observer.

    Parameters
    ----------
    direction : Vector
        Unit vector along which it flies.
    velocity : Vector
        Of the observer, m/s.

    Notes
    -----
    The Lorentz transformation of the wave vector (1, n).
    """
    beta = velocity / C
    ctx = beta.x.context
    g = 1 / ctx.sqrt(1 - beta @ beta)
    along = direction @ beta
    # n + (g^2/(g + 1) (n.b) - g) b, over g (1 - n.b)
    return (direction + beta * (g**2 / (g + 1) * along - g)) / (g * (1 - along))


def zenith_delay(latitude: Real, height: Real, weather: Any, wavelength_nm: float) -> Real:
    """Delay towards the zenith, m: hydrostatic and wet. Source: TN36, equations 9.3 to 9.8."""
    ctx = latitude.context
    mpf = ctx.mpf
    s = (1000 / mpf(float(wavelength_nm))) ** 2  # wave number squared, um^-2
    carbon_dioxide = 1 + mpf("0.534e-6") * (375 - 450)
    hydrostatic = (
        carbon_dioxide
        / 100
        * (
            mpf("19990.975") * (mpf("238.0185") + s) / (mpf("238.0185") - s) ** 2
            + mpf("579.55174") * (mpf("57.362") + s) / (mpf("57.362") - s) ** 2
        )
    )
    omega = ("295.235", "2.6422", "-0.032380", "0.004028")
    wet = mpf("0.003101") * sum(
        (2 * k + 1) * mpf(coefficient) * s**k for k, coefficient in enumerate(omega)
    )
    gravity = 1 - mpf("0.00266") * ctx.cos(2 * latitude) - mpf("0.28e-6") * height
    pressure = mpf(float(weather.pressure_hpa))
    vapour = mpf(float(weather.vapour_pressure_hpa))
    dry = mpf("0.002416579") * hydrostatic * pressure
    moist = (mpf("5.316") * wet - mpf("3.759") * hydrostatic) * vapour / 10**4
    return (dry + moist) / gravity


_FCULA = (
    ("12100.8e-7", "1729.5e-9", "319.1e-7", "-1847.8e-11"),
    ("30496.5e-7", "234.6e-8", "-103.5e-6", "-185.6e-10"),
    ("6877.7e-5", "197.2e-7", "-345.8e-5", "106.0e-9"),
)
"""a1, a2, a3 by 1, Celsius temperature, cosine of latitude, height. Source: TN36, table 9.1."""


def mapping(sine: Real, latitude: Real, height: Real, temperature_k: float) -> Real:
    """Slant over zenith delay at the sine of an elevation. Source: TN36, equations 9.9, 9.10.

    Raises
    ------
    HorizonError
        At 3 degrees and lower, where the mapping function does not hold.
    """
    ctx = sine.context
    degrees = ctx.asin(sine) * 180 / ctx.pi
    if degrees <= LOWEST_DEG:
        raise HorizonError(
            "elevation_deg", ctx.nstr(degrees, 8), f"above {LOWEST_DEG} deg for a troposphere"
        )
    celsius = ctx.mpf(float(temperature_k)) - ctx.mpf("273.15")
    factors = (ctx.one, celsius, ctx.cos(latitude), height)
    a1, a2, a3 = (ctx.fdot([ctx.mpf(c) for c in row], factors) for row in _FCULA)

    def fraction(x: Real) -> Real:
        return x + a1 / (x + a2 / (x + a3))

    return fraction(ctx.one) / fraction(sine)
