"""Loading by ocean tide, ocean pole tide and atmosphere."""

from __future__ import annotations

import pickle

import numpy as np
import pytest
from ocean_case import AMPLITUDES_M, DISPLACEMENTS_M, PHASES_DEG
from sun_and_moon import sun_and_moon

from lighttime.earth.admittance import CONSTITUENTS, potential, spread
from lighttime.earth.loading import (
    AtmosphereLoading,
    OceanLoading,
    OceanPoleTide,
    atmosphere_loading,
    ocean_loading,
    ocean_pole_tide_loading,
)
from lighttime.earth.local import from_geodetic, itrf_to_enu
from lighttime.earth.tides import secular_pole
from lighttime.errors import InputError

ONSALA = from_geodetic(np.radians(57.3958), np.radians(11.9264), 0.0)
GREENWICH = from_geodetic(0.0, 0.0, 0.0)
COEFFICIENTS = OceanLoading(AMPLITUDES_M, PHASES_DEG, "Onsala")


def up_south_west(tt2: np.ndarray, fraction: np.ndarray) -> np.ndarray:
    shift = ocean_loading(ONSALA, COEFFICIENTS, 2455007.5, tt2, fraction)
    east, north, up = itrf_to_enu(shift, ONSALA)
    return np.stack([up, -north, -east], axis=-1)


def test_published_case_to_the_printed_digit() -> None:
    """Source: see ocean_case. All 24 numbers.

    They come out when UTC is given as the argument of Sun and Moon, and only then (within 2 s).
    """
    fraction = DISPLACEMENTS_M[:, 0] / 24.0
    computed = up_south_west(fraction, fraction)
    np.testing.assert_array_equal(np.round(computed, 6), DISPLACEMENTS_M[:, 1:])


def test_published_case_with_its_argument_in_tt() -> None:
    """Sun and Moon belong to TT: the 66 s from UTC move Onsala by 2.2 micrometres at most."""
    fraction = DISPLACEMENTS_M[:, 0] / 24.0
    computed = up_south_west(fraction + 66.184 / 86400.0, fraction)
    difference = np.abs(computed - DISPLACEMENTS_M[:, 1:]).max()
    assert 1e-6 < difference < 2.5e-6


def test_lines_of_the_potential() -> None:
    """Numbers and amplitudes as in the Conventions' own routine (from memory), 1e-6 m.

    S2 and K1 differ there in the sixth digit: the planets share these lines.
    """
    multipliers, amplitude, _ = potential()
    species = multipliers[:, 0]
    assert [int((species == kind).sum()) for kind in (2, 1, 0)] == [109, 154, 79]
    published = {
        2: [0.632208, 0.294107, 0.121046, 0.079915, 0.023818, -0.023589, 0.022994, 0.019333],
        1: [0.368645, -0.262232, -0.121995, -0.050208, 0.050031, -0.049470, 0.020620, 0.020613],
        0: [-0.066607, -0.035184, -0.030988, 0.027929, -0.027616, -0.012753, -0.006728, -0.005837],
    }
    smallest = {2: 0.000050, 1: 0.000050, 0: -0.000051}
    for kind, largest in published.items():
        lines = amplitude[species == kind]
        np.testing.assert_allclose(lines[:8], largest, rtol=0.0, atol=3.1e-6)
        assert lines[-1] == pytest.approx(smallest[kind], abs=0.5e-6)


def test_constituents_keep_what_was_given() -> None:
    multipliers, amplitude, _ = potential()
    lines = spread(AMPLITUDES_M, PHASES_DEG)
    assert lines.shape == (3, 342)
    for column, key in enumerate(CONSTITUENTS.values()):
        row = int(np.flatnonzero((multipliers == np.array(key)).all(axis=1))[0])
        # the phase lags refer to cos(arguments), shifted so that the potential's sign is +
        shift = {2: 0.0, 1: 90.0, 0: 180.0}[key[0]] + (180.0 if amplitude[row] < 0.0 else 0.0)
        expected = AMPLITUDES_M[:, column] * np.exp(1j * np.radians(shift - PHASES_DEG[:, column]))
        np.testing.assert_allclose(lines[:, row], expected, rtol=1e-12)


@pytest.mark.parametrize(
    ("name", "series"),
    [
        ("M2", (1.0004, -0.0373, 0.0002)),
        ("K2", (1.0241, 0.2863, 0.0083)),
        ("K1", (1.0060, 0.1150, -0.0088)),
        ("O1", (1.0089, 0.1871, -0.0147)),
    ],
)
def test_nodal_modulation_comes_with_the_lines(name: str, series: tuple[float, ...]) -> None:
    """Nodal factors as series in cos kN: Doodson & Warburg 1941 (from memory)."""
    multipliers, amplitude, _ = potential()
    key = np.array(CONSTITUENTS[name])
    same = (multipliers[:, [0, 1, 2, 3, 5]] == key[[0, 1, 2, 3, 5]]).all(axis=1)
    side, size = multipliers[same, 4], amplitude[same]
    for node in np.radians([0.0, 60.0, 120.0, 180.0]):
        factor = abs(np.sum(size * np.exp(-1j * side * node))) / abs(size[side == 0.0][0])
        expected = sum(c * np.cos(k * node) for k, c in enumerate(series))
        assert factor == pytest.approx(expected, abs=0.0025)  # measured 0.0019


LATE = 66.184  # seconds of TT after UTC, to which UT1 is put here
DAYS = 2452000.5 + np.linspace(0.0, 6798.0, 1501)  # TT, over a nodal period


def potential_from_bodies(species: int) -> np.ndarray:
    """Tidal potential of degree 2 over g at longitude 0, in Cartwright & Tayler's normalisation.

    From the Sun and Moon of ERFA; height GM a^2/(g R^3) with g = GM/a^2.
    """
    total = np.zeros_like(DAYS)
    for body, ratio in zip(sun_and_moon(DAYS, LATE), (332946.05, 0.012300037), strict=True):
        distance = np.linalg.norm(body, axis=0)
        x, y, z = body / distance
        shape = {
            0: -(1.5 * z**2 - 0.5) / np.sqrt(5.0 / (4.0 * np.pi)),
            1: z * x / np.sqrt(5.0 / (24.0 * np.pi)),
            2: 0.75 * (x**2 - y**2) / (3.0 * np.sqrt(5.0 / (96.0 * np.pi))),
        }[species]
        total += ratio * 6378136.6**4 / distance**3 * shape
    return total


def potential_from_lines(species: int, argument_late_s: float = 0.0) -> np.ndarray:
    """The same from an ocean whose admittance is 1: the sum of lines of one species."""
    multipliers, amplitude, _ = potential()
    size = np.zeros((3, 11))
    for column, key in enumerate(CONSTITUENTS.values()):
        if key[0] == species:
            row = (multipliers == np.array(key)).all(axis=1)
            size[0, column] = abs(amplitude[row][0]) / 10.0  # a tenth, for sizes are checked
    fraction = (DAYS - 0.5 - LATE / 86400.0) % 1.0
    ocean = OceanLoading(size, np.zeros((3, 11)))
    shift = ocean_loading(GREENWICH, ocean, DAYS, -argument_late_s / 86400.0, fraction)
    return 10.0 * np.asarray(shift[0])


@pytest.mark.parametrize("species", [0, 1, 2])
def test_an_ocean_that_follows_gives_back_the_tidal_potential(species: int) -> None:
    """Lines, arguments, signs and phases together, against Sun and Moon themselves."""
    expected, lines = potential_from_bodies(species), potential_from_lines(species)
    if species == 0:  # the constant is not a tide
        expected, lines = expected - expected.mean(), lines - lines.mean()
    assert np.abs(expected).max() > 0.15
    # measured 0.8, 1.2 and 1.0 mm, of 0.2, 0.9 and 1.2 m: what the smaller lines make
    assert np.abs(lines - expected).max() < 1.5e-3
    assert np.dot(lines, expected) / np.dot(expected, expected) == pytest.approx(1.0, abs=3e-4)


def test_sun_and_moon_belong_to_tt() -> None:
    """With UTC in place of TT the lines follow the Moon less well."""
    expected = potential_from_bodies(2)
    in_tt, in_utc = (np.std(potential_from_lines(2, late) - expected) for late in (0.0, LATE))
    assert in_tt < 2.2e-4  # measured 2.15e-4 m, 2.93e-4 m
    assert in_utc > 2.8e-4


def test_scalars_arrays_and_no_loading() -> None:
    days = np.array([[0.0, 0.3, 0.6], [100.0, 2000.2, 7000.9]])
    many = ocean_loading(ONSALA, COEFFICIENTS, 2455007.5, days, days % 1.0)
    assert many.shape == (3, 2, 3)
    one = ocean_loading(tuple(ONSALA), COEFFICIENTS, 2455007.5, days[1, 2], days[1, 2] % 1.0)
    assert one.shape == (3,)
    np.testing.assert_allclose(many[:, 1, 2], one, rtol=0.0, atol=1e-17)
    none = OceanLoading(np.zeros((3, 11)), np.zeros((3, 11)))
    assert not ocean_loading(ONSALA, none, 2455007.5, days, days % 1.0).any()


def test_ocean_pole_tide_of_an_earth_all_ocean() -> None:
    """A load of height gamma_2 dV/g on the whole sphere, lifted by h2' = -1.

    Displacement 3 rho_w/(5 rho_e) h2' x height, with the mean density rho_e of the Earth;
    potential dV of TN36, equation 7.24. Its coefficients are in closed form.
    """
    latitude, longitude = np.radians(40.0), np.radians(70.0)
    station = 6371000.0 * np.array(
        [
            np.cos(latitude) * np.cos(longitude),
            np.cos(latitude) * np.sin(longitude),
            np.sin(latitude),
        ]
    )
    harmonic = np.sin(2.0 * latitude) * np.exp(1j * longitude)
    coefficients = OceanPoleTide(0.3 * harmonic / np.sqrt(8.0 * np.pi / 15.0), 0.0, 0.0)
    x, y = secular_pole(5.0)
    shift = ocean_pole_tide_loading(station, coefficients, x + 0.2, y - 0.3, 5.0)

    m1, m2 = np.radians(0.2 / 3600.0), np.radians(0.3 / 3600.0)
    a, gamma = 6378136.6, 0.6870 + 0.0036j
    wave = np.sin(2.0 * latitude) * np.exp(-1j * longitude) * (m1 + 1j * m2) * gamma.conjugate()
    height = -((7.292115e-5 * a) ** 2) / (2.0 * 9.798) * wave.real
    expected = 3.0 * 1025.0 / (5.0 * 5514.0) * -1.0 * height
    east, north, up = itrf_to_enu(shift, station)
    assert abs(up) > 5e-4
    # K of TN36 holds g and radius of the equator: as if rho_e were 5485 (0.5 % less than 5514)
    assert up == pytest.approx(expected, rel=0.006)
    assert abs(east) + abs(north) < 1e-18


def test_ocean_pole_tide_axes() -> None:
    x, y = secular_pole(5.0)
    for axis, only in zip((2, 1, 0), 0.1 * np.eye(3), strict=True):
        coefficients = OceanPoleTide(*only)
        shift = ocean_pole_tide_loading(ONSALA, coefficients, x + np.array([0.1, 0.2]), y, 5.0)
        enu = itrf_to_enu(shift, ONSALA)
        # K = 5340 m (TN36, 7.1.5), gamma_2 = 0.6870: 0.1 arcsec x 0.1 is 0.178 mm
        np.testing.assert_allclose(enu[axis], [0.1779e-3, 0.3557e-3], rtol=2e-4)
        assert np.abs(np.delete(enu, axis, axis=0)).max() < 1e-18


def test_atmosphere_turns_once_and_twice_a_day() -> None:
    cosine = np.array([[1.0e-3, 0.0], [0.0, 2.0e-3], [0.0, 0.0]])
    sine = np.array([[0.0, 0.0], [0.0, 0.0], [3.0e-3, 4.0e-3]])
    coefficients = AtmosphereLoading(cosine, sine, "made up")
    shift = atmosphere_loading(ONSALA, coefficients, np.array([0.0, 0.125, 0.25, 0.5]))
    east, north, up = 1e3 * itrf_to_enu(shift, ONSALA)
    np.testing.assert_allclose(up, [1.0, np.sqrt(0.5), 0.0, -1.0], atol=1e-12)
    np.testing.assert_allclose(north, [2.0, 0.0, -2.0, 2.0], atol=1e-12)
    np.testing.assert_allclose(east, [0.0, 3.0 * np.sqrt(0.5) + 4.0, 3.0, 0.0], atol=1e-12)


def test_coefficients_are_values() -> None:
    same = OceanLoading(AMPLITUDES_M.tolist(), PHASES_DEG.tolist(), "Onsala")
    other = OceanLoading(AMPLITUDES_M, PHASES_DEG + 1.0, "Onsala")
    assert same == COEFFICIENTS
    assert hash(same) == hash(COEFFICIENTS)
    assert other != COEFFICIENTS
    assert pickle.loads(pickle.dumps(same)) == same
    assert OceanPoleTide(0.1, 0.0, 0.0) == OceanPoleTide(0.1 + 0.0j, 0j, 0j)
    with pytest.raises(ValueError, match="read-only"):
        same.amplitudes_m[0, 0] = 1.0


def broken(where: tuple[int, int], value: float) -> np.ndarray:
    numbers = AMPLITUDES_M.copy()
    numbers[where] = value
    return numbers


@pytest.mark.parametrize(
    ("amplitudes", "phases", "name"),
    [
        (AMPLITUDES_M * 1e3, PHASES_DEG, "amplitudes_m"),  # millimetres
        (-AMPLITUDES_M, PHASES_DEG, "amplitudes_m"),
        (AMPLITUDES_M[:, :10], PHASES_DEG, "amplitudes_m"),
        (AMPLITUDES_M.T, PHASES_DEG.T, "amplitudes_m"),
        (broken((1, 4), np.nan), PHASES_DEG, r"amplitudes_m\[1, 4\] is nan"),
        (broken((2, 0), np.inf), PHASES_DEG, r"amplitudes_m\[2, 0\] is inf"),
        (AMPLITUDES_M, PHASES_DEG * 3.0, "phases_deg"),
        (AMPLITUDES_M, "no", "phases_deg"),
    ],
)
def test_ocean_loading_coefficients_refused(
    amplitudes: np.ndarray, phases: np.ndarray, name: str
) -> None:
    with pytest.raises(InputError, match=name):
        OceanLoading(amplitudes, phases)


def test_other_coefficients_refused() -> None:
    for value in (complex(np.nan, 0.0), 5.0 + 0.0j, "up", None):
        with pytest.raises(InputError, match="north"):
            OceanPoleTide(0.0j, value, 0.0j)  # type: ignore[arg-type]
    with pytest.raises(InputError, match="sine_m"):
        AtmosphereLoading(np.zeros((3, 2)), np.full((3, 2), 0.3))  # millimetres
    with pytest.raises(InputError, match="cosine_m"):
        AtmosphereLoading(np.zeros((2, 3)), np.zeros((3, 2)))


def test_station_in_kilometres_is_refused() -> None:
    with pytest.raises(InputError, match="xyz_m"):
        ocean_loading(ONSALA / 1e3, COEFFICIENTS, 2455007.5, 0.0, 0.0)
