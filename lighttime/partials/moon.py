"""Derivatives by what the reflector depends on: place, libration, the Moon's position, tide."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from lighttime.partials.block import Block
from lighttime.partials.ground import Slopes, xyz
from lighttime.partials.reflector_end import ReflectorEnd
from lighttime.partials.side import Side
from lighttime.vectors import Array, dot, norm


def _mirror(of_end: Callable[[ReflectorEnd], Array]) -> Callable[[Side], Array]:
    """The same at the reflector of either leg."""

    def at(side: Side) -> Array:
        assert side.reflector is not None
        return of_end(side.reflector)

    return at


def reflector_position(block: Block) -> Slopes:
    """Principal-axis coordinates; the tide changes with them."""
    return xyz("reflector_{}_m", block.total(_mirror(lambda end: end.by_place)))


def libration(block: Block) -> Slopes:
    """Libration angles; the tide stays with the Earth."""

    def rows(end: ReflectorEnd) -> Array:
        return np.stack([dot(axis, end.by_rotation) for axis in end.libration_axes])

    names = ("libration_phi_rad", "libration_theta_rad", "libration_psi_rad")
    return dict(zip(names, block.total(_mirror(rows)), strict=True))


def moon_position(block: Block) -> Slopes:
    """Geocentric position of the Moon along ICRS axes, the Earth held; the tides follow."""

    def row(side: Side) -> Array:
        end, ground = side.reflector, side.station
        assert end is not None
        total = end.slopes.far - end.by_earth
        if ground is not None and ground.tide is not None:
            distance = norm(ground.event.ladder["moon_geocentric_m"])
            total = total + ground.tide.by_source(ground.by_gcrs, 0, distance)
        return total

    return xyz("moon_{}_m", block.total(row))


def moon_tide(block: Block) -> Slopes:
    """Love and Shida number of degree 2 of the Moon."""

    def rows(end: ReflectorEnd) -> Array:
        tide, row = end.tide, end.by_principal
        if tide is None:
            return np.zeros_like(row[:2])
        return np.stack([dot(tide.by_h(), row), dot(tide.by_l(), row)])

    return dict(zip(("h2_moon", "l2_moon"), block.total(_mirror(rows)), strict=True))
