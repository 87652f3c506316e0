"""Derivatives by what acts on the whole way: the Earth's motion, gravity, epoch and timer."""

from __future__ import annotations

import numpy as np

from lighttime.answer import RoundTrip
from lighttime.constants import SPEED_OF_LIGHT
from lighttime.moon.tide import lunar_tide, permanent_lunar_tide
from lighttime.partials.block import Block
from lighttime.partials.ground import Slopes, xyz
from lighttime.partials.reflector_end import ReflectorEnd
from lighttime.partials.side import Side
from lighttime.path.delays import GRAVITY_TERMS
from lighttime.vectors import Array, column, dot, norm

c = SPEED_OF_LIGHT


def earth_velocity(block: Block) -> Slopes:
    """Barycentric velocity of the Earth, and of the Moon with it, ICRS axes.

    Positions at the tagged epoch are held, and TDB - TT, which comes from a series of time.
    """
    gm_sun = block.model.ephemeris.gm("sun")

    def row(side: Side) -> Array:
        leg, slopes = side.leg, side.slopes
        near, far = leg.near, leg.far
        total: Array = (slopes.near - slopes.earth_near) * near.seconds
        total = total + (slopes.far - slopes.earth_far) * far.seconds
        total = total + slopes.velocity
        # a body that moves with them delays the light that meets it more
        for body in ("earth", "moon"):
            if body in leg.delays:
                total = total - leg.direction * leg.delays[body] / c
        if side.station is not None:
            total = total + side.station.by_sun(gm_sun) * -near.seconds
            if "station_contraction" not in side.station.omit:
                total = total + _contraction_by_velocity(
                    near.ladder["gcrs_m"], near.earth_velocity, slopes.near
                )
        if side.reflector is not None and "reflector_contraction" not in block.model.omit:
            total = total + _contraction_by_velocity(
                far.ladder["icrs_m"], far.moon_velocity, slopes.far
            )
        return total

    return xyz("earth_v{}_m_per_s", block.total(row))


def _contraction_by_velocity(r: Array, v: Array, row: Array) -> Array:
    """Derivative of row . [-(V.r) V/(2 c^2)] by V."""
    return -(dot(row, v) * r + dot(v, r) * row) / (2.0 * c**2)


def epoch(block: Block) -> Slopes:
    """The tagged epoch."""
    return {"epoch_s": block.motion.by_epoch(block.legs.tag)}


def gamma(block: Block) -> Slopes:
    """Parameter gamma of the post-Newtonian formalism: every gravity term is as 1 + gamma."""

    def of_side(side: Side) -> Array:
        delays = (late for body, late in side.leg.delays.items() if body in GRAVITY_TERMS)
        total: Array = sum(delays, np.zeros(block.query.size))
        return total / (1.0 + block.model.gamma)

    return {"gamma": block.total(of_side)}


def masses(block: Block) -> Slopes:
    """GM of the Sun and of the Earth, as fractions of them; orbits are held.

    They act through the delay, the potentials in the scales of length, and the Moon's tide (the
    Earth's is computed with fixed ratios of mass).
    """

    def slope(body: str) -> Array:
        return block.total(lambda side: _by_mass(block, side, body))

    return {f"gm_{body}_relative": slope(body) for body in ("sun", "earth")}


def _by_mass(block: Block, side: Side, body: str) -> Array:
    model = block.model
    gm = model.ephemeris.gm
    total = np.zeros(block.query.size) + side.leg.delays.get(body, 0.0)
    ground, end = side.station, side.reflector
    if body == "sun" and ground is not None and "station_contraction" not in ground.omit:
        rung = ground.event.ladder
        potential = gm("sun") / norm(rung["sun_geocentric_m"])
        total = total - potential / c**2 * dot(rung["gcrs_m"], ground.slopes.near)
    if end is None:
        return total
    rung = end.event.ladder
    place = rung["sun_from_moon_m"] if body == "sun" else -rung["moon_geocentric_m"]
    if end.reflector.scale != "tdb" and "reflector_contraction" not in model.omit:
        potential = gm(body) / norm(place)
        total = total - potential / c**2 * dot(rung["icrs_m"], end.slopes.far)
    if end.tide is not None:
        total = total + dot(_tide_of(end, body), end.by_principal)
    return total


def _tide_of(end: ReflectorEnd, body: str) -> Array:
    """The part of the lunar tide that one body raises, principal axes."""
    rung, gm, model = end.event.ladder, end.model.ephemeris.gm, end.model
    gm_moon, gm_earth, gm_sun = (
        gm(name) if name in (body, "moon") else 0.0 for name in ("moon", "earth", "sun")
    )
    place = column(end.reflector.xyz_m, end.event.seconds)
    earth = end.to_principal(-rung["moon_geocentric_m"])
    sun = end.to_principal(rung["sun_from_moon_m"])
    h2, l2 = model.moon_h2, model.moon_l2
    tide = lunar_tide(place, earth, sun, gm_moon, gm_earth, gm_sun, h2=h2, l2=l2)
    if end.reflector.contains_permanent_tide:
        tide = tide - permanent_lunar_tide(place, gm_moon, gm_earth, gm_sun, h2=h2, l2=l2)
    return tide


def timer(block: Block) -> Slopes:
    """The station's timer: its rate (a fraction of the range) and what it adds to every range."""
    answer = RoundTrip.of(block.model, block.query, block.legs)
    return {"clock_rate": answer.seconds, "bias_s": np.ones(block.query.size)}
