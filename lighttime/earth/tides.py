"""Tides of the solid Earth and of the pole: where the ground goes.

Every function returns a displacement in ITRF, components first, metres.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.constants import DEGREE, EARTH_EQUATORIAL_RADIUS, J2000, JULIAN_CENTURY
from lighttime.data import table
from lighttime.earth.harmonics import doodson_multipliers, harmonic_sum
from lighttime.earth.local import SphericalFrame, stack_components

__all__ = ["permanent_tide", "pole_tide", "secular_pole", "solid_earth_tide", "wobble"]

Array = NDArray[np.float64]

SUN_TO_EARTH_MASS: Final = 332946.0482
MOON_TO_EARTH_MASS: Final = 0.0123000371
"""The ratios GM_body / GM_Earth with which the test case of the solid tide was computed.

Source: IERS Conventions (2010), the solid tide routine that goes with chapter 7."""

H2: Final = 0.6078
L2: Final = 0.0847
"""Love and Shida numbers of degree 2 at the equatorial node of P2. Source: TN36, 7.1.1.1."""

H3: Final = 0.292
L3: Final = 0.015
"""Degree 3. Source: TN36, 7.1.1.1."""

H2_OF_LATITUDE: Final = -0.0006
L2_OF_LATITUDE: Final = 0.0002
"""Coefficients of P2(sin latitude) in h2 and l2. Source: TN36, equation 7.2."""

_L1_DIURNAL, _L1_SEMIDIURNAL = 0.0012, 0.0024  # TN36, 7.1.1.1, l(1)
_H_OUT_DIURNAL, _L_OUT_DIURNAL = -0.0025, -0.0007  # TN36, equations 7.10
_H_OUT_SEMIDIURNAL, _L_OUT_SEMIDIURNAL = -0.0022, -0.0007  # TN36, equations 7.11


def solid_earth_tide(
    xyz_m: ArrayLike,
    sun_m: ArrayLike,
    moon_m: ArrayLike,
    tt1: ArrayLike,
    tt2: ArrayLike,
    ut1_fraction: ArrayLike,
    *,
    h2: float = H2,
    l2: float = L2,
    h3: float = H3,
    l3: float = L3,
    sun_to_earth_mass: float = SUN_TO_EARTH_MASS,
    moon_to_earth_mass: float = MOON_TO_EARTH_MASS,
) -> Array:
    """Displacement by the tide of the solid Earth, tide-free convention.

    Parameters
    ----------
    xyz_m : array_like, shape (3,) or (3, ...)
        Station, ITRF, metres.
    sun_m, moon_m : array_like, shape (3, ...)
        Sun and Moon from the geocentre, ITRF, metres.
    tt1, tt2 : array_like, shape (...)
        Instant, TT Julian date in two parts.
    ut1_fraction : array_like, shape (...)
        Fraction of the UT1 day since 0 h. UTC serves as well: a second is 1 micrometre.
    h2, l2, h3, l3 : float
        Love and Shida numbers of degrees 2 (before the dependence on latitude) and 3.
    sun_to_earth_mass, moon_to_earth_mass : float
        GM of the body over GM of the Earth.

    Returns
    -------
    ndarray, shape (3, ...)
        ITRF, metres. It contains the permanent tide: coordinates that it is added to are
        tide-free ("conventional"), as those of the ITRF are.

    Raises
    ------
    InputError
        If the station is not near the Earth's surface.

    Notes
    -----
    Step 1: degrees 2 and 3 with h2 and l2 that depend on latitude, the out-of-phase parts and
    l(1) of the diurnal and semidiurnal bands. Step 2: the frequency dependence in the diurnal
    and long-period bands.

    Source: IERS Conventions (2010), TN36, 7.1.1.1, equations 7.5 to 7.13, tables 7.3a and 7.3b.
    """
    frame = SphericalFrame.at(xyz_m)
    displacement = _frequency_dependence(frame, tt1, tt2, ut1_fraction)
    for body_m, mass in ((sun_m, sun_to_earth_mass), (moon_m, moon_to_earth_mass)):
        x, y, z = np.asarray(body_m, dtype=float)
        distance = np.sqrt(x * x + y * y + z * z)
        ratio = EARTH_EQUATORIAL_RADIUS / distance
        size = mass * EARTH_EQUATORIAL_RADIUS * ratio**3  # GM_j Re^4 / (GM_E R_j^3)
        body = (x / distance, y / distance, z / distance)
        displacement = displacement + size * (
            _in_phase(frame, body, ratio, h2, l2, h3, l3)
            + _out_of_phase(frame, body)
            + _latitude_dependence_of_l(frame, body)
        )
    return displacement


Direction = tuple[Array, Array, Array]


def _in_phase(
    frame: SphericalFrame, body: Direction, ratio: Array, h2: float, l2: float, h3: float, l3: float
) -> Array:
    """Degrees 2 and 3, in units of GM_j Re^4 / (GM_E R_j^3): equations 7.2, 7.5, 7.6."""
    p2 = (3.0 * frame.sin_latitude**2 - 1.0) / 2.0
    h = h2 + H2_OF_LATITUDE * p2
    l = l2 + L2_OF_LATITUDE * p2  # noqa: E741 (the Shida number)
    up = frame.radial
    cosine = up[0] * body[0] + up[1] * body[1] + up[2] * body[2]
    along_radial = h * (1.5 * cosine**2 - 0.5) + ratio * h3 * (2.5 * cosine**3 - 1.5 * cosine)
    along_tangent = 3.0 * l * cosine + ratio * l3 * (7.5 * cosine**2 - 1.5)
    return stack_components(
        *(
            along_radial * r + along_tangent * (b - cosine * r)
            for r, b in zip(up, body, strict=True)
        )
    )


def _diurnal(frame: SphericalFrame, body: Direction) -> tuple[Array, Array]:
    """sin(2 declination) times the cosine and sine of (station's minus body's longitude)."""
    x, y, z = body
    return (
        2.0 * z * (x * frame.cos_longitude + y * frame.sin_longitude),
        2.0 * z * (x * frame.sin_longitude - y * frame.cos_longitude),
    )


def _semidiurnal(frame: SphericalFrame, body: Direction) -> tuple[Array, Array]:
    """cos(declination)^2 times the cosine and sine of twice the difference of longitudes."""
    x, y, _ = body
    cos_2lon = frame.cos_longitude**2 - frame.sin_longitude**2
    sin_2lon = 2.0 * frame.sin_longitude * frame.cos_longitude
    return (
        (x * x - y * y) * cos_2lon + 2.0 * x * y * sin_2lon,
        (x * x - y * y) * sin_2lon - 2.0 * x * y * cos_2lon,
    )


def _out_of_phase(frame: SphericalFrame, body: Direction) -> Array:
    """The imaginary parts of the Love numbers: equations 7.10 and 7.11."""
    sin, cos = frame.sin_latitude, frame.cos_latitude
    sin_2lat, cos_2lat = 2.0 * sin * cos, cos**2 - sin**2
    d_cosine, d_sine = _diurnal(frame, body)
    s_cosine, s_sine = _semidiurnal(frame, body)
    radial = -0.75 * (_H_OUT_DIURNAL * sin_2lat * d_sine + _H_OUT_SEMIDIURNAL * cos**2 * s_sine)
    north = (
        -1.5 * _L_OUT_DIURNAL * cos_2lat * d_sine + 0.75 * _L_OUT_SEMIDIURNAL * sin_2lat * s_sine
    )
    east = -1.5 * (_L_OUT_DIURNAL * sin * d_cosine + _L_OUT_SEMIDIURNAL * cos * s_cosine)
    return frame.to_itrf(radial, north, east)


def _latitude_dependence_of_l(frame: SphericalFrame, body: Direction) -> Array:
    """The Shida number l(1): equations 7.8 and 7.9, with P21 = 3/2 sin 2Phi, P22 = 3 cos^2 Phi."""
    sin, cos = frame.sin_latitude, frame.cos_latitude
    d_cosine, d_sine = _diurnal(frame, body)
    s_cosine, s_sine = _semidiurnal(frame, body)
    diurnal = -1.5 * _L1_DIURNAL * sin
    semidiurnal = -1.5 * _L1_SEMIDIURNAL * sin * cos
    north = diurnal * sin * d_cosine + semidiurnal * s_cosine
    east = -diurnal * (cos**2 - sin**2) * d_sine + semidiurnal * sin * s_sine
    return frame.to_itrf(0.0, north, east)


def _frequency_dependence(
    frame: SphericalFrame, tt1: ArrayLike, tt2: ArrayLike, ut1_fraction: ArrayLike
) -> Array:
    """Step 2: equations 7.12 and 7.13 with tables 7.3a and 7.3b."""
    arguments = _doodson_arguments(tt1, tt2, ut1_fraction)
    sin, cos = frame.sin_latitude, frame.cos_latitude
    sin_2lat, cos_2lat, p2 = 2.0 * sin * cos, cos**2 - sin**2, 1.5 * sin**2 - 0.5

    # diurnal: the imaginary part of (in + i out) exp i(theta + longitude) is
    # in x sin(theta + longitude) + out x cos(theta + longitude)
    meridian = frame.cos_longitude + 1j * frame.sin_longitude
    radial, transverse = (sum_ * meridian for sum_ in _band("solid_tide_diurnal", 1.0, arguments))
    diurnal = frame.to_itrf(
        sin_2lat * radial.imag, cos_2lat * transverse.imag, sin * transverse.real
    )
    # long periods: the real part of (in - i out) exp(i theta) is in x cos(theta) + out x sin(theta)
    radial, transverse = _band("solid_tide_long_period", -1.0, arguments)
    return diurnal + frame.to_itrf(p2 * radial.real, sin_2lat * transverse.real, 0.0)


def _band(name: str, sign: float, arguments: Array) -> NDArray[np.complex128]:
    """Sums over a table of (in-phase + sign x i x out-of-phase) exp(i theta).

    Row 0 is radial, row 1 transverse; metres.
    """
    terms = table(name)
    coefficients = 1.0e-3 * np.stack(
        [
            terms[f"{axis}_in_mm"] + sign * 1j * terms[f"{axis}_out_mm"]
            for axis in ("radial", "transverse")
        ]
    )
    return harmonic_sum(coefficients, doodson_multipliers(terms), arguments)


_MOON = (218.31664563, 481267.88194, -0.0014663889, 0.00000185139)
_MEAN_SIDEREAL = (280.4606184, 36000.7700536, 0.00038793, -0.0000000258)
_PRECESSION = (0.0, 1.396971278, 0.000308889, 0.000000021, 0.000000007)
_SUN = (280.46645, 36000.7697489, 0.00030322222, 0.000000020, -0.00000000654)
_PERIGEE = (83.35324312, 4069.01363525, -0.01032172222, -0.0000124991, 0.00000005263)
_NODE = (234.95544499, 1934.13626197, -0.00207561111, -0.00000213944, 0.00000001650)
_PERIHELION = (282.93734098, 1.71945766667, 0.00045688889, -0.00000001778, -0.00000000334)
# Degrees, by powers of Julian centuries of TT since J2000.


def _doodson_arguments(tt1: ArrayLike, tt2: ArrayLike, ut1_fraction: ArrayLike) -> Array:
    """tau, s, h, p, N' and p_s in radians, shape (6, ...).

    Source: the polynomials of the solid tide routine of the IERS Conventions (2010). Those of
    other sources differ by a few arcseconds: nothing in the tables, but the last digits of a
    comparison.
    """
    t: Array = ((np.asarray(tt1, dtype=float) - J2000) + np.asarray(tt2)) / JULIAN_CENTURY
    moon, sidereal, precession, sun, perigee, node, perihelion = (
        _polynomial(coefficients, t)
        for coefficients in (
            _MOON, _MEAN_SIDEREAL, _PRECESSION, _SUN, _PERIGEE, _NODE, _PERIHELION,
        )
    )  # fmt: skip
    lunar_time = 360.0 * np.asarray(ut1_fraction, dtype=float) + sidereal - moon
    degrees = (lunar_time, moon + precession, sun, perigee, node, perihelion)
    return stack_components(*degrees) % 360.0 * DEGREE


def _polynomial(coefficients: tuple[float, ...], t: Array) -> Array:
    value = np.zeros_like(t)
    for coefficient in reversed(coefficients):
        value = value * t + coefficient
    return value


def permanent_tide(xyz_m: ArrayLike) -> Array:
    """The permanent tide: mean-tide minus tide-free position.

    Parameters
    ----------
    xyz_m : array_like, shape (3, ...)
        Station, ITRF, metres.

    Returns
    -------
    ndarray, shape (3, ...)
        ITRF, metres. Add it to a tide-free position to get the mean-tide one.

    Raises
    ------
    InputError
        If the station is not near the Earth's surface.

    Notes
    -----
    Source: IERS Conventions (2010), TN36, 7.1.1.2, equations 7.14.

    Examples
    --------
    >>> permanent_tide([0.0, 0.0, 6356752.0]).round(4).tolist()
    [0.0, 0.0, -0.1205]
    """
    frame = SphericalFrame.at(xyz_m)
    p2 = (3.0 * frame.sin_latitude**2 - 1.0) / 2.0
    sin_2lat = 2.0 * frame.sin_latitude * frame.cos_latitude
    return frame.to_itrf((-0.1206 + 0.0001 * p2) * p2, (-0.0252 - 0.0001 * p2) * sin_2lat, 0.0)


def secular_pole(years_since_2000: ArrayLike) -> tuple[Array, Array]:
    """The IERS secular pole of 2018, arcseconds: xs, ys, each of shape (...).

    Source: IERS Conventions (2010), 7.1.4 as updated in 2018:
    55.0 + 1.677 dt and 320.5 + 3.460 dt milliarcseconds.

    Examples
    --------
    >>> x, y = secular_pole(10.0)
    >>> round(float(x), 5), round(float(y), 5)
    (0.07177, 0.3551)
    """
    years = np.asarray(years_since_2000, dtype=float)
    return (55.0 + 1.677 * years) * 1.0e-3, (320.5 + 3.460 * years) * 1.0e-3


def wobble(
    xp_arcsec: ArrayLike, yp_arcsec: ArrayLike, years_since_2000: ArrayLike
) -> tuple[Array, Array]:
    """Wobble parameters m1 and m2, arcseconds: the pole from its secular position.

    Parameters
    ----------
    xp_arcsec, yp_arcsec : array_like, shape (...)
        Coordinates of the pole.
    years_since_2000 : array_like, shape (...)
        Years of 365.25 days since 2000.0.

    Returns
    -------
    m1, m2 : ndarray, shape (...)

    Notes
    -----
    Source: IERS Conventions (2010), TN36, 7.1.4: m1 = xp - xs, m2 = -(yp - ys).
    """
    x_secular, y_secular = secular_pole(years_since_2000)
    return np.asarray(xp_arcsec) - x_secular, y_secular - np.asarray(yp_arcsec)


def pole_tide(
    xyz_m: ArrayLike, xp_arcsec: ArrayLike, yp_arcsec: ArrayLike, years_since_2000: ArrayLike
) -> Array:
    """Displacement by the pole tide: the ground follows the moving axis of rotation.

    Parameters
    ----------
    xyz_m : array_like, shape (3,) or (3, ...)
        Station, ITRF, metres.
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
    The coefficients stand for h2 = 0.6207 and l2 = 0.0836. They are the rounded ones of the
    equation: unrounded they are -33.2 and 9.0 mm, a difference of 0.1 mm at the largest.

    Source: IERS Conventions (2010), TN36, 7.1.4, equation 7.26.
    """
    frame = SphericalFrame.at(xyz_m)
    m1, m2 = wobble(xp_arcsec, yp_arcsec, years_since_2000)
    sin, cos = frame.sin_latitude, frame.cos_latitude
    toward = m1 * frame.cos_longitude + m2 * frame.sin_longitude
    across = m1 * frame.sin_longitude - m2 * frame.cos_longitude
    # in colatitude: sin 2theta = sin 2latitude, cos 2theta = -cos 2latitude, south = -north
    radial = -33.0e-3 * 2.0 * sin * cos * toward
    north = -9.0e-3 * (cos**2 - sin**2) * toward
    east = 9.0e-3 * sin * across
    return frame.to_itrf(radial, north, east)
