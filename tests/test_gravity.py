"""Gravity delay: sizes, limits and symmetries. The integration along the ray is in validation/."""

from __future__ import annotations

import mpmath
import numpy as np
import pytest

from lighttime.path.gravity import in_rest_frame, moving_body, shapiro
from lighttime.vectors import norm

c = 299792458.0
GM_SUN = 1.32712440041e20
GM_EARTH = 3.986004418e14


def test_radial_ray_from_the_earth() -> None:
    """Straight up from the ground to the Moon: 2 GM/c^3 ln(r2/r1), in mpmath."""
    r1, r2 = 6.371e6, 3.844e8
    expected = 2 * GM_EARTH / c**3 * float(mpmath.log(mpmath.mpf(r2) / r1))
    delay = shapiro(GM_EARTH, np.array(r1), np.array(r2), np.array(r2 - r1))
    assert delay == pytest.approx(expected, rel=1e-13)
    assert 0.11e-9 < delay < 0.13e-9


def test_gamma_scales_the_delay() -> None:
    r = np.array(1.5e11), np.array(1.502e11), np.array(3.8e8)
    newton_half = shapiro(GM_SUN, *r, gamma=0.0)
    assert shapiro(GM_SUN, *r, gamma=1.0) == pytest.approx(2.0 * newton_half, rel=1e-15)


def test_digits_survive_where_the_logarithm_is_small() -> None:
    """Jupiter's ratio is 1 + 1e-3: mpmath gives the same to 1e-15 of the delay."""
    gm, r1, r2, r12 = 1.267e17, 7.0e11, 7.0e11 + 1.3e8, 3.9e8
    with mpmath.workdps(40):
        a, b, d = (mpmath.mpf(v) for v in (r1, r2, r12))
        expected = 2 * mpmath.mpf(gm) / mpmath.mpf(c) ** 3 * mpmath.log((a + b + d) / (a + b - d))
    delay = shapiro(gm, np.array(r1), np.array(r2), np.array(r12))
    assert delay == pytest.approx(float(expected), rel=1e-15)


def test_rest_frame_keeps_the_interval() -> None:
    """c^2 t^2 - x^2 is the same in both frames (definition of the Lorentz transformation)."""
    x, t = np.array([3.0e8, -1.0e8, 2.0e8]), 1.7
    beta = np.array([0.3, -0.2, 0.1])
    lorentz = 1.0 / np.sqrt(1.0 - beta @ beta)
    t_rest = lorentz * (t - beta @ x / c)
    at_rest = in_rest_frame(x, t, beta * c)
    assert (c * t_rest) ** 2 - at_rest @ at_rest == pytest.approx((c * t) ** 2 - x @ x, rel=1e-13)


def test_body_at_rest_is_the_limit() -> None:
    x1, x2 = np.array([6.4e6, 0.0, 0.0]), np.array([2.0e8, 3.2e8, 0.0])
    still = moving_body(GM_EARTH, x1, 0.0, x2, 1.27, np.zeros(3))
    assert still == shapiro(GM_EARTH, norm(x1), norm(x2), norm(x2 - x1))


def test_order_of_the_events_does_not_matter() -> None:
    x1, x2, v = np.array([6.4e6, 1e5, 0.0]), np.array([2e8, 3.2e8, 1e7]), np.array([2e4, 1e4, 5e3])
    there = moving_body(GM_EARTH, x1, 0.0, x2, 1.27, v)
    assert moving_body(GM_EARTH, x2, 1.27, x1, 0.0, v) == pytest.approx(there, rel=1e-15)


def test_motion_of_the_earth_is_felt() -> None:
    """First order in v/c: the delay changes by about (1 - k.v/c), 1e-4 of it (Klioner 2003)."""
    x1, x2 = np.array([6.4e6, 0.0, 0.0]), np.array([3.84e8, 0.0, 0.0])
    still = moving_body(GM_EARTH, x1, 0.0, x2, 1.26, np.zeros(3))
    # in its own frame the body sees the far event less far by v t
    velocity = np.array([3.0e4, 0.0, 0.0])
    moving = moving_body(GM_EARTH, x1, 0.0, x2, 1.26, velocity)
    seen = shapiro(GM_EARTH, norm(x1), norm(x2) - 3.0e4 * 1.26, norm(x2 - x1) - 3.0e4 * 1.26)
    assert moving == pytest.approx(seen * (1.0 - 1e-4), rel=2e-8)
    assert abs(moving - still) > 1e-14


def test_bending_is_a_small_correction() -> None:
    r = np.array(1.5e11), np.array(1.502e11), np.array(3.8e8)
    change = shapiro(GM_SUN, *r, bending=True) - shapiro(GM_SUN, *r)
    assert -1e-15 < change < 0.0


def test_oblateness_is_the_integral_of_the_field() -> None:
    """Against mpmath quadrature of -(1+gamma)/c^3 of the J2 potential along straight rays."""
    from lighttime.path.gravity import oblateness

    j2_radius2 = 1.0826e-3 * 6378136.6**2
    axis = np.array([0.6, 0.0, 0.8])
    for x1, x2 in (
        (np.array([6.37e6, 0.0, 0.0]), np.array([3.84e8, 0.0, 0.0])),  # to the zenith
        (np.array([6.37e6, 0.0, 0.0]), np.array([1.0e8, 3.7e8, 5.0e7])),
        (np.array([3.0e6, 4.0e6, 4.0e6]), np.array([-1.0e7, 3.7e8, -5.0e7])),
    ):
        length = float(norm(x2 - x1))

        def field(l: mpmath.mpf, x1=x1, x2=x2, length=length) -> mpmath.mpf:  # noqa: E741
            x = [a + (b - a) * l / length for a, b in zip(x1.tolist(), x2.tolist(), strict=True)]
            r = mpmath.sqrt(sum(v * v for v in x))
            z = sum(v * n for v, n in zip(x, axis.tolist(), strict=True))
            return (3 * z**2 / r**5 - 1 / r**3) / 2

        ends = [0, length / 100, length / 10, length]
        integral = mpmath.quad(field, ends)
        expected = -2 * GM_EARTH * j2_radius2 / c**3 * float(integral)
        delay = oblateness(GM_EARTH * j2_radius2, x1, x2, axis)
        assert delay == pytest.approx(expected, rel=1e-9)
        assert abs(delay) < 3e-14
