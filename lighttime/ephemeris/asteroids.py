"""The asteroids' part in the potential at the Earth and the Moon, as a mean.

An ephemeris states their masses but not where they are. Their potential at the Earth, 4e-18 c^2,
is 14 ns of TDB - TT in a century, all but a part in thousands of it steady: what Ceres, the
largest, adds and takes away as it comes and goes is some picoseconds.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from lighttime.data import table
from lighttime.ephemeris.bodies import au3_per_day2

OTHERS_AU = 2.75
"""Semi-major axis given to those that the table does not list. Masses by distance from the Sun are
spread by 0.3 au about it, which is a tenth of the potential of the small ones: 2e-19 c^2."""


def masses(constants: Mapping[str, float]) -> dict[int, float]:
    """GM of each asteroid that an ephemeris states one for (m^3/s^2), by number; 0 for the rest.

    Parameters
    ----------
    constants : mapping
        Of an `Ephemeris`: ``file:MA0001`` and so on, and ``file:GMAST1`` to 3 for the small ones
        of three kinds taken together, in au^3/day^2.
    """
    found: dict[int, float] = {}
    for key, value in constants.items():
        if key.startswith("file:MA0"):
            number = int(key.removeprefix("file:MA"))
        elif key.startswith("file:GMAST"):
            number = 0
        else:
            continue
        found[number] = found.get(number, 0.0) + au3_per_day2(value, constants["au_m"])
    return found


def mean_potential(constants: Mapping[str, float]) -> float:
    """Mean potential of all asteroids one au from the Sun, m^2/s^2.

    Notes
    -----
    A body on an orbit of semi-major axis a, its mass spread along it by time, acts at radius r
    near its plane as ``GM/a (1 + (r/a)^2/4 + 9 (r/a)^4/64 + ...)``; eccentricities and
    inclinations change that by a part in a hundred.

    Source: potential of a ring, Legendre's expansion, with the P_2n(0)^2 as coefficients.
    """
    listed = table("asteroids")
    axes = dict(zip(listed["number"].astype(int), listed["semi_major_axis_au"], strict=True))
    total = 0.0
    for number, gm in masses(constants).items():
        a = float(axes.get(number, OTHERS_AU))
        ring = 1.0 + np.sum([p2 * a ** (-2 * (k + 1)) for k, p2 in enumerate(_SQUARES)])
        total += gm / (a * constants["au_m"]) * float(ring)
    return total


_SQUARES = (1.0 / 4.0, 9.0 / 64.0, 25.0 / 256.0, 1225.0 / 16384.0)
"""P_2(0)^2, P_4(0)^2, P_6(0)^2, P_8(0)^2."""
