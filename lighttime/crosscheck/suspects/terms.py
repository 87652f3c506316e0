"""Suspects: a term of the range left out, counted twice, or with the wrong sign."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from functools import partial
from typing import Any

import numpy as np

from lighttime.constants import ARCSECOND, EARTH_ROTATION_RATE, J2000, JULIAN_YEAR, SPEED_OF_LIGHT
from lighttime.crosscheck.scene import PS, Effect, Scene
from lighttime.crosscheck.suspects.suspect import Suspect
from lighttime.earth import rotation, subdaily, tides
from lighttime.ephemeris.bodies import PLANETS
from lighttime.model import Model
from lighttime.moon.tide import lunar_tide, permanent_lunar_tide
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


def _solid_tide(scene: Scene, **changed: float) -> list[Array]:
    """The solid tide at t1 and t3 with other numbers, in the GCRS."""
    found = []
    for event, to_gcrs in ((scene.t1, scene.to_gcrs1), (scene.t3, scene.to_gcrs3)):
        rung = event.ladder
        sun, moon = (
            rotation.rotate(rotation.transpose(to_gcrs), scene.geocentric(body, event))
            for body in ("sun", "moon")
        )
        fraction = np.mod(rung["ut1_1"] + 0.5 + rung["ut1_2"], 1.0)  # of the day, to 40 us
        moved = tides.solid_earth_tide(
            scene.station.xyz_m, sun, moon, rung["tt1"], rung["tt2"], fraction, **changed
        )
        found.append(rotation.rotate(to_gcrs, moved))
    return found


def without_solid_tide_of(scene: Scene, body: str) -> Array:
    """Without the part that one body raises (degrees 2 and 3)."""
    if "solid_earth_tide" in scene.model.omit:
        return scene.zero
    whole = _solid_tide(scene)
    rest = _solid_tide(scene, **{f"{body}_to_earth_mass": 0.0})
    return scene.moved(at1=rest[0] - whole[0], at3=rest[1] - whole[1])


def without_solid_tide_step_2(scene: Scene) -> Array:
    """Without the frequency dependence of the Love numbers."""
    if "solid_earth_tide" in scene.model.omit:
        return scene.zero
    step2 = _solid_tide(scene, sun_to_earth_mass=0.0, moon_to_earth_mass=0.0)
    return scene.moved(at1=-step2[0], at3=-step2[1])


def without_solid_tide_degree_3(scene: Scene) -> Array:
    """Without degree 3."""
    if "solid_earth_tide" in scene.model.omit:
        return scene.zero
    whole, rest = _solid_tide(scene), _solid_tide(scene, h3=0.0, l3=0.0)
    return scene.moved(at1=rest[0] - whole[0], at3=rest[1] - whole[1])


def without_lunar_tide_of(scene: Scene, body: str) -> Array:
    """Without the tide that the Earth or the Sun raises on the Moon."""
    if "lunar_tide" in scene.model.omit:
        return scene.zero
    return scene.moved(at2=-scene.lunar(lunar_tide_of(scene, body)))


def lunar_tide_of(scene: Scene, body: str, place_m: Any = None, **love: float) -> Array:
    """The tide of one body (``"earth"``, ``"sun"``) in principal axes, permanent part included.

    At the array, or at another place (3,), with our Love numbers or others.
    """
    place = scene.reflector.xyz_m if place_m is None else place_m
    gm, to_axes = scene.model.ephemeris.gm, rotation.transpose(scene.lunar_axes)
    earth, sun = (rotation.rotate(to_axes, scene.selenocentric(b)) for b in ("earth", "sun"))
    numbers = {"h2": scene.model.moon_h2, "l2": scene.model.moon_l2} | love
    masses = {"gm_earth": gm("earth"), "gm_sun": gm("sun")}
    return lunar_tide(
        np.asarray(place)[:, None],
        earth,
        sun,
        gm("moon"),
        **{name: value if name == f"gm_{body}" else 0.0 for name, value in masses.items()},
        **numbers,
    )


def permanent_lunar_tide_exchanged(scene: Scene) -> Array:
    """The permanent tide counted where ours has it in the coordinates, or the other way round."""
    gm = scene.model.ephemeris.gm
    permanent = permanent_lunar_tide(
        np.asarray(scene.reflector.xyz_m)[:, None],
        gm("moon"), gm("earth"), gm("sun"), h2=scene.model.moon_h2, l2=scene.model.moon_l2,
    )  # fmt: skip
    sign = 1.0 if scene.reflector.contains_permanent_tide else -1.0
    return scene.moved(at2=sign * scene.lunar(np.broadcast_to(permanent, (3, scene.size))))


def without_lorentz(scene: Scene) -> Array:
    """Without the Lorentz contraction of the station's geocentric vector."""
    if "station_contraction" in scene.model.omit:
        return scene.zero
    longer = []
    for event in (scene.t1, scene.t3):
        gcrs, v = event.ladder["gcrs_m"], event.earth_velocity
        longer.append(v * (dot(v, gcrs) / (2.0 * C2)))
    return scene.moved(at1=longer[0], at3=longer[1])


# -- the pole tide's reference and the rapid variations of rotation --------------------------------


def pole_tide_with(scene: Scene, xs_mas: Array, ys_mas: Array) -> Array:
    """The pole tide reckoned from another mean pole (mas, shape (n,))."""
    if "pole_tide" in scene.model.omit:
        return scene.zero
    shifts = []
    for event, to_gcrs in ((scene.t1, scene.to_gcrs1), (scene.t3, scene.to_gcrs3)):
        years = years_since_2000(event)
        xs, ys = tides.secular_pole(years)
        pole = scene.model.earth_orientation.at(event.ladder["tai1"], event.ladder["tai2"])
        xp, yp = pole.xp_rad / ARCSECOND, pole.yp_rad / ARCSECOND
        ours, theirs = (
            tides.pole_tide(scene.station.xyz_m, xp + dx, yp + dy, years)
            for dx, dy in ((0.0, 0.0), (xs - 1e-3 * xs_mas, ys - 1e-3 * ys_mas))
        )
        shifts.append(rotation.rotate(to_gcrs, theirs - ours))
    return scene.moved(at1=shifts[0], at3=shifts[1])


def years_since_2000(event: object) -> Array:
    """Julian years of TT."""
    rung = event.ladder  # type: ignore[attr-defined]
    years: Array = ((rung["tt1"] - J2000) + rung["tt2"]) / JULIAN_YEAR
    return years


def pole_tide_without_mean(scene: Scene) -> Array:
    """The pole tide of the whole pole coordinate."""
    return pole_tide_with(scene, scene.zero, scene.zero)


def pole_tide_mean_pole_2010(scene: Scene) -> Array:
    """The mean pole of 2010 in the place of the secular pole of 2018.

    Source: IERS Conventions (2010), TN36, 7.1.4, table 7.7: after 2010.0 the pole
    23.513 + 7.6141 dt and 358.891 - 0.6287 dt mas; before it
    55.974 + 1.8243 dt + 0.18413 dt^2 + 0.007024 dt^3 and
    346.346 + 1.7896 dt - 0.10729 dt^2 - 0.000908 dt^3 mas (dt in years from 2000.0).
    """
    t = years_since_2000(scene.t1)
    late = t >= 10.0
    x = np.where(late, 23.513 + 7.6141 * t, 55.974 + t * (1.8243 + t * (0.18413 + t * 0.007024)))
    y = np.where(late, 358.891 - 0.6287 * t, 346.346 + t * (1.7896 + t * (-0.10729 - t * 0.000908)))
    return pole_tide_with(scene, x, y)


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


def _part(name: str, says: str, look_for: str, effect: Effect) -> Suspect:
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
    _part(
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
    _part(
        "solid_tide_of_moon",
        "solid tide that the Moon raises",
        "the sum over bodies in the solid tide: is the Moon in it?",
        partial(without_solid_tide_of, body="moon"),
    ),
    _part(
        "solid_tide_of_sun",
        "solid tide that the Sun raises",
        "the sum over bodies in the solid tide: is the Sun in it?",
        partial(without_solid_tide_of, body="sun"),
    ),
    _part(
        "solid_tide_step_2",
        "frequency dependence of the solid tide (step 2)",
        "the corrections of tables 7.3a and 7.3b of the IERS Conventions",
        without_solid_tide_step_2,
    ),
    _part(
        "solid_tide_degree_3",
        "degree 3 of the solid tide",
        "the terms with h3 and l3 in the solid tide",
        without_solid_tide_degree_3,
    ),
    _displacement(
        "pole_tide",
        "pole tide",
        "the displacement of the station by polar motion; the sign of m2 = -(yp - ys)",
    ),
    Suspect(
        "pole_tide_without_mean",
        "term",
        "pole tide of the whole pole, no mean pole subtracted",
        "m1 and m2 of the pole tide: is the secular pole subtracted from xp and yp?",
        pole_tide_without_mean,
        {1.0: "as described"},
    ),
    Suspect(
        "pole_tide_mean_pole_2010",
        "term",
        "pole tide about the mean pole of 2010",
        "the mean pole in the pole tide: the model of 2010 or the linear one of 2018?",
        pole_tide_mean_pole_2010,
        {1.0: "as described"},
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
    _part(
        "rapid_ocean_tides",
        "ocean tides in pole and UT1",
        "the 71 ocean-tide terms of 8.2 of the IERS Conventions",
        partial(_rapid, part="ocean"),
    ),
    _part(
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
    _part(
        "lunar_tide_of_earth",
        "lunar tide that the Earth raises",
        "the sum over bodies in the lunar tide: is the Earth in it?",
        partial(without_lunar_tide_of, body="earth"),
    ),
    _part(
        "lunar_tide_of_sun",
        "lunar tide that the Sun raises",
        "the sum over bodies in the lunar tide: is the Sun in it?",
        partial(without_lunar_tide_of, body="sun"),
    ),
    Suspect(
        "lunar_permanent_tide",
        "term",
        "permanent part of the lunar tide",
        "whether the coordinates of the array already contain the permanent tide",
        permanent_lunar_tide_exchanged,
        {1.0: "handled the other way than here"},
    ),
    _displacement(
        "station_contraction",
        "scale and contraction of the station's geocentric vector",
        "the step from GCRS to BCRS: 1 - U/c^2 - L_C and (V.r) V/(2 c^2)",
    ),
    _part(
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
