"""Solid Earth tide, permanent tide and pole tide."""

from __future__ import annotations

import numpy as np
import pytest
from sun_and_moon import sun_and_moon

from lighttime.earth.local import SphericalFrame, from_geodetic
from lighttime.earth.tides import (
    MOON_TO_EARTH_MASS,
    SUN_TO_EARTH_MASS,
    permanent_tide,
    pole_tide,
    secular_pole,
    solid_earth_tide,
    wobble,
)
from lighttime.errors import InputError

RE = 6378136.6
STATION = np.array([4075578.385, 931852.890, 4801570.154])
SUN = np.array([137859926952.015, 54228127881.4350, 23509422341.6960])
MOON = np.array([-179996231.920342, -312468450.131567, -169288918.592160])
TT = (2454934.5, (34.0 + 32.184) / 86400.0)


def test_published_case() -> None:
    """IERS Conventions (2010), solid tide routine, test case 1: 2009-04-13 0h UTC."""
    expected = [0.07700420357108125891, 0.06304056321824967613, 0.05516568152597246810]
    tide = solid_earth_tide(STATION, SUN, MOON, *TT, 0.0)
    np.testing.assert_allclose(tide, expected, rtol=0.0, atol=1e-16)  # measured 2e-17 m


def test_arrays_give_what_scalars_give() -> None:
    days = np.array([[0.0, 0.25, 0.5], [1.0, 400.0, 4000.0]])
    turn = np.cos(days), np.sin(days)
    sun = np.stack([SUN[0] * turn[0], SUN[0] * turn[1], SUN[2] + 0.0 * days])
    moon = np.stack([MOON[1] * turn[1], MOON[1] * turn[0], MOON[2] + 0.0 * days])
    tides = solid_earth_tide(STATION, sun, moon, TT[0] + days, TT[1], days % 1.0)
    assert tides.shape == (3, 2, 3)
    for k in np.ndindex(days.shape):
        where = (slice(None), *k)
        one = solid_earth_tide(
            STATION, sun[where], moon[where], TT[0] + days[k], TT[1], days[k] % 1.0
        )
        np.testing.assert_allclose(tides[where], one, rtol=0.0, atol=2e-16)


def test_many_stations_at_one_instant() -> None:
    stations = from_geodetic(np.radians([-40.0, 10.0, 80.0]), np.radians([10.0, 130.0, -70.0]), 0.0)
    tides = solid_earth_tide(stations, SUN, MOON, *TT, 0.3)
    for k in range(3):
        one = solid_earth_tide(stations[:, k], SUN, MOON, *TT, 0.3)
        np.testing.assert_allclose(tides[:, k], one, rtol=0.0, atol=2e-16)


def test_love_numbers_enter_as_defined() -> None:
    """Under the body a unit h2 lifts by GM_j Re^4 / (GM R^3), a unit l2 moves nothing."""
    station = np.array([RE, 0.0, 0.0])
    moon, sun = np.array([384.4e6, 0.0, 0.0]), np.array([0.0, 0.0, 1.496e11])

    def tide(**numbers: float) -> np.ndarray:
        return solid_earth_tide(station, sun, moon, *TT, 0.0, **numbers)

    moon_lift = MOON_TO_EARTH_MASS * RE**4 / 384.4e6**3
    sun_lift = SUN_TO_EARTH_MASS * RE**4 / 1.496e11**3
    unit_h = tide(h2=1.6078) - tide(h2=0.6078)
    np.testing.assert_allclose(unit_h, [moon_lift - sun_lift / 2.0, 0.0, 0.0], atol=1e-15)
    unit_l = tide(l2=1.0847) - tide(l2=0.0847)
    np.testing.assert_allclose(unit_l, [0.0, 0.0, 0.0], atol=1e-15)
    unit_h3 = tide(h3=1.292) - tide(h3=0.292)
    np.testing.assert_allclose(unit_h3, [moon_lift * RE / 384.4e6, 0.0, 0.0], atol=1e-15)


def test_mean_over_a_nodal_period_is_the_permanent_tide() -> None:
    """TN36, 7.1.1.2: what the tide leaves on average is the permanent tide."""
    days = np.linspace(0.0, 6798.4, 8001)  # steps of 0.8 day, drifting through the day
    tt = 2451545.0 + days
    bodies = sun_and_moon(tt)
    for latitude_deg in (-75.0, -20.0, 0.0, 35.0, 89.0):
        station = from_geodetic(np.radians(latitude_deg), 0.3, 0.0)
        tides = solid_earth_tide(station, *bodies, tt, 0.0, (tt - 0.5) % 1.0)
        difference = tides.mean(axis=1) - permanent_tide(station)
        assert np.ptp(tides) > 0.1
        assert np.abs(difference).max() < 1e-4  # measured 5.5e-5 m (TN36 prints 0.1 mm)


def test_permanent_tide_sizes() -> None:
    """TN36, 7.1.1.2: about -12 cm in radius at the poles and +6 cm at the equator."""
    assert permanent_tide([0.0, 0.0, 6356752.0])[2] == pytest.approx(-0.1205, abs=1e-12)
    assert permanent_tide([6378137.0, 0.0, 0.0])[0] == pytest.approx(0.0603 + 0.000025, abs=1e-12)


def test_tide_at_the_poles_is_finite() -> None:
    for z in (6356752.0, -6356752.0):
        tide = solid_earth_tide([0.0, 0.0, z], SUN, MOON, *TT, 0.0)
        near = solid_earth_tide([1.0, 0.0, z], SUN, MOON, *TT, 0.0)
        np.testing.assert_allclose(tide, near, atol=1e-6)


def pole_potential(m1: float, m2: float, colatitude: float, longitude: float) -> float:
    """Centrifugal potential of a wobble (radians), m^2/s^2. Source: TN36, equation 7.24."""
    return float(
        -((7.292115e-5 * RE) ** 2)
        / 2.0
        * np.sin(2.0 * colatitude)
        * (m1 * np.cos(longitude) + m2 * np.sin(longitude))
    )


@pytest.mark.parametrize(("latitude", "longitude"), [(0.8, 0.3), (-0.4, 2.9), (1.3, -1.2)])
def test_pole_tide_is_the_response_to_the_centrifugal_potential(
    latitude: float, longitude: float
) -> None:
    """With h2 = 0.6207, l2 = 0.0836 of TN36, 7.1.4; its coefficients are rounded by 0.7 %."""
    theta, g, step = np.pi / 2.0 - latitude, 9.798, 1e-5
    x_secular, y_secular = secular_pole(8.0)
    xp, yp = x_secular + 0.4, y_secular - 0.3
    m1, m2 = np.radians(0.4 / 3600.0), np.radians(0.3 / 3600.0)

    def potential(dtheta: float, dlongitude: float) -> float:
        return pole_potential(m1, m2, theta + dtheta, longitude + dlongitude)

    up = 0.6207 * potential(0.0, 0.0) / g
    south = 0.0836 * (potential(step, 0.0) - potential(-step, 0.0)) / (2.0 * step) / g
    east = 0.0836 * (potential(0.0, step) - potential(0.0, -step)) / (2.0 * step) / g
    station = 6371000.0 * np.array(
        [
            np.cos(latitude) * np.cos(longitude),
            np.cos(latitude) * np.sin(longitude),
            np.sin(latitude),
        ]
    )
    expected = SphericalFrame.at(station).to_itrf(up, -south, east / np.sin(theta))
    tide = pole_tide(station, xp, yp, 8.0)
    np.testing.assert_allclose(tide, expected, rtol=0.0, atol=1.5e-4)
    assert np.linalg.norm(tide) > 4e-3


def test_pole_tide_size() -> None:
    """TN36, 7.1.4: at most about 25 mm in radius and 7 mm across, for a wobble of 0.8 arcsec."""
    station = from_geodetic(np.radians(45.0), 0.0, 0.0)
    xp, yp = secular_pole(0.0)
    tide = pole_tide(station, xp + 0.8, yp, 0.0)
    assert np.linalg.norm(tide) == pytest.approx(0.0264, abs=1e-4)
    assert tide @ station < 0.0


def test_secular_pole_and_wobble() -> None:
    """IERS Conventions (2010), 7.1.4, update of 2018: 55.0 + 1.677 t, 320.5 + 3.460 t mas."""
    np.testing.assert_allclose(secular_pole([0.0, 18.0]), [[0.055, 0.085186], [0.3205, 0.38278]])
    np.testing.assert_allclose(wobble(0.155, 0.4205, 0.0), [0.1, -0.1], atol=1e-15)


def test_pole_tide_over_many_instants() -> None:
    xp, yp, years = np.array([0.1, 0.2]), np.array([0.3, 0.4]), np.array([8.0, 9.0])
    tides = pole_tide(STATION, xp, yp, years)
    assert tides.shape == (3, 2)
    np.testing.assert_array_equal(tides[:, 1], pole_tide(STATION, xp[1], yp[1], years[1]))


def test_station_in_kilometres_is_refused() -> None:
    with pytest.raises(InputError, match="xyz_m"):
        solid_earth_tide(STATION / 1e3, SUN, MOON, *TT, 0.0)
    with pytest.raises(InputError, match="xyz_m"):
        permanent_tide(STATION / 1e3)
    with pytest.raises(InputError, match="xyz_m"):
        pole_tide(STATION / 1e3, 0.0, 0.0, 0.0)
