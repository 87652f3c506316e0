"""Rotation of the Earth against published values, extended precision and ERFA."""

from __future__ import annotations

import erfa
import numpy as np
import pytest
from mpmath import mp, mpf

from lighttime.constants import ARCSECOND, DAY, EARTH_ROTATION_RATE, MILLIARCSECOND
from lighttime.earth.rotation import (
    angular_velocity,
    celestial_pole,
    celestial_pole_rates,
    earth_rotation_angle,
    polar_motion,
    polar_motion_velocity,
    product,
    rotate,
    terrestrial_origin,
    terrestrial_to_celestial,
    transpose,
)
from lighttime.vectors import cross

RANDOM = np.random.default_rng(20260101)
COUNT = 400
DAYS = np.floor(RANDOM.uniform(2437000.0, 2475000.0, COUNT)) + 0.5
FRACTION = RANDOM.uniform(0.0, 1.0, COUNT)


def test_sofa_worked_example() -> None:
    """IAU SOFA, Tools for Earth Attitude: 2007-04-05 12:00 UTC, IAU 2006/2000A, CIO based
    (from memory): first row of the celestial-to-terrestrial matrix, to every printed digit."""
    tt = (2454195.5, 0.5 + (33.0 + 32.184) / DAY)
    X, Y, s = celestial_pole(*tt)
    X, Y = X + 0.1750 * MILLIARCSECOND, Y - 0.2259 * MILLIARCSECOND
    era = earth_rotation_angle(2454195.5, 0.5 - 0.072073685 / DAY)
    matrix = terrestrial_to_celestial(
        X, Y, s, era, 0.0349282 * ARCSECOND, 0.4833163 * ARCSECOND, *tt
    )
    printed = (0.973104317697535, 0.230363826239128, -0.000703163482198)
    assert transpose(matrix)[0] == pytest.approx(printed, rel=0.0, abs=5.1e-16)


def test_earth_rotation_angle_in_extended_precision() -> None:
    """To the last bit: half a unit of 2 pi in float64 is 4.5e-16 rad."""
    found = earth_rotation_angle(DAYS, FRACTION)
    with mp.workdps(40):
        for one, day, fraction in zip(found, DAYS, FRACTION, strict=True):
            ut1_days = mpf(float(day)) - 2451545 + mpf(float(fraction))
            turns = mpf("0.7790572732640") + mpf("1.00273781191135448") * ut1_days
            exact = 2 * mp.pi * (turns - mp.floor(turns))
            assert abs(mpf(float(one)) - exact) < 4.6e-16


def test_earth_rotation_angle_however_the_date_is_split() -> None:
    """Dates that are the same to the last bit give the same angle to the last bit."""
    fraction = np.round(FRACTION * 2.0**20) / 2.0**20  # leaves room for exact shifts
    whole = earth_rotation_angle(DAYS, fraction)
    for shift in (0.5, 17.0, 2400000.5):
        assert np.array_equal(earth_rotation_angle(DAYS - shift, fraction + shift), whole)
    assert np.array_equal(earth_rotation_angle(fraction, DAYS), whole)


def test_erfa_test_values() -> None:
    """ERFA t_erfa_c: era00, xys06a, sp00."""
    assert earth_rotation_angle(2400000.5, 54388.0) == pytest.approx(
        0.4022837240028158102, rel=0.0, abs=1e-15
    )
    pole = celestial_pole(2400000.5, 53736.0)
    printed = (0.5791308482835292617e-3, 0.4020580099454020310e-4, -0.1220032294164579896e-7)
    assert pole == pytest.approx(printed, rel=0.0, abs=1e-15)
    assert terrestrial_origin(2400000.5, 52541.0) == pytest.approx(
        -0.6216698469981019309e-11, rel=1e-12
    )


def test_matrix_against_erfa() -> None:
    X, Y = RANDOM.uniform(-3e-3, 3e-3, (2, COUNT))
    s = RANDOM.uniform(-1e-7, 1e-7, COUNT)
    xp, yp = RANDOM.uniform(-3e-6, 3e-6, (2, COUNT))
    era = earth_rotation_angle(DAYS, FRACTION)
    ours = terrestrial_to_celestial(X, Y, s, era, xp, yp, DAYS, FRACTION)
    polar = erfa.pom00(xp, yp, erfa.sp00(DAYS, FRACTION))
    theirs = erfa.c2tcio(erfa.c2ixys(X, Y, s), era, polar)
    assert ours.shape == (3, 3, COUNT)
    assert np.max(np.abs(np.moveaxis(transpose(ours), -1, 0) - theirs)) < 2e-15
    identity = product(ours, transpose(ours)) - np.eye(3)[:, :, None]
    assert np.max(np.abs(identity)) < 2e-15


def test_whole_chain_against_erfa() -> None:
    """c2t06a does it all, with the rotation angle of era00 (good to 2e-13 rad)."""
    ut1 = FRACTION - 69.0 / DAY
    X, Y, s = celestial_pole(DAYS, FRACTION)
    era = earth_rotation_angle(DAYS, ut1)
    ours = terrestrial_to_celestial(X, Y, s, era, 1e-6, 2e-6, DAYS, FRACTION)
    theirs = erfa.c2t06a(DAYS, FRACTION, DAYS, ut1, 1e-6, 2e-6)
    assert np.max(np.abs(np.moveaxis(transpose(ours), -1, 0) - theirs)) < 3e-13


def test_pole_rates_against_differences_of_the_full_model() -> None:
    days, fraction, step = DAYS[:100], FRACTION[:100], 0.02
    after, before = (celestial_pole(days, fraction + h) for h in (step, -step))
    for rate, late, early in zip(celestial_pole_rates(days, fraction), after, before, strict=False):
        assert np.max(np.abs(rate - (late - early) / (2.0 * step * DAY))) < 4e-14


def test_angular_velocity_against_differences_of_the_matrix() -> None:
    """To 1e-6 m/s at the surface: everything moves, the pole by 0.01 arcseconds a day."""
    days, fraction = DAYS[:100], FRACTION[:100]
    r = np.array([4.1e6, -2.9e6, 3.9e6])
    lod, xp_rate, yp_rate = -3e-8, 5e-13, -4e-13

    def matrix(seconds: float) -> np.ndarray:
        tt2 = fraction + seconds / DAY
        X, Y, s = celestial_pole(days, tt2)
        era = earth_rotation_angle(days, tt2 + seconds * lod / DAY)
        xp, yp = 1e-6 + xp_rate * seconds, 2e-6 + yp_rate * seconds
        return terrestrial_to_celestial(X, Y, s, era, xp, yp, days, tt2)

    def slope(seconds: float) -> np.ndarray:
        return (rotate(matrix(seconds), r) - rotate(matrix(-seconds), r)) / (2.0 * seconds)

    velocity = (4.0 * slope(5.0) - slope(10.0)) / 3.0  # the cubic term removed
    X, Y, _ = celestial_pole(days, fraction)
    X_rate, Y_rate = celestial_pole_rates(days, fraction)
    omega = angular_velocity(X, Y, X_rate, Y_rate, EARTH_ROTATION_RATE * (1.0 + lod))
    now = matrix(0.0)
    omega = omega + rotate(now, polar_motion_velocity(xp_rate, yp_rate))
    assert np.max(np.abs(cross(omega, rotate(now, r)) - velocity)) < 5e-7


def test_polar_motion_turns_the_way_of_the_conventions() -> None:
    """x_p along the Greenwich meridian, y_p along 90 degrees west (TN36, 5.4.1): the pole of
    the intermediate frame is at (x_p, -y_p, 1) in the ITRF."""
    pole = rotate(transpose(polar_motion(1e-6, 2e-6)), np.array([0.0, 0.0, 1.0]))
    assert pole == pytest.approx((1e-6, -2e-6, 1.0), abs=3e-12)


def test_shapes_broadcast() -> None:
    era = earth_rotation_angle(DAYS[:6].reshape(2, 3), 0.25)
    assert era.shape == (2, 3)
    assert isinstance(earth_rotation_angle(2455000.5, 0.25), float)
    matrix = terrestrial_to_celestial(1e-3, 2e-5, 1e-8, era, 1e-6, 1e-6, 2455000.5, 0.0)
    assert matrix.shape == (3, 3, 2, 3)
    assert rotate(matrix, np.ones((3, 2, 3))).shape == (3, 2, 3)
    assert terrestrial_to_celestial(1e-3, 2e-5, 1e-8, 1.0, 0.0, 0.0, 2455000.5, 0.0).shape == (3, 3)
