"""Where the bodies are: DE421, from its raw records."""

from __future__ import annotations

from functools import lru_cache
from importlib.resources import as_file, files
from typing import Any

import numpy as np

from lighttime.exact.chebyshev import Records
from lighttime.exact.gravity import Oblateness, State
from lighttime.exact.numbers import Context, Real, Vector, context

__all__ = ["BODIES", "PLANETS", "State", "Tables", "de421"]

PLANETS = ("mercury", "venus", "mars", "jupiter", "saturn", "uranus", "neptune")
BODIES = ("sun", "earth", "moon", *PLANETS)
"""Everything that delays light, in the order in which it is listed."""

_GM_NAMES = {
    "sun": "GMS",
    "mercury": "GM1",
    "venus": "GM2",
    "mars": "GM4",
    "jupiter": "GM5",
    "saturn": "GM6",
    "uranus": "GM7",
    "neptune": "GM8",
}


class Tables:
    """An ephemeris as its makers published it: polynomials (km, rad; TDB) and constants.

    Parameters
    ----------
    ctx : context
        Working precision.
    records : dict of str to Records
        ``"earthmoon"`` and planets from the barycentre of the solar system, ``"moon"`` from the
        Earth, ``"librations"`` (phi, theta, psi).
    constants : dict of str to float
        As named in the file: ``"AU"`` in km, ``"GMB"`` and the like in au^3/day^2, ``"EMRAT"``.
    """

    def __init__(
        self, ctx: Context, records: dict[str, Records], constants: dict[str, float]
    ) -> None:
        self.ctx = ctx
        self.records = records
        self.constants = constants
        self.earth_moon_ratio = ctx.mpf(constants["EMRAT"])
        unit = (1000 * ctx.mpf(constants["AU"])) ** 3 / ctx.mpf(86400) ** 2
        self.gm = {body: unit * ctx.mpf(constants[name]) for body, name in _GM_NAMES.items()}
        both = unit * ctx.mpf(constants["GMB"])
        self.gm["moon"] = both / (1 + self.earth_moon_ratio)
        self.gm["earth"] = both - self.gm["moon"]

    def figure_of_earth(self, axis: Vector) -> Oblateness:
        """J2 of the Earth and its radius, with the axis as given."""
        j2, radius = (self.ctx.mpf(self.constants[name]) for name in ("J2E", "AE"))
        return Oblateness(j2, 1000 * radius, axis)

    def _from_records(self, name: str, tdb: Real) -> State:
        position, velocity = self.records[name].at(tdb)
        metres = self.ctx.mpf(1000)
        return State(position * metres, velocity * (metres / 86400))

    def earth_and_moon(self, tdb: Real) -> tuple[State, State]:
        """The Earth and the Moon: the barycentre of the two divides their line by mass."""
        barycentre, moon = self._from_records("earthmoon", tdb), self._from_records("moon", tdb)
        share = 1 / (1 + self.earth_moon_ratio)
        earth = State(
            barycentre.position - moon.position * share,
            barycentre.velocity - moon.velocity * share,
        )
        return earth, State(earth.position + moon.position, earth.velocity + moon.velocity)

    def sun(self, tdb: Real) -> State:
        """The Sun."""
        return self._from_records("sun", tdb)

    def all(self, tdb: Real) -> dict[str, State]:
        """Every body in `BODIES`."""
        earth, moon = self.earth_and_moon(tdb)
        planets = {name: self._from_records(name, tdb) for name in PLANETS}
        return {"sun": self.sun(tdb), "earth": earth, "moon": moon, **planets}

    def state(self, body: str, tdb: Real) -> State:
        """Any one of `BODIES`."""
        if body in ("earth", "moon"):
            earth, moon = self.earth_and_moon(tdb)
            return earth if body == "earth" else moon
        return self._from_records(body, tdb)

    def librations(self, tdb: Real) -> Vector:
        """Euler angles phi, theta, psi of the Moon's principal axes, rad."""
        return self.records["librations"].at(tdb)[0]


@lru_cache(maxsize=8)
def de421(digits: int) -> Tables:
    """DE421 as carried by the package of that name."""
    ctx = context(digits)
    constants = {row["name"].decode(): float(row["value"]) for row in _array("constants")}
    start, end = constants["jalpha"], constants["jomega"]
    names = ("earthmoon", "moon", "librations", "sun", *PLANETS)
    records = {
        name: Records(ctx, f"the {name} of DE421", start, end, _array(f"jpl-{name}"))
        for name in names
    }
    return Tables(ctx, records, constants)


@lru_cache(maxsize=32)
def _array(name: str) -> Any:
    with as_file(files("de421") / f"{name}.npy") as path:
        return np.load(path, allow_pickle=False)
