"""Parts of the error budget: where the station is and how the Earth turns."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from lighttime.constants import ARCSECOND, MILLIARCSECOND
from lighttime.earth.local import east_north_up
from lighttime.earth.station import Station
from lighttime.uncertainty.case import Case, Contribution

ORIENTATION = {
    "ut1": {"ut1_s": ("ut1_tai_s", 1.0)},
    "pole": {"xp_arcsec": ("xp_rad", ARCSECOND), "yp_arcsec": ("yp_rad", ARCSECOND)},
    "celestial_pole": {
        "dx_mas": ("dx_rad", MILLIARCSECOND),
        "dy_mas": ("dy_rad", MILLIARCSECOND),
    },
}
"""Parameters of each part, where the series tells their sigmas, and in which unit."""


def earth(case: Case) -> Iterator[Contribution]:
    """All of them; none if there is no station."""
    station = case.answer.query.station
    if isinstance(station, Station):
        yield from _orientation(case)
        yield from _place(case, station)
        yield from _tides(case)


def _orientation(case: Case) -> Iterator[Contribution]:
    query, series = case.answer.query, case.answer.model.earth_orientation
    tai = query.when.to("tai", place=query.station, earth_orientation=series)
    at_date = series.sigmas(np.ravel(tai.jd1), np.ravel(tai.jd2))
    source = (
        "taken as exact"
        if series.constant is not None
        else "published with the series, at the date"
    )
    for part, fields in ORIENTATION.items():
        sigmas = [np.ravel(getattr(at_date, name)) / unit for name, unit in fields.values()]
        yield Contribution(part, "geometry", case.rows(tuple(fields), sigmas), source)
    if case.has("subdaily_rotation"):
        sizes = case.sigmas
        pole = sizes.subdaily_pole_arcsec
        names = ("ut1_s", "xp_arcsec", "yp_arcsec")
        values = (sizes.subdaily_ut1_s, pole, pole)
        rows = np.stack([case.slope(n) * v for n, v in zip(names, values, strict=True)])
        source = sizes.source("subdaily_ut1_s")
        yield Contribution("subdaily_rotation", "subdaily_rotation", rows, source)


def _place(case: Case, station: Station) -> Iterator[Contribution]:
    sizes = case.sigmas
    given = station.sigma_m
    sigmas = (sizes.station_m,) * 3 if given is None else given
    source = sizes.source("station_m") if given is None else "Station.sigma_m"
    rows = case.rows([f"station_{axis}_m" for axis in "xyz"], sigmas)
    yield Contribution("station", "geometry", rows, source)
    rows = case.rows(
        [f"station_v{axis}_m_per_yr" for axis in "xyz"], (sizes.station_velocity_m_per_yr,) * 3
    )
    source = sizes.source("station_velocity_m_per_yr")
    yield Contribution("station_velocity", "geometry", rows, source)
    if case.has("residual_motion"):  # what is said of it is a fraction of it
        rows = sizes.residual_motion * case.term("residual_motion")[None, :]
        source = sizes.source("residual_motion")
        yield Contribution("residual_motion", "residual_motion", rows, source)
    else:
        along = np.stack(east_north_up(station.xyz_m)) @ case.three("station_{}_m")
        rows = along * np.array(sizes.station_motion_enu_m)[:, None]
        source = sizes.source("station_motion_enu_m")
        yield Contribution("station_motion", "geometry", rows, source)


def _tides(case: Case) -> Iterator[Contribution]:
    """Love numbers; and fractions of the displacements whose size is uncertain."""
    sizes = case.sigmas
    if case.has("solid_earth_tide"):
        rows = case.rows(("h2_earth", "l2_earth"), (sizes.h2_earth, sizes.l2_earth))
        source = sizes.source("h2_earth")
        yield Contribution("solid_earth_tide", "solid_earth_tide", rows, source)
    for name in ("pole_tide", "ocean_loading", "ocean_pole_tide", "atmosphere_loading"):
        if case.has(name) and f"{name}_scale" not in case.covered:
            rows = getattr(sizes, name) * case.term(name)[None, :]
            yield Contribution(name, name, rows, sizes.source(name))
