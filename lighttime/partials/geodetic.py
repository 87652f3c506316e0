"""What hangs on a place on the Earth, differentiated by its position."""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from lighttime.constants import GRS80_INVERSE_FLATTENING, WGS84_SEMI_MAJOR_AXIS
from lighttime.earth.local import east_north_up, geodetic
from lighttime.earth.tides import pole_tide, secular_pole
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
    east, north, up = east_north_up(xyz_m)
    meridian, across = _radii(xyz_m)
    zenith = np.outer(north, north) / meridian + np.outer(east, east) / across
    return north / meridian, up, zenith


def turn_of_local_axes(xyz_m: tuple[float, float, float]) -> Array:
    """How east, north and up turn with the position, ITRF, rad/m.

    Parameters
    ----------
    xyz_m : 3 floats

    Returns
    -------
    ndarray, shape (3, 3)
        Row k is the rotation per metre along axis k. At a pole, where longitude has no sense,
        that of a move in the meridian alone.

    Notes
    -----
    A move to the north turns them about west, one to the east about the polar axis.
    """
    east, north, _ = east_north_up(xyz_m)
    meridian, across = _radii(xyz_m)
    turn = -np.outer(north, east) / meridian
    from_axis = across * float(north[2])  # north has the cosine of the latitude along z
    if from_axis > 1.0:
        turn = turn + np.outer(east, [0.0, 0.0, 1.0]) / from_axis
    return turn


@lru_cache(maxsize=64)
def pole_tide_slopes(xyz_m: tuple[float, float, float]) -> tuple[Array, Array]:
    """How the pole tide changes with the place, per arcsecond of the wobbles m1 and m2.

    Parameters
    ----------
    xyz_m : 3 floats

    Returns
    -------
    by_m1, by_m2 : ndarray, shape (3, 3)
        Metres of displacement (second index) per metre along each axis (first index), ITRF;
        differenced over 100 m.
    """
    xs, ys = (float(pole) for pole in secular_pole(0.0))

    def slope(m1: float, m2: float) -> Array:
        step = 100.0
        rows = []
        for axis in np.eye(3):
            ends = [
                pole_tide(np.array(xyz_m) + h * axis, xs + m1, ys - m2, 0.0) for h in (step, -step)
            ]
            rows.append((ends[0] - ends[1]) / (2.0 * step))
        return np.stack(rows)

    return slope(1.0, 0.0), slope(0.0, 1.0)


def _radii(xyz_m: tuple[float, float, float]) -> tuple[float, float]:
    """Radii of curvature in the meridian and across it, the height added, m."""
    flattening = 1.0 / GRS80_INVERSE_FLATTENING
    e2 = flattening * (2.0 - flattening)
    latitude, _, height = geodetic(xyz_m)
    root = float(np.sqrt(1.0 - e2 * np.sin(latitude) ** 2))
    meridian = WGS84_SEMI_MAJOR_AXIS * (1.0 - e2) / root**3 + float(height)
    return meridian, WGS84_SEMI_MAJOR_AXIS / root + float(height)
