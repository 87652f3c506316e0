"""Reader of SINEX files: stations with velocity, sigmas, solution intervals and eccentricities.

Of a file these blocks are read: SITE/ID, SITE/ECCENTRICITY, SOLUTION/EPOCHS, SOLUTION/ESTIMATE
(STAX to STAZ, VELX to VELZ) and SOLUTION/DISCONTINUITY. A file is read as a whole or not at all:
nothing comes of one that is cut, miscounted or at odds with itself.

Source: SINEX format, version 2.02 (from memory).
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from os import PathLike
from pathlib import Path
from typing import Any, Final

import numpy as np

from lighttime.constants import DEGREE
from lighttime.earth.local import from_geodetic
from lighttime.earth.sinex_site import Eccentricity, SinexSite, SinexSolution, Triple
from lighttime.earth.sinex_text import HEADER, Columns, records
from lighttime.earth.station import Station
from lighttime.errors import FileError, UnknownNameError

__all__ = ["SinexFile", "read_sinex"]

ESTIMATE, EPOCHS, DISCONTINUITY = (
    f"SOLUTION/{name}" for name in ("ESTIMATE", "EPOCHS", "DISCONTINUITY")
)
IDENTITY, ECCENTRICITY = "SITE/ID", "SITE/ECCENTRICITY"

_POSITION = ("STAX", "STAY", "STAZ")
_VELOCITY = ("VELX", "VELY", "VELZ")
_UNITS: Final = {"STA": ("m",), "VEL": ("m/y", "m/yr")}
_POST_SEISMIC = ("AEXP", "TEXP", "ALOG", "TLOG")

_ESTIMATE_BLANKS = (0, 6, 13, 18, 21, 26, 39, 44, 68)
_EPOCHS_BLANKS = (0, 5, 8, 13, 15, 28)
_APPROXIMATE_M = 10_000.0
"""Positions and the rounded coordinates of SITE/ID agree to this."""

Key = tuple[str, str, str]  # code, point, solution
Interval = tuple[float, float]


@dataclass(frozen=True, repr=False)
class SinexFile:
    """The stations of a SINEX file.

    Made by `read_sinex`.

    Attributes
    ----------
    path : str
    sites : tuple of SinexSite
        In the order of their estimates.
    """

    path: str
    sites: tuple[SinexSite, ...]

    def site(self, site: str, point: str | None = None) -> SinexSite:
        """A site by its code of four characters or its DOMES number.

        Parameters
        ----------
        site : str
            Case does not matter.
        point : str, optional
            Needed where a code has several points.

        Raises
        ------
        UnknownNameError
            If it is not in the file (near names are given), or the point is needed or unknown.
        """
        wanted = site.strip()
        found = [s for s in self.sites if wanted in (s.code, s.domes)] or [
            s for s in self.sites if wanted.casefold() in (s.code.casefold(), s.domes.casefold())
        ]
        codes = dict.fromkeys(s.code for s in found or self.sites)
        if not found or len(codes) > 1:
            raise UnknownNameError(f"site in {Path(self.path).name}", site, codes)
        points = {s.point: s for s in found}
        if point is None and len(points) == 1:
            return found[0]
        if point is None or point.strip() not in points:
            raise UnknownNameError(f"point of {found[0].code}", str(point), points)
        return points[point.strip()]

    def station(
        self,
        site: str,
        when: Any = None,
        solution: str | int | None = None,
        point: str | None = None,
        eccentricity: bool = True,
        **more: Any,
    ) -> Station:
        """A station of the file: see `Station.from_sinex`."""
        return self.site(site, point).station(when, solution, eccentricity, **more)

    def __repr__(self) -> str:
        solutions = sum(len(site.solutions) for site in self.sites)
        return f"<SinexFile {self.path}: {len(self.sites)} sites, {solutions} solutions>"

    def __str__(self) -> str:
        return "\n".join([repr(self)[1:-1], *(f"  {site}" for site in self.sites)])


def read_sinex(
    path: str | PathLike[str], discontinuities: str | PathLike[str] | None = None
) -> SinexFile:
    """Read all stations of a SINEX file.

    Parameters
    ----------
    path : path
        Plain or gzip; read as a stream.
    discontinuities : path, optional
        Another SINEX file that carries the block SOLUTION/DISCONTINUITY, when this one does not.
        With it solutions hold from one discontinuity to the next, without it from their first
        to their last observation.

    Returns
    -------
    SinexFile

    Raises
    ------
    FileError
        With the line. If the file cannot be read, has no header or no end, a block that is not
        closed, a line without the columns of its block, another number of estimates than its
        header says, a position or velocity that lacks a component or a reference epoch, a site
        without the line that it needs in another block, or coordinates that are no station.
    """
    path = Path(path)
    parts = _Parts(path)
    titles = (IDENTITY, ECCENTRICITY, EPOCHS, ESTIMATE, DISCONTINUITY)
    for title, line, text in records(path, titles):
        parts.take(title, line, text)
    parts.check_count()
    if discontinuities is not None:
        other = _Parts(Path(discontinuities))
        for title, line, text in records(other.path, (DISCONTINUITY,)):
            other.take(title, line, text)
        if not other.discontinuities:
            raise FileError(other.path, None, f"no block {DISCONTINUITY} for positions in it")
        parts.discontinuities = other.discontinuities
    return SinexFile(str(path), parts.sites())


@dataclass(frozen=True)
class _Estimate:
    value: float
    sigma: float
    reference_mjd: float | None
    line: int


@dataclass(frozen=True)
class _Identity:
    domes: str
    name: str
    xyz_m: Triple | None


class _Parts:
    """What the blocks say, put together line by line and checked when all is there."""

    def __init__(self, path: Path) -> None:
        self.path = path
        self.stated: int | None = None
        self.counted = 0
        self.last_line = 0
        self.titles: set[str] = set()
        self.estimates: dict[Key, dict[str, _Estimate]] = {}
        self.identities: dict[tuple[str, str], _Identity] = {}
        self.epochs: dict[Key, Interval] = {}
        self.discontinuities: dict[Key, Interval] = {}
        self.eccentricities: dict[tuple[str, str], list[Eccentricity]] = {}
        self.post_seismic: set[str] = set()

    def take(self, title: str, line: int, text: str) -> None:
        """One line of one block."""
        if not text.strip():
            return
        self.titles.add(title)
        if title == HEADER:
            self._take_header(text)
        elif title == ESTIMATE:
            self._take_estimate(line, text)
        elif title == IDENTITY:
            self._take_identity(Columns(self.path, line, text, (0, 5, 8, 18, 20), 20))
        elif title == ECCENTRICITY:
            blanks = (*_EPOCHS_BLANKS, 41, 45, 54, 63)
            self._take_eccentricity(Columns(self.path, line, text, blanks, 72))
        elif title == EPOCHS:
            interval = Columns(self.path, line, text, (*_EPOCHS_BLANKS, 41), 54)
            self._put(self.epochs, interval, title)
        else:
            interval = Columns(self.path, line, text, (*_EPOCHS_BLANKS, 41), 43)
            if interval.word(42, 43) == "P":  # of positions; V are those of velocities
                self._put(self.discontinuities, interval, title)

    def _take_header(self, text: str) -> None:
        words = text.split()
        if len(words) < 9 or not (words[8].isdigit() or set(words[8]) == {"*"}):
            raise FileError(self.path, 1, "the header does not say the number of estimates")
        self.stated = int(words[8]) if words[8].isdigit() else None

    def check_count(self) -> None:
        """The number of estimates is that of the header (which may be out of its columns)."""
        if not self.estimates:
            raise FileError(self.path, None, f"no position of a station in {ESTIMATE}")
        if self.stated is not None and self.stated != self.counted:
            reason = f"{self.counted} estimates up to here, and {self.stated} in the header"
            raise FileError(self.path, self.last_line, reason)

    def _take_estimate(self, line: int, text: str) -> None:
        self.counted += 1
        self.last_line = line
        index = text[1:6].strip()
        if index != str(self.counted):
            reason = f"estimate {self.counted} should be here, not {index!r}"
            raise FileError(self.path, line, reason)
        kind = text[7:13].strip()
        if kind.partition("_")[0] in _POST_SEISMIC:
            self.post_seismic.add(text[14:18].strip())
        if kind not in _POSITION and kind not in _VELOCITY:
            return
        columns = Columns(self.path, line, text, _ESTIMATE_BLANKS, 80)
        unit, allowed = columns.word(40, 44), _UNITS[kind[:3]]
        if unit not in allowed:
            raise columns.error(f"{kind} in {unit!r}; allowed: {' or '.join(allowed)}")
        found = _Estimate(columns.number(46, 68), columns.number(69, 80), columns.time(27), line)
        if found.sigma < 0.0:
            raise columns.error(f"a sigma of {found.sigma}")
        group = self.estimates.setdefault(_key(columns), {})
        if kind in group:
            reason = f"{kind} of {columns.word(14, 18)} a second time"
            raise columns.error(f"{reason} (first at line {group[kind].line})")
        group[kind] = found

    def _take_identity(self, columns: Columns) -> None:
        key = columns.word(1, 5), columns.word(6, 8)
        if key in self.identities:
            raise columns.error(f"{key[0]} a second time in {IDENTITY}")
        numbers = columns.text[43:].split()[-7:]
        try:
            degrees = [_degrees(numbers[k : k + 3]) for k in (0, 3)]
            height = float(numbers[6])
            none = not any(degrees)  # some write zeros for what they do not know
            xyz = None if none else from_geodetic(degrees[1] * DEGREE, degrees[0] * DEGREE, height)
        except (ValueError, IndexError):
            reason = f"no longitude, latitude and height at the end of {columns.text.strip()!r}"
            raise columns.error(reason) from None
        place = None if xyz is None else _triple(xyz)
        self.identities[key] = _Identity(columns.word(9, 18), columns.word(21, 43), place)

    def _take_eccentricity(self, columns: Columns) -> None:
        kind = columns.word(42, 45)
        if kind not in ("UNE", "XYZ"):
            raise columns.error(f"an eccentricity along {kind!r}; allowed: UNE, XYZ")
        first, last = _interval(columns)
        vector = (columns.number(46, 54), columns.number(55, 63), columns.number(64, 72))
        of = columns.word(1, 5), columns.word(6, 8)
        found = Eccentricity(columns.word(9, 13), first, last, kind, vector)
        self.eccentricities.setdefault(of, []).append(found)

    def _put(self, into: dict[Key, Interval], columns: Columns, title: str) -> None:
        key = columns.word(1, 5), columns.word(6, 8), columns.word(9, 13)
        if key in into:
            raise columns.error(f"solution {key[2]} of {key[0]} a second time in {title}")
        into[key] = _interval(columns)

    # -- everything together -----------------------------------------------------------------

    def sites(self) -> tuple[SinexSite, ...]:
        """The sites, complete."""
        solutions: dict[tuple[str, str], list[SinexSolution]] = {}
        for key, group in self.estimates.items():
            solutions.setdefault(key[:2], []).append(self._solution(key, group))
        return tuple(self._site(key, found) for key, found in solutions.items())

    def _solution(self, key: Key, group: Mapping[str, _Estimate]) -> SinexSolution:
        code, _, number = key
        first = next(iter(group.values()))
        of = f"of {code}, solution {number}"
        has_velocity = any(kind in group for kind in _VELOCITY)
        for kind in (*_POSITION, *(_VELOCITY if has_velocity else ())):
            if kind not in group:
                raise FileError(self.path, first.line, f"{kind} {of} is missing")
            if group[kind].reference_mjd is None:
                raise FileError(self.path, group[kind].line, f"no reference epoch for {kind} {of}")
            if group[kind].reference_mjd != first.reference_mjd:
                reason = f"{kind} {of} has another reference epoch than line {first.line}"
                raise FileError(self.path, group[kind].line, reason)
        if EPOCHS in self.titles and key not in self.epochs:
            raise FileError(self.path, first.line, f"no line {of} in {EPOCHS}")
        position, velocity = (
            [group[kind] for kind in kinds if kind in group] for kinds in (_POSITION, _VELOCITY)
        )
        assert first.reference_mjd is not None
        found = SinexSolution(
            number=number,
            xyz_m=_triple(e.value for e in position),
            sigma_m=_triple(e.sigma for e in position),
            velocity_m_per_yr=_triple(e.value for e in velocity) if velocity else None,
            sigma_velocity_m_per_yr=_triple(e.sigma for e in velocity) if velocity else None,
            reference_mjd=first.reference_mjd,
            observed_mjd=self.epochs.get(key),
            valid_mjd=self.discontinuities.get(key),
        )
        self._check_place(key, found, first.line)
        return found

    def _check_place(self, key: Key, solution: SinexSolution, line: int) -> None:
        """A position is one on the Earth, and the one that SITE/ID says."""
        try:
            Station(key[0], solution.xyz_m, solution.velocity_m_per_yr or (0.0, 0.0, 0.0))
        except ValueError as error:
            of = f"{key[0]}, solution {key[2]}"
            raise FileError(self.path, line, f"{of}: {error}") from error
        identity = self.identities.get(key[:2])
        if identity is None:
            if IDENTITY in self.titles:
                raise FileError(self.path, line, f"no line of {key[0]} {key[1]} in {IDENTITY}")
        elif identity.xyz_m is not None:
            away = float(np.linalg.norm(np.subtract(solution.xyz_m, identity.xyz_m)))
            if away > _APPROXIMATE_M:
                reason = f"{key[0]}, solution {key[2]}, is {away / 1e3:.1f} km from where"
                raise FileError(self.path, line, f"{reason} {IDENTITY} puts it")

    def _site(self, key: tuple[str, str], solutions: list[SinexSolution]) -> SinexSite:
        identity = self.identities.get(key, _Identity("", "", None))
        eccentricities = self.eccentricities.get(key, [])
        return SinexSite(
            path=str(self.path),
            code=key[0],
            point=key[1],
            domes=identity.domes,
            name=identity.name or key[0],
            solutions=tuple(solutions),
            eccentricities=tuple(eccentricities) if ECCENTRICITY in self.titles else None,
            post_seismic=key[0] in self.post_seismic,
        )


def _key(columns: Columns) -> Key:
    return columns.word(14, 18), columns.word(19, 21), columns.word(22, 26)


def _interval(columns: Columns) -> Interval:
    """First and last MJD of a line; what is not stated is open."""
    first, last = columns.time(16), columns.time(29)
    interval = -np.inf if first is None else first, np.inf if last is None else last
    if not interval[0] <= interval[1]:
        raise columns.error("an interval that ends before it begins")
    return interval


def _degrees(words: list[str]) -> float:
    degrees, minutes, seconds = map(float, words)
    size = abs(degrees) + minutes / 60.0 + seconds / 3600.0
    return -size if words[0].startswith("-") else size


def _triple(values: Iterable[float]) -> Triple:
    x, y, z = (float(value) for value in values)
    return x, y, z
