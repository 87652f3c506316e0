"""How much slower than barycentric coordinate time a body's own coordinate time runs.

The coordinate time of the Earth (TCG) or the Moon (TCL) is that of a clock carried along by its
centre, with its own field taken away.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.constants import L_B, L_G, SPEED_OF_LIGHT

Array = NDArray[np.float64]

c = SPEED_OF_LIGHT


class State(NamedTuple):
    """Barycentric position (m) and velocity (m/s), each (3, ...)."""

    position: Array
    velocity: Array


def slowing(
    centre: str, bodies: Mapping[str, State], gm: Mapping[str, float], distant: ArrayLike = 0.0
) -> Array:
    """1 - dTCG/dTCB at the geocentre, or 1 - dTCL/dTCB at the centre of the Moon.

    Parameters
    ----------
    centre : str
        The body whose time it is.
    bodies : mapping of str to State
        It and all others.
    gm : mapping of str to float
        m^3/s^2.
    distant : float or array
        Potential of what is not in `bodies`, m^2/s^2.

    Returns
    -------
    ndarray
        Of the order of 1.5e-8. Positions and GMs that are TDB-compatible serve as well as those
        that are TCB-compatible: both are scaled alike.

    Notes
    -----
    ``(v^2/2 + w)/c^2 - (-v^4/8 - 3/2 w v^2 + 4 w^i v^i + w^2/2)/c^4`` with the potential
    ``w = sum GM/r`` and the vector potential ``w^i = sum GM v^i/r`` of the other bodies. Left
    out at 1/c^4: what the motion and the potentials of the other bodies change in w, 1.9e-20
    (measured), steady to 1e-13 s.

    Source: IAU 2000 B1.5; Soffel et al. 2003, Astron. J. 126, 2687, equation 58.
    """
    x, v = bodies[centre]
    v2 = np.einsum("i...,i...->...", v, v)
    w = np.zeros_like(v2) + distant
    w_v = np.zeros_like(v2)
    for name, (position, velocity) in bodies.items():
        if name != centre:
            separation = position - x
            part = gm[name] / np.sqrt(np.einsum("i...,i...->...", separation, separation))
            w += part
            w_v += part * np.einsum("i...,i...->...", velocity, v)
    newton = 0.5 * v2 + w
    second = -(v2**2) / 8.0 - 1.5 * w * v2 + 4.0 * w_v + 0.5 * w * w
    rate: Array = newton / c**2 - second / c**4
    return rate


def tdb_minus_tt_rate(slow: Array) -> Array:
    """d(TDB - TT)/dTDB at the geocentre.

    Parameters
    ----------
    slow : ndarray
        `slowing` at the geocentre.

    Notes
    -----
    dTT/dTDB = (1 - L_G) (1 - slow) / (1 - L_B). Source: IAU 2000 B1.9, 2006 B3.
    """
    return ((1.0 - L_G) * slow - (L_B - L_G)) / (1.0 - L_B)


def place_term(r: Array, velocity: Array, potential: ArrayLike = 0.0) -> Array:
    """What TDB - TT (or TDB - TCL) is more at a place than at the centre of the body.

    Parameters
    ----------
    r : ndarray, shape (3, ...)
        The place from the centre, along ICRS axes: GCRS, or the like for the Moon; metres.
    velocity : ndarray, shape (3, ...)
        Barycentric velocity of the centre, m/s.
    potential : float or ndarray, optional
        Of the other bodies at the centre, m^2/s^2; without it 4e-14 s are left out.

    Returns
    -------
    ndarray
        Seconds; for the Earth up to 2.1 microseconds.

    Notes
    -----
    ``v.r/c^2 (1 + 2 w/c^2)``: of ``v.r_E/c^2 + (3 w + v^2/2) v.r_E/c^4`` in IAU 2000 B1.5 the
    terms w + v^2/2 are taken back when r_E, seen in the BCRS, is expressed by r (B1.3).
    """
    along = np.einsum("i...,i...->...", velocity, r)
    seconds: Array = along / c**2 * (1.0 + 2.0 * np.asarray(potential) / c**2)
    return seconds
