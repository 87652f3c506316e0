"""A station with everything that moves it: each displacement alone, in a range, and in words."""

from __future__ import annotations

import pickle
from pathlib import Path
from typing import Any

import erfa
import numpy as np
import pytest
from ocean_case import AMPLITUDES_M, DISPLACEMENTS_M, PHASES_DEG, ROWS
from sinex_case import HILL, MESA, blocks, written

import lighttime as lt
from lighttime.earth import alone
from lighttime.earth.loading import AtmosphereLoading, OceanLoading, OceanPoleTide
from lighttime.earth.residual_motion import ResidualMotion
from lighttime.exact import round_trip as exact_round_trip
from lighttime.terms import STATION

c = 299792458.0

HILLTOP = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
COMPLETE = lt.Station(
    "Hilltop",
    HILLTOP.xyz_m,
    (-0.0141, 0.0188, 0.0103),
    2015.0,
    ocean_loading=OceanLoading(AMPLITUDES_M, PHASES_DEG, "those of another place", True),
    ocean_pole_tide=OceanPoleTide(-0.31 + 0.11j, 0.14 - 0.12j, -0.13 + 0.08j, "invented"),
    atmosphere_loading=AtmosphereLoading(
        [[0.41e-3, -0.53e-3], [0.3e-3, 0.4e-4], [-0.6e-4, 0.7e-4]],
        [[-0.22e-3, 0.36e-3], [0.5e-4, -0.1e-4], [0.2e-4, 0.9e-4]],
        "invented",
    ),
    residual_motion=ResidualMotion(
        ["2020-01-01", "2020-03-01", "2020-07-01"],
        [[0.004, -0.003, 0.010], [0.006, -0.007, -0.012], [0.0, 0.0, 0.0]],
        "invented",
    ),
    source="invented",
)
"""Coefficients of all kinds; those of the ocean are of Onsala (see ocean_case)."""

APOLLO_15 = lt.reflector("Apollo 15")
NIGHT = ["2020-02-08T20:00:00", "2020-03-01T18:00:00", "2020-03-01T21:00:00"]


@pytest.fixture(scope="module")
def model() -> lt.Model:
    return lt.Model()


# -- in a range ----------------------------------------------------------------------------------


def line_of_sight(sheet: Any, event: str) -> np.ndarray:
    """Unit vector from the station to the reflector in the ITRF, by ERFA's matrix; (3, n)."""
    ray = sheet["t2.position_m"] - sheet[f"{event}.position_m"]
    x, y, s, era, xp, yp = (
        sheet[f"{event}.{name}_rad"] for name in ("x", "y", "s", "era", "xp", "yp")
    )
    sp = erfa.sp00(sheet[f"{event}.tt1"], sheet[f"{event}.tt2"])
    to_itrf = erfa.c2tcio(erfa.c2ixys(x, y, s), era, erfa.pom00(xp, yp, sp))
    return np.einsum("nij,jn->in", to_itrf, ray / np.linalg.norm(ray, axis=0))


@pytest.mark.parametrize("name", [name for name in STATION if name != "subdaily_rotation"])
def test_a_displacement_moves_the_range_by_its_projection(model: lt.Model, name: str) -> None:
    """Within 0.01 mm of one-way range; the displacement is taken alone.

    Measured: 0.0001 mm, the grid of a float64 of seconds; the terms 0.00006 mm.
    (The sub-daily terms turn the station and displace nothing in the ITRF: see test_model.)
    """
    answer = model.round_trip(NIGHT, COMPLETE, APOLLO_15)
    without = lt.Model(omit=name).round_trip(NIGHT, COMPLETE, APOLLO_15)
    sheet = answer.worksheet()
    sent = lt.Epoch.parse(NIGHT)
    longer = np.zeros(3)
    for event, when in (("t1", sent), ("t3", sent.shift(answer.seconds))):
        moved = COMPLETE.displacement(when, name)
        longer -= np.einsum("ni,in->n", moved, line_of_sight(sheet, event))
    change = (answer.seconds - without.seconds) * c
    assert np.abs(change).max() / 2 > 1e-5  # it is there to be seen
    assert np.abs(change - longer).max() / 2 < 3e-7
    assert np.abs(answer.terms[name] * c - longer).max() / 2 < 2e-7


def test_nothing_is_left_to_model(model: lt.Model) -> None:
    weather = lt.Weather(780.0, 280.0, 0.4)
    answer = model.round_trip(NIGHT, COMPLETE, APOLLO_15, weather=weather)
    assert answer.not_modelled == ()
    assert set(answer.terms) == set(lt.TERMS)
    bare = model.round_trip(NIGHT, HILLTOP, APOLLO_15)
    assert bare.not_modelled == (
        "troposphere", "ocean_loading", "ocean_pole_tide", "atmosphere_loading"
    )  # fmt: skip


def test_the_extended_precision_twin_has_them_all(model: lt.Model) -> None:
    answer = model.round_trip(NIGHT[1], COMPLETE, APOLLO_15)
    exact = exact_round_trip(NIGHT[1], COMPLETE, APOLLO_15, digits=25)
    assert abs(float(exact.seconds - answer.seconds)) < 3e-15


def test_a_jump_of_the_ground(model: lt.Model) -> None:
    """A metre within ten seconds, between transmission and reception: no harm to the solver."""
    instants = ["2020-01-01", "2020-03-01T17:59:55", "2020-03-01T18:00:05", "2020-07-01"]
    jump = ResidualMotion(instants, [[0.0, 0.0, 0.0]] * 2 + [[0.0, 0.0, 1.0]] * 2)
    station = lt.Station("Hilltop", HILLTOP.xyz_m, residual_motion=jump)
    answer = model.round_trip(NIGHT[1], station, APOLLO_15)
    exact = exact_round_trip(NIGHT[1], station, APOLLO_15, digits=25)
    assert abs(float(exact.seconds - answer.seconds)) < 3e-15


# -- alone ---------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", alone.NAMES)
def test_axes_and_shapes(name: str) -> None:
    many = COMPLETE.displacement([NIGHT, NIGHT], name)
    one = COMPLETE.displacement(NIGHT[2], name)
    assert many.shape == (2, 3, 3)
    assert one.shape == (3,)
    np.testing.assert_allclose(many[1, 2], one, atol=1e-12)
    assert COMPLETE.displacement(lt.Epoch([], [], "utc"), name).shape == (0, 3)
    east, north, up = COMPLETE.displacement(NIGHT[2], name, frame="enu")
    assert np.hypot(np.hypot(east, north), up) == pytest.approx(np.linalg.norm(one), rel=1e-12)
    assert up == pytest.approx(one @ COMPLETE.up, abs=1e-12)


def test_published_ocean_loading_through_the_front_door() -> None:
    """Onsala at every hour given; the source is in ocean_case. Its 6 digits are met to 2.2 um:

    the published numbers take UTC for the argument of Sun and Moon (see test_loading).
    """
    onsala = lt.Station.from_geodetic(
        "Onsala", 57.3958, 11.9264, 0.0, ocean_loading=OceanLoading(AMPLITUDES_M, PHASES_DEG)
    )
    when = lt.Epoch(2455007.5, DISPLACEMENTS_M[:, 0] / 24.0, "utc")
    east, north, up = onsala.displacement(when, "ocean_loading", frame="enu").T
    found = np.stack([up, -north, -east], axis=-1)
    assert np.abs(found - DISPLACEMENTS_M[:, 1:]).max() < 2.5e-6


def test_other_data_can_be_given() -> None:
    fixed = lt.EarthOrientation.fixed(0.1, 0.2, 0.4)
    bundled = COMPLETE.displacement(NIGHT[1], "pole_tide")
    assert (
        np.abs(
            COMPLETE.displacement(NIGHT[1], "pole_tide", earth_orientation=fixed) - bundled
        ).max()
        > 1e-4
    )
    tide = COMPLETE.displacement(NIGHT[1], "solid_earth_tide", ephemeris=lt.Ephemeris.default())
    np.testing.assert_array_equal(tide, COMPLETE.displacement(NIGHT[1], "solid_earth_tide"))
    assert COMPLETE.displacement("2045-01-01", "pole_tide", earth_orientation=fixed).shape == (3,)


@pytest.mark.parametrize(
    ("station", "arguments", "error", "message"),
    [
        (
            HILLTOP,
            (NIGHT[0], "ocean_loading"),
            lt.InputError,
            "ocean_loading is None; .*not modelled",
        ),
        (HILLTOP, (NIGHT[0], "residual_motion"), lt.InputError, "residual_motion is None"),
        (
            COMPLETE,
            (NIGHT[0], "ocean_tide"),
            lt.UnknownNameError,
            "did you mean ocean_pole_tide or",
        ),
        (COMPLETE, (NIGHT[0], "pole_tide", "neu"), lt.UnknownNameError, "did you mean enu"),
        (COMPLETE, ("2045-01-01", "pole_tide"), lt.CoverageError, "epoch is .2045-01-01"),
        (COMPLETE, ("2020-08-01", "residual_motion"), lt.CoverageError, "when is .2020-08-01"),
        (COMPLETE, ("soon", "pole_tide"), lt.InputError, "'soon'"),
    ],
)
def test_bad_input_is_named(
    station: lt.Station, arguments: Any, error: type[Exception], message: str
) -> None:
    with pytest.raises(error, match=message):
        station.displacement(*arguments)


# -- in words ------------------------------------------------------------------------------------


def test_sources() -> None:
    assert COMPLETE.displacement_source("ocean_pole_tide") == (
        "IERS Conventions (2010), TN36, 7.1.5; coefficients: invented"
    )
    assert COMPLETE.displacement_source("residual_motion") == (
        "supplied by the user, linear between its instants; series: invented"
    )
    assert HILLTOP.displacement_source("ocean_loading").endswith("not modelled: nothing was given")
    with pytest.raises(lt.UnknownNameError, match="did you mean pole_tide"):
        HILLTOP.displacement_source("pole_tides")


@pytest.mark.parametrize(
    ("centre_of_mass", "said"),
    [(True, "contained in the"), (False, "not contained in the"), (None, "do not say whether")],
)
def test_the_geocentre_is_told_of(model: lt.Model, centre_of_mass: bool | None, said: str) -> None:
    ocean = OceanLoading(AMPLITUDES_M, PHASES_DEG, "a model", centre_of_mass)
    station = lt.Station("Hilltop", HILLTOP.xyz_m, ocean_loading=ocean)
    assert said in station.displacement_source("ocean_loading")
    assert said in alone.geocentre(station)[1]
    assert "centre of mass of the whole Earth" in alone.geocentre(HILLTOP)[0]
    assert "not modelled, up to 1 cm" in alone.geocentre(HILLTOP)[1]
    notes = " ".join(model.round_trip(NIGHT[0], station, APOLLO_15).notes)
    assert ("motion of the geocentre" in notes) is not (centre_of_mass is True)


# -- conveniences --------------------------------------------------------------------------------


def test_coefficients_from_files(tmp_path: Path) -> None:
    (tmp_path / "all.blq").write_text(f"$$ CMC: NO\n  HILLTOP\n{ROWS}")
    (tmp_path / "motion.csv").write_text(
        "utc,east_mm,north_mm,up_mm\n2020-01-01,0,0,0\n2021-01-01,1,2,3\n"
    )
    station = HILLTOP.with_blq(tmp_path / "all.blq").with_residual_motion(tmp_path / "motion.csv")
    assert station.ocean_loading is not None
    assert station.ocean_loading.centre_of_mass is False
    np.testing.assert_array_equal(station.ocean_loading.amplitudes_m, AMPLITUDES_M)
    assert station.displacement("2021-01-01", "residual_motion", frame="enu")[2] == pytest.approx(
        0.003, abs=1e-12
    )
    assert HILLTOP.ocean_loading is None
    with pytest.raises(lt.UnknownNameError, match="did you mean HILLTOP"):
        HILLTOP.with_blq(tmp_path / "all.blq", "HILTOP")
    (tmp_path / "hilltop.toml").write_text(
        'name = "Hilltop"\nlatitude_deg = 46.2\nlongitude_deg = 7.1\nheight_m = 2310\n'
    )
    assert lt.Station.from_file(tmp_path / "hilltop.toml") == HILLTOP


def test_sinex_and_residual_motion_in_a_station_file(tmp_path: Path) -> None:
    (tmp_path / "all.snx").write_text(written(blocks([HILL, MESA])))
    (tmp_path / "motion.csv").write_text(
        "utc,east_mm,north_mm,up_mm\n2020-01-01,0,0,0\n2021-01-01,1,2,3\n"
    )
    path = tmp_path / "hilltop.toml"
    sinex = 'name = "Hilltop"\n[sinex]\nfile = "all.snx"\nsite = "HILL"\n'
    motion = '[residual_motion]\ncsv = "motion.csv"\n'
    for choice in ("solution = 2", 'solution = "2"', 'when = "2005-01-01"'):
        path.write_text(f"{sinex}{choice}\npoint = 'A'\neccentricity = false\n{motion}")
        station = lt.Station.from_file(path)
        assert station.name == "Hilltop"
        assert station.xyz_m == pytest.approx(HILL.position(2), abs=1e-8)
        assert "all.snx: HILL A 10002M001, solution 2" in station.source
        assert station.residual_motion is not None
    for text, line, message in (
        (sinex, 2, r"\[sinex\] solution is None; allowed: a solution of HILL or when"),
        (sinex + "solution = 3\n", 2, r"solution of HILL is '3'"),
        (sinex + "solution = 2.5\n", 5, r"solution is 2\.5; allowed: text in quotes"),
        (sinex + "sollution = 2\n", 5, "did you mean solution"),
        (sinex + 'discontinuities = "none.snx"\n', None, "none.snx: cannot be read: No such file"),
        (sinex.replace("HILL", "HULL"), 2, "site in all.snx is 'HULL'; .*did you mean HILL"),
        (sinex.replace("[sinex]", "height_m = 1.0\n[sinex]"), 2, r"height_m and \[sinex\]: a pos"),
        (sinex + "solution = 2\n[residual_motion]\nfile = 'motion.csv'\n", 7, "key is 'file'"),
        (sinex + "solution = 2\n[residual_motion]\ncsv = 'none.csv'\n", None, "No such file"),
    ):
        path.write_text(text)
        with pytest.raises(lt.FileError, match=message) as caught:
            lt.Station.from_file(path)
        assert caught.value.line == line


def test_a_station_is_a_value() -> None:
    again = pickle.loads(pickle.dumps(COMPLETE))
    assert again == COMPLETE
    assert hash(again) == hash(COMPLETE)
    assert HILLTOP != COMPLETE


def test_angles_in_radians() -> None:
    station = lt.Station.from_geodetic("Hilltop", 46.2, -7.1, 2310.0)
    assert station.latitude_rad == pytest.approx(np.radians(46.2), abs=1e-15)
    assert station.longitude_rad == pytest.approx(np.radians(-7.1), abs=1e-15)
