"""Every displacement of a station, by its name and in the ITRF."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import TypeVar

from numpy.typing import ArrayLike

from lighttime.constants import J2000, JULIAN_YEAR
from lighttime.earth import loading, tides
from lighttime.earth.local import enu_to_itrf
from lighttime.earth.station import Station
from lighttime.vectors import Array

DISPLACEMENTS = (
    "solid_earth_tide",
    "pole_tide",
    "ocean_loading",
    "ocean_pole_tide",
    "atmosphere_loading",
)
"""Names of the terms, in the order in which they are added."""


NEEDING_COEFFICIENTS = ("ocean_loading", "ocean_pole_tide", "atmosphere_loading")


def not_modelled(station: Station) -> tuple[str, ...]:
    """Displacements that a station gives no coefficients for."""
    return tuple(name for name in NEEDING_COEFFICIENTS if getattr(station, name) is None)


def modelled(station: Station, omit: frozenset[str] = frozenset()) -> tuple[str, ...]:
    """Displacements of a station that are neither omitted nor lack coefficients, in order."""
    absent = omit.union(not_modelled(station))
    return tuple(name for name in DISPLACEMENTS if name not in absent)


def displacements(
    station: Station,
    *,
    sun_itrf_m: Array,
    moon_itrf_m: Array,
    tt1: Array,
    tt2: Array,
    ut1_fraction: Array,
    xp_arcsec: Array,
    yp_arcsec: Array,
    omit: frozenset[str] = frozenset(),
) -> Mapping[str, Array]:
    """Displacements of a station in the ITRF, metres.

    Parameters
    ----------
    station : Station
    sun_itrf_m, moon_itrf_m : array, shape (3, n)
        Geocentric Sun and Moon in the ITRF.
    tt1, tt2 : array, shape (n,)
        The instant, TT.
    ut1_fraction : array, shape (n,)
        Fraction of the UT1 day.
    xp_arcsec, yp_arcsec : array, shape (n,)
        The pole without its sub-daily part.
    omit : frozenset of str
        Terms to leave out.

    Returns
    -------
    mapping of str to ndarray, shape (3, n)
        Those that are neither omitted nor lack coefficients.
    """
    xyz = station.xyz_m
    years = ((tt1 - J2000) + tt2) / JULIAN_YEAR
    evaluate: dict[str, Callable[[], Array]] = {
        "solid_earth_tide": lambda: tides.solid_earth_tide(
            xyz, sun_itrf_m, moon_itrf_m, tt1, tt2, ut1_fraction
        ),
        "pole_tide": lambda: tides.pole_tide(xyz, xp_arcsec, yp_arcsec, years),
        "ocean_loading": lambda: loading.ocean_loading(
            xyz, given(station.ocean_loading), tt1, tt2, ut1_fraction
        ),
        "ocean_pole_tide": lambda: loading.ocean_pole_tide_loading(
            xyz, given(station.ocean_pole_tide), xp_arcsec, yp_arcsec, years
        ),
        "atmosphere_loading": lambda: loading.atmosphere_loading(
            xyz, given(station.atmosphere_loading), ut1_fraction
        ),
    }
    return {name: evaluate[name]() for name in modelled(station, omit)}


def residual_motion(
    station: Station, tt1: ArrayLike, tt2: ArrayLike, omit: frozenset[str] = frozenset()
) -> dict[str, Array]:
    """The displacement that the user supplied, by its name in the ITRF; empty if there is none.

    It bends where the user's instants are and ends with them, and so is no part of
    `displacements`, which are smooth from one midnight UTC to the next.

    Parameters
    ----------
    station : Station
    tt1, tt2 : array_like, shape (...)
        The instant, TT.
    omit : frozenset of str
        Terms to leave out.

    Returns
    -------
    dict of str to ndarray, shape (3, ...)

    Raises
    ------
    CoverageError
        If the supplied series does not reach an instant.
    """
    if station.residual_motion is None or "residual_motion" in omit:
        return {}
    enu = station.residual_motion.at(tt1, tt2)
    return {"residual_motion": enu_to_itrf(enu, station.xyz_m)}


T = TypeVar("T")


def given(coefficients: T | None) -> T:
    """Coefficients that `modelled` has found to be there."""
    assert coefficients is not None
    return coefficients
