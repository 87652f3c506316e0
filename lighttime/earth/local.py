"""Directions at a place on the Earth: geodetic coordinates and local axes.

Two sets of local axes are in use. East, north and up of the GRS80 ellipsoid serve stations,
loading coefficients and people. The spherical axes (radial, and north and east on the sphere)
are those in which the tides of the solid Earth and of the pole are written.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.constants import GRS80_INVERSE_FLATTENING, WGS84_SEMI_MAJOR_AXIS
from lighttime.errors import InputError

__all__ = [
    "SphericalFrame",
    "east_north_up",
    "enu_to_itrf",
    "from_geodetic",
    "geodetic",
    "itrf_to_enu",
    "place",
    "stack_components",
]

Array = NDArray[np.float64]

_FLATTENING = 1.0 / GRS80_INVERSE_FLATTENING
_ECCENTRICITY_SQUARED = _FLATTENING * (2.0 - _FLATTENING)
_SEMI_MINOR_AXIS = WGS84_SEMI_MAJOR_AXIS * (1.0 - _FLATTENING)
_ITERATIONS = 3  # each gains a factor of 1e-4 or more within 100 km of the ground


def place(xyz_m: ArrayLike) -> Array:
    """The position of something on the ground, checked.

    Parameters
    ----------
    xyz_m : array_like, shape (3, ...)
        ITRF position, metres.

    Returns
    -------
    ndarray, shape (3, ...)

    Raises
    ------
    InputError
        If the first axis is not of length 3, or a point is not within 6250 to 6500 km of the
        geocentre (kilometres given for metres, longitude for x, ...).
    """
    xyz = np.asarray(xyz_m, dtype=float)
    if xyz.ndim == 0 or xyz.shape[0] != 3:
        raise InputError("xyz_m", f"an array of shape {xyz.shape}", "shape (3, ...), metres")
    radius = np.sqrt(np.sum(xyz * xyz, axis=0))
    if not np.all((radius > 6.25e6) & (radius < 6.5e6)):
        raise InputError("xyz_m", xyz.tolist(), "6250000 to 6500000 m from the geocentre")
    return xyz


def geodetic(xyz_m: ArrayLike) -> tuple[Array, Array, Array]:
    """Geodetic latitude, longitude and height above the GRS80 ellipsoid.

    Parameters
    ----------
    xyz_m : array_like, shape (3, ...)
        ITRF position, metres.

    Returns
    -------
    latitude_rad, longitude_rad, height_m : ndarray, shape (...)
        Longitude in (-pi, pi]; zero at a pole.

    Raises
    ------
    InputError
        If the position is not near the Earth's surface.

    Notes
    -----
    Bowring's formula for the latitude, repeated from the parametric latitude it gives: exact
    on the ellipsoid, and at the limit of float64 (1e-9 m) for every height a station can have.

    Source: Bowring 1976, Survey Review 23, 323; GRS80 (IERS TN36, 4.2.6).

    Examples
    --------
    >>> latitude, longitude, height = geodetic([6378137.0 + 100.0, 0.0, 0.0])
    >>> float(latitude), float(longitude), float(height)
    (0.0, 0.0, 100.0)
    """
    x, y, z = place(xyz_m)
    p = np.hypot(x, y)
    opposite, adjacent = z, (1.0 - _FLATTENING) * p  # tangent of the parametric latitude
    for _ in range(_ITERATIONS):
        length = np.hypot(opposite, adjacent)
        sine, cosine = opposite / length, adjacent / length
        north = z + _ECCENTRICITY_SQUARED * WGS84_SEMI_MAJOR_AXIS**2 / _SEMI_MINOR_AXIS * sine**3
        outward = p - _ECCENTRICITY_SQUARED * WGS84_SEMI_MAJOR_AXIS * cosine**3
        opposite, adjacent = (1.0 - _FLATTENING) * north, outward
    latitude = np.arctan2(north, outward)
    sine, cosine = np.sin(latitude), np.cos(latitude)
    root = np.sqrt(1.0 - _ECCENTRICITY_SQUARED * sine**2)
    height = p * cosine + z * sine - WGS84_SEMI_MAJOR_AXIS * root
    return latitude, np.arctan2(y, x), height


def from_geodetic(latitude_rad: ArrayLike, longitude_rad: ArrayLike, height_m: ArrayLike) -> Array:
    """ITRF position of geodetic coordinates on the GRS80 ellipsoid.

    Parameters
    ----------
    latitude_rad, longitude_rad, height_m : array_like, broadcastable
        Geodetic latitude (-pi/2 to pi/2), longitude (east), height above the ellipsoid.

    Returns
    -------
    ndarray, shape (3, ...)
        Metres.

    Raises
    ------
    InputError
        If a latitude is outside -pi/2 to pi/2 (degrees given for radians, for instance), or a
        coordinate is not finite.

    Notes
    -----
    Source: GRS80 (IERS TN36, 4.2.6).
    """
    latitude, longitude, height = (
        np.asarray(value, dtype=float) for value in (latitude_rad, longitude_rad, height_m)
    )
    if not np.all(np.abs(latitude) <= np.pi / 2.0):
        raise InputError("latitude_rad", latitude_rad, "-pi/2 to pi/2")
    for name, value in (("longitude_rad", longitude), ("height_m", height)):
        if not np.all(np.isfinite(value)):
            raise InputError(name, value.tolist(), "finite numbers")
    sine, cosine = np.sin(latitude), np.cos(latitude)
    normal = WGS84_SEMI_MAJOR_AXIS / np.sqrt(1.0 - _ECCENTRICITY_SQUARED * sine**2)
    return stack_components(
        (normal + height) * cosine * np.cos(longitude),
        (normal + height) * cosine * np.sin(longitude),
        (normal * (1.0 - _ECCENTRICITY_SQUARED) + height) * sine,
    )


def east_north_up(xyz_m: ArrayLike) -> tuple[Array, Array, Array]:
    """Unit vectors east, north and up (along the normal of the GRS80 ellipsoid).

    Parameters
    ----------
    xyz_m : array_like, shape (3, ...)
        ITRF position, metres.

    Returns
    -------
    east, north, up : ndarray, shape (3, ...)

    Raises
    ------
    InputError
        If the position is not near the Earth's surface.
    """
    latitude, longitude, _ = geodetic(xyz_m)
    sin_lat, cos_lat = np.sin(latitude), np.cos(latitude)
    sin_lon, cos_lon = np.sin(longitude), np.cos(longitude)
    return (
        np.stack([-sin_lon, cos_lon, np.zeros_like(sin_lon)]),
        np.stack([-sin_lat * cos_lon, -sin_lat * sin_lon, cos_lat]),
        np.stack([cos_lat * cos_lon, cos_lat * sin_lon, sin_lat]),
    )


def enu_to_itrf(enu_m: ArrayLike, xyz_m: ArrayLike) -> Array:
    """Turn a displacement in east, north and up into ITRF.

    Parameters
    ----------
    enu_m : array_like, shape (3, ...)
        East, north, up.
    xyz_m : array_like, shape (3,) or (3, ...)
        Where, in ITRF, metres.

    Returns
    -------
    ndarray, shape (3, ...)
        In the unit of `enu_m`.

    Raises
    ------
    InputError
        If the position is not near the Earth's surface.

    Examples
    --------
    >>> enu_to_itrf([0.0, 1.0, 0.0], [6378137.0, 0.0, 0.0]).tolist()
    [0.0, 0.0, 1.0]
    """
    e, n, u = np.asarray(enu_m, dtype=float)
    axes = zip(*east_north_up(xyz_m), strict=True)
    return stack_components(*(e * east + n * north + u * up for east, north, up in axes))


def itrf_to_enu(displacement_m: ArrayLike, xyz_m: ArrayLike) -> Array:
    """Turn a displacement in ITRF into east, north and up: the inverse of `enu_to_itrf`.

    Parameters
    ----------
    displacement_m : array_like, shape (3, ...)
        In ITRF.
    xyz_m : array_like, shape (3,) or (3, ...)
        Where, in ITRF, metres.

    Returns
    -------
    ndarray, shape (3, ...)
        In the unit of `displacement_m`.

    Raises
    ------
    InputError
        If the position is not near the Earth's surface.
    """
    dx, dy, dz = np.asarray(displacement_m, dtype=float)
    return stack_components(*(dx * x + dy * y + dz * z for x, y, z in east_north_up(xyz_m)))


@dataclass(frozen=True)
class SphericalFrame:
    """Radial, north and east on the sphere through a point, by geocentric latitude.

    Parameters
    ----------
    sin_latitude, cos_latitude : ndarray, shape (...)
        Of the geocentric latitude.
    sin_longitude, cos_longitude : ndarray, shape (...)
        East longitude; zero at a pole.
    """

    sin_latitude: Array
    cos_latitude: Array
    sin_longitude: Array
    cos_longitude: Array

    @classmethod
    def at(cls, xyz_m: ArrayLike) -> SphericalFrame:
        """The frame of an ITRF position (3, ...) in metres; InputError if not on the ground."""
        x, y, z = place(xyz_m)
        p = np.hypot(x, y)
        radius = np.hypot(p, z)
        pole = p == 0.0
        distance = np.where(pole, 1.0, p)
        return cls(z / radius, p / radius, y / distance, np.where(pole, 1.0, x / distance))

    @property
    def radial(self) -> tuple[Array, Array, Array]:
        """Components of the unit vector away from the geocentre."""
        return (
            self.cos_latitude * self.cos_longitude,
            self.cos_latitude * self.sin_longitude,
            self.sin_latitude,
        )

    def to_itrf(self, radial: ArrayLike, north: ArrayLike, east: ArrayLike) -> Array:
        """ITRF components (3, ...) of a vector given along the three axes."""
        r, n, e = (np.asarray(value, dtype=float) for value in (radial, north, east))
        outward = r * self.cos_latitude - n * self.sin_latitude
        return stack_components(
            outward * self.cos_longitude - e * self.sin_longitude,
            outward * self.sin_longitude + e * self.cos_longitude,
            r * self.sin_latitude + n * self.cos_latitude,
        )


def stack_components(*components: Array) -> Array:
    """Components of any broadcastable shapes as one array, components first."""
    return np.stack(np.broadcast_arrays(*components))
