"""The tide of the solid Moon: where a reflector goes.

Displacements in the principal axes of the Moon, components first, metres.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.constants import MOON_MEAN_RADIUS
from lighttime.errors import InputError
from lighttime.vectors import dot, norm

__all__ = ["H2", "L2", "lunar_tide", "permanent_lunar_tide", "permanent_tensor"]

Array = NDArray[np.float64]

H2: Final = 0.0476
L2: Final = 0.0107
"""Love and Shida numbers of the Moon, degree 2.

Source: Williams, Boggs & Folkner 2013, IOM 335-JW,DB,WF-20130722-016 (from memory)."""


def lunar_tide(
    r_pa_m: ArrayLike,
    earth_pa_m: ArrayLike,
    sun_pa_m: ArrayLike,
    gm_moon: float,
    gm_earth: float,
    gm_sun: float,
    h2: float = H2,
    l2: float = L2,
) -> Array:
    """Displacement by the tide that Earth and Sun raise, its permanent part included.

    Parameters
    ----------
    r_pa_m : array_like, shape (3,) or (3, ...)
        Reflector, principal axes of the Moon, metres.
    earth_pa_m, sun_pa_m : array_like, shape (3, ...)
        Earth and Sun from the centre of the Moon, in the same axes, metres.
    gm_moon, gm_earth, gm_sun : float
        In one unit, whichever: only the ratios count.
    h2, l2 : float
        Love and Shida numbers. The displacement is linear in them, so the derivatives are
        ``lunar_tide(..., h2=1.0, l2=0.0)`` and ``lunar_tide(..., h2=0.0, l2=1.0)``.

    Returns
    -------
    ndarray, shape (3, ...)
        Principal axes, metres: 0.2 to 0.7 m at the five arrays, mostly permanent.

    Raises
    ------
    InputError
        If a first axis is not of length 3.

    Notes
    -----
    The radius is the mean one of the Moon, 1737.4 km, for every reflector: what the numbers h2
    and l2 stand for is the surface of a sphere. A reflector 2 km lower does not move less by the
    fourth power of its own radius (0.5 %, 2 mm): within the outermost kilometres the ground
    moves as a whole (the free surface makes du/dr about -0.2 u/r).

    Source: IERS Conventions (2010), TN36, equation 7.5, for the Moon.
    """
    r = _vectors("r_pa_m", r_pa_m)
    up = r / norm(r)
    displacement = np.zeros(())
    for name, body_pa_m, gm in (
        ("earth_pa_m", earth_pa_m, gm_earth),
        ("sun_pa_m", sun_pa_m, gm_sun),
    ):
        body = _vectors(name, body_pa_m)
        distance = norm(body)
        towards = body / distance
        cosine = dot(up, towards)
        size = gm / gm_moon * MOON_MEAN_RADIUS * (MOON_MEAN_RADIUS / distance) ** 3
        radial = size * h2 * (1.5 * cosine**2 - 0.5)
        tangential = size * 3.0 * l2 * cosine
        displacement = displacement + np.stack(
            [radial * u + tangential * (b - cosine * u) for u, b in zip(up, towards, strict=True)]
        )
    return displacement


_EARTH_MEAN_DISTANCE = 383_809_356.0
"""m: the -1/3 power of the mean of distance^-3."""

_EARTH_DIRECTION = np.array(
    [
        [0.98690876, -0.00027012, 0.00040236],
        [-0.00027012, 0.00630925, 0.00014950],
        [0.00040236, 0.00014950, 0.00678199],
    ]
)
"""Mean of n n^T, n the direction of the Earth, weighted by distance^-3.

Source, with the distance: averages over the 6798.38 days of the nodal period around J2000.0,
principal axes, Earth and libration of DE421, computed for this library; the test repeats it."""

_SUN_MEAN_DISTANCE = 149_577_000_000.0
"""m: the same for the Sun, a sqrt(1 - e^2) with e = 0.0167."""

_SUN_DIRECTION = np.diag([0.5, 0.5, 0.0])
"""The Sun goes round the equator of the Moon (inclination 1.5 degrees) once a month."""


def permanent_lunar_tide(
    r_pa_m: ArrayLike,
    gm_moon: float,
    gm_earth: float,
    gm_sun: float,
    h2: float = H2,
    l2: float = L2,
) -> Array:
    """The permanent part of `lunar_tide`: its mean over a nodal period of 18.6 years.

    To be subtracted for a reflector whose coordinates contain it already.

    Parameters
    ----------
    r_pa_m, gm_moon, gm_earth, gm_sun, h2, l2
        As in `lunar_tide`.

    Returns
    -------
    ndarray, shape (3, ...)
        Principal axes, metres.

    Raises
    ------
    InputError
        If the first axis is not of length 3.

    Notes
    -----
    The tide is linear in the tensor n n^T / distance^3 of each body, so the mean of the tide is
    the tide of the mean tensor. (The Earth held still on the x axis instead would make it 2 %,
    9 mm, too large: libration spreads the Earth over the sky of the Moon.)
    """
    r = _vectors("r_pa_m", r_pa_m)
    up = r / norm(r)
    tensor = permanent_tensor(gm_moon, gm_earth, gm_sun)
    pull: Array = np.tensordot(tensor, up, axes=1)
    along = dot(up, pull)
    radial: Array = h2 * (1.5 * along - 0.5 * np.trace(tensor)) * up
    return radial + 3.0 * l2 * (pull - along * up)


def permanent_tensor(gm_moon: float, gm_earth: float, gm_sun: float) -> Array:
    """The mean of the tide's tensor: of size times n n^T, of Earth and Sun together.

    Parameters
    ----------
    gm_moon, gm_earth, gm_sun
        As in `lunar_tide`.

    Returns
    -------
    ndarray, shape (3, 3)
        Principal axes, metres. Its trace is the mean of the size.
    """
    tensor = np.zeros((3, 3))
    for gm, distance, direction in (
        (gm_earth, _EARTH_MEAN_DISTANCE, _EARTH_DIRECTION),
        (gm_sun, _SUN_MEAN_DISTANCE, _SUN_DIRECTION),
    ):
        tensor += gm / gm_moon * MOON_MEAN_RADIUS * (MOON_MEAN_RADIUS / distance) ** 3 * direction
    return tensor


def _vectors(name: str, value: ArrayLike) -> Array:
    array = np.asarray(value, dtype=float)
    if array.ndim == 0 or array.shape[0] != 3:
        raise InputError(name, f"an array of shape {array.shape}", "shape (3, ...), metres")
    return array
