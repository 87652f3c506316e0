"""Every displacement of a station, by its name and in the ITRF."""

from __future__ import annotations

from collections.abc import Mapping

from lighttime.constants import J2000, JULIAN_YEAR
from lighttime.earth import loading, tides
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


def not_modelled(station: Station) -> tuple[str, ...]:
    """Displacements that a station gives no coefficients for."""
    return tuple(
        name
        for name in ("ocean_loading", "ocean_pole_tide", "atmosphere_loading")
        if getattr(station, name) is None
    )


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
    moved: dict[str, Array] = {}
    if "solid_earth_tide" not in omit:
        moved["solid_earth_tide"] = tides.solid_earth_tide(
            xyz, sun_itrf_m, moon_itrf_m, tt1, tt2, ut1_fraction
        )
    years = ((tt1 - J2000) + tt2) / JULIAN_YEAR
    if "pole_tide" not in omit:
        moved["pole_tide"] = tides.pole_tide(xyz, xp_arcsec, yp_arcsec, years)
    if station.ocean_loading is not None and "ocean_loading" not in omit:
        moved["ocean_loading"] = loading.ocean_loading(
            xyz, station.ocean_loading, tt1, tt2, ut1_fraction
        )
    if station.ocean_pole_tide is not None and "ocean_pole_tide" not in omit:
        moved["ocean_pole_tide"] = loading.ocean_pole_tide_loading(
            xyz, station.ocean_pole_tide, xp_arcsec, yp_arcsec, years
        )
    if station.atmosphere_loading is not None and "atmosphere_loading" not in omit:
        moved["atmosphere_loading"] = loading.atmosphere_loading(
            xyz, station.atmosphere_loading, ut1_fraction
        )
    return moved
