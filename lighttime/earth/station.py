"""A station: where it is fixed to the Earth, and what moves it there."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property
from math import hypot
from os import PathLike
from pathlib import Path
from typing import TYPE_CHECKING, Any, Literal

import numpy as np

from lighttime.constants import DEGREE, J2000, JULIAN_YEAR
from lighttime.earth.local import east_north_up, from_geodetic, geodetic
from lighttime.errors import InputError
from lighttime.inputs import number, numbers
from lighttime.vectors import Array

if TYPE_CHECKING:
    from lighttime.earth.loading import AtmosphereLoading, OceanLoading, OceanPoleTide
    from lighttime.earth.residual_motion import ResidualMotion
    from lighttime.earth.series import EarthOrientation
    from lighttime.ephemeris import Ephemeris

Triple = tuple[float, float, float]

HIGHEST_M = 100_000.0
"""A station lies within this of the ellipsoid."""


@dataclass(frozen=True)
class Station:
    """A station on the Earth.

    Parameters
    ----------
    name : str
        For people.
    xyz_m : 3 floats
        ITRF position at `epoch`, metres, of the point at which the light time begins and ends
        (the intersection of the telescope's axes); tide-free convention.
    velocity_m_per_yr : 3 floats
        ITRF velocity, metres per Julian year.
    epoch : float
        Epoch of the position, in Julian years (2000.0 = J2000.0).
    ocean_loading, ocean_pole_tide, atmosphere_loading : optional
        Loading coefficients of this place. What is not given is *not modelled*, and every
        answer says so.
    residual_motion : ResidualMotion, optional
        What else moves this place, as a series of east, north and up.
    sigma_m : 3 floats, optional
        One-sigma of the position along x, y and z, metres, for error budgets.
    source : str
        Where the coordinates come from.

    Raises
    ------
    InputError
        If a number is not finite or the position is not within 100 km of the ellipsoid.

    Notes
    -----
    The origin is the centre of mass of the whole Earth, oceans and air included, as it is that of
    an ephemeris; coordinates in the ITRF refer to its mean over years. Ocean tides move it
    against the ground by up to 1 cm: that motion is contained in ocean loading coefficients
    whose `OceanLoading.centre_of_mass` is true, and missing otherwise. What seasons and weather
    add, some millimetres, can be supplied as `residual_motion`.

    Examples
    --------
    >>> station = Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
    >>> [round(x) for x in station.xyz_m]
    [4389978, 546801, 4582330]
    >>> round(station.height_m, 6)
    2310.0
    """

    name: str
    xyz_m: Triple
    velocity_m_per_yr: Triple = (0.0, 0.0, 0.0)
    epoch: float = 2015.0
    ocean_loading: OceanLoading | None = None
    ocean_pole_tide: OceanPoleTide | None = None
    atmosphere_loading: AtmosphereLoading | None = None
    residual_motion: ResidualMotion | None = None
    sigma_m: Triple | None = None
    source: str = ""

    def __post_init__(self) -> None:
        for field in ("xyz_m", "velocity_m_per_yr", "sigma_m"):
            value = getattr(self, field)
            if value is not None:
                object.__setattr__(self, field, _triple(field, value))
        if not 1900.0 <= float(self.epoch) <= 2100.0:
            raise InputError("epoch", self.epoch, "1900 to 2100, in years")
        object.__setattr__(self, "epoch", float(self.epoch))
        radius = hypot(*self.xyz_m)
        # outside this shell there is no need to ask for the height, nor sense in doing so
        near = 6_250_000.0 < radius < 6_480_000.0
        if not near or abs(self.height_m) > HIGHEST_M:
            far = f"{self.xyz_m} ({radius / 1e3:.1f} km from the geocentre)"
            raise InputError("xyz_m", far, "a place within 100 km of the ellipsoid, in metres")
        if max(abs(v) for v in self.velocity_m_per_yr) > 1.0:
            raise InputError(
                "velocity_m_per_yr", self.velocity_m_per_yr, "-1 to 1 m/yr in each component"
            )

    @classmethod
    def from_geodetic(
        cls,
        name: str,
        latitude_deg: float,
        longitude_deg: float,
        height_m: float,
        **more: object,
    ) -> Station:
        """A station from geodetic coordinates on the GRS80 ellipsoid.

        Parameters
        ----------
        name : str
        latitude_deg, longitude_deg : float
            Geodetic latitude, -90 to 90; longitude, positive east, -360 to 360.
        height_m : float
            Height above the ellipsoid.
        **more
            The other fields of `Station`.

        Raises
        ------
        InputError
            If a coordinate is out of range.
        """
        found = []
        for field, value, most in (
            ("latitude_deg", latitude_deg, 90.0),
            ("longitude_deg", longitude_deg, 360.0),
            ("height_m", height_m, HIGHEST_M),
        ):
            found.append(number(field, value))
            if not abs(found[-1]) <= most:
                raise InputError(field, value, f"-{most:g} to {most:g}")
        latitude, longitude, height = found
        xyz = from_geodetic(latitude * DEGREE, longitude * DEGREE, height)
        return cls(name, _triple("xyz_m", xyz), **more)  # type: ignore[arg-type]

    @classmethod
    def from_earth_location(cls, name: str, location: Any, **more: object) -> Station:
        """A station from an astropy `EarthLocation`.

        Parameters
        ----------
        name : str
        location : astropy.coordinates.EarthLocation
            One place; its geocentric coordinates are taken as those of the ITRF, tide-free.
        **more
            The other fields of `Station`.

        Raises
        ------
        InputError
            If it is no `EarthLocation`, several, or not near the surface.

        Examples
        --------
        >>> from astropy.coordinates import EarthLocation
        >>> place = EarthLocation.from_geodetic(7.1, 46.2, 2310.0, ellipsoid="GRS80")
        >>> print(Station.from_earth_location("Hilltop", place))
        Hilltop: 46.20000 deg N, 7.10000 deg E, 2310.00 m
        """
        if not hasattr(location, "to_geocentric"):
            raise InputError("location", location, "an astropy EarthLocation")
        geocentric = location.to_geocentric()
        xyz = [number(f"{axis}_m", v) for axis, v in zip("xyz", geocentric, strict=True)]
        return cls(name, _triple("xyz_m", xyz), **more)  # type: ignore[arg-type]

    @staticmethod
    def from_file(path: str | PathLike[str]) -> Station:
        """A station from a station file (TOML): see `lighttime.earth.site_file`."""
        from lighttime.earth.site_file import read_station

        return read_station(path)

    @staticmethod
    def from_sinex(
        path: str | PathLike[str],
        site: str,
        when: Any = None,
        solution: str | int | None = None,
        point: str | None = None,
        eccentricity: bool = True,
        discontinuities: str | PathLike[str] | None = None,
        **more: Any,
    ) -> Station:
        """A station from a SINEX file, plain or gzip.

        Parameters
        ----------
        path : path
            To take several stations of a large file, read it once: `lighttime.read_sinex`.
        site : str
            Code of four characters, or DOMES number.
        when : Epoch, str, ..., optional
            An instant: of several solutions takes the one that holds then.
        solution : str or int, optional
            The solution by its number, to choose it whatever the instant. One of the two is
            needed for a site that has several.
        point : str, optional
            Where a code has several points.
        eccentricity : bool
            Whether to add the vector from the marker to the reference point of the instrument.
            `Station.source` says what was added.
        discontinuities : path, optional
            Another SINEX file with the block SOLUTION/DISCONTINUITY.
        **more
            The other fields of `Station`.

        Raises
        ------
        FileError
            If any part of the file is broken, with the line.
        UnknownNameError
            If the site is not in it (near names are given), or the solution or the point.
        CoverageError
            If no solution holds at `when`.
        InputError
            If what was asked leaves a choice open.
        """
        from lighttime.earth.sinex import read_sinex

        file = read_sinex(path, discontinuities)
        return file.station(site, when, solution, point, eccentricity, **more)

    def with_blq(self, path: str | PathLike[str], site: str | None = None) -> Station:
        """This station with its ocean loading coefficients from a BLQ file.

        Parameters
        ----------
        path : path
        site : str, optional
            Its name in the file, when it is not `name`.
        """
        from lighttime.earth.blq import read_blq

        name = self.name if site is None else site
        return replace(self, ocean_loading=read_blq(Path(path), name))

    def with_residual_motion(self, path: str | PathLike[str]) -> Station:
        """This station with a residual motion from a CSV file: see `ResidualMotion.read`."""
        from lighttime.earth.residual_motion import ResidualMotion

        return replace(self, residual_motion=ResidualMotion.read(path))

    # -- geodetic coordinates ----------------------------------------------------------------

    @cached_property
    def _geodetic(self) -> Triple:
        latitude, longitude, height = geodetic(self.xyz_m)
        return float(latitude), float(longitude), float(height)

    @property
    def latitude_rad(self) -> float:
        """Geodetic latitude, GRS80."""
        return self._geodetic[0]

    @property
    def longitude_rad(self) -> float:
        """Longitude, positive east."""
        return self._geodetic[1]

    @property
    def latitude_deg(self) -> float:
        """Geodetic latitude, GRS80."""
        return self._geodetic[0] / DEGREE

    @property
    def longitude_deg(self) -> float:
        """Longitude, positive east."""
        return self._geodetic[1] / DEGREE

    @property
    def height_m(self) -> float:
        """Height above the GRS80 ellipsoid."""
        return self._geodetic[2]

    @cached_property
    def up(self) -> Array:
        """Unit vector to the geodetic zenith in ITRF, shape (3,)."""
        return np.asarray(east_north_up(self.xyz_m)[2])

    def __str__(self) -> str:
        return (
            f"{self.name}: {self.latitude_deg:.5f} deg N, {self.longitude_deg:.5f} deg E, "
            f"{self.height_m:.2f} m"
        )

    # -- motion ------------------------------------------------------------------------------

    def years_since_epoch(self, tt1: Array, tt2: Array) -> Array:
        """Julian years of TT since the epoch of the coordinates."""
        years: Array = ((tt1 - J2000) + tt2) / JULIAN_YEAR - (self.epoch - 2000.0)
        return years

    def displacement(
        self,
        when: Any,
        name: str,
        frame: Literal["itrf", "enu"] = "itrf",
        earth_orientation: EarthOrientation | None = None,
        ephemeris: Ephemeris | None = None,
    ) -> Array:
        """One displacement alone, as it enters a range.

        Parameters
        ----------
        when : Epoch, str, datetime, astropy Time, or an array or list of them
        name : str
            ``solid_earth_tide``, ``pole_tide``, ``ocean_loading``, ``ocean_pole_tide``,
            ``atmosphere_loading`` or ``residual_motion``.
        frame : {"itrf", "enu"}
            Along the axes of the ITRF, or east, north and up of the GRS80 ellipsoid.
        earth_orientation : EarthOrientation, optional
            The bundled series if not given.
        ephemeris : Ephemeris, optional
            Of Sun and Moon; DE421 if not given.

        Returns
        -------
        ndarray, shape (..., 3)
            Metres, in the shape of `when`.

        Raises
        ------
        UnknownNameError
            For another name or frame.
        InputError
            If the station has no coefficients for it.
        CoverageError
            If the data in use do not reach an instant.

        Examples
        --------
        >>> station = Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
        >>> tide = station.displacement("2020-03-01T19:00:00", "solid_earth_tide", frame="enu")
        >>> [round(1e3 * metres) for metres in tide.tolist()]
        [-21, -26, 27]
        """
        from lighttime.earth.alone import displacement

        return displacement(self, when, name, frame, earth_orientation, ephemeris)

    def displacement_source(self, name: str) -> str:
        """Where a displacement comes from: its model, and whose coefficients it uses.

        Examples
        --------
        >>> Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0).displacement_source("pole_tide")
        'IERS Conventions (2010), TN36, 7.1.4, secular pole of 2018'
        """
        from lighttime.earth.alone import source

        return source(self, name)


def _triple(field: str, value: Any) -> Triple:
    array = numbers(field, value)
    if array.shape != (3,):
        raise InputError(field, value, "three numbers")
    if not np.all(np.isfinite(array)):
        raise InputError(field, value, "finite numbers")
    x, y, z = array.tolist()
    return (x, y, z)
