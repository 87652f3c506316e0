"""The range end to end: published ranges, identities between its parts, and what it refuses."""

from __future__ import annotations

import pickle
from datetime import datetime
from typing import Any

import numpy as np
import pytest

import lighttime as lt

c = 299792458.0

STATION = lt.Station(
    "test station of the published ranges",
    xyz_m=(-1463998.9085, -5166632.7635, 3435012.8835),
    velocity_m_per_yr=(-0.0141, 0.0008, -0.0015),
    epoch=2000.0,
)
"""ITRF coordinates that go with the published ranges (from memory)."""

HILLTOP = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
APOLLO_15 = lt.reflector("Apollo 15")
WEATHER = lt.Weather(780.0, 280.0, 0.4)
NIGHT = ["2020-03-01T18:00:00", "2020-03-01T19:30:00", "2020-03-01T21:00:00.123456789012"]


@pytest.fixture(scope="module")
def model() -> lt.Model:
    return lt.Model()


@pytest.mark.parametrize(
    ("when", "measured", "weather"),
    [
        ("2008-03-30T12:39:50.000", 2.6170710379889, lt.Weather(724.39, 268.05, 0.34)),
        ("2006-04-07T06:26:30.000", 2.6494326499837, lt.Weather(725.0, 278.15, 0.30)),
    ],
)
def test_published_normal_points(
    model: lt.Model, when: str, measured: float, weather: lt.Weather
) -> None:
    """Measured ranges to Apollo 15, 532 nm.

    Source: T. W. Murphy, UC San Diego, the example of a normal-point record, and the archive of
    the same project (weather of the second assumed). The array's coordinates are those of
    another ephemeris, an inconsistency of up to about a metre: -0.57 and -0.79 m are found.
    """
    answer = model.round_trip(when, STATION, APOLLO_15, weather=weather)
    assert abs(measured - answer.seconds) * c / 2 < 0.85


def test_terms_add_up(model: lt.Model) -> None:
    answer = model.round_trip(NIGHT, HILLTOP, APOLLO_15, weather=WEATHER)
    assert np.abs(sum(answer.terms.values()) - answer.seconds).max() < 1e-15
    assert list(answer.terms) == [t for t in lt.TERMS if t in answer.terms]
    legs = answer.uplink.seconds + answer.downlink.seconds + answer.terms["clock"]
    assert np.abs(legs - answer.seconds).max() < 1e-15


@pytest.mark.parametrize("tag", ["transmit", "bounce", "receive"])
@pytest.mark.parametrize("name", [t for t in lt.TERMS if t != "geometry"])
def test_leaving_a_term_out_takes_it_away(model: lt.Model, name: str, tag: str) -> None:
    """`seconds` moves by the term within 0.05 ps (measured; the worst is the sub-daily term)."""
    answer = model.round_trip(NIGHT, HILLTOP, APOLLO_15, tag=tag, weather=WEATHER)
    without = lt.Model(omit=name).round_trip(NIGHT, HILLTOP, APOLLO_15, tag=tag, weather=WEATHER)
    assert name not in without.terms
    term = answer.terms.get(name, np.zeros(3))
    if name in ("ocean_loading", "ocean_pole_tide", "atmosphere_loading"):
        assert name in answer.not_modelled
        assert name not in without.not_modelled
    elif name == "residual_motion":  # the user's own, of which no range need have any
        assert name not in (*answer.terms, *answer.not_modelled)
    else:
        assert np.abs(term).max() > 1e-13
    assert np.abs(answer.seconds - without.seconds - term).max() < 5e-14


def test_tags_tell_of_the_same_photons(model: lt.Model) -> None:
    """Transmission, bounce and reception of one pulse, each told by its own instant."""
    sent = lt.Epoch.parse(NIGHT[1])
    transmit = model.round_trip(sent, HILLTOP, APOLLO_15, weather=WEATHER)
    back = model.round_trip(
        sent.shift(transmit.seconds), HILLTOP, APOLLO_15, tag="receive", weather=WEATHER
    )
    assert abs(back.seconds - transmit.seconds) < 2e-15
    sheet = transmit.worksheet()
    to_bounce = sheet["t2.seconds_after_tag"][0]
    # TDB seconds and UTC seconds of the bounce differ by 1e-9 at most: no effect on the range
    bounce = model.round_trip(
        sent.shift(to_bounce), HILLTOP, APOLLO_15, tag="bounce", weather=WEATHER
    )
    assert abs(bounce.seconds - transmit.seconds) < 3e-15


def test_scalars_and_shapes(model: lt.Model) -> None:
    one = model.round_trip(NIGHT[0], HILLTOP, APOLLO_15)
    assert type(one.seconds) is float
    assert type(one.terms["geometry"]) is float
    assert type(one.uplink.elevation_deg) is float
    many = model.round_trip(np.array([NIGHT, NIGHT]), HILLTOP, APOLLO_15)
    assert many.seconds.shape == (2, 3)
    assert many.downlink.gravity["sun"].shape == (2, 3)
    assert many.seconds[1, 0] == one.seconds
    none = model.round_trip(lt.Epoch(np.zeros(0), np.zeros(0), "utc"), HILLTOP, APOLLO_15)
    assert none.seconds.shape == (0,)


def test_weather_along_the_epochs(model: lt.Model) -> None:
    weather = lt.Weather(np.array([780.0, 781.0, 782.0]), 280.0, 0.4)
    answer = model.round_trip(NIGHT, HILLTOP, APOLLO_15, weather=weather)
    alone = model.round_trip(NIGHT[2], HILLTOP, APOLLO_15, weather=lt.Weather(782.0, 280.0, 0.4))
    assert answer.seconds[2] == pytest.approx(alone.seconds, abs=1e-15)
    with pytest.raises(lt.InputError, match=r"weather is 'values of shape \(3,\)'"):
        model.round_trip(NIGHT[:2], HILLTOP, APOLLO_15, weather=weather)


def test_pair_of_floats_continues_the_answer(model: lt.Model) -> None:
    answer = model.round_trip(NIGHT, HILLTOP, APOLLO_15)
    assert np.abs(answer.seconds_low).max() <= 2.3e-16
    assert np.abs(answer.seconds_low).max() > 0.0


def test_gamma_scales_gravity(model: lt.Model) -> None:
    a = model.round_trip(NIGHT, HILLTOP, APOLLO_15).terms
    b = lt.Model(gamma=0.0).round_trip(NIGHT, HILLTOP, APOLLO_15).terms
    for term in ("sun_gravity", "earth_gravity", "moon_gravity", "planet_gravity"):
        assert b[term] == pytest.approx(0.5 * a[term], rel=1e-9)


def test_sizes(model: lt.Model) -> None:
    """Sizes of each term over a month, above the horizon (common practice, from memory)."""
    when = lt.Epoch(2458900.5 + np.arange(0.0, 29.0, 0.37), np.zeros(79), "utc")
    when = when[model.round_trip(when, HILLTOP, APOLLO_15).uplink.elevation_deg > 15.0]
    answer = model.round_trip(when, HILLTOP, APOLLO_15)
    up = answer.uplink
    assert 1.17 < up.geometry.min() < up.geometry.max() < 1.36
    # 9.85 us x 2 r12 / (r1 + r2 - r12), with 357 000 to 406 000 km at 0.983 to 1.017 AU
    assert 23e-9 < up.gravity["sun"].min() < up.gravity["sun"].max() < 28e-9
    assert 0.11e-9 < up.gravity["earth"].min() < up.gravity["earth"].max() < 0.19e-9
    assert 1.5e-12 < up.gravity["moon"].min() < up.gravity["moon"].max() < 2.5e-12
    mm = {name: np.abs(value).max() * c / 2 * 1e3 for name, value in answer.terms.items()}
    assert 100.0 < mm["solid_earth_tide"] < 450.0
    assert 300.0 < mm["lunar_tide"] < 600.0
    assert 1.0 < mm["pole_tide"] < 30.0
    assert 2.0 < mm["subdaily_rotation"] < 20.0
    assert 60.0 < mm["clock"] < 200.0


# -- other ends ------------------------------------------------------------------------------


class Beside:
    """A trajectory that repeats another end: where a solved event was."""

    name = "Beside"

    def __init__(self, ephemeris: lt.Ephemeris, with_velocity: bool) -> None:
        self.ephemeris = ephemeris
        self.with_velocity = with_velocity

    def bcrs(self, when: lt.Epoch) -> Any:
        position, velocity = self.ephemeris.barycentric_body("moon", when.jd1, when.jd2)
        return (position.T, velocity.T) if self.with_velocity else position.T


@pytest.mark.parametrize("with_velocity", [True, False])
def test_one_way_from_a_planet_sized_trajectory(model: lt.Model, with_velocity: bool) -> None:
    """Light time from the Moon's centre against jplephem and a fixed-point iteration."""
    moon = Beside(model.ephemeris, with_velocity)
    quiet = lt.Model(omit=[t for t in lt.TERMS if t.endswith("_gravity")])
    answer = quiet.one_way(NIGHT[0], moon, HILLTOP)
    sheet = quiet.round_trip(NIGHT[0], HILLTOP, moon, tag="bounce")
    assert answer.seconds == pytest.approx(sheet.downlink.seconds, abs=2e-9)
    earth = Earth(model.ephemeris)
    geocentric = quiet.one_way(NIGHT[0], moon, earth).seconds
    tdb = lt.Epoch.parse(NIGHT[0]).to("tdb")
    tau = 1.3
    for _ in range(20):
        there, _ = model.ephemeris.barycentric_body("moon", tdb.jd1, tdb.jd2)
        here, _ = model.ephemeris.earth(tdb.jd1, tdb.jd2, tau)
        tau = float(np.linalg.norm(here - there)) / c
    assert geocentric == pytest.approx(tau, abs=1e-12)


class Earth:
    """The geocentre as an end."""

    name = "geocentre"

    def __init__(self, ephemeris: lt.Ephemeris) -> None:
        self.ephemeris = ephemeris

    def bcrs(self, when: lt.Epoch) -> Any:
        position, velocity = self.ephemeris.earth(when.jd1, when.jd2)
        return position.T, velocity.T


def test_there_and_back_one_way_at_a_time(model: lt.Model) -> None:
    trip = model.round_trip(NIGHT[0], HILLTOP, APOLLO_15, weather=WEATHER)
    up = model.one_way(NIGHT[0], HILLTOP, APOLLO_15, weather=WEATHER)
    assert up.seconds == pytest.approx(trip.uplink.seconds, abs=2e-15)
    assert sum(up.terms.values()) == pytest.approx(up.seconds, abs=1e-15)
    received = lt.Epoch.parse(NIGHT[0]).shift(trip.seconds)
    down = model.one_way(received, APOLLO_15, HILLTOP, tag="receive", weather=WEATHER)
    assert down.seconds == pytest.approx(trip.downlink.seconds, abs=2e-15)


@pytest.mark.parametrize("tag", ["transmit", "bounce", "receive"])
def test_turnaround_is_in_the_answer(model: lt.Model, tag: str) -> None:
    """A transponder that waits 0.1 s: the answer grows by it and by what the ends move."""
    at_once = model.round_trip(NIGHT[0], HILLTOP, APOLLO_15, tag=tag)
    later = model.round_trip(NIGHT[0], HILLTOP, APOLLO_15, tag=tag, turnaround_s=0.1)
    assert later.seconds - at_once.seconds == pytest.approx(0.1, abs=3e-7)
    assert sum(later.terms.values()) == pytest.approx(later.seconds, abs=1e-15)


# -- what a person sees ------------------------------------------------------------------------


def test_printed_form(model: lt.Model) -> None:
    text = str(model.round_trip(NIGHT[0], HILLTOP, APOLLO_15))
    assert "Round trip Hilltop - Apollo 15" in text
    assert "not modelled (nothing was given): troposphere, ocean_loading" in text
    assert "ephemeris DE421: 1899-12-04 to 2200-02-01" in text
    assert "up to about a metre" in text
    omitting = lt.Model(omit=("clock", "pole_tide"))
    assert "left out on request: clock, pole_tide" in str(
        omitting.round_trip(NIGHT[0], HILLTOP, APOLLO_15)
    )
    many = str(model.round_trip(lt.Epoch(2458900.5 + np.arange(20.0), np.zeros(20), "utc"),
                                HILLTOP, APOLLO_15))  # fmt: skip
    assert "20 epochs, transmit" in many
    assert many.count("2020-0") == 10


def test_predictions_are_said(model: lt.Model) -> None:
    last = model.earth_orientation.last_measured_mjd
    when = lt.Epoch(2400000.5 + last + 20.0, 0.0, "utc")
    notes = " ".join(model.round_trip(when, HILLTOP, APOLLO_15).notes)
    assert "pole and UT1 are predicted: the last measured day is" in notes


def test_table_has_units(model: lt.Model) -> None:
    from astropy import units

    table = model.round_trip(NIGHT, HILLTOP, APOLLO_15, weather=WEATHER).table()
    assert len(table) == 3
    assert table["light_time"].unit == units.s
    assert table["elevation_uplink"].unit == units.deg
    assert table["term_troposphere"].unit == units.s
    assert table["epoch_utc"][2] == NIGHT[2]


def test_worksheet_ends_in_the_answer(model: lt.Model) -> None:
    answer = model.round_trip(NIGHT, HILLTOP, APOLLO_15, weather=WEATHER)
    sheet = answer.worksheet()
    assert np.array_equal(sheet["answer_s"], answer.seconds)
    legs = sheet["uplink.distance_m"] / c
    assert np.abs(legs - answer.uplink.geometry).max() == 0.0
    for name in ("t1.x_rad", "t1.era_rad", "t3.gcrs_m", "t2.libration_rad", "downlink.sun_s"):
        assert name in sheet


# -- values ------------------------------------------------------------------------------------


def test_model_is_a_value(model: lt.Model) -> None:
    assert lt.Model() == model
    assert hash(lt.Model()) == hash(model)
    copy = pickle.loads(pickle.dumps(lt.Model(omit=("clock",), gamma=0.5)))
    assert copy == lt.Model(omit=["clock"], gamma=0.5)
    with pytest.raises(AttributeError):
        model.gamma = 2.0  # type: ignore[misc]


def test_answers_cannot_be_written_to(model: lt.Model) -> None:
    answer = model.round_trip(NIGHT, HILLTOP, APOLLO_15)
    with pytest.raises(ValueError, match="read-only"):
        answer.seconds[0] = 0.0


def test_progress_counts_epochs(model: lt.Model) -> None:
    seen: list[tuple[int, int]] = []
    model.round_trip(NIGHT, HILLTOP, APOLLO_15, progress=lambda a, b: seen.append((a, b)))
    assert seen == [(3, 3)]


# -- what is refused -----------------------------------------------------------------------------

MOONLESS = "2020-03-01T06:00:00"


@pytest.mark.parametrize(
    ("arguments", "more", "message"),
    [
        (("1950-01-01", HILLTOP, APOLLO_15), {}, r"1960"),
        (("2060-01-01", HILLTOP, APOLLO_15), {}, r"allowed: 1962-01-01 to 20\d\d-"),
        (("2020-06-30T23:59:60", HILLTOP, APOLLO_15), {}, r"60"),
        ((datetime(2020, 1, 1), HILLTOP, APOLLO_15), {}, r"naive|time ?zone|aware"),
        ((NIGHT[0], HILLTOP, APOLLO_15), {"tag": "recieve"}, r"tag is 'recieve'.*receive"),
        ((NIGHT[0], HILLTOP, APOLLO_15), {"turnaround_s": -1.0}, r"turnaround_s is -1\.0"),
        ((NIGHT[0], HILLTOP, APOLLO_15), {"weather": (780, 280, 0.4)}, r"weather is .*a Weather"),
        ((NIGHT[0], HILLTOP, "Apollo 15"), {}, r"reflector is 'Apollo 15'; allowed: a Station, "),
        ((NIGHT[0], "Hilltop", APOLLO_15), {}, r"station is 'Hilltop'; allowed: a Station"),
        ((NIGHT[0], HILLTOP, HILLTOP), {}, r"reflector is .*Station"),
        ((MOONLESS, HILLTOP, APOLLO_15), {"weather": WEATHER},
         r"elevation_deg at 2020-03-01T06:00:00.* UTC is -\d+.*below the horizon"),
        ((NIGHT[0], HILLTOP, APOLLO_15), {"weather": WEATHER, "wavelength_nm": 0.532},
         r"wavelength_nm is 0\.532"),
    ],
)  # fmt: skip
def test_bad_input_is_named(
    model: lt.Model, arguments: Any, more: dict[str, Any], message: str
) -> None:
    with pytest.raises(lt.LighttimeError, match=message):
        model.round_trip(*arguments, **more)


def test_below_the_horizon_geometry_alone_answers(model: lt.Model) -> None:
    answer = model.round_trip(MOONLESS, HILLTOP, APOLLO_15)
    assert answer.uplink.elevation_deg < 0.0
    asked = lt.Model(omit="troposphere").round_trip(MOONLESS, HILLTOP, APOLLO_15, weather=WEATHER)
    assert asked.seconds == answer.seconds


def test_the_epoch_below_the_horizon_is_named(model: lt.Model) -> None:
    """In an array the lowest of them, wherever it stands."""
    when = [NIGHT[0], MOONLESS, NIGHT[1]]
    with pytest.raises(lt.HorizonError, match=r"elevation_deg at 2020-03-01T06:00:00"):
        model.round_trip(when, HILLTOP, APOLLO_15, weather=WEATHER)


def test_outside_the_ephemeris(model: lt.Model) -> None:
    """With a fixed Earth orientation any date goes, and the ephemeris sets the limit."""
    fixed = lt.Model(earth_orientation=lt.EarthOrientation.fixed(0.0, 0.0, 0.0, 0.0, 0.0))
    assert fixed.round_trip("2045-06-01", HILLTOP, APOLLO_15).seconds > 2.3
    late = lt.Epoch(2524630.5, 0.0, "tt")
    message = r"when is '2200-\d\d-\d\dT.* TT'; allowed: 1899-12-04.* the span of DE421"
    with pytest.raises(lt.CoverageError, match=message):
        fixed.round_trip(late, HILLTOP, APOLLO_15)


@pytest.mark.parametrize(
    ("omit", "message"),
    [("geometry", "omit is 'geometry'"), ("sun_gravty", "did you mean sun_gravity")],
)
def test_terms_that_cannot_be_left_out(omit: str, message: str) -> None:
    with pytest.raises(lt.InputError, match=message):
        lt.Model(omit=omit)


def test_numbers_of_the_model_are_finite() -> None:
    with pytest.raises(lt.InputError, match="gamma is nan"):
        lt.Model(gamma=float("nan"))


@pytest.mark.parametrize(
    ("xyz", "message"),
    [
        ((4389.8, 546.8, 4582.4), "within 100 km of the ellipsoid"),
        ((4.4e6, 5.5e5, float("nan")), "finite"),
        ((4.4e6, 5.5e5), "three numbers"),
        ((5.4e6, 5.5e5, 4.6e6), "within 100 km of the ellipsoid"),
    ],
)
def test_places_that_are_no_station(xyz: Any, message: str) -> None:
    with pytest.raises(lt.InputError, match=message):
        lt.Station("nowhere", xyz)


@pytest.mark.parametrize(
    ("field", "value"),
    [("latitude_deg", 91.0), ("longitude_deg", 400.0), ("height_m", 2e5)],
)
def test_geodetic_coordinates_out_of_range(field: str, value: float) -> None:
    place = {"latitude_deg": 46.2, "longitude_deg": 7.1, "height_m": 2310.0} | {field: value}
    with pytest.raises(lt.InputError, match=f"{field} is {value}"):
        lt.Station.from_geodetic("nowhere", **place)


class Broken:
    name = "broken"

    def __init__(self, value: Any) -> None:
        self.value = value

    def bcrs(self, when: lt.Epoch) -> Any:
        return self.value


@pytest.mark.parametrize("value", [np.full((1, 3), np.nan), np.zeros(3), np.zeros((2, 3))])
def test_trajectories_that_are_none(model: lt.Model, value: Any) -> None:
    with pytest.raises(lt.InputError, match=r"bcrs\(\) of broken is .*finite numbers of shape"):
        model.one_way(NIGHT[0], HILLTOP, Broken(value))
