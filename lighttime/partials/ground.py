"""Derivatives by what the station depends on: place, rotation of the Earth, tides, air.

Every function takes a solved block and gives the derivatives of a group of parameters, arrays
of shape (n,). Names end in the unit of the parameter.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping

import numpy as np

from lighttime.constants import ARCSECOND, EARTH_ROTATION_RATE, MILLIARCSECOND, SPEED_OF_LIGHT
from lighttime.earth.loading import ocean_pole_tide_loading
from lighttime.earth.station import Station
from lighttime.earth.tides import pole_tide
from lighttime.partials.block import Block
from lighttime.partials.geodetic import geodetic_slopes
from lighttime.partials.side import Side
from lighttime.partials.station_end import StationEnd
from lighttime.vectors import Array, column, cross, dot

c = SPEED_OF_LIGHT

Slopes = Mapping[str, Array]


def _ground(of_end: Callable[[StationEnd], Array]) -> Callable[[Side], Array]:
    """The same at the station of either leg."""

    def at(side: Side) -> Array:
        assert side.station is not None
        return of_end(side.station)

    return at


def xyz(names: str, row: Array) -> Slopes:
    """The three components of a row by their names."""
    return {names.format(axis): row[k] for k, axis in enumerate("xyz")}


def station_position(block: Block) -> Slopes:
    """ITRF coordinates: with them move tide, zenith, height in the air and TDB - TT."""
    station: Station = block.query.station
    by_latitude, by_height, tilt = geodetic_slopes(station.xyz_m)

    def row(end: StationEnd) -> Array:
        by_xyz = end.by_place
        air = end.slopes.air
        if air is not None:
            up = end.by_itrf(end.slopes.up)
            by_xyz = (
                by_xyz
                + np.tensordot(tilt.T, up, axes=1)
                + by_latitude[:, None] * air.latitude_rad / c
                + by_height[:, None] * air.height_m / c
            )
        return by_xyz

    clock = block.clock(lambda end: end.by_itrf(end.clock_by_place))
    return xyz("station_{}_m", block.total(_ground(row)) + clock)


def station_velocity(block: Block) -> Slopes:
    """ITRF velocity: the coordinates drift, tide and air are taken at the nominal place."""
    station: Station = block.query.station

    def row(end: StationEnd) -> Array:
        rung = end.event.ladder
        years = station.years_since_epoch(rung["tt1"], rung["tt2"])
        return years * end.by_itrf(end.by_gcrs)

    return xyz("station_v{}_m_per_yr", block.total(_ground(row)))


def earth_orientation(block: Block) -> Slopes:
    """UT1, pole and celestial pole offsets; the pole tides follow the pole."""
    station: Station = block.query.station
    daily = _daily_motion(block)
    follow = [_pole_tide_slope(station, frozenset(block.model.omit), axis) for axis in (0, 1)]

    def rows(end: StationEnd) -> Array:
        turn = end.by_rotation
        by_itrf = end.by_itrf(end.by_gcrs)
        pole = [
            ARCSECOND * dot(axis, turn) + dot(column(moved, turn[0]), by_itrf)
            for axis, moved in zip(end.pole_axes, follow, strict=True)
        ]
        celestial = [MILLIARCSECOND * dot(axis, turn) for axis in end.celestial_axes]
        ut1 = EARTH_ROTATION_RATE * dot(end.event.axis, turn) + dot(daily, by_itrf)
        return np.stack([ut1, *pole, *celestial])

    def clock(end: StationEnd) -> Array:
        return dot(end.event.axis, cross(end.nominal, end.clock_by_place))

    names = ("ut1_s", "xp_arcsec", "yp_arcsec", "dx_mas", "dy_mas")
    total = block.total(_ground(rows))
    total[0] += EARTH_ROTATION_RATE * block.clock(clock)
    return dict(zip(names, total, strict=True))


def _daily_motion(block: Block) -> Array:
    """How the displacements that know the time of day move the station in the ITRF, m/s.

    They are series of arguments that turn once or twice a day with UT1: within 4 % (tides of the
    Moon come later every day) they change with UT1 as they do from transmission to reception.
    """
    up, down = block.sides
    assert up.station is not None
    assert down.station is not None
    moved = np.zeros((3, block.query.size))
    for name in ("subdaily_rotation", "ocean_loading", "atmosphere_loading"):
        for end, sign in ((up.station, -1.0), (down.station, 1.0)):
            if name in end.event.displacement:
                moved = moved + sign * end.by_itrf(end.event.displacement[name])
    return moved / (down.station.event.seconds - up.station.event.seconds)


def _pole_tide_slope(station: Station, omit: frozenset[str], axis: int) -> Array:
    """How the pole tides move the station per arcsecond of x_p (0) or y_p (1), ITRF, m."""

    def moved(xp: float, yp: float) -> Array:
        total = np.zeros(3)
        if "pole_tide" not in omit:
            total = total + pole_tide(station.xyz_m, xp, yp, 0.0)
        if station.ocean_pole_tide is not None and "ocean_pole_tide" not in omit:
            ocean = station.ocean_pole_tide
            total = total + ocean_pole_tide_loading(station.xyz_m, ocean, xp, yp, 0.0)
        return total

    return moved(1.0 - axis, float(axis)) - moved(0.0, 0.0)  # linear in the pole


def earth_tide(block: Block) -> Slopes:
    """Love and Shida number of degree 2 of the Earth."""

    def rows(end: StationEnd) -> Array:
        tide, row = end.tide, end.by_gcrs
        if tide is None:
            return np.zeros_like(row[:2])
        return np.stack([dot(tide.by_h(), row), dot(tide.by_l(), row)])

    return dict(zip(("h2_earth", "l2_earth"), block.total(_ground(rows)), strict=True))


def ocean_loading(block: Block) -> Slopes:
    """A factor on all of the ocean loading."""

    def along(end: StationEnd) -> Array:
        moved = end.event.displacement.get("ocean_loading")
        return np.zeros_like(end.by_gcrs[0]) if moved is None else dot(moved, end.by_gcrs)

    return {"ocean_loading_scale": block.total(_ground(along))}


def air(block: Block) -> Slopes:
    """Zenith delay, and the weather that it and the mapping are computed from."""
    names = ("zenith_delay_m", "pressure_hpa", "temperature_k", "relative_humidity")
    fields = ("zenith_m", *names[1:])

    def rows(side: Side) -> Array:
        slopes = side.slopes.air
        nothing = np.zeros(block.query.size)
        if slopes is None:
            return np.stack([nothing] * len(fields))
        return np.stack([getattr(slopes, field) / c + nothing for field in fields])

    return dict(zip(names, block.total(rows), strict=True))
