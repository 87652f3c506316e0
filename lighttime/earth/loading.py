"""Displacements by the weight of the oceans and of the atmosphere, from station coefficients.

Every function returns a displacement in ITRF, components first, metres. Without coefficients
there is no displacement to compute: these effects depend on the place, and the services that
publish them give them for each station.
"""

from __future__ import annotations

from dataclasses import dataclass, fields
from functools import cached_property
from math import pi, sqrt
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.constants import ARCSECOND, EARTH_EQUATORIAL_RADIUS, TURN
from lighttime.earth.admittance import CONSTITUENTS, potential, spread
from lighttime.earth.arguments import centuries, doodson_arguments, fundamental_arguments
from lighttime.earth.harmonics import harmonic_sum
from lighttime.earth.local import enu_to_itrf
from lighttime.earth.tides import wobble
from lighttime.errors import InputError

__all__ = [
    "AtmosphereLoading",
    "OceanLoading",
    "OceanPoleTide",
    "atmosphere_loading",
    "ocean_loading",
    "ocean_pole_tide_loading",
]

Array = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class _Coefficients:
    """Coefficients of a station: immutable, compared and hashed by value."""

    def __eq__(self, other: object) -> bool:
        return type(self) is type(other) and self._key() == other._key()

    def __hash__(self) -> int:
        return hash(self._key())

    def _key(self) -> tuple[object, ...]:
        values = (getattr(self, field.name) for field in fields(self))
        return tuple(v.tobytes() if isinstance(v, np.ndarray) else v for v in values)

    def _set(self, name: str, shape: tuple[int, ...], lowest: float, highest: float) -> None:
        """Check an array and put a read-only float64 copy in its place."""
        given = getattr(self, name)
        allowed = f"shape {shape}, {lowest:g} to {highest:g}"
        try:
            value = np.array(given, dtype=float)
        except (TypeError, ValueError):
            raise InputError(name, given, f"numbers of {allowed}") from None
        if value.shape != shape:
            raise InputError(name, f"an array of shape {value.shape}", allowed)
        wrong = ~((value >= lowest) & (value <= highest))
        if wrong.any():
            where = tuple(int(k) for k in np.argwhere(wrong)[0])
            raise InputError(f"{name}{list(where)}", float(value[where]), allowed)
        value.flags.writeable = False
        object.__setattr__(self, name, value)


@dataclass(frozen=True, eq=False)
class OceanLoading(_Coefficients):
    """Ocean tide loading coefficients of a station, as the loading services publish them.

    Parameters
    ----------
    amplitudes_m : array_like, shape (3, 11)
        Rows: up, west, south. Columns: M2 S2 N2 K2 K1 O1 P1 Q1 Mf Mm Ssa. Metres.
    phases_deg : array_like, shape (3, 11)
        Greenwich phase lags, degrees; same layout.
    source : str
        The ocean model and who computed the coefficients.
    centre_of_mass : bool or None
        Whether the coefficients contain the motion of the centre of mass ("CMC: YES"): the
        displacement is then reckoned from the joint centre of mass of solid Earth and ocean,
        which is the one that an ephemeris of the Earth describes. None: their source does not
        say.

    Raises
    ------
    InputError
        For a wrong shape, a number that is not finite, an amplitude below 0 or above 0.5 m
        (millimetres given for metres), a phase outside -360 to 360 degrees.
    """

    amplitudes_m: Array
    phases_deg: Array
    source: str = ""
    centre_of_mass: bool | None = None

    def __post_init__(self) -> None:
        self._set("amplitudes_m", (3, len(CONSTITUENTS)), 0.0, 0.5)
        self._set("phases_deg", (3, len(CONSTITUENTS)), -360.0, 360.0)

    @cached_property
    def spectrum(self) -> NDArray[np.complex128]:
        """Complex amplitudes of all lines, metres, shape (3, 342); rows up, west, south."""
        lines = spread(self.amplitudes_m, self.phases_deg)
        lines.flags.writeable = False
        return lines


@dataclass(frozen=True, eq=False)
class OceanPoleTide(_Coefficients):
    """Ocean pole tide loading coefficients of a station.

    Parameters
    ----------
    up, north, east : complex
        Coefficients u^R + i u^I, without unit. Source of a world-wide grid: Desai 2002, as
        distributed with the IERS Conventions (2010), 7.1.5.
    source : str
        Where they were taken from.

    Raises
    ------
    InputError
        If a coefficient is not finite or its size is above 2.
    """

    up: complex
    north: complex
    east: complex
    source: str = ""

    def __post_init__(self) -> None:
        for name in ("up", "north", "east"):
            given = getattr(self, name)
            try:
                value = complex(given)
            except (TypeError, ValueError):
                raise InputError(name, given, "a complex number") from None
            if not abs(value) <= 2.0:
                raise InputError(name, given, "a complex number of absolute value 0 to 2")
            object.__setattr__(self, name, value)


@dataclass(frozen=True, eq=False)
class AtmosphereLoading(_Coefficients):
    """Loading coefficients of the daily and half-daily tide of the atmosphere.

    Parameters
    ----------
    cosine_m, sine_m : array_like, shape (3, 2)
        Rows: up, north, east. Columns: S1, S2. Metres, of the cosine and sine of UT1.
    source : str
        Who computed them.

    Raises
    ------
    InputError
        For a wrong shape, a number that is not finite or above 0.05 m in size.
    """

    cosine_m: Array
    sine_m: Array
    source: str = ""

    def __post_init__(self) -> None:
        for name in ("cosine_m", "sine_m"):
            self._set(name, (3, 2), -0.05, 0.05)


def ocean_loading(
    xyz_m: ArrayLike,
    coefficients: OceanLoading,
    tt1: ArrayLike,
    tt2: ArrayLike,
    ut1_fraction: ArrayLike,
) -> Array:
    """Displacement by the load of the ocean tide.

    Parameters
    ----------
    xyz_m : array_like, shape (3,)
        Station, ITRF, metres.
    coefficients : OceanLoading
        Of this station.
    tt1, tt2 : array_like, shape (...)
        Instant, TT Julian date in two parts.
    ut1_fraction : array_like, shape (...)
        Fraction of the UT1 day since 0 h (UTC serves as well).

    Returns
    -------
    ndarray, shape (3, ...)
        ITRF, metres.

    Raises
    ------
    InputError
        If the station is not near the Earth's surface.

    Notes
    -----
    The 11 constituents are spread over the 342 largest lines of the tidal potential; see
    `lighttime.earth.admittance`.

    Source: IERS Conventions (2010), TN36, 7.1.2.
    """
    fundamental = fundamental_arguments(centuries(tt1, tt2))
    _, _, f, d, omega = fundamental
    mean_sun = f + omega - d
    sidereal = TURN * (np.asarray(ut1_fraction, dtype=float) + 0.5) + mean_sun
    arguments = doodson_arguments(fundamental, sidereal)
    multipliers, _, _ = potential()
    up, west, south = harmonic_sum(coefficients.spectrum, multipliers, arguments).real
    return enu_to_itrf(np.stack([-west, -south, up]), xyz_m)


_ROTATION_RATE: Final = 7.292115e-5  # rad/s
_GM_EARTH: Final = 3.986004418e14  # m^3/s^2
_GRAVITATION: Final = 6.67428e-11  # m^3/(kg s^2)
_EQUATORIAL_GRAVITY: Final = 9.7803278  # m/s^2
_SEA_WATER_DENSITY: Final = 1025.0  # kg/m^3
_GAMMA_2: Final = 0.6870 + 0.0036j  # 1 + k2 - h2
# Source: IERS Conventions (2010), TN36, 7.1.5 and table 1.1.

_POLE_TIDE_HEIGHT: Final = (
    sqrt(8.0 * pi / 15.0) * _ROTATION_RATE**2 * EARTH_EQUATORIAL_RADIUS**4 / _GM_EARTH
)
_POLE_TIDE_LOAD: Final = (
    4.0 * pi * _GRAVITATION * EARTH_EQUATORIAL_RADIUS * _SEA_WATER_DENSITY * _POLE_TIDE_HEIGHT
) / (3.0 * _EQUATORIAL_GRAVITY)
"""H_p and K, metres. Source: IERS Conventions (2010), TN36, equations 7.30 and 7.31."""


def ocean_pole_tide_loading(
    xyz_m: ArrayLike,
    coefficients: OceanPoleTide,
    xp_arcsec: ArrayLike,
    yp_arcsec: ArrayLike,
    years_since_2000: ArrayLike,
) -> Array:
    """Displacement by the load of the pole tide in the ocean.

    Parameters
    ----------
    xyz_m : array_like, shape (3,)
        Station, ITRF, metres.
    coefficients : OceanPoleTide
        Of this station.
    xp_arcsec, yp_arcsec : array_like, shape (...)
        Coordinates of the pole.
    years_since_2000 : array_like, shape (...)
        Years of 365.25 days since 2000.0.

    Returns
    -------
    ndarray, shape (3, ...)
        ITRF, metres.

    Raises
    ------
    InputError
        If the station is not near the Earth's surface.

    Notes
    -----
    u = K {(m1 gR + m2 gI) uR + (m2 gR - m1 gI) uI}, with g = gamma_2 = 1 + k2 - h2: the real
    part of a product of complex numbers.

    Source: IERS Conventions (2010), TN36, 7.1.5, equation 7.29.
    """
    m1, m2 = wobble(xp_arcsec, yp_arcsec, years_since_2000)
    driving = _POLE_TIDE_LOAD * ARCSECOND * (m1 + 1j * m2) * _GAMMA_2.conjugate()
    enu = [
        (driving * u.conjugate()).real
        for u in (coefficients.east, coefficients.north, coefficients.up)
    ]
    return enu_to_itrf(np.stack(enu), xyz_m)


def atmosphere_loading(
    xyz_m: ArrayLike, coefficients: AtmosphereLoading, ut1_fraction: ArrayLike
) -> Array:
    """Displacement by the load of the daily (S1) and half-daily (S2) tide of the atmosphere.

    Parameters
    ----------
    xyz_m : array_like, shape (3,)
        Station, ITRF, metres.
    coefficients : AtmosphereLoading
        Of this station.
    ut1_fraction : array_like, shape (...)
        Fraction of the UT1 day since 0 h.

    Returns
    -------
    ndarray, shape (3, ...)
        ITRF, metres.

    Raises
    ------
    InputError
        If the station is not near the Earth's surface.

    Notes
    -----
    A cos(w1 t) + B sin(w1 t) for S1 and the same for S2, with one and two turns a day of UT1.

    Source: IERS Conventions (2010), TN36, 7.1.3 (model of Ray & Ponte 2003).
    """
    daily = TURN * np.asarray(ut1_fraction, dtype=float)
    phases = np.stack([daily, 2.0 * daily])
    up, north, east = np.tensordot(coefficients.cosine_m, np.cos(phases), axes=1) + np.tensordot(
        coefficients.sine_m, np.sin(phases), axes=1
    )
    return enu_to_itrf(np.stack([east, north, up]), xyz_m)
