"""Reader of SINEX files: stations with velocity, sigmas, solution intervals and eccentricities.

Of a file these blocks are read: SITE/ID, SITE/ECCENTRICITY, SOLUTION/EPOCHS, SOLUTION/ESTIMATE
(STAX to STAZ, VELX to VELZ) and SOLUTION/DISCONTINUITY. A file is read as a whole or not at all:
nothing comes of one that is cut, miscounted or at odds with itself.

Source: SINEX format, version 2.02 (from memory).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from os import PathLike
from pathlib import Path
from typing import Any

import numpy as np

from lighttime.constants import DEGREE
from lighttime.earth.local import from_geodetic
from lighttime.earth.sinex_blocks import (
    DISCONTINUITY,
    ECCENTRICITY,
    EPOCHS,
    IDENTITY,
    POSITION,
    VELOCITY,
    Blocks,
    Estimate,
    Identity,
    Key,
    Place,
)
from lighttime.earth.sinex_site import SinexSite, SinexSolution
from lighttime.earth.station import Station
from lighttime.errors import FileError, InputError, UnknownNameError
from lighttime.vectors import norm

__all__ = ["SinexFile", "read_sinex"]

MOST_LINES = 20
"""So many sites are printed."""

_APPROXIMATE_M = 10_000.0
"""Positions and the rounded coordinates of SITE/ID agree to this."""


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
        shown = [f"  {site}" for site in self.sites[:MOST_LINES]]
        more = ["  ..."] if len(self.sites) > MOST_LINES else []
        return "\n".join([repr(self)[1:-1], *shown, *more])


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
    blocks = Blocks.of_file(path)
    blocks.check_count()
    if discontinuities is not None:
        other = Blocks.of_file(Path(discontinuities), (DISCONTINUITY,))
        if not other.discontinuities:
            raise FileError(other.path, None, f"no block {DISCONTINUITY} for positions in it")
        blocks.discontinuities = other.discontinuities
    solutions = {key: _solution(blocks, key, group) for key, group in blocks.estimates.items()}
    _check_on_earth(blocks, solutions)
    _check_identities(blocks, solutions)
    places: dict[Place, list[SinexSolution]] = {}
    for key, solution in solutions.items():
        places.setdefault(key[:2], []).append(solution)
    return SinexFile(str(path), tuple(_site(blocks, *item) for item in places.items()))


def _solution(blocks: Blocks, key: Key, group: Mapping[str, Estimate]) -> SinexSolution:
    """One solution, of which no part is missing."""
    path, of = blocks.path, f"of {key[0]}, solution {key[2]}"
    first = next(iter(group.values()))
    has_velocity = any(kind in group for kind in VELOCITY)
    for kind in (*POSITION, *(VELOCITY if has_velocity else ())):
        if kind not in group:
            raise FileError(path, first.line, f"{kind} {of} is missing")
        if group[kind].reference_mjd is None:
            raise FileError(path, group[kind].line, f"no reference epoch for {kind} {of}")
        if group[kind].reference_mjd != first.reference_mjd:
            reason = f"{kind} {of} has another reference epoch than line {first.line}"
            raise FileError(path, group[kind].line, reason)
    if EPOCHS in blocks.titles and key not in blocks.epochs:
        raise FileError(path, first.line, f"no line {of} in {EPOCHS}")
    if IDENTITY in blocks.titles and key[:2] not in blocks.identities:
        raise FileError(path, first.line, f"no line of {key[0]} {key[1]} in {IDENTITY}")
    x, y, z = (group[kind] for kind in POSITION)
    velocity = sigma_velocity = None
    if has_velocity:
        vx, vy, vz = (group[kind] for kind in VELOCITY)
        velocity, sigma_velocity = (vx.value, vy.value, vz.value), (vx.sigma, vy.sigma, vz.sigma)
    assert first.reference_mjd is not None
    return SinexSolution(
        number=key[2],
        xyz_m=(x.value, y.value, z.value),
        sigma_m=(x.sigma, y.sigma, z.sigma),
        velocity_m_per_yr=velocity,
        sigma_velocity_m_per_yr=sigma_velocity,
        reference_mjd=first.reference_mjd,
        observed_mjd=blocks.epochs.get(key),
        valid_mjd=blocks.discontinuities.get(key),
    )


def _site(blocks: Blocks, place: Place, solutions: list[SinexSolution]) -> SinexSite:
    code, point = place
    identity = blocks.identities.get(place, Identity("", "", None))
    eccentricities = tuple(blocks.eccentricities.get(place, ()))
    return SinexSite(
        path=str(blocks.path),
        code=code,
        point=point,
        domes=identity.domes,
        name=identity.name or code,
        solutions=tuple(solutions),
        eccentricities=eccentricities if ECCENTRICITY in blocks.titles else None,
        post_seismic=code in blocks.post_seismic,
    )


def _check_on_earth(blocks: Blocks, solutions: Mapping[Key, SinexSolution]) -> None:
    """Position and velocity are those of a station."""
    still = (0.0, 0.0, 0.0)
    with np.errstate(over="ignore"):  # infinity is no place on the Earth either
        radius = np.linalg.norm([s.xyz_m for s in solutions.values()], axis=1)
        speed = np.linalg.norm([s.velocity_m_per_yr or still for s in solutions.values()], axis=1)
    plain = (radius > 6_340_000.0) & (radius < 6_400_000.0) & (speed < 0.5)
    for (key, solution), fine in zip(solutions.items(), plain.tolist(), strict=True):
        if fine:
            continue
        try:
            Station(key[0], solution.xyz_m, solution.velocity_m_per_yr or still)
        except InputError as error:
            reason = f"{key[0]}, solution {key[2]}: {error}"
            raise FileError(blocks.path, _line(blocks, key), reason) from error


def _check_identities(blocks: Blocks, solutions: Mapping[Key, SinexSolution]) -> None:
    """Positions are where SITE/ID puts them."""
    known = {k: i.geodetic for k, i in blocks.identities.items() if i.geodetic is not None}
    keys = [key for key in solutions if key[:2] in known]
    if not keys:
        return
    latitude, longitude, height = np.array([known[key[:2]] for key in keys]).T
    there = from_geodetic(latitude * DEGREE, longitude * DEGREE, height)
    here = np.array([solutions[key].xyz_m for key in keys]).T
    away = norm(here - there)
    k = int(np.argmax(away))
    if away[k] > _APPROXIMATE_M:
        of = f"{keys[k][0]}, solution {keys[k][2]},"
        reason = f"{of} is {away[k] / 1e3:.1f} km from where {IDENTITY} puts it"
        raise FileError(blocks.path, _line(blocks, keys[k]), reason)


def _line(blocks: Blocks, key: Key) -> int:
    return next(iter(blocks.estimates[key].values())).line
