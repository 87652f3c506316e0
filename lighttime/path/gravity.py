"""The delay of light in the gravity of Sun, Earth, Moon and planets.

A body at rest delays light between two points by Shapiro's logarithm. A body in motion is at
rest in its own frame: the two events are carried there by a Lorentz transformation, the
logarithm is taken there, and since the interval between the events is the same in both frames,
the delay is carried back by the ratio of the two distances. No expansion in velocity is made.

Source: Shapiro 1964; Moyer 2000, 8.3.1; the moving body as in Kopeikin & Schaefer 1999 and
Klioner 2003 (uniform motion over the flight of the light).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.constants import SPEED_OF_LIGHT
from lighttime.vectors import dot, norm, norm2

Array = NDArray[np.float64]

c = SPEED_OF_LIGHT


def shapiro(
    gm: float,
    r1: Array,
    r2: Array,
    r12: Array,
    gamma: float = 1.0,
    bending: bool = False,
) -> Array:
    """Delay by a body at rest: (1+gamma) GM/c^3 ln[(r1 + r2 + r12)/(r1 + r2 - r12)].

    Parameters
    ----------
    gm : float
        GM of the body, m^3/s^2.
    r1, r2 : array, shape (...)
        Distances of the two events from the body, m.
    r12 : array, shape (...)
        Distance between the two events, m.
    gamma : float
        Parameter gamma of the post-Newtonian formalism; 1 in general relativity.
    bending : bool
        Add (1+gamma) GM/c^2 in numerator and denominator, for the bending of the ray
        (Moyer 2000, eq. 8-54).

    Returns
    -------
    ndarray, shape (...)
        Delay in seconds.
    """
    m = (1.0 + gamma) * gm / c**2
    denominator = r1 + r2 - r12
    if bending:
        denominator = denominator + m
    # the ratio is 1 + 2 r12/(r1 + r2 - r12); log1p keeps the digits where that is close to 1
    delay: Array = m / c * np.log1p(2.0 * r12 / denominator)
    return delay


def in_rest_frame(x: Array, t: ArrayLike, velocity: Array) -> Array:
    """Where an event is in the frame of a body that moves with `velocity`.

    Parameters
    ----------
    x : array, shape (3, ...)
        Event minus position of the body at ``t = 0``, m.
    t : array, shape (...)
        Time of the event, s.
    velocity : array, shape (3, ...)
        Velocity of the body, m/s.

    Returns
    -------
    ndarray, shape (3, ...)
        The event in the body's rest frame (Lorentz transformation without rotation), m.
    """
    beta = velocity / c
    lorentz = 1.0 / np.sqrt(1.0 - dot(beta, beta))
    along = lorentz / (1.0 + lorentz) * dot(beta, x) - c * np.asarray(t)
    return x + lorentz * along * beta


def oblateness(
    gm_j2_radius2: float, x1: Array, x2: Array, axis: Array, gamma: float = 1.0
) -> Array:
    """What the flattening of a body at rest adds to its delay.

    The flattened part of the potential is the second derivative of the round part along the
    body's axis, so that part of the delay is the second derivative of Shapiro's logarithm
    L(s) = ln[(s + r12)/(s - r12)], s = r1 + r2, when both events are shifted along the axis n:

        delay = -(1+gamma) GM J2 R^2/(2 c^3) [ (r12 s/E^2) s'^2 - (r12/E) s'' ]

        E = r1 r2 + x1.x2,   s' = n.(u1 + u2),   s'' = sum of (1 - (n.u)^2)/r

    Nothing in it is singular for a ray that rises to the zenith.

    Parameters
    ----------
    gm_j2_radius2 : float
        GM J2 R^2 of the body, m^5/s^2.
    x1, x2 : array, shape (3, ...)
        The events, from the centre of the body, m.
    axis : array, shape (3, ...)
        Unit vector along the body's axis.
    gamma : float
        Parameter gamma of the post-Newtonian formalism.

    Returns
    -------
    ndarray, shape (...)
        Delay in seconds: up to 30 fs per leg above the Earth's horizon.

    Notes
    -----
    Source: derived here from the definition of J2; the same field is treated in Klioner 1991
    and Le Poncin-Lafitte & Teyssandier 2008 (from memory).
    """
    r1, r2, r12 = norm(x1), norm(x2), norm(x2 - x1)
    n1, n2 = dot(axis, x1) / r1, dot(axis, x2) / r2
    e = r1 * r2 + dot(x1, x2)
    first = n1 + n2
    second = (1.0 - n1 * n1) / r1 + (1.0 - n2 * n2) / r2
    bracket = r12 / e * ((r1 + r2) / e * first**2 - second)
    delay: Array = -(1.0 + gamma) * gm_j2_radius2 / (2.0 * c**3) * bracket
    return delay


def moving_body(
    gm: float,
    x1: Array,
    t1: ArrayLike,
    x2: Array,
    t2: ArrayLike,
    velocity: Array,
    gamma: float = 1.0,
    bending: bool = False,
    distance: Array | None = None,
) -> Array:
    """Delay between two events by a body in uniform motion.

    Parameters
    ----------
    gm : float
        GM of the body, m^3/s^2.
    x1, x2 : array, shape (3, ...)
        The events, relative to the position of the body at ``t = 0``, m.
    t1, t2 : array, shape (...)
        Times of the events, s.
    velocity : array, shape (3, ...)
        Velocity of the body, m/s.
    gamma, bending
        As in `shapiro`.
    distance : array, shape (...), optional
        Between the two events, m, where it is known already.

    Returns
    -------
    ndarray, shape (...)
        Delay in seconds of BCRS time.

    Notes
    -----
    Only distances are needed in the rest frame, and an event is there at x + k beta, with k as
    in `in_rest_frame`: |x + k beta|^2 = x^2 + 2 k beta.x + k^2 beta^2.
    """
    beta = velocity / c
    beta2, along1, along2 = dot(beta, beta), dot(beta, x1), dot(beta, x2)
    lorentz = 1.0 / np.sqrt(1.0 - beta2)
    stretch = lorentz * lorentz / (1.0 + lorentz)
    # in the rest frame an event is at x + k beta
    k1 = stretch * along1 - lorentz * c * np.asarray(t1)
    k2 = stretch * along2 - lorentz * c * np.asarray(t2)
    k12 = k2 - k1
    r1 = np.sqrt(dot(x1, x1) + k1 * (2.0 * along1 + k1 * beta2))
    r2 = np.sqrt(dot(x2, x2) + k2 * (2.0 * along2 + k2 * beta2))
    apart2 = norm2(x2 - x1) if distance is None else distance * distance
    r12 = np.sqrt(apart2 + k12 * (2.0 * (along2 - along1) + k12 * beta2))
    delay: Array = shapiro(gm, r1, r2, r12, gamma, bending) * (r12 / np.sqrt(apart2))
    return delay
