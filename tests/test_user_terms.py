"""Delay terms of one's own: in the range, its terms, its derivatives; and what is refused."""

from __future__ import annotations

import pickle
from typing import Any

import numpy as np
import pytest

import lighttime as lt
from lighttime.vectors import dot

C = 299792458.0
STATION = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
REFLECTOR = lt.reflector("Apollo 15")
WEATHER = lt.Weather(770.0, 280.0, 0.4)
WHEN = lt.Epoch(2458910.5, np.array([18.0, 20.0, 22.0]) / 24.0, "utc")


def wind(ray: lt.Ray, along: float, squared: float) -> np.ndarray:
    """A light that is dragged along with the Earth; a test of a preferred frame."""
    earth = ray.body("earth")[1]
    towards = dot(ray.direction, earth) / C
    flight: np.ndarray = ray.distance_m / C
    return flight * (along * towards + squared * dot(earth, earth) / C**2)


def mist(ray: lt.Ray, thickness_m: float) -> Any:
    """A layer above the station."""
    return thickness_m / np.sin(ray.elevation_rad) / C


WIND = lt.DelayTerm("wind", wind, {"along": 1e-7, "squared": 2e-4})
MIST = lt.DelayTerm("mist", mist, {"thickness_m": 0.01})


def ask(model: lt.Model, **more: Any) -> lt.RoundTrip:
    return model.round_trip(WHEN, STATION, REFLECTOR, weather=WEATHER, **more)


@pytest.mark.parametrize("tag", ["transmit", "bounce", "receive"])
def test_a_term_moves_the_events_as_a_built_in_one_does(tag: str) -> None:
    with_it, without = ask(lt.Model(delays=[MIST]), tag=tag), ask(lt.Model(), tag=tag)
    longer = with_it.seconds - without.seconds
    np.testing.assert_allclose(longer, with_it.terms["mist"], rtol=0, atol=2e-15)
    # two legs of 0.01 m over the sine of the elevation
    sines = np.sin(np.deg2rad([with_it.uplink.elevation_deg, with_it.downlink.elevation_deg]))
    np.testing.assert_allclose(longer, np.sum(0.01 / sines / C, axis=0), rtol=1e-4)
    np.testing.assert_allclose(with_it.uplink.own["mist"], 0.01 / sines[0] / C, rtol=1e-9)


def test_terms_still_add_up_and_are_told_last() -> None:
    answer = ask(lt.Model(delays=[WIND, MIST]))
    assert tuple(answer.terms)[-3:] == ("clock", "wind", "mist")
    np.testing.assert_allclose(sum(answer.terms.values()), answer.seconds, rtol=0, atol=1e-15)
    assert "wind" in str(ask(lt.Model(delays=[WIND])))
    assert "term_mist" in answer.table().colnames


def test_left_out_by_its_name() -> None:
    model = lt.Model(delays=[WIND, MIST], omit=["wind"])
    answer = ask(model)
    assert "wind" not in answer.terms
    np.testing.assert_array_equal(answer.partials(["wind.along"])["wind.along"], 0.0)
    with pytest.raises(lt.UnknownNameError, match="did you mean wind"):
        lt.Model(delays=[WIND], omit=["wynd"])
    with pytest.raises(lt.UnknownNameError):
        lt.Model(omit=["wind"])


@pytest.mark.parametrize(("name", "step"), [("along", 1e-4), ("squared", 1e-1)])
def test_derivatives_by_its_parameters(name: str, step: float) -> None:
    model = lt.Model(delays=[WIND])

    def ranges(h: float) -> np.ndarray:
        term = lt.DelayTerm("wind", wind, WIND.values | {name: WIND.values[name] + h})
        answer = ask(lt.Model(delays=[term]))
        return answer.seconds + answer.seconds_low

    slopes = ask(model).partials()
    expected = (ranges(step) - ranges(-step)) / (2.0 * step)
    size = np.abs(expected).max()
    np.testing.assert_allclose(
        slopes[f"wind.{name}"], expected, rtol=0, atol=1e-7 * size + 2e-15 / step
    )
    assert slopes.notes[f"wind.{name}"].startswith("central differences, steps ")


def test_one_way() -> None:
    model = lt.Model(delays=[MIST])
    answer = model.one_way(WHEN, STATION, REFLECTOR)
    np.testing.assert_allclose(answer.terms["mist"], answer.leg.own["mist"], rtol=1e-12)


def test_what_a_term_is_told() -> None:
    seen: dict[bool, lt.Ray] = {}

    def listens(ray: lt.Ray) -> float:
        seen[ray.upward] = ray
        return 0.0

    answer = lt.Model(delays=[lt.DelayTerm("listens", listens)]).round_trip(
        WHEN, STATION, REFLECTOR
    )
    assert set(seen) == {True, False}
    sheet = answer.worksheet()
    up, down = seen[True], seen[False]
    np.testing.assert_allclose(
        up.near_epoch.seconds_since(WHEN.to("tdb", place=STATION)), 0.0, atol=2e-8, rtol=0
    )
    np.testing.assert_allclose(
        down.near_epoch.seconds_since(up.near_epoch), answer.uplink.seconds
        + answer.downlink.seconds, atol=1e-9,
    )  # fmt: skip
    np.testing.assert_allclose(up.seconds, answer.uplink.seconds, atol=1e-9)
    np.testing.assert_allclose(down.seconds, answer.downlink.seconds, atol=1e-9)
    np.testing.assert_allclose(up.distance_m / C, answer.uplink.geometry, atol=1e-9)
    np.testing.assert_allclose(up.far_m - up.near_m, up.separation_m, atol=1e-4)
    np.testing.assert_allclose(dot(up.direction, up.direction), 1.0, atol=1e-14)
    assert np.all(dot(up.direction, down.direction) < -0.999999)
    np.testing.assert_array_equal(up.near_velocity, sheet["t1.velocity_m_per_s"])
    ephemeris = lt.Ephemeris.default()
    tdb = WHEN.to("tdb", place=STATION)
    earth = ephemeris.barycentric_body("earth", tdb.jd1, tdb.jd2)[0]
    np.testing.assert_allclose(up.body("earth")[0], earth, atol=1e-2)
    # the station is on the Earth, the reflector on the Moon
    assert np.all(np.abs(np.linalg.norm(up.near_m - up.body("earth")[0], axis=0) - 6.37e6) < 2e4)
    moon = np.linalg.norm(down.far_m - down.body("moon")[0], axis=0)
    assert np.all(np.abs(moon - 1.7374e6) < 5e4)  # which has moved on since the bounce
    np.testing.assert_allclose(np.rad2deg(up.elevation_rad), answer.uplink.elevation_deg)
    with pytest.raises(lt.UnknownNameError, match="did you mean moon"):
        up.body("mooon")


def test_models_with_terms_are_values() -> None:
    model = lt.Model(delays=[WIND])
    assert model == lt.Model(delays=[lt.DelayTerm("wind", wind, dict(WIND.parameters))])
    assert model != lt.Model(delays=[MIST])
    again = pickle.loads(pickle.dumps(model))
    assert again == model
    np.testing.assert_array_equal(ask(again).seconds, ask(model).seconds)


# -- what is refused -----------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["troposphere", "moon", "two words", ""])
def test_names_that_are_taken_or_none(name: str) -> None:
    with pytest.raises(lt.InputError, match="a Python name not in use yet"):
        lt.DelayTerm(name, mist)


def test_parameters_that_cannot_be() -> None:
    with pytest.raises(lt.InputError, match="parameters of mist: thickness_m is nan"):
        lt.DelayTerm("mist", mist, {"thickness_m": np.nan})
    with pytest.raises(lt.InputError, match="a finite number, 0 or more"):
        lt.DelayTerm("mist", mist, {"thickness_m": 0.1}, {"thickness_m": -0.1})
    with pytest.raises(lt.UnknownNameError, match="did you mean thickness_m"):
        lt.DelayTerm("mist", mist, {"thickness_m": 0.1}, {"thickness": 0.1})
    with pytest.raises(lt.InputError, match="a function of a Ray"):
        lt.DelayTerm("mist", 3.0)  # type: ignore[arg-type]
    with pytest.raises(lt.InputError, match="a name that only one of the terms has"):
        lt.Model(delays=[MIST, MIST])
    with pytest.raises(lt.InputError, match="DelayTerm objects"):
        lt.Model(delays=[mist])  # type: ignore[list-item]


@pytest.mark.parametrize(
    ("value", "said"),
    [
        (np.nan, "delay of odd is nan; allowed: below 1 s, and finite"),
        (3.0, r"delay of odd is 3\.0; allowed: below 1 s"),
        (np.zeros((2, 2)), r"an array of shape \(2, 2\)"),
        ("late", "numbers of shape"),
    ],
)
def test_delays_that_are_none(value: Any, said: str) -> None:
    model = lt.Model(delays=[lt.DelayTerm("odd", lambda ray: value)])
    with pytest.raises(lt.InputError, match=said):
        ask(model)


def test_a_function_without_a_derivative() -> None:
    def jumps(ray: lt.Ray, a: float) -> float:
        return 1e-9 * np.sign(a) * abs(a) ** 0.3

    answer = ask(lt.Model(delays=[lt.DelayTerm("jumps", jumps, {"a": 0.0})]))
    with pytest.raises(lt.InputError, match="not smooth in a"):
        answer.partials(["jumps.a"])
