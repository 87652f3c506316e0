"""Zonal tides in the rotation of the Earth: periods of five days to 18.6 years.

Source: IERS Conventions (2010), TN36, 8.1 and table 8.1 (elastic body and equilibrium ocean
after Yoder et al. 1981 and Wahr & Bergen 1986, inelastic corrections, ocean dissipation).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.data import table
from lighttime.earth.arguments import centuries, fundamental_arguments

Floats = NDArray[np.float64]

BLOCK: Final = 1024
"""Instants evaluated together: keeps the work in the processor's cache."""


@dataclass(frozen=True)
class ZonalTides:
    """Effect of the 62 zonal tides: what the tides add to each quantity."""

    ut1_s: Floats
    """UT1, s."""
    lod_s: Floats
    """Length of day in excess of 86400 s, s (per day)."""
    omega_rad_s: Floats
    """Rotation rate, rad/s."""


def zonal_tides(tt1: ArrayLike, tt2: ArrayLike) -> ZonalTides:
    """Zonal tides in UT1, length of day and rotation rate.

    Parameters
    ----------
    tt1, tt2 : array_like, shape (...)
        Two-part Julian date, TT.

    Returns
    -------
    ZonalTides
        Arrays of shape (...).

    Notes
    -----
    Source: IERS Conventions (2010), TN36, equations 8.1 and table 8.1.

    Examples
    --------
    >>> print(round(float(zonal_tides(2454465.5, 0.0).ut1_s), 9))
    0.079832877
    """
    ut1, lod, omega = _in_blocks(tt1, tt2, slice(None))
    return ZonalTides(ut1, lod, omega)


def zonal_ut1(tt1: ArrayLike, tt2: ArrayLike) -> Floats:
    """Only the tides in UT1, s; arguments and source as for `zonal_tides`."""
    ut1: Floats = _in_blocks(tt1, tt2, slice(0, 1))[0]
    return ut1


def zonal_sums(arguments: ArrayLike, rows: slice = slice(None)) -> Floats:
    """The sums of equations 8.1 for given fundamental arguments.

    Parameters
    ----------
    arguments : array_like, shape (5, n)
        Fundamental arguments l, l', F, D, Omega, rad.
    rows : slice
        Which of UT1 (s), LOD (s), omega (rad/s).

    Returns
    -------
    ndarray, shape (3, n) or as many rows as asked for
    """
    phase = _multipliers() @ np.asarray(arguments, dtype=float)
    sines, cosines = (amplitude[rows] for amplitude in _amplitudes())
    with_sine, with_cosine = sines.any(axis=0), cosines.any(axis=0)  # half of them are zero
    total: Floats = sines[:, with_sine] @ np.sin(phase[with_sine])
    total += cosines[:, with_cosine] @ np.cos(phase[with_cosine])
    return total


def _in_blocks(tt1: ArrayLike, tt2: ArrayLike, rows: slice) -> Floats:
    t = np.asarray(centuries(tt1, tt2))
    flat = t.reshape(-1)
    total = np.empty((len(range(3)[rows]), flat.size))
    for start in range(0, flat.size, BLOCK):
        block = slice(start, start + BLOCK)
        total[:, block] = zonal_sums(fundamental_arguments(flat[block]), rows)
    shaped: Floats = total.reshape(len(total), *t.shape)
    return shaped


@cache
def _multipliers() -> Floats:
    tides = table("zonal_tides")
    return np.stack([tides[name] for name in ("l", "l_sun", "F", "D", "Omega")], axis=1)


@cache
def _amplitudes() -> tuple[Floats, Floats]:
    """Of the sines and of the cosines in UT1 (s), LOD (s), omega (rad/s); shape (3, 62)."""
    tides = table("zonal_tides")
    units = np.array([[1e-4], [1e-5], [1e-14]])
    sines = np.stack([tides[name] for name in ("ut1_sin", "lod_sin", "omega_sin")])
    cosines = np.stack([tides[name] for name in ("ut1_cos", "lod_cos", "omega_cos")])
    return units * sines, units * cosines
