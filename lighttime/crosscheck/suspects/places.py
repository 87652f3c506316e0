"""Free offsets of each station and each array: coordinates, constants, unknown loading."""

from __future__ import annotations

from collections.abc import Sequence
from functools import partial

import numpy as np

from lighttime.constants import J2000, SPEED_OF_LIGHT, TURN
from lighttime.crosscheck.scene import Scene
from lighttime.crosscheck.suspects.offsets import MM, offset
from lighttime.crosscheck.suspects.suspect import Suspect
from lighttime.crosscheck.suspects.terms import years_since_2000
from lighttime.earth.local import east_north_up
from lighttime.earth.station import Station
from lighttime.moon.reflector import Reflector
from lighttime.path.troposphere import mapping
from lighttime.vectors import Array

TIDES_H = {"M2": 12.4206012, "S2": 12.0, "K1": 23.9344696, "O1": 25.8193417}
"""Periods of the main tides, hours. Source: Doodson 1921."""


def constant_of(scene: Scene, station: str = "", array: str = "") -> Array:
    """A picosecond on the ranges of one station or of one array."""
    here = scene.station.name == station or scene.reflector.name == array
    return scene.zero + float(here)


def station_offset(scene: Scene, station: str, axis: int) -> Array:
    """A millimetre of the station to the east, north or up."""
    if scene.station.name != station:
        return scene.zero
    at1, at3 = scene.itrf(MM * np.asarray(east_north_up(scene.station.xyz_m)[axis]))
    return scene.moved(at1=at1, at3=at3)


def station_drift(scene: Scene, station: str, axis: int, middle_year: float) -> Array:
    """A millimetre a year of the station to the east, north or up."""
    if scene.station.name != station:
        return scene.zero
    years = years_since_2000(scene.t1) + (2000.0 - middle_year)
    at1, at3 = scene.itrf(MM * np.asarray(east_north_up(scene.station.xyz_m)[axis]))
    return scene.moved(at1=years * at1, at3=years * at3)


def tide_in_height(scene: Scene, station: str, period_h: float, quarter: float) -> Array:
    """A millimetre of height with the period of a tide, of unknown phase."""
    if scene.station.name != station:
        return scene.zero
    rung = scene.t1.ladder
    hours = ((rung["tt1"] - J2000) + rung["tt2"]) * 24.0
    wave = MM * np.cos(TURN * (hours / period_h - quarter))
    at1, at3 = scene.itrf(east_north_up(scene.station.xyz_m)[2])
    return scene.moved(at1=wave * at1, at3=wave * at3)


def zenith_delay_offset(scene: Scene, station: str) -> Array:
    """A millimetre of zenith delay."""
    if scene.station.name != station or not scene.has_troposphere or scene.query.weather is None:
        return scene.zero
    place = scene.station
    temperature = scene.query.weather.temperature_k
    up, down = (
        MM * mapping(np.arcsin(s), place.latitude_rad, place.height_m, temperature) / SPEED_OF_LIGHT
        for s in scene.sines
    )
    return scene.delayed(up, down)


def array_offset(scene: Scene, array: str, axis: int) -> Array:
    """A millimetre of the array along a principal axis."""
    if scene.reflector.name != array:
        return scene.zero
    return scene.moved(at2=scene.lunar(MM * np.eye(3)[axis]))


# -- the lists -------------------------------------------------------------------------------------


def station_offsets(stations: Sequence[Station], middle_year: float) -> tuple[Suspect, ...]:
    """Free offsets of some stations; drifts are counted from a year."""
    found: list[Suspect] = []
    for station in stations:
        name, key = station.name, plain(station.name)
        for k, axis in enumerate(("east", "north", "up")):
            found.append(
                offset(
                    f"{key}_{axis}", f"{name} displaced {axis}", f"the coordinates of {name}",
                    partial(station_offset, station=name, axis=k), (100.0, "mm"),
                    f"coordinates of {name}",
                )
            )  # fmt: skip
        for k, axis in enumerate(("east", "north", "up")):
            found.append(
                offset(
                    f"{key}_{axis}_drift", f"{name} moving {axis}", f"the velocity of {name}",
                    partial(station_drift, station=name, axis=k, middle_year=middle_year),
                    (10.0, "mm/yr"), f"velocity of {name}",
                )
            )  # fmt: skip
        found.append(
            offset(
                f"{key}_zenith_delay", f"zenith delay at {name}", "the zenith delay; the pressure",
                partial(zenith_delay_offset, station=name), (10.0, "mm"),
            )
        )  # fmt: skip
        if len(stations) > 1:
            found.append(
                offset(
                    f"{key}_bias", f"a constant of {name} alone",
                    f"what is different in the records of {name}",
                    partial(constant_of, station=name), (1e3, "ps"),
                )
            )  # fmt: skip
        if station.ocean_loading is None:
            found += _unknown_loading(name, key)
    return tuple(found)


def _unknown_loading(name: str, key: str) -> list[Suspect]:
    """Height at the periods of the tides, where ours has no coefficients of ocean loading."""
    return [
        offset(
            f"{key}_{tide.lower()}_{part}", f"height of {name} at the period of {tide} ({part})",
            f"ocean loading: ours has no coefficients for {name}",
            partial(tide_in_height, station=name, period_h=period, quarter=quarter), (10.0, "mm"),
            f"{tide} at {name}",
        )
        for tide, period in TIDES_H.items()
        for quarter, part in ((0.0, "cosine"), (0.25, "sine"))
    ]  # fmt: skip


def array_offsets(arrays: Sequence[Reflector]) -> tuple[Suspect, ...]:
    """Free offsets of some arrays."""
    found: list[Suspect] = []
    for array in arrays:
        name, key = array.name, plain(array.name)
        for k, axis in enumerate("xyz"):
            found.append(
                offset(
                    f"{key}_{axis}", f"{name} displaced along {axis}",
                    f"the coordinates of {name} and their axes",
                    partial(array_offset, array=name, axis=k), (1e3, "mm"),
                    f"coordinates of {name}",
                )
            )  # fmt: skip
        if len(arrays) > 1:
            found.append(
                offset(
                    f"{key}_bias", f"a constant of {name} alone", f"what is different for {name}",
                    partial(constant_of, array=name), (1e3, "ps"),
                )
            )  # fmt: skip
    return tuple(found)


def plain(name: str) -> str:
    """A name fit to be part of the name of a suspect.

    Examples
    --------
    >>> plain("Apollo 15")
    'apollo_15'
    """
    words = "".join(ch if ch.isalnum() else " " for ch in name.lower()).split()
    return "_".join(words)
