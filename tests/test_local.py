"""Geodetic coordinates and local axes."""

from __future__ import annotations

import erfa
import numpy as np
import pytest

from lighttime.earth.local import (
    SphericalFrame,
    east_north_up,
    enu_to_itrf,
    from_geodetic,
    geodetic,
    itrf_to_enu,
)
from lighttime.errors import InputError

GRS80 = 2  # the ellipsoid's number in ERFA


def everywhere() -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    latitude, longitude, height = np.meshgrid(
        np.radians([-90.0, -89.9999, -60.0, -30.0, -1e-9, 0.0, 12.3, 45.0, 77.0, 90.0]),
        np.radians([-179.9, -90.0, 0.0, 1e-7, 33.0, 180.0]),
        [-400.0, 0.0, 2800.0, 9000.0, 100000.0],
    )
    return latitude.ravel(), longitude.ravel(), height.ravel()


def test_position_agrees_with_erfa() -> None:
    latitude, longitude, height = everywhere()
    expected = erfa.gd2gc(GRS80, longitude, latitude, height).T
    # measured 0.9e-9 m: the grid of float64 at 6.4e6 m
    assert np.abs(from_geodetic(latitude, longitude, height) - expected).max() < 2e-9


def test_geodetic_agrees_with_erfa() -> None:
    xyz = from_geodetic(*everywhere())
    latitude, _, height = geodetic(xyz)
    _, expected_latitude, expected_height = erfa.gc2gd(GRS80, xyz.T.copy())
    # ERFA itself comes back to 4.3e-9 m in latitude (at 100 km), this module to 1.4e-9 m
    assert np.abs(latitude - expected_latitude).max() * 6.4e6 < 6e-9
    assert np.abs(height - expected_height).max() < 3e-9  # measured 1.7e-9 m


def test_round_trip() -> None:
    latitude, longitude, height = everywhere()
    xyz = from_geodetic(latitude, longitude, height)
    back = geodetic(xyz)
    assert np.abs(back[0] - latitude).max() * 6.4e6 < 2e-9  # measured 1.4e-9 m
    assert np.abs(back[2] - height).max() < 3e-9  # measured 1.9e-9 m
    assert np.abs(from_geodetic(*back) - xyz).max() < 2e-9  # measured 1.9e-9 m: two grid steps


def test_axes_are_right_handed_and_up_is_the_gradient_of_height() -> None:
    xyz = from_geodetic(0.7, -1.9, 2000.0)
    east, north, up = east_north_up(xyz)
    np.testing.assert_allclose(np.cross(east, north), up, atol=1e-15)
    raised = from_geodetic(0.7, -1.9, 3000.0)
    np.testing.assert_allclose((raised - xyz) / 1000.0, up, atol=3e-12)
    step = 1e-4
    ahead = from_geodetic(0.7 + step, -1.9, 2000.0) - from_geodetic(0.7 - step, -1.9, 2000.0)
    np.testing.assert_allclose(ahead / np.linalg.norm(ahead), north, atol=1e-8)


def test_there_and_back_with_many_instants() -> None:
    xyz = from_geodetic(-0.4, 2.5, 100.0)
    enu = np.random.default_rng(1).normal(size=(3, 4, 5))
    np.testing.assert_allclose(itrf_to_enu(enu_to_itrf(enu, xyz), xyz), enu, atol=1e-15)


def test_many_places_at_once() -> None:
    xyz = from_geodetic(*everywhere())
    enu = np.random.default_rng(2).normal(size=xyz.shape)
    one_by_one = [enu_to_itrf(enu[:, k], xyz[:, k]) for k in range(xyz.shape[1])]
    np.testing.assert_array_equal(enu_to_itrf(enu, xyz), np.stack(one_by_one, axis=1))


def test_spherical_frame_at_a_pole_is_finite() -> None:
    frame = SphericalFrame.at([0.0, 0.0, 6356752.0])
    np.testing.assert_array_equal(frame.to_itrf(1.0, 2.0, 3.0), [-2.0, 3.0, 1.0])


def test_spherical_frame_is_orthonormal() -> None:
    frame = SphericalFrame.at(from_geodetic(0.7, -1.9, 2000.0))
    axes = np.stack([frame.to_itrf(*row) for row in np.eye(3)])
    np.testing.assert_allclose(axes @ axes.T, np.eye(3), atol=1e-15)
    np.testing.assert_allclose(axes[0], frame.radial, atol=1e-16)


@pytest.mark.parametrize(
    "xyz",
    [
        [6378.137, 0.0, 0.0],  # kilometres
        [0.0, 0.0, 0.0],
        [np.nan, 0.0, 6.4e6],
        [6.4e6, np.inf, 0.0],
        [6.4e6, 0.0],
        6.4e6,
    ],
)
def test_not_a_place(xyz: object) -> None:
    with pytest.raises(InputError, match="xyz_m"):
        geodetic(xyz)  # type: ignore[arg-type]


@pytest.mark.parametrize(
    ("coordinates", "name"),
    [
        ((45.0, 0.1, 0.0), "latitude_rad"),
        ((np.nan, 0.1, 0.0), "latitude_rad"),
        ((0.5, np.inf, 0.0), "longitude_rad"),
        ((0.5, 0.1, np.nan), "height_m"),
    ],
)
def test_not_geodetic(coordinates: tuple[float, float, float], name: str) -> None:
    with pytest.raises(InputError, match=name):
        from_geodetic(*coordinates)
