"""Ranges with tables are ranges without: to the femtosecond, in any order, from any thread."""

from __future__ import annotations

import pickle
from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pytest

import lighttime as lt

HILLTOP = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
ARRAY = lt.reflector("Lunokhod 2")
LEAP_DAY = 2457753.5  # 2016-12-31, 86401 s long


def night(count: int) -> lt.Epoch:
    """Two days around a leap second and a midnight."""
    return lt.Epoch(np.full(count, LEAP_DAY), np.linspace(0.2, 1.9, count), "utc")


@pytest.fixture(scope="module")
def tabulated() -> lt.RoundTrip:
    return lt.Model().round_trip(night(600), HILLTOP, ARRAY)


def test_tables_were_built(tabulated: lt.RoundTrip) -> None:
    told = tabulated.model.tables()
    assert "Hilltop: 2 days built, 22 terms each" in told
    assert "left out:" in told


@pytest.mark.parametrize("tag", ["transmit", "bounce", "receive"])
def test_tables_change_nothing(tag: str) -> None:
    """One epoch at a time nothing is tabulated: 0.9 fs, two units in the last place, measured."""
    many = lt.Model().round_trip(night(600), HILLTOP, ARRAY, tag=tag)
    bare = lt.Model()
    for k in range(0, 600, 37):
        alone = bare.round_trip(many.query.when[k], HILLTOP, ARRAY, tag=tag)
        assert abs(alone.seconds - many.seconds[k]) < 1.4e-15
        for name, value in alone.terms.items():
            assert abs(value - many.terms[name][k]) < 2e-15
    assert "0 days built" in bare.tables()


def test_order_does_not_matter(tabulated: lt.RoundTrip) -> None:
    shuffle = np.random.default_rng(3).permutation(600)
    when = night(600)[shuffle]
    weather = lt.Weather(np.linspace(760.0, 780.0, 600)[shuffle], 280.0, 0.4)
    quiet = lt.Model(omit="troposphere").round_trip(when, HILLTOP, ARRAY, weather=weather)
    assert np.array_equal(quiet.seconds, tabulated.seconds[shuffle])


def test_threads_share_a_model(tabulated: lt.RoundTrip) -> None:
    model = lt.Model()
    with ThreadPoolExecutor(6) as pool:
        answers = pool.map(
            lambda _: model.round_trip(night(600), HILLTOP, ARRAY).seconds, range(12)
        )
    assert all(np.array_equal(a, tabulated.seconds) for a in answers)


def test_a_model_pickles_without_its_tables(tabulated: lt.RoundTrip) -> None:
    data = pickle.dumps(tabulated.model)
    again = pickle.loads(data).round_trip(night(600), HILLTOP, ARRAY)
    assert np.array_equal(again.seconds, tabulated.seconds)
    assert "0 days built" not in again.model.tables()


def test_stations_are_kept_apart() -> None:
    model = lt.Model()
    other = lt.Station.from_geodetic("Seaside", -31.0, 115.0, 10.0)
    first = model.round_trip(night(600), HILLTOP, ARRAY)
    second = model.round_trip(night(600), other, ARRAY)
    assert np.array_equal(model.round_trip(night(600), HILLTOP, ARRAY).seconds, first.seconds)
    assert np.array_equal(lt.Model().round_trip(night(600), other, ARRAY).seconds, second.seconds)
