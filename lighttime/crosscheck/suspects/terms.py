"""Suspects: a term of the range left out, counted twice, or with the wrong sign."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from functools import partial

from lighttime.constants import EARTH_ROTATION_RATE, J2000, JULIAN_YEAR, SPEED_OF_LIGHT
from lighttime.crosscheck.scene import PS, Effect, Scene
from lighttime.crosscheck.suspects.suspect import Suspect
from lighttime.earth import subdaily
from lighttime.ephemeris.bodies import PLANETS
from lighttime.model import Model
from lighttime.path.weather import Weather
from lighttime.terms import TERMS
from lighttime.vectors import Array, dot

TERM_READINGS = {
    1.0: "left out",
    -1.0: "counted twice",
    2.0: "with the wrong sign",
    0.5: "only half of it",
}
ADDED = {-1.0: "there, but left out of ours"}

C2 = SPEED_OF_LIGHT**2


# -- delays ----------------------------------------------------------------------------------------


def without_delay(scene: Scene, names: Sequence[str]) -> Array:
    """Without some delays: those in the gravity of bodies, or terms of the user."""
    up, down = (
        sum((leg.delays[b] for b in names if b in leg.delays), scene.zero)
        for leg in (scene.legs.up, scene.legs.down)
    )
    return scene.delayed(-up, -down)


def without_troposphere(scene: Scene) -> Array:
    """Without the delay in the air."""
    if not scene.has_troposphere:
        return scene.zero
    return scene.air(scene.zero, scene.zero)


def without_clock(scene: Scene) -> Array:
    """The interval left in TDB seconds."""
    if scene.quantity != "round_trip":
        return scene.zero
    difference: Array = scene.t3.tdb_minus_tt - scene.t1.tdb_minus_tt
    return PS * difference


# -- displacements ---------------------------------------------------------------------------------


def without_displacement(scene: Scene, term: str) -> Array:
    """Without a displacement of the station or of the reflector."""
    at1, at2, at3 = (
        -e.displacement[term] if term in e.displacement else 0.0
        for e in (scene.t1, scene.t2, scene.t3)
    )
    return scene.moved(at1, at2, at3)


def without_lorentz(scene: Scene) -> Array:
    """Without the Lorentz contraction of the station's geocentric vector."""
    if "station_contraction" in scene.model.omit:
        return scene.zero
    longer = []
    for event in (scene.t1, scene.t3):
        gcrs, v = event.ladder["gcrs_m"], event.earth_velocity
        longer.append(v * (dot(v, gcrs) / (2.0 * C2)))
    return scene.moved(at1=longer[0], at3=longer[1])


# -- rapid variations of rotation ------------------------------------------------------------------


def years_since_2000(event: object) -> Array:
    """Julian years of TT."""
    rung = event.ladder  # type: ignore[attr-defined]
    years: Array = ((rung["tt1"] - J2000) + rung["tt2"]) / JULIAN_YEAR
    return years


def _rapid(scene: Scene, part: str) -> Array:
    """Without one part of the daily and half-daily variations of pole and UT1."""
    if "subdaily_rotation" in scene.model.omit:
        return scene.zero
    rung = scene.t1.ladder
    ut1, tt = (rung["ut1_1"], rung["ut1_2"]), (rung["tt1"], rung["tt2"])
    dx, dy, dut1 = scene.zero, scene.zero, scene.zero
    if part == "ocean":
        dx, dy, dut1 = subdaily.ocean_tides(*ut1)
    else:
        dx, dy = subdaily.pole_libration(*ut1, *tt)
        dut1, _ = subdaily.ut1_libration(*ut1, *tt)
    return scene.turned_itrf(-dx, -dy, -dut1 * EARTH_ROTATION_RATE)


# -- terms that ours does not have -----------------------------------------------------------------


def without_term_of_full_model(scene: Scene, term: str) -> Array:
    """Minus a term that ours leaves out on request, from a model that has it."""
    model = scene.model
    return -scene.as_if(replace(model, omit=frozenset(model.omit) - {term}))


def standard_weather(scene: Scene) -> Weather:
    """The standard atmosphere at the height of the station, half saturated.

    Source: ISO 2533 (1975): 1013.25 hPa and 288.15 K at sea level, 6.5 K per kilometre.
    """
    height = scene.station.height_m
    temperature = 288.15 - 0.0065 * height
    pressure = 1013.25 * (temperature / 288.15) ** 5.25588
    return Weather(pressure, temperature, 0.5)


def troposphere_where_ours_has_none(scene: Scene) -> Array:
    """Minus a troposphere in standard weather, where no weather was given."""
    if scene.has_troposphere or "troposphere" in scene.model.omit:
        return scene.zero
    up, down = scene.slant(*scene.sines, weather=standard_weather(scene))
    return scene.delayed(-up, -down)


# -- the list --------------------------------------------------------------------------------------


def _gravity(names: Sequence[str], name: str, of: str) -> Suspect:
    return Suspect(
        name,
        "term",
        f"gravity of {of}",
        f"the Shapiro delay of {of}: is it added, once, on both legs, with plus sign?",
        partial(without_delay, names=names),
        TERM_READINGS,
    )


def _displacement(term: str, says: str, look_for: str) -> Suspect:
    return Suspect(
        term, "term", says, look_for, partial(without_displacement, term=term), TERM_READINGS
    )


def part(name: str, says: str, look_for: str, effect: Effect) -> Suspect:
    return Suspect(name, "term", says, look_for, effect, TERM_READINGS)


_ALL = ("sun", "earth", "moon", *PLANETS)

SUSPECTS: tuple[Suspect, ...] = (
    _gravity(("sun",), "sun_gravity", "the Sun"),
    _gravity(("earth",), "earth_gravity", "the Earth"),
    _gravity(("moon",), "moon_gravity", "the Moon"),
    _gravity(PLANETS, "planet_gravity", "all planets"),
    *(_gravity((p,), f"{p}_gravity", p.capitalize()) for p in PLANETS),
    Suspect(
        "all_gravity",
        "term",
        "gravity of every body",
        "the factor (1 + gamma) GM/c^3: is it 2 GM/c^3? Is the delay added at all?",
        partial(without_delay, names=_ALL),
        {1.0: "left out", 0.5: "with 1 in the place of (1 + gamma) = 2", -1.0: "counted twice"},
    ),
    part(
        "troposphere",
        "delay in the troposphere",
        "the tropospheric delay: is it added on both legs, from the same weather?",
        without_troposphere,
    ),
    Suspect(
        "troposphere_added",
        "term",
        "troposphere, where no weather was given to ours",
        "a tropospheric delay in ranges that should be without; or give the weather here",
        troposphere_where_ours_has_none,
        ADDED,
    ),
    _displacement(
        "solid_earth_tide",
        "tide of the solid Earth",
        "the displacement of the station by the solid tide, and that it is in the ITRF when added",
    ),
    _displacement(
        "pole_tide",
        "pole tide",
        "the displacement of the station by polar motion; the sign of m2 = -(yp - ys)",
    ),
    _displacement(
        "ocean_loading", "ocean loading", "the BLQ coefficients: the right station, signs, units?"
    ),
    _displacement(
        "ocean_pole_tide", "ocean pole tide loading", "the ocean pole tide loading of the station"
    ),
    _displacement(
        "atmosphere_loading",
        "S1 and S2 atmospheric loading",
        "the atmospheric tides of the station",
    ),
    _displacement(
        "residual_motion",
        "motion of the station given as a series",
        "the series of the station's residual motion: the same, with the same signs and units?",
    ),
    _displacement(
        "subdaily_rotation",
        "daily and half-daily variations of pole and UT1",
        "the terms of 8.2 and 5.5 of the IERS Conventions, added after interpolation",
    ),
    part(
        "rapid_ocean_tides",
        "ocean tides in pole and UT1",
        "the 71 ocean-tide terms of 8.2 of the IERS Conventions",
        partial(_rapid, part="ocean"),
    ),
    part(
        "rapid_libration",
        "libration of the Earth's figure in pole and UT1",
        "tables 5.1a and 5.1b of the IERS Conventions",
        partial(_rapid, part="libration"),
    ),
    _displacement(
        "lunar_tide",
        "tide of the solid Moon",
        "the displacement of the array, h2 and l2 of the Moon",
    ),
    _displacement(
        "station_contraction",
        "scale and contraction of the station's geocentric vector",
        "the step from GCRS to BCRS: 1 - U/c^2 - L_C and (V.r) V/(2 c^2)",
    ),
    part(
        "station_lorentz",
        "Lorentz contraction of the station's geocentric vector",
        "the term (V.r) V/(2 c^2) in the step from GCRS to BCRS",
        without_lorentz,
    ),
    _displacement(
        "reflector_contraction",
        "contraction of the array's selenocentric vector",
        "the step from the Moon's own frame to the BCRS: (V.g) V/(2 c^2), and the scale",
    ),
    Suspect(
        "clock",
        "term",
        "TDB to the station's TT",
        "the last step: is the interval t3 - t1 turned from TDB into TT at the station?",
        without_clock,
        TERM_READINGS | {1.0: "left out: TDB seconds are reported"},
    ),
)
"""Terms that ours has."""


def terms_of(model: Model) -> tuple[Suspect, ...]:
    """A suspect for each delay term of the user, and for each term that ours leaves out."""
    own = tuple(
        Suspect(
            term.name,
            "term",
            f"the delay term {term.name}",
            f"whether the other program has the delay term {term.name}, and of the same size",
            partial(without_delay, names=(term.name,)),
            TERM_READINGS,
        )
        for term in model.delays
    )
    absent = tuple(
        Suspect(
            f"{term}_present",
            "term",
            f"the term {term}, which ours leaves out on request,",
            f"the other program has {term.replace('_', ' ')}: omit it there, or not here",
            partial(without_term_of_full_model, term=term),
            ADDED,
        )
        for term in TERMS
        if term in model.omit
    )
    return own + absent
