"""All parameters: their names, what they need, and who differentiates by them."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass

import numpy as np

from lighttime.earth.station import Station
from lighttime.errors import InputError, UnknownNameError
from lighttime.model import Model
from lighttime.moon.reflector import Reflector
from lighttime.partials import ground, moon, path
from lighttime.partials.block import Block
from lighttime.partials.ground import Slopes
from lighttime.partials.side import Side
from lighttime.query import Query
from lighttime.user_terms import DelayTerm, Ray
from lighttime.vectors import Array


@dataclass(frozen=True)
class Group:
    """Parameters that are differentiated together.

    Parameters
    ----------
    names : tuple of str
    slopes : callable
        From a solved block to the derivatives.
    needs : str
        An input without which there is no such parameter; empty if there always is.
    """

    names: tuple[str, ...]
    slopes: Callable[[Block], Slopes]
    needs: str = ""


def _three(name: str) -> tuple[str, ...]:
    return tuple(name.format(axis) for axis in "xyz")


GROUPS = (
    Group(_three("station_{}_m"), ground.station_position, "a Station"),
    Group(_three("station_v{}_m_per_yr"), ground.station_velocity, "a Station"),
    Group(
        ("ut1_s", "xp_arcsec", "yp_arcsec", "dx_mas", "dy_mas"),
        ground.earth_orientation,
        "a Station",
    ),
    Group(("h2_earth", "l2_earth"), ground.earth_tide, "a Station"),
    Group(("ocean_loading_scale",), ground.ocean_loading, "Station.ocean_loading"),
    Group(
        ("zenith_delay_m", "pressure_hpa", "temperature_k", "relative_humidity"),
        ground.air,
        "weather",
    ),
    Group(_three("reflector_{}_m"), moon.reflector_position, "a Reflector"),
    Group(
        ("libration_phi_rad", "libration_theta_rad", "libration_psi_rad"),
        moon.libration,
        "a Reflector",
    ),
    Group(_three("moon_{}_m"), moon.moon_position, "a Reflector"),
    Group(("h2_moon", "l2_moon"), moon.moon_tide, "a Reflector"),
    Group(_three("earth_v{}_m_per_s"), path.earth_velocity, "a Station and a Reflector"),
    Group(("epoch_s",), path.epoch),
    Group(("gamma",), path.gamma),
    Group(("gm_sun_relative", "gm_earth_relative"), path.masses),
    Group(("clock_rate", "bias_s"), path.timer),
)

PARAMETERS = tuple(name for group in GROUPS for name in group.names)
"""Names of all parameters, in the order in which they are told."""


def given(query: Query) -> frozenset[str]:
    """Which of the needs of `GROUPS` a query satisfies."""
    has = {""}
    if isinstance(query.station, Station):
        has.add("a Station")
        if query.station.ocean_loading is not None:
            has.add("Station.ocean_loading")
    if isinstance(query.reflector, Reflector):
        has.add("a Reflector")
    if {"a Station", "a Reflector"} <= has:
        has.add("a Station and a Reflector")
    if query.weather is not None:
        has.add("weather")
    return frozenset(has)


def chosen(model: Model, query: Query, names: Iterable[str] | None) -> tuple[str, ...]:
    """The parameters asked for, or all that there are.

    Raises
    ------
    UnknownNameError
        For a name that is no parameter.
    InputError
        For a parameter that needs an input which was not given.
    """
    has = given(query)
    own = tuple(name for term in model.delays for name in term.partial_names)
    if names is None:
        built_in = (name for group in GROUPS if group.needs in has for name in group.names)
        return (*built_in, *own)
    needs = {name: group.needs for group in GROUPS for name in group.names}
    needs.update(dict.fromkeys(own, ""))
    wanted = tuple(names)
    for name in wanted:
        if name not in needs:
            raise UnknownNameError("names", name, tuple(needs))
        if needs[name] not in has:
            raise InputError("names", name, f"a parameter of this range: it needs {needs[name]}")
    return wanted


def slopes(block: Block, names: Iterable[str], notes: dict[str, str] | None = None) -> Slopes:
    """The derivatives asked for, of one block; `notes` gathers how some were found."""
    wanted = frozenset(names)
    found: dict[str, Array] = {}
    for group in GROUPS:
        if wanted.intersection(group.names):
            found.update(group.slopes(block))
    for term in block.model.delays:
        for parameter, name in zip(term.values, term.partial_names, strict=True):
            if name in wanted:
                found[name], note = own_parameter(block, term, parameter)
                if notes is not None:
                    notes[name] = note
    return {name: found[name] for name in names}


def own_parameter(block: Block, term: DelayTerm, parameter: str) -> tuple[Array, str]:
    """Derivative by a parameter of a user's delay term, and how it was found."""
    if term.name in block.model.omit:
        return np.zeros(block.query.size), "left out"
    notes: list[str] = []

    def late(side: Side) -> Array:
        ray = Ray(block.frame, side.leg.near, side.leg.far, side is block.sides[0])
        slope, note = term.slope(ray, parameter)
        notes.append(note)
        return slope

    return block.total(late), notes[0]
