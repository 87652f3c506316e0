"""The working frame: BCRS axes, with the origin where the Earth is at the tagged instant.

Barycentric coordinates in float64 are a grid of 30 micrometres. Seen from the Earth's own place
at the tagged instant, everything that takes part in a round trip is within 500 000 km, and the
30 to 80 km by which the Earth moves meanwhile are a sum of small powers, not a difference of
large numbers.

The events of a round trip lie within seconds of the tagged instant, where the Earth, the Moon
and the libration are their Taylor series: the records are evaluated once, with derivatives. The
few epochs that have the seam of two records within those seconds, and events further away (light
times to planets), take the difference of polynomials instead.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.constants import DAY
from lighttime.ephemeris.bodies import PLANETS, Ephemeris
from lighttime.ephemeris.chebyshev import Records

Array = NDArray[np.float64]

NEAR_S = 4.0
"""Taylor series reach this far: the first neglected term is below 1e-12 m there.

(Fourth derivative of the geocentric Moon: 2e-14 m/s^4, times 4^4/24 s^4.)"""

ORDER = 3


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

    # -- Taylor series at the tagged instant -------------------------------------------------

    @cached_property
    def _barycentre(self) -> Array:
        return self._jet(self.ephemeris.barycentric["earth_moon_barycentre"])

    @cached_property
    def _moon(self) -> Array:
        return self._jet(self.ephemeris.moon_from_earth)

    @cached_property
    def _earth(self) -> Array:
        offset = self.ephemeris.earth_from_barycentre
        if isinstance(offset, Records):
            return self._barycentre + self._jet(offset)
        return self._barycentre + offset * self._moon

    @cached_property
    def _angles(self) -> Array:
        return self._jet(self.ephemeris.orientation())

    def _jet(self, records: Records) -> Array:
        return records.jet(records.locate(self.tdb1, self.tdb2), ORDER)

    @cached_property
    def _rows(self) -> list[Records]:
        """The records of Earth, Moon and libration."""
        ephemeris = self.ephemeris
        rows = (
            ephemeris.barycentric["earth_moon_barycentre"],
            ephemeris.moon_from_earth,
            ephemeris.earth_from_barycentre,
            ephemeris.angles,
        )
        return [records for records in rows if isinstance(records, Records)]

    @cached_property
    def _seam(self) -> NDArray[np.bool_]:
        """Epochs that have the end of a record of Earth, Moon or libration near them."""
        near = np.zeros(np.shape(self.tdb1), dtype=bool)
        for records in self._rows:
            days = np.abs(records.locate(self.tdb1, self.tdb2).days)
            near |= days > 0.5 * records.span_days - NEAR_S / DAY
        return near

    def crosses_seam(self, before: Array, after: Array) -> bool:
        """Whether the end of a record of Earth, Moon or libration lies between two instants.

        Records of the Earth in DE421 meet to 0.05 mm rms, 0.14 mm at most, and no velocity leads
        over that step.

        Parameters
        ----------
        before, after : array, shape (n,)
            Seconds after the tagged instants, less than `NEAR_S`.
        """
        near = self._seam
        if not near.any():
            return False
        tdb1, tdb2, before, after = (a[near] for a in (self.tdb1, self.tdb2, before, after))
        return any(
            bool(np.any(r.locate(tdb1, tdb2, before).index != r.locate(tdb1, tdb2, after).index))
            for r in self._rows
        )

    def _at(
        self,
        seconds: Array,
        taylor: Callable[[Array], tuple[Array, Array]],
        exact: Callable[[Array, Array, Array], tuple[Array, Array]],
    ) -> tuple[Array, Array]:
        """Taylor series where they hold, the polynomials themselves elsewhere."""
        far = self._seam | (np.abs(seconds) > NEAR_S)
        value, rate = taylor(seconds)
        if np.any(far):
            some = exact(self.tdb1[far], self.tdb2[far], seconds[far])
            value[:, far], rate[:, far] = some
        return value, rate

    # -- what is asked -----------------------------------------------------------------------

    @property
    def origin(self) -> tuple[Array, Array]:
        """BCRS position (to 30 micrometres) and velocity of the Earth at the tagged instant."""
        return self._earth[0], self._earth[1]

    def earth(self, seconds: Array) -> tuple[Array, Array]:
        """The Earth at an event: position in this frame (m) and velocity (m/s), (3, n)."""
        ephemeris = self.ephemeris

        def exact(tdb1: Array, tdb2: Array, seconds: Array) -> tuple[Array, Array]:
            _, velocity = ephemeris.earth(tdb1, tdb2, seconds)
            return ephemeris.earth_displacement(tdb1, tdb2, 0.0, seconds), velocity

        return self._at(seconds, lambda s: _taylor(self._earth, s, whole=False), exact)

    def moon_geocentric(self, seconds: Array) -> tuple[Array, Array]:
        """Moon minus Earth at an event: position (m) and velocity (m/s), (3, n)."""
        return self._at(seconds, lambda s: _taylor(self._moon, s), self.ephemeris.moon_geocentric)

    def libration(self, seconds: Array) -> tuple[Array, Array]:
        """Libration angles (rad) and their rates (rad/s) at an event, (3, n)."""
        return self._at(seconds, lambda s: _taylor(self._angles, s), self.ephemeris.libration)

    @cached_property
    def _distant(self) -> dict[str, tuple[Array, Array]]:
        place = {}
        for body in ("sun", *(p for p in PLANETS if p in self.ephemeris.barycentric)):
            records = self.ephemeris.barycentric[body]
            position, velocity = records.jet(records.locate(self.tdb1, self.tdb2), 1)
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


def _taylor(jet: Array, s: Array, whole: bool = True) -> tuple[Array, Array]:
    """Value (or, without its constant term, displacement) and rate after s seconds."""
    position, velocity, acceleration, jerk = jet
    moved = s * (velocity + s / 2.0 * (acceleration + s / 3.0 * jerk))
    return (position + moved if whole else moved), velocity + s * (acceleration + s / 2.0 * jerk)
