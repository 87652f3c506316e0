"""The working frame: Taylor series near the tagged instant are the polynomials themselves."""

from __future__ import annotations

import numpy as np
import pytest

from lighttime.ephemeris import Ephemeris
from lighttime.ephemeris.frame import NEAR_S, EarthFrame

SEAM = 2454992.5  # where records of 4, 8 and 16 days end together


def frame(jd2: np.ndarray) -> EarthFrame:
    return EarthFrame(Ephemeris.default(), np.full(jd2.shape, SEAM), jd2)


@pytest.mark.parametrize("seconds", [-3.99, -1.3, 0.0, 1.3, 2.6, 3.99, 5.0, -700.0])
def test_events_at_any_distance(seconds: float) -> None:
    """Position of the Earth to 1e-9 m, the Moon to 0.2 um, libration to 1e-15 rad.

    Within the reach of the series, beyond it, and (the first three) with a seam in between.
    """
    jd2 = np.array([-2.0, -1e-6, 1e-7, *np.linspace(0.01, 20.0, 50) * 86400.0]) / 86400.0
    s = np.full(jd2.shape, seconds)
    near, ephemeris = frame(jd2), Ephemeris.default()
    args = (near.tdb1, near.tdb2, s)
    earth, earth_velocity = near.earth(s)
    moved = ephemeris.earth_displacement(near.tdb1, near.tdb2, 0.0, s)
    tolerance = 1e-9 if abs(seconds) < NEAR_S else 1e-15 * np.abs(moved).max()
    assert np.abs(earth - moved).max() <= tolerance
    assert np.abs(earth_velocity - ephemeris.earth(*args)[1]).max() < 1e-9
    moon, moon_velocity = near.moon_geocentric(s)
    exact_moon, exact_velocity = ephemeris.moon_geocentric(*args)
    assert np.abs(moon - exact_moon).max() < 3e-7
    assert np.abs(moon_velocity - exact_velocity).max() < 1e-10
    angles, rates = near.libration(s)
    exact_angles, exact_rates = ephemeris.libration(*args)
    assert np.abs(angles - exact_angles).max() < 2e-15
    assert np.abs(rates - exact_rates).max() < 1e-16


def test_seams_are_known() -> None:
    days = np.array([-3.0, 3.0, -4.1, 4.1, 43200.0]) / 86400.0
    assert frame(days)._seam.tolist() == [True, True, False, False, False]


def test_distant_bodies_go_straight() -> None:
    """Jupiter after 2.6 s: 0.2 m of curvature at the most is neglected, on a grid of 0.1 mm."""
    near = frame(np.linspace(0.0, 10.0, 20))
    position, velocity = near.distant("jupiter", 2.6)
    expected, _ = Ephemeris.default().barycentric_body("jupiter", near.tdb1, near.tdb2, 2.6)
    assert np.abs(position + near.origin[0] - expected).max() < 2e-3
    assert velocity.shape == (3, 20)
    assert near.distant_bodies[0] == "sun"
