"""What a person meets first: signatures, what the prompt shows, refusals of a slip."""

from __future__ import annotations

import inspect
from typing import Any

import numpy as np
import pytest

import lighttime as lt

STATION = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
ARRAY = lt.reflector("Apollo 15")
WHEN = "2025-12-02T22:00:00"


@pytest.mark.parametrize("name", ["round_trip", "one_way"])
def test_functions_take_what_the_method_takes(name: str) -> None:
    function = inspect.signature(getattr(lt, name)).parameters
    method = dict(inspect.signature(getattr(lt.Model, name)).parameters)
    method.pop("self")
    assert list(function) == list(method)
    assert [p.default for p in function.values()] == [p.default for p in method.values()]


def test_prompt_shows_a_line() -> None:
    one = lt.round_trip(WHEN, STATION, ARRAY)
    assert repr(one) == f"<RoundTrip Hilltop - Apollo 15: {one.seconds:.12f} s>"
    assert repr(one.uplink) == f"<LegAnswer: {one.uplink.seconds:.12f} s TDB>"
    many = lt.Epoch(2461012.3, np.linspace(0.0, 0.1, 1000), "utc")
    shown = repr(lt.round_trip(many, STATION, ARRAY))
    assert shown.startswith("<RoundTrip Hilltop - Apollo 15: 1000 epochs, 2.3")
    assert repr(lt.one_way(many[:0], STATION, ARRAY)) == "<OneWay Hilltop - Apollo 15: no epochs>"


@pytest.mark.parametrize(
    ("choice", "message"),
    [
        ({"ephemeris": "de430.bsp"}, "ephemeris is 'de430.bsp'; .*Ephemeris.open"),
        ({"earth_orientation": "finals.all"}, "earth_orientation is .*EarthOrientation.read"),
        ({"gamma": "1"}, None),
        ({"gamma": "one"}, "gamma is 'one'; .*number"),
        ({"gamma": [1.0, 1.1]}, "gamma is .*one number"),
        ({"moon_h2": np.nan}, "moon_h2 is nan; allowed: a finite number"),
    ],
)
def test_choices_of_a_model(choice: Any, message: str | None) -> None:
    if message is None:
        assert lt.Model(**choice).gamma == 1.0
        return
    with pytest.raises(lt.InputError, match=message):
        lt.Model(**choice)


class Planet:
    """The centre of a body."""

    def __init__(self, name: str) -> None:
        self.name = name

    def bcrs(self, when: lt.Epoch) -> Any:
        """See `lt.Trajectory`."""
        ephemeris = lt.Ephemeris.default()
        position, velocity = ephemeris.barycentric_body(self.name, when.jd1, when.jd2)
        return position.T, velocity.T


@pytest.mark.parametrize(
    ("start", "end", "body", "term"),
    [
        (Planet("mars"), ARRAY, "mars", "planet_gravity"),
        (STATION, Planet("mars"), "mars", "planet_gravity"),
        (STATION, Planet("moon"), "moon", "moon_gravity"),
        (Planet("earth"), ARRAY, "earth", "earth_gravity"),
    ],
)
def test_an_end_in_the_middle_of_a_body(start: Any, end: Any, body: str, term: str) -> None:
    with pytest.raises(lt.InputError, match=f"the centre of {body} is .* omits {term}"):
        lt.one_way(WHEN, start, end)
    answer = lt.Model(omit=[term]).one_way(WHEN, start, end)
    assert np.isfinite(answer.seconds)
