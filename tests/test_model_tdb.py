"""`Model(tdb=...)`: the relation of TDB to TT that a range rests on."""

from __future__ import annotations

import pickle

import numpy as np
import pytest

import lighttime as lt
from lighttime.constants import SPEED_OF_LIGHT
from lighttime.ephemeris.time_integral import TimeEphemeris
from lighttime.errors import UnknownNameError

STATION = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
REFLECTOR = lt.reflector("Apollo 15")
WHEN = lt.Epoch(2459000.5 + np.arange(0.0, 200.0, 0.377), 0.0, "utc")


def _seconds(model: lt.Model) -> np.ndarray:
    return np.asarray(model.round_trip(WHEN, STATION, REFLECTOR).seconds)


def test_integrated_and_series_are_micrometres_apart() -> None:
    apart = _seconds(lt.Model(tdb="integrated")) - _seconds(lt.Model())
    one_way_um = 0.5e6 * SPEED_OF_LIGHT * np.abs(apart).max()
    assert 2.0 < one_way_um < 11.0


def test_one_instant_as_many() -> None:
    model = lt.Model(tdb="integrated")
    alone = model.round_trip(WHEN[3], STATION, REFLECTOR).seconds
    assert alone == pytest.approx(_seconds(model)[3], abs=2e-15)


def test_a_time_ephemeris_of_ones_own() -> None:
    own = TimeEphemeris.integrate(first="2020-01-01", last="2021-06-01")
    np.testing.assert_allclose(
        _seconds(lt.Model(tdb=own)), _seconds(lt.Model(tdb="integrated")), rtol=0, atol=2e-15
    )


def test_pickles_and_compares() -> None:
    model = lt.Model(tdb="integrated")
    again = pickle.loads(pickle.dumps(model))
    assert again == model != lt.Model()
    np.testing.assert_array_equal(_seconds(again), _seconds(model))
    with pytest.raises(AttributeError):
        model.tdb = "series"  # type: ignore[misc]


def test_other_words_are_refused() -> None:
    with pytest.raises(UnknownNameError, match="tdb is 'exact'; allowed: one of series, integrat"):
        lt.Model(tdb="exact")
