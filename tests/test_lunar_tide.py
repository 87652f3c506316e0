"""The tide of the solid Moon."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

import numpy as np
import pytest

from lighttime.constants import MOON_MEAN_RADIUS
from lighttime.ephemeris import Ephemeris
from lighttime.errors import InputError
from lighttime.moon.libration import principal_axes
from lighttime.moon.reflector import reflectors
from lighttime.moon.tide import H2, L2, lunar_tide, permanent_lunar_tide

GMS = (4.9028e12, 3.986004e14, 1.32712440e20)
REFLECTOR = (1554678.104, 98094.498, 765005.863)
NODAL_PERIOD = 6798.38  # days


def from_the_moon(days: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Earth and Sun from the Moon, principal axes of DE421; TDB days since J2000.0."""
    ephemeris = Ephemeris.default()
    whole = np.floor(days)
    when = 2451545.0 + whole, days - whole
    moon = ephemeris.moon_geocentric(*when)[0]
    sun = ephemeris.barycentric_body("sun", *when)[0] - ephemeris.earth(*when)[0]
    axes = principal_axes(ephemeris.libration(*when)[0])
    earth_pa, sun_pa = (np.einsum("jin,jn->in", axes, r) for r in (-moon, sun - moon))
    return earth_pa, sun_pa


def test_is_the_gradient_of_the_tidal_potential() -> None:
    # Definition of the numbers of Love and Shida (IERS Conventions 2010, TN36, 7.1.1): uplift
    # h W / g, and along the surface l r grad W / g, W = GM r^2 / R^3 P2(cos) of each body.
    r = np.array(REFLECTOR) / np.linalg.norm(REFLECTOR) * MOON_MEAN_RADIUS
    earth, sun = np.array([3.7e8, 3.0e7, -4.0e7]), np.array([-1.1e11, 0.9e11, 2.0e9])

    def potential(at: np.ndarray) -> float:
        total = 0.0
        for body, gm in ((earth, GMS[1]), (sun, GMS[2])):
            distance = np.linalg.norm(body)
            cosine = at @ body / np.linalg.norm(at) / distance
            total += gm * (at @ at) / distance**3 * (1.5 * cosine**2 - 0.5)
        return total

    step = 100.0 * np.eye(3)
    gradient = np.array([potential(r + e) - potential(r - e) for e in step]) / 200.0
    gravity = GMS[0] / (r @ r)
    up = r / np.linalg.norm(r)
    expected = H2 * potential(r) / gravity * up
    expected += L2 * np.linalg.norm(r) * (gradient - up * (up @ gradient)) / gravity
    found = lunar_tide(r, earth, sun, *GMS)
    assert found == pytest.approx(expected, abs=1e-9)


def test_under_the_earth_in_exact_arithmetic() -> None:
    # radial: (GM_E/GM_M) R^4/d^3 h2 (P2 = 1); nothing sideways; a Sun that weighs nothing
    distance = 384_400_000
    uplift = Fraction(813, 10) * 1737400**4 / Fraction(distance) ** 3 * Fraction(476, 10000)
    found = lunar_tide((1735000.0, 0, 0), (distance, 0, 0), (1e11, 0, 0), 1.0, 81.3, 0.0)
    assert found.tolist() == [pytest.approx(float(uplift), rel=1e-14), 0.0, 0.0]
    assert float(uplift) == pytest.approx(0.621, abs=5e-4)


def test_at_the_limb_it_is_minus_half() -> None:
    earth, sun = (3.8e8, 0.0, 0.0), (1e11, 0.0, 0.0)
    below = lunar_tide((1.7374e6, 0.0, 0.0), earth, sun, *GMS)
    limb = lunar_tide((0.0, 1.7374e6, 0.0), earth, sun, *GMS)
    assert limb[1] == pytest.approx(-0.5 * below[0], rel=1e-14)
    assert limb[[0, 2]].tolist() == [0.0, 0.0]


def test_size_over_a_nodal_period() -> None:
    # "0.45 m, varying by 0.1 m": common knowledge of lunar ranging, no source
    earth, sun = from_the_moon(np.arange(-3400.0, 3400.0, 3.3))
    size = np.linalg.norm(lunar_tide(REFLECTOR, earth, sun, *GMS), axis=0)
    assert np.mean(size) == pytest.approx(0.45, abs=0.02)
    assert np.sqrt(2.0) * np.std(size) == pytest.approx(0.1, abs=0.01)


def test_permanent_tide_is_the_mean_of_the_tide() -> None:
    # a mean of 2000 instants is within 0.03 mm of a mean of 40000
    days = (np.arange(2000) / 2000.0 - 0.5) * NODAL_PERIOD
    earth, sun = from_the_moon(days)
    for reflector in reflectors():
        mean = lunar_tide(reflector.xyz_m, earth, sun, *GMS).mean(axis=1)
        permanent = permanent_lunar_tide(reflector.xyz_m, *GMS)
        assert permanent == pytest.approx(mean, abs=4e-5)
        assert 0.2 < np.linalg.norm(permanent) < 0.6


def test_linear_in_love_and_shida_numbers() -> None:
    earth, sun = from_the_moon(np.array([100.25]))
    for function, where in ((lunar_tide, (earth, sun)), (permanent_lunar_tide, ())):
        radial = function(REFLECTOR, *where, *GMS, h2=1.0, l2=0.0)
        tangential = function(REFLECTOR, *where, *GMS, h2=0.0, l2=1.0)
        whole = function(REFLECTOR, *where, *GMS, h2=0.05, l2=0.01)
        assert whole == pytest.approx(0.05 * radial + 0.01 * tangential, rel=1e-13)
        across = np.cross(REFLECTOR, np.ravel(radial)) / np.linalg.norm(REFLECTOR)
        assert np.linalg.norm(across) < 1e-14
        assert abs(np.dot(REFLECTOR, np.ravel(tangential))) < 1e-8


@pytest.mark.parametrize("shape", [(1,), (3,), (4,), (2, 3)])
def test_arrays_are_the_instants_one_by_one(shape: tuple[int, ...]) -> None:
    count = int(np.prod(shape))
    earth, sun = (v.reshape(3, *shape) for v in from_the_moon(np.arange(count) * 1.7))
    tide = lunar_tide(REFLECTOR, earth, sun, *GMS)
    assert tide.shape == (3, *shape)
    for index in np.ndindex(*shape):
        here = (slice(None), *index)
        assert tide[here] == pytest.approx(
            lunar_tide(REFLECTOR, earth[here], sun[here], *GMS), rel=1e-14
        )


def test_many_reflectors_at_once() -> None:
    points = np.array([each.xyz_m for each in reflectors()]).T
    together = permanent_lunar_tide(points, *GMS)
    for i, each in enumerate(reflectors()):
        assert together[:, i] == pytest.approx(permanent_lunar_tide(each.xyz_m, *GMS), rel=1e-14)


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (([1.0, 2.0], [1.0] * 3, [1.0] * 3), r"r_pa_m is 'an array of shape \(2,\)'"),
        (([1.0] * 3, 1.0, [1.0] * 3), r"earth_pa_m is 'an array of shape \(\)'"),
        (([1.0] * 3, [1.0] * 3, np.ones((4, 3))), r"sun_pa_m is .*shape \(3, ...\), metres"),
    ],
)
def test_bad_shapes(arguments: tuple[Any, ...], message: str) -> None:
    with pytest.raises(InputError, match=message):
        lunar_tide(*arguments, *GMS)
