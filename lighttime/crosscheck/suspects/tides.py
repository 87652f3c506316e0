"""Suspects: a part of a tide left out, or reckoned from something else."""

from __future__ import annotations

from functools import partial
from typing import Any

import numpy as np

from lighttime.constants import ARCSECOND
from lighttime.crosscheck.scene import Scene
from lighttime.crosscheck.suspects.suspect import Suspect
from lighttime.crosscheck.suspects.terms import part, years_since_2000
from lighttime.earth import rotation, tides
from lighttime.moon.tide import lunar_tide, permanent_lunar_tide
from lighttime.vectors import Array


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


# -- the pole tide's reference ---------------------------------------------------------------------


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


# -- the list --------------------------------------------------------------------------------------

SUSPECTS: tuple[Suspect, ...] = (
    part(
        "solid_tide_of_moon",
        "solid tide that the Moon raises",
        "the sum over bodies in the solid tide: is the Moon in it?",
        partial(without_solid_tide_of, body="moon"),
    ),
    part(
        "solid_tide_of_sun",
        "solid tide that the Sun raises",
        "the sum over bodies in the solid tide: is the Sun in it?",
        partial(without_solid_tide_of, body="sun"),
    ),
    part(
        "solid_tide_step_2",
        "frequency dependence of the solid tide (step 2)",
        "the corrections of tables 7.3a and 7.3b of the IERS Conventions",
        without_solid_tide_step_2,
    ),
    part(
        "solid_tide_degree_3",
        "degree 3 of the solid tide",
        "the terms with h3 and l3 in the solid tide",
        without_solid_tide_degree_3,
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
    part(
        "lunar_tide_of_earth",
        "lunar tide that the Earth raises",
        "the sum over bodies in the lunar tide: is the Earth in it?",
        partial(without_lunar_tide_of, body="earth"),
    ),
    part(
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
)
"""Parts of tides."""
