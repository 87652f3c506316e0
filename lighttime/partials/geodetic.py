"""Geodetic coordinates, differentiated by the position."""

from __future__ import annotations

import numpy as np

from lighttime.constants import GRS80_INVERSE_FLATTENING, WGS84_SEMI_MAJOR_AXIS
from lighttime.earth.local import east_north_up, geodetic
from lighttime.vectors import Array


def geodetic_slopes(xyz_m: tuple[float, float, float]) -> tuple[Array, Array, Array]:
    """Derivatives of geodetic latitude, height and zenith by an ITRF position.

    Parameters
    ----------
    xyz_m : 3 floats

    Returns
    -------
    latitude : ndarray, shape (3,)
        rad/m.
    height : ndarray, shape (3,)
        m/m.
    zenith : ndarray, shape (3, 3)
        Change of the unit vector (first index) per metre (second index).

    Notes
    -----
    The zenith turns by the displacement over the radii of curvature of the ellipsoid, M in the
    meridian and N across it, at the height of the place.
    """
    flattening = 1.0 / GRS80_INVERSE_FLATTENING
    e2 = flattening * (2.0 - flattening)
    latitude, _, height = geodetic(xyz_m)
    east, north, up = east_north_up(xyz_m)
    root = np.sqrt(1.0 - e2 * np.sin(latitude) ** 2)
    across = WGS84_SEMI_MAJOR_AXIS / root + height
    meridian = WGS84_SEMI_MAJOR_AXIS * (1.0 - e2) / root**3 + height
    zenith = np.outer(north, north) / meridian + np.outer(east, east) / across
    return north / meridian, up, zenith
