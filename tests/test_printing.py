"""Answers as text: what a person reads is what the answer holds."""

from __future__ import annotations

import re
from typing import Any

import numpy as np
import pytest

import lighttime as lt
from lighttime.constants import SPEED_OF_LIGHT

HILLTOP = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
ARRAY = lt.reflector("Apollo 15")
EVENING = "2020-03-01T19:00:00"
MORNING = "2020-03-01T06:00:00"
"""The Moon is below the horizon."""


class Body:
    """The centre of a body of DE421, as an end of the light."""

    def __init__(self, body: str) -> None:
        self.name = f"centre of the {body}"
        self.body = body

    def bcrs(self, when: lt.Epoch) -> Any:
        ephemeris = lt.Ephemeris.default()
        position, velocity = ephemeris.barycentric_body(self.body, when.jd1, when.jd2)
        return position.T, velocity.T


@pytest.fixture(scope="module")
def model() -> lt.Model:
    return lt.Model()


def rows(text: str) -> dict[str, tuple[float, float]]:
    """Both numbers of each term, read back."""
    found = re.findall(r"^  (\w+) +(-?[\d ]+\.\d{3}) +(-?[\d ]+\.\d{3})$", text, re.MULTILINE)
    return {name: tuple(float(n.replace(" ", "")) for n in two) for name, *two in found}  # type: ignore[misc]


@pytest.mark.parametrize("tag", ["transmit", "receive"])
def test_one_way(model: lt.Model, tag: Any) -> None:
    ends = (HILLTOP, ARRAY) if tag == "transmit" else (ARRAY, HILLTOP)
    answer = model.one_way(EVENING, *ends, tag=tag)
    text = str(answer)
    lines = text.splitlines()
    assert lines[0] == "One way, Hilltop and Apollo 15"
    assert lines[1] == f"  {tag} 2020-03-01T19:00:00.000000000000 UTC"
    whole, km = re.fullmatch(r"  ([\d. ]+) s \(TDB\)   ([\d.]+) km", lines[2]).groups()  # type: ignore[union-attr]
    assert float(whole.replace(" ", "")) == pytest.approx(answer.seconds, abs=1e-15)
    assert float(km) == pytest.approx(answer.seconds * SPEED_OF_LIGHT / 1e3, abs=1e-6)
    assert lines[3] == f"  elevation {answer.leg.elevation_deg:.4f} deg"
    for name, (ps, mm) in rows(text).items():
        seconds = answer.terms[name] if name != "sum" else answer.seconds
        assert ps == pytest.approx(seconds * 1e12, abs=6e-4)
        assert mm == pytest.approx(seconds * SPEED_OF_LIGHT * 1e3, abs=6e-4)
    assert set(rows(text)) == {*answer.terms, "sum"}
    assert "not modelled (nothing was given): troposphere, ocean_loading" in text


def test_half_of_a_round_trip_in_millimetres(model: lt.Model) -> None:
    text = str(model.round_trip(EVENING, HILLTOP, ARRAY))
    for ps, mm in rows(text).values():
        assert mm == pytest.approx(0.5e-12 * ps * SPEED_OF_LIGHT * 1e3, abs=7e-4)


def test_one_way_of_many_epochs(model: lt.Model) -> None:
    text = str(model.one_way([EVENING, MORNING], HILLTOP, ARRAY))
    assert text.startswith("One way, Hilltop and Apollo 15, 2 epochs, transmit\n")
    assert re.search(r"T06:00:00\.000000 UTC   1\.[\d ]+ s   elevation +-\d+\.\d{3} deg", text)


def test_below_the_horizon(model: lt.Model) -> None:
    assert "deg: below the horizon" in str(model.round_trip(MORNING, HILLTOP, ARRAY))
    assert "below the horizon" not in str(model.round_trip(EVENING, HILLTOP, ARRAY))


def test_without_a_station_there_is_no_elevation() -> None:
    """Between two bodies, time is TDB, and nothing of the Earth is said to be missing."""
    earth, moon = Body("earth"), Body("moon")
    model = lt.Model(omit=[t for t in lt.TERMS if t.endswith("_gravity")])
    told = str(model.round_trip(EVENING, earth, moon))
    assert told.startswith("Round trip centre of the earth - centre of the moon\n")
    many = model.round_trip([EVENING, MORNING], earth, moon)
    for text in (told, str(many)):
        for word in ("elevation", "not modelled", "Earth orientation"):
            assert word not in text
    assert " s (TDB)   half of it:" in told
    assert {"elevation_uplink_deg", "elevation_downlink_deg"}.isdisjoint(many.table().colnames)


def test_a_grid_of_epochs(model: lt.Model) -> None:
    """Ten of twelve, and dots for the others."""
    day = np.linspace(0.0, 0.05, 12).reshape(3, 4)
    text = str(model.round_trip(lt.Epoch(2458910.25, day, "utc"), HILLTOP, ARRAY))
    assert "12 epochs (3, 4), transmit" in text
    assert len(re.findall(r"UTC   2\.", text)) == 10
    assert text.count("\n  ...\n") == 1


def test_no_epochs(model: lt.Model) -> None:
    none = lt.Epoch(np.zeros(0), np.zeros(0), "utc")
    text = str(model.round_trip(none, HILLTOP, ARRAY))
    assert text.startswith("Round trip Hilltop - Apollo 15, 0 epochs, transmit\n")
    assert "least, ps" not in text


def test_what_was_left_out_and_what_it_rests_on() -> None:
    fixed = lt.EarthOrientation.fixed(-0.2, 0.1, 0.3)
    told = str(
        lt.Model(omit=["clock", "pole_tide", "moon_gravity"], earth_orientation=fixed).round_trip(
            EVENING, HILLTOP, Body("moon")
        )
    )
    assert "  left out on request: clock, moon_gravity, pole_tide\n" in told
    assert "  Earth orientation fixed: the same at every instant" in told
    assert "principal axes" not in told


def test_predictions_are_noted(model: lt.Model) -> None:
    """After the last measured day of pole and UT1, and after that of dX and dY."""
    series = lt.EarthOrientation.bundled()
    for mjd, predicted in ((series.last_measured_mjd - 9.0, False), (series.mjd[-1] - 1.0, True)):
        notes = model.round_trip(lt.Epoch(2400000.5, mjd, "utc"), HILLTOP, ARRAY).notes
        said = "\n".join(notes)
        assert ("pole and UT1 are predicted: the last measured day is" in said) is predicted
        assert ("dX and dY are taken as zero: the last published day is" in said) is predicted
