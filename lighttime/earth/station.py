"""A station: where it is fixed to the Earth, and what moves it there."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

from lighttime.constants import DEGREE, J2000, JULIAN_YEAR
from lighttime.earth.local import east_north_up, from_geodetic, geodetic
from lighttime.errors import InputError
from lighttime.vectors import Array

if TYPE_CHECKING:
    from lighttime.earth.loading import AtmosphereLoading, OceanLoading, OceanPoleTide

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
    sigma_m : 3 floats, optional
        One-sigma of the position along x, y and z, metres, for error budgets.
    source : str
        Where the coordinates come from.

    Raises
    ------
    InputError
        If a number is not finite or the position is not within 100 km of the ellipsoid.

    Examples
    --------
    >>> station = Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
    >>> [round(x) for x in station.xyz_m]
    [4389842, 546779, 4582377]
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
        radius = float(np.linalg.norm(self.xyz_m))
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
        for field, value, most in (
            ("latitude_deg", latitude_deg, 90.0),
            ("longitude_deg", longitude_deg, 360.0),
            ("height_m", height_m, HIGHEST_M),
        ):
            if not abs(float(value)) <= most:
                raise InputError(field, value, f"-{most:g} to {most:g}")
        xyz = from_geodetic(latitude_deg * DEGREE, longitude_deg * DEGREE, height_m)
        return cls(name, _triple("xyz_m", xyz), **more)  # type: ignore[arg-type]

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


def _triple(field: str, value: object) -> Triple:
    array = np.asarray(value, dtype=float)
    if array.shape != (3,):
        raise InputError(field, value, "three numbers")
    if not np.all(np.isfinite(array)):
        raise InputError(field, value, "finite numbers")
    x, y, z = array.tolist()
    return (x, y, z)
