"""A site of a SINEX file: its solutions, and the station at an epoch."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from lighttime.constants import J2000, JULIAN_YEAR, MJD_ZERO
from lighttime.earth.local import enu_to_itrf
from lighttime.earth.station import Station
from lighttime.errors import CoverageError, InputError, UnknownNameError
from lighttime.timescales import Epoch

__all__ = ["Eccentricity", "SinexSite", "SinexSolution"]

Triple = tuple[float, float, float]


@dataclass(frozen=True)
class SinexSolution:
    """Position and velocity of a site in one interval between discontinuities.

    Attributes
    ----------
    number : str
        As the file says it, ``"1"`` for instance.
    xyz_m, sigma_m : 3 floats
        ITRF position of the marker at the reference epoch, and its one-sigma.
    velocity_m_per_yr, sigma_velocity_m_per_yr : 3 floats or None
        None where the file has no velocity.
    reference_mjd : float
        UTC.
    observed_mjd : 2 floats or None
        First and last observation, UTC; infinite where the file leaves them open, None where
        it does not speak of them.
    valid_mjd : 2 floats or None
        From discontinuity to discontinuity, UTC; None without such a list.
    """

    number: str
    xyz_m: Triple
    sigma_m: Triple
    velocity_m_per_yr: Triple | None
    sigma_velocity_m_per_yr: Triple | None
    reference_mjd: float
    observed_mjd: tuple[float, float] | None
    valid_mjd: tuple[float, float] | None

    @property
    def interval_mjd(self) -> tuple[float, float] | None:
        """Where it may be used without being asked for: `valid_mjd`, else `observed_mjd`."""
        return self.valid_mjd or self.observed_mjd

    @property
    def reference_year(self) -> float:
        """The reference epoch in Julian years of TT."""
        tt = Epoch(MJD_ZERO, self.reference_mjd, "utc").to("tt")
        return 2000.0 + ((float(tt.jd1) - J2000) + float(tt.jd2)) / JULIAN_YEAR

    def __str__(self) -> str:
        if self.interval_mjd is None:
            return self.number
        return f"{self.number} ({' to '.join(map(_day, self.interval_mjd))})"


@dataclass(frozen=True)
class Eccentricity:
    """The vector from the marker to the point that the observations refer to.

    Attributes
    ----------
    solution : str
        Its solution, or dashes.
    first_mjd, last_mjd : float
        When, UTC; infinite where open.
    kind : {"UNE", "XYZ"}
        Up, north, east or ITRF components.
    vector_m : 3 floats
    """

    solution: str
    first_mjd: float
    last_mjd: float
    kind: str
    vector_m: Triple

    def itrf(self, xyz_m: Triple) -> Triple:
        """ITRF components at a marker."""
        if self.kind == "XYZ":
            return self.vector_m
        up, north, east = self.vector_m
        x, y, z = enu_to_itrf([east, north, up], xyz_m).tolist()
        return x, y, z

    def __str__(self) -> str:
        names = ("up", "north", "east") if self.kind == "UNE" else ("x", "y", "z")
        parts = zip(names, self.vector_m, strict=True)
        return ", ".join(f"{name} {value:.4f}" for name, value in parts) + " m"


@dataclass(frozen=True)
class SinexSite:
    """A site, or one of its points.

    Attributes
    ----------
    path : str
        The file.
    code, point, domes : str
    name : str
        The description of the site, else its code.
    solutions : tuple of SinexSolution
    eccentricities : tuple of Eccentricity or None
        None where the file has no such block.
    post_seismic : bool
        Whether the file has terms of post-seismic motion for it. They are not applied.
    """

    path: str
    code: str
    point: str
    domes: str
    name: str
    solutions: tuple[SinexSolution, ...]
    eccentricities: tuple[Eccentricity, ...] | None
    post_seismic: bool

    def station(
        self,
        when: Any = None,
        solution: str | int | None = None,
        eccentricity: bool = True,
        **more: Any,
    ) -> Station:
        """The station in one of its solutions: see `Station.from_sinex`."""
        mjd = None if when is None else _mjd(when)
        found = self._choose(mjd, solution)
        said = [f"{Path(self.path).name}: {self}, solution {found}"]
        xyz = found.xyz_m
        chosen = self._eccentricity(found, mjd) if eccentricity else None
        if chosen is not None:
            x, y, z = np.add(xyz, chosen.itrf(xyz)).tolist()
            xyz = x, y, z
            said.append(f"eccentricity added: {chosen}")
        elif self.eccentricities is None:
            said.append("the file has no eccentricities: the marker")
        else:
            said.append("the marker, without eccentricity")
        if found.velocity_m_per_yr is None:
            said.append("no velocity in the file")
        if self.post_seismic:
            said.append("post-seismic terms of the file not applied")
        fields: dict[str, Any] = {
            "name": self.name,
            "velocity_m_per_yr": found.velocity_m_per_yr or (0.0, 0.0, 0.0),
            "epoch": found.reference_year,
            "sigma_m": found.sigma_m,
            "source": "; ".join(said),
        }
        return Station(xyz_m=xyz, **(fields | more))

    def __str__(self) -> str:
        return " ".join(filter(None, (self.code, self.point, self.domes.strip("- "))))

    def _choose(self, mjd: float | None, solution: str | int | None) -> SinexSolution:
        known = ", ".join(map(str, self.solutions))
        if solution is not None:
            named = {each.number: each for each in self.solutions}
            number = str(solution).strip()
            if number not in named:
                raise UnknownNameError(f"solution of {self.code}", number, named)
            return named[number]
        if mjd is None:
            if len(self.solutions) > 1:
                raise InputError("solution", None, f"a solution of {self.code} or when: {known}")
            return self.solutions[0]
        if any(each.interval_mjd is None for each in self.solutions):
            allowed = f"None, as the file does not say when the solutions of {self.code} hold"
            raise InputError("when", _day(mjd), f"{allowed}: name one, solution= ({known})")
        inside = [
            each
            for each in self.solutions
            if each.interval_mjd is not None and each.interval_mjd[0] <= mjd <= each.interval_mjd[1]
        ]
        if not inside:
            allowed = f"the solutions of {self.code}: {known}; beyond them name one, solution="
            raise CoverageError("when", _day(mjd), allowed)
        return _the_later(inside, mjd, self.code)

    def _eccentricity(self, solution: SinexSolution, mjd: float | None) -> Eccentricity | None:
        """The one that holds; None if the file has no block of them."""
        if self.eccentricities is None:
            return None
        otherwise = "eccentricity=False takes the marker without one"
        numbers = ("", solution.number)
        mine = [each for each in self.eccentricities if each.solution.strip("-") in numbers]
        if not mine:
            of = f"the eccentricity of {self.code}, solution {solution.number},"
            raise InputError(of, None, f"a line in {Path(self.path).name}; {otherwise}")
        first, last = (mjd, mjd) if mjd is not None else solution.interval_mjd or (-np.inf, np.inf)
        now = [each for each in mine if each.first_mjd <= last and each.last_mjd >= first]
        if not now:
            spans = ", ".join(f"{_day(e.first_mjd)} to {_day(e.last_mjd)}" for e in mine)
            allowed = f"{spans}, the eccentricities of {self.code} in the file; {otherwise}"
            raise CoverageError("when", _day(first), allowed)
        if len({(each.kind, each.vector_m) for each in now}) > 1:
            listed = "; ".join(f"{_day(e.first_mjd)} to {_day(e.last_mjd)}: {e}" for e in now)
            raise InputError("when", None if mjd is None else _day(mjd), f"one of {listed}")
        return now[0]


def _the_later(inside: list[SinexSolution], mjd: float, code: str) -> SinexSolution:
    """Of two solutions that meet at an instant, the one that begins there."""
    begins = [each for each in inside if each.interval_mjd and each.interval_mjd[0] == mjd]
    ends = [each for each in inside if each.interval_mjd and each.interval_mjd[1] == mjd]
    if len(inside) == 1:
        return inside[0]
    if len(inside) == 2 and len(begins) == len(ends) == 1 and begins != ends:
        return begins[0]
    both = ", ".join(map(str, inside))
    raise InputError("when", _day(mjd), f"in one solution of {code}; name one, solution= ({both})")


def _mjd(when: Any) -> float:
    epoch = Epoch.parse(when)
    if epoch.shape:
        raise InputError("when", f"epochs of shape {epoch.shape}", "one epoch")
    utc = epoch.to("utc")
    return float((utc.jd1 - MJD_ZERO) + utc.jd2)


def _day(mjd: float) -> str:
    """A date for people; words for what is open."""
    if not np.isfinite(mjd):
        return "the beginning" if mjd < 0.0 else "now"
    return str(Epoch(MJD_ZERO, mjd, "tai").isoformat(0)).removesuffix("T00:00:00")
