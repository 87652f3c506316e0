"""Suspects: another orientation of the Earth, other axes, other coordinates."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from functools import partial
from typing import Any

import erfa
import numpy as np

from lighttime.constants import ARCSECOND, J2000, L_B, L_G, SPEED_OF_LIGHT
from lighttime.crosscheck.scene import Scene, rotation_vector
from lighttime.crosscheck.suspects.suspect import Suspect
from lighttime.crosscheck.suspects.terms import years_since_2000
from lighttime.crosscheck.suspects.tides import lunar_tide_of
from lighttime.crosscheck.suspects.time import AS_DESCRIBED
from lighttime.earth import rotation, tides
from lighttime.vectors import Array, dot, norm

IGNORED = {1.0: "ignored", 2.0: "with the wrong sign", -1.0: "applied twice"}

# -- the pole --------------------------------------------------------------------------------------


def pole_of(scene: Scene) -> tuple[Array, Array]:
    """x_p and y_p in use at transmission, rad."""
    return scene.t1.ladder["xp_rad"], scene.t1.ladder["yp_rad"]


def without_pole(scene: Scene) -> Array:
    """x_p = y_p = 0."""
    xp, yp = pole_of(scene)
    return scene.turned_itrf(-xp, -yp, scene.zero)


def without_xp(scene: Scene) -> Array:
    """x_p = 0."""
    return scene.turned_itrf(-pole_of(scene)[0], scene.zero, scene.zero)


def without_yp(scene: Scene) -> Array:
    """y_p = 0."""
    return scene.turned_itrf(scene.zero, -pole_of(scene)[1], scene.zero)


def exchanged_pole(scene: Scene) -> Array:
    """x_p in the place of y_p and the other way round."""
    xp, yp = pole_of(scene)
    return scene.turned_itrf(yp - xp, xp - yp, scene.zero)


def without_s_prime(scene: Scene) -> Array:
    """The terrestrial origin's locator s' = 0."""
    s_prime = rotation.terrestrial_origin(scene.t1.ladder["tt1"], scene.t1.ladder["tt2"])
    return scene.turned_itrf(scene.zero, scene.zero, -np.asarray(s_prime))


# -- the celestial pole ----------------------------------------------------------------------------


def celestial_pole_moved(scene: Scene, dx: Array, dy: Array, turned: Any = 0.0) -> Array:
    """The effect of a changed X, Y and of a rotation about the pole, rad."""
    vectors = []
    for event in (scene.t1, scene.t3):
        x, y = event.ladder["x_rad"], event.ladder["y_rad"]
        ours, theirs = rotation.celestial_tilt(x, y), rotation.celestial_tilt(x + dx, y + dy)
        tilt = rotation_vector(rotation.product(theirs, rotation.transpose(ours)))
        vectors.append(tilt + turned * event.axis)
    return scene.turned(*vectors)


def celestial_corrections(scene: Scene) -> tuple[Array, Array]:
    """dX and dY of the series, rad."""
    pole = scene.model.earth_orientation.at(*scene.tagged_tai)
    return np.asarray(pole.dx_rad), np.asarray(pole.dy_rad)


def without_dx_dy(scene: Scene) -> Array:
    """dX = dY = 0."""
    dx, dy = celestial_corrections(scene)
    return celestial_pole_moved(scene, -dx, -dy)


def exchanged_dx_dy(scene: Scene) -> Array:
    """dX in the place of dY."""
    dx, dy = celestial_corrections(scene)
    return celestial_pole_moved(scene, dy - dx, dx - dy)


def with_celestial_pole(scene: Scene, model: Callable[[Any, Any], tuple[Any, Any, Any]]) -> Array:
    """Another model of X, Y and s, with the same dX, dY."""
    tt1, tt2 = scene.t1.ladder["tt1"], scene.t1.ladder["tt2"]
    x, y, s = model(tt1, tt2)
    x0, y0, s0 = erfa.xys06a(tt1, tt2)
    return celestial_pole_moved(scene, x - x0, y - y0, -(s - s0))


def iau_1976_1980(scene: Scene) -> Array:
    """Precession 1976, nutation 1980 and sidereal time 1994, from the mean equator of J2000.0.

    r_J2000 = N'^T R3(-GST') W r in the place of r_GCRS = N^T R3(-GST) W r: the Earth is turned by
    N'^T R3(GST - GST') N.
    """
    vectors = []
    for event in (scene.t1, scene.t3):
        rung = event.ladder
        tt, ut1 = (rung["tt1"], rung["tt2"]), (rung["ut1_1"], rung["ut1_2"])
        ahead = erfa.anpm(erfa.gst94(*ut1) - erfa.gst06a(*ut1, *tt))
        ours, theirs = (np.moveaxis(m, 0, -1) for m in (erfa.pnm06a(*tt), erfa.pnm80(*tt)))
        back = rotation.product(rotation.turned(ahead), ours)
        vectors.append(rotation_vector(rotation.product(rotation.transpose(theirs), back)))
    return scene.turned(*vectors)


def without_bias(scene: Scene) -> Array:
    """The axes of the ephemeris taken as the mean equator and equinox of J2000.0."""
    bias = np.asarray(erfa.bp06(J2000, 0.0)[0])  # GCRS to mean J2000
    # r_GCRS = B^T r_J2000; without it r_J2000 = B r_GCRS stands in its place
    vector = np.broadcast_to(rotation_vector(bias)[:, None], (3, scene.size))
    return scene.turned(vector, vector)


# -- coordinates of the station --------------------------------------------------------------------


def _shifted(scene: Scene, xyz_m: Any) -> Array:
    at1, at3 = scene.itrf(xyz_m)
    return scene.moved(at1=at1, at3=at3)


def without_velocity(scene: Scene) -> Array:
    """The station's coordinates as at their epoch."""
    years = years_since_2000(scene.t1) - (scene.station.epoch - 2000.0)
    return _shifted(scene, -np.outer(scene.station.velocity_m_per_yr, years))


def epoch_taken_as_2000(scene: Scene) -> Array:
    """The station's velocity counted from 2000.0."""
    years = scene.station.epoch - 2000.0
    return _shifted(scene, np.multiply(scene.station.velocity_m_per_yr, years))


def mean_tide_position(scene: Scene) -> Array:
    """A tide-free position taken as mean-tide: the permanent tide taken away once more."""
    return _shifted(scene, -tides.permanent_tide(scene.station.xyz_m))


def tcg_position(scene: Scene) -> Array:
    """The station's coordinates scaled from TT- to TCG-compatible."""
    return _shifted(scene, np.multiply(scene.station.xyz_m, L_G))


def spherical_vertical(scene: Scene) -> Array:
    """The elevation for the troposphere reckoned from the geocentric vertical."""
    if not scene.has_troposphere:
        return scene.zero
    up1, up3 = scene.itrf(np.asarray(scene.station.xyz_m) / np.linalg.norm(scene.station.xyz_m))
    return scene.seen(replace(scene.t1, up=up1), replace(scene.t3, up=up3))


# -- coordinates of the array ----------------------------------------------------------------------

MEAN_EARTH_ARCSEC: Mapping[str, tuple[float, float, float]] = {
    "DE421": (0.30, 78.56, 67.92),
    "DE430": (0.285, 78.580, 67.573),
}
"""Angles about x, y and z from mean-Earth axes to principal axes.

Source: Williams, Boggs & Folkner 2008 (IOM 335-JW,DB,WF-20080314-001) and 2013 (IOM
335-JW,DB,WF-20130722-016), from memory: PA = Rz(67.92") Ry(78.56") Rx(0.30") ME for DE421."""


def mean_earth(xyz_pa: Any, ephemeris_name: str) -> Array:
    """The mean-Earth coordinates of a point given in principal axes, (3,)."""
    x, y, z = (a * ARCSECOND for a in MEAN_EARTH_ARCSEC.get(
        ephemeris_name, MEAN_EARTH_ARCSEC["DE430"]
    ))  # fmt: skip
    to_pa = erfa.rz(z, erfa.ry(y, erfa.rx(x, np.eye(3))))
    found: Array = np.asarray(to_pa).T @ np.asarray(xyz_pa)
    return found


def mean_earth_taken_as_principal(scene: Scene) -> Array:
    """The array's mean-Earth coordinates used in principal axes; the tide is that of the place."""
    ours = scene.reflector
    theirs = mean_earth(ours.xyz_m, scene.model.ephemeris.name)
    shift = np.broadcast_to((theirs - np.asarray(ours.xyz_m))[:, None], (3, scene.size))
    if "lunar_tide" not in scene.model.omit:
        for body in ("earth", "sun"):
            there = lunar_tide_of(scene, body, place_m=theirs)
            shift = shift + (there - lunar_tide_of(scene, body))
    g = scene.lunar(shift)
    if "reflector_contraction" not in scene.model.omit:
        v = scene.t2.moon_velocity
        g = g - v * (dot(v, g) / (2.0 * SPEED_OF_LIGHT**2))
    return scene.moved(at2=g)


def array_scaled(scene: Scene, factor: float) -> Array:
    """The array's coordinates scaled."""
    return scene.moved(at2=scene.lunar(np.multiply(scene.reflector.xyz_m, factor)))


def array_in_local_scale(scene: Scene) -> Array:
    """The array's coordinates taken as those of the Moon's own system, unscaled."""
    gm, array = scene.model.ephemeris.gm, scene.reflector
    bodies = ("earth", *scene.frame.distant_bodies)
    potential = sum((gm(body) / norm(scene.selenocentric(body)) for body in bodies), scene.zero)
    factor = replace(array, scale="local").scale_change(potential) - array.scale_change(potential)
    return scene.moved(at2=scene.lunar(array.xyz_m) * factor)


# -- the list --------------------------------------------------------------------------------------


def _frame(
    name: str, says: str, look_for: str, effect: Callable[[Scene], Array], readings: Any
) -> Suspect:
    return Suspect(name, "frame", says, look_for, effect, readings)


SUSPECTS: tuple[Suspect, ...] = (
    _frame(
        "pole", "polar motion", "x_p and y_p: applied, with the right sign?", without_pole, IGNORED
    ),
    _frame("pole_x", "x_p of the pole", "x_p: its sign and its unit", without_xp, IGNORED),
    _frame("pole_y", "y_p of the pole", "y_p: its sign and its unit", without_yp, IGNORED),
    _frame(
        "pole_exchanged", "x_p and y_p of the pole exchanged",
        "the order of the two rotations R2(x_p) R1(y_p)", exchanged_pole, AS_DESCRIBED,
    ),
    _frame(
        "s_prime", "locator s' of the terrestrial origin", "s' = -47 uas per century",
        without_s_prime, IGNORED,
    ),
    _frame(
        "celestial_corrections", "dX and dY of the celestial pole",
        "whether dX, dY of the series are added to X, Y", without_dx_dy, IGNORED,
    ),
    _frame(
        "celestial_corrections_exchanged", "dX and dY exchanged",
        "the columns of the series that dX and dY are read from", exchanged_dx_dy, AS_DESCRIBED,
    ),
    _frame(
        "nutation_2000b", "nutation IAU 2000B (abridged, 1 mas)",
        "which nutation series: 77 terms or 1365", partial(with_celestial_pole, model=erfa.xys00b),
        AS_DESCRIBED,
    ),
    _frame(
        "precession_2000", "precession IAU 2000 with nutation 2000A",
        "which precession: IAU 2000 or IAU 2006", partial(with_celestial_pole, model=erfa.xys00a),
        AS_DESCRIBED,
    ),
    _frame(
        "iau_1976_1980", "precession 1976 and nutation 1980, without offsets of the pole",
        "which precession and nutation; dPsi and dEps belong to them",
        iau_1976_1980, AS_DESCRIBED,
    ),
    _frame(
        "frame_bias", "equator of J2000.0 taken for the ICRS",
        "the frame bias between GCRS and mean equator of J2000.0", without_bias, IGNORED,
    ),
    _frame(
        "station_velocity", "velocity of the station",
        "whether the station's coordinates are moved from their epoch", without_velocity, IGNORED,
    ),
    _frame(
        "station_epoch_2000", "velocity of the station counted from 2000.0",
        "the epoch of the station's coordinates", epoch_taken_as_2000, AS_DESCRIBED,
    ),
    _frame(
        "station_permanent_tide", "permanent tide of the station",
        "tide-free against mean-tide coordinates, and what the tide model contains",
        mean_tide_position,
        {1.0: "tide-free taken as mean-tide", -1.0: "mean-tide taken as tide-free"},
    ),
    _frame(
        "station_tcg", "coordinates of the station scaled as for TCG",
        "the factor 1 - L_G in the station's coordinates", tcg_position,
        {1.0: "as described", -1.0: "the factor applied once too often"},
    ),
    _frame(
        "vertical_geocentric", "elevation above the sphere, not the ellipsoid",
        "the vertical that the elevation for the troposphere is reckoned from",
        spherical_vertical, AS_DESCRIBED,
    ),
    _frame(
        "array_mean_earth", "mean-Earth coordinates of the array taken as principal-axis ones",
        "the axes of the array's coordinates, and of the libration", mean_earth_taken_as_principal,
        AS_DESCRIBED,
    ),
    _frame(
        "array_tcb", "coordinates of the array scaled as for TCB",
        "the factor 1 - L_B in the array's coordinates",
        partial(array_scaled, factor=L_B),
        {1.0: "as described", -1.0: "the factor applied once too often"},
    ),
    _frame(
        "array_local_scale", "coordinates of the array taken as those of the Moon's own system",
        "the scale of the array's coordinates: TDB-compatible, or local", array_in_local_scale,
        {1.0: "as described", -1.0: "taken the other way"},
    ),
)  # fmt: skip
"""Orientation of the Earth, axes of the Moon, coordinates."""
