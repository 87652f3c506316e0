"""The solar system of one ephemeris: positions, differences of positions, libration, GMs."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from os import PathLike
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.constants import DAY
from lighttime.ephemeris.chebyshev import Records
from lighttime.errors import LighttimeError, UnknownNameError

Array = NDArray[np.float64]

PLANETS = ("mercury", "venus", "mars", "jupiter", "saturn", "uranus", "neptune")
"""Planets whose gravity is felt by the light, as barycentres of their systems."""

BODIES = ("sun", "earth", "moon", *PLANETS)


@dataclass(frozen=True, eq=False)
class Ephemeris:
    """Positions of the Sun, the Moon and the planets, and the orientation of the Moon.

    Open one with `Ephemeris.default` or `Ephemeris.open`; the fields are for those who bring
    their own. Everything that is returned is in metres, seconds and radians, in the BCRS with
    TDB as its time; vectors are (3, ...) with the components first.

    Parameters
    ----------
    name : str
        The ephemeris, as in a report ("DE421").
    barycentric : mapping of str to Records
        ``"earth_moon_barycentre"``, ``"sun"`` and the planets, relative to the barycentre of
        the solar system.
    moon_from_earth : Records
        The geocentric Moon.
    earth_from_barycentre : Records or float
        The Earth relative to the Earth-Moon barycentre; or the factor that makes it from the
        geocentric Moon, -1/(1 + EMRAT).
    angles : Records or None
        The three libration angles phi, theta, psi of the Moon's principal axes; None if the
        file carries none.
    constants : mapping of str to float
        GMs in m^3/s^2 (``"gm_sun"``, ...) and what else the ephemeris states.
    origin : tuple
        How to open it again (for pickling).
    constants_from : str
        Where the GMs come from.
    """

    name: str
    barycentric: Mapping[str, Records]
    moon_from_earth: Records
    earth_from_barycentre: Records | float
    angles: Records | None
    constants: Mapping[str, float]
    origin: tuple[Any, ...] = ()
    constants_from: str = ""
    orientation_name: str = ""

    # -- opening -----------------------------------------------------------------------------

    @staticmethod
    def default() -> Ephemeris:
        """DE421, as carried by the package `de421`: 1900 to 2199, libration included.

        Source: Folkner, Williams & Boggs 2009, IPN Progress Report 42-178.
        """
        return _default()

    @staticmethod
    def open(
        bsp: str | PathLike[str],
        orientation: str | PathLike[str] | None = None,
        constants: Mapping[str, float] | None = None,
    ) -> Ephemeris:
        """Open any other ephemeris from its files.

        Parameters
        ----------
        bsp : path
            Positions: an SPK file with Chebyshev segments for the Earth-Moon barycentre, the
            Earth, the Moon, the Sun and the planets.
        orientation : path, optional
            Lunar orientation: a binary PCK file. Without it a reflector cannot be placed.
        constants : mapping, optional
            GMs in m^3/s^2 that replace those of DE421 (such files carry none).

        Raises
        ------
        FileError
            If a file cannot be read, or lacks a body that is needed.
        """
        from lighttime.ephemeris.files import open_files

        return open_files(bsp, orientation, constants)

    def __reduce__(self) -> tuple[Any, ...]:
        if not self.origin:
            return super().__reduce__()  # type: ignore[return-value]
        return _reopen, self.origin

    # -- what a person wants to know ---------------------------------------------------------

    @property
    def coverage(self) -> tuple[float, float]:
        """First and last Julian date (TDB) at which everything in it can be had."""
        rows = self._rows()
        return max(r.start_jd for r in rows), min(r.end_jd for r in rows)

    def _rows(self) -> list[Records]:
        more = (self.angles, self.earth_from_barycentre)
        rows = [*self.barycentric.values(), self.moon_from_earth]
        return rows + [r for r in more if isinstance(r, Records)]

    def __repr__(self) -> str:
        first, last = self.coverage
        moon = self.orientation_name if self.angles is not None else "no lunar orientation"
        return f"<Ephemeris {self.name}: JD {first} to {last} TDB, {moon}>"

    def gm(self, body: str) -> float:
        """GM of a body in m^3/s^2 (TDB-compatible), as the ephemeris states it."""
        try:
            return self.constants[f"gm_{body}"]
        except KeyError:
            raise UnknownNameError("body", body, BODIES) from None

    # -- the Earth and the Moon --------------------------------------------------------------

    def moon_geocentric(
        self, tdb1: ArrayLike, tdb2: ArrayLike, seconds: ArrayLike = 0.0
    ) -> tuple[Array, Array]:
        """Moon minus Earth at ``tdb1 + tdb2 + seconds``: position (m) and velocity (m/s)."""
        place = self.moon_from_earth.locate(tdb1, tdb2, seconds)
        return self.moon_from_earth.value(place), self.moon_from_earth.rate(place)

    def earth(
        self, tdb1: ArrayLike, tdb2: ArrayLike, seconds: ArrayLike = 0.0
    ) -> tuple[Array, Array]:
        """The Earth in the BCRS: position (m, to 30 micrometres) and velocity (m/s)."""
        emb = self.barycentric["earth_moon_barycentre"]
        place = emb.locate(tdb1, tdb2, seconds)
        offset, offset_rate = self._earth_from_barycentre(tdb1, tdb2, seconds)
        return emb.value(place) + offset, emb.rate(place) + offset_rate

    def earth_displacement(
        self, tdb1: ArrayLike, tdb2: ArrayLike, start_s: ArrayLike, end_s: ArrayLike
    ) -> Array:
        """How far the Earth moves in the BCRS between two events, to all digits of a float64.

        Parameters
        ----------
        tdb1, tdb2 : float or array
            A common instant, TDB, in two parts.
        start_s, end_s : float or array
            The events, in TDB seconds after it.
        """
        emb = self.barycentric["earth_moon_barycentre"]
        moved = emb.difference(tdb1, tdb2, start_s, end_s)
        offset = self.earth_from_barycentre
        if isinstance(offset, Records):
            return moved + offset.difference(tdb1, tdb2, start_s, end_s)
        return moved + offset * self.moon_from_earth.difference(tdb1, tdb2, start_s, end_s)

    def _earth_from_barycentre(
        self, tdb1: ArrayLike, tdb2: ArrayLike, seconds: ArrayLike
    ) -> tuple[Array, Array]:
        offset = self.earth_from_barycentre
        if isinstance(offset, Records):
            place = offset.locate(tdb1, tdb2, seconds)
            return offset.value(place), offset.rate(place)
        moon, moon_rate = self.moon_geocentric(tdb1, tdb2, seconds)
        return offset * moon, offset * moon_rate

    # -- everything else ---------------------------------------------------------------------

    def barycentric_body(
        self, body: str, tdb1: ArrayLike, tdb2: ArrayLike, seconds: ArrayLike = 0.0
    ) -> tuple[Array, Array]:
        """Position (m) and velocity (m/s) of the Sun, a planet, the Earth or the Moon, BCRS.

        Raises
        ------
        UnknownNameError
            For a body that the ephemeris does not carry.
        """
        if body == "earth":
            return self.earth(tdb1, tdb2, seconds)
        if body == "moon":
            earth, earth_rate = self.earth(tdb1, tdb2, seconds)
            moon, moon_rate = self.moon_geocentric(tdb1, tdb2, seconds)
            return earth + moon, earth_rate + moon_rate
        try:
            records = self.barycentric[body]
        except KeyError:
            raise UnknownNameError("body", body, BODIES) from None
        place = records.locate(tdb1, tdb2, seconds)
        return records.value(place), records.rate(place)

    def libration(
        self, tdb1: ArrayLike, tdb2: ArrayLike, seconds: ArrayLike = 0.0
    ) -> tuple[Array, Array]:
        """Libration angles phi, theta, psi (rad) and their rates (rad/s), each (3, ...).

        They take the ICRS to the Moon's principal axes:
        ``r_PA = Rz(psi) Rx(theta) Rz(phi) r_ICRS``.

        Raises
        ------
        LighttimeError
            If this ephemeris carries no lunar orientation.
        """
        angles = self.orientation()
        place = angles.locate(tdb1, tdb2, seconds)
        return angles.value(place), angles.rate(place)

    def orientation(self) -> Records:
        """The records of the libration angles.

        Raises
        ------
        LighttimeError
            If this ephemeris carries no lunar orientation.
        """
        if self.angles is None:
            raise LighttimeError(
                f"ephemeris {self.name} carries no lunar orientation, and a reflector on the Moon "
                "needs it: open it with Ephemeris.open(bsp, orientation=bpc)"
            )
        return self.angles


@cache
def _default() -> Ephemeris:
    from lighttime.ephemeris.files import de421

    return de421()


def _reopen(opener: str, *arguments: Any) -> Ephemeris:
    return _default() if opener == "default" else Ephemeris.open(*arguments)


def au3_per_day2(value: float, au_m: float) -> float:
    """A GM from au^3/day^2 to m^3/s^2."""
    return value * au_m**3 / DAY**2
