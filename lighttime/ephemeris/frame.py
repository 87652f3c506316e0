"""The working frame: BCRS axes, with the origin where the Earth is at the tagged instant.

Barycentric coordinates in float64 are a grid of 30 micrometres. Seen from the Earth's own place
at the tagged instant, everything that takes part in a round trip is within 500 000 km, and the
30 to 80 km by which the Earth moves meanwhile come from a difference of polynomials.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.ephemeris.bodies import PLANETS, Ephemeris

Array = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class EarthFrame:
    """Sun, Moon and planets around one instant, relative to the Earth at that instant.

    Parameters
    ----------
    ephemeris : Ephemeris
    tdb1, tdb2 : array, shape (n,)
        The tagged instant in two parts, TDB. Events are told in TDB seconds after it.
    """

    ephemeris: Ephemeris
    tdb1: Array
    tdb2: Array

    @cached_property
    def origin(self) -> tuple[Array, Array]:
        """BCRS position (to 30 micrometres) and velocity of the Earth at the tagged instant."""
        return self.ephemeris.earth(self.tdb1, self.tdb2)

    def earth(self, seconds: Array) -> tuple[Array, Array]:
        """The Earth at an event: position in this frame (m) and velocity (m/s), (3, n)."""
        _, velocity = self.ephemeris.earth(self.tdb1, self.tdb2, seconds)
        return self.ephemeris.earth_displacement(self.tdb1, self.tdb2, 0.0, seconds), velocity

    def moon_geocentric(self, seconds: Array) -> tuple[Array, Array]:
        """Moon minus Earth at an event: position (m) and velocity (m/s), (3, n)."""
        return self.ephemeris.moon_geocentric(self.tdb1, self.tdb2, seconds)

    @cached_property
    def _distant(self) -> dict[str, tuple[Array, Array]]:
        place = {}
        for body in ("sun", *(p for p in PLANETS if p in self.ephemeris.barycentric)):
            position, velocity = self.ephemeris.barycentric_body(body, self.tdb1, self.tdb2)
            place[body] = (position - self.origin[0], velocity)
        return place

    @property
    def distant_bodies(self) -> tuple[str, ...]:
        """The Sun and the planets that this ephemeris carries."""
        return tuple(self._distant)

    def distant(self, body: str, seconds: ArrayLike) -> tuple[Array, Array]:
        """The Sun or a planet at an event: position in this frame (m) and velocity (m/s).

        Evaluated once, at the tagged instant, and carried along its velocity: over the seconds
        of a round trip the neglected curvature is below 0.2 m, a part in 10^11 of the distance.
        """
        position, velocity = self._distant[body]
        return position + velocity * np.asarray(seconds), velocity
