"""Ends that a user brings: the gravity that is felt between them, and what is refused."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np
import pytest

import lighttime as lt
from lighttime.constants import SPEED_OF_LIGHT
from lighttime.path.solver import MOST_ITERATIONS, solve_leg

EVENING = "2020-03-01T19:00:00"
DE421 = lt.Ephemeris.default()


class Beside:
    """A place at rest beside a body, some metres away along the axes of the ICRS."""

    name = "craft"

    def __init__(self, body: str, offset_m: Any, velocity_m_per_s: float = 0.0) -> None:
        self.body, self.offset = body, np.array(offset_m)
        self.velocity = velocity_m_per_s

    def bcrs(self, when: lt.Epoch) -> Any:
        position, velocity = DE421.barycentric_body(self.body, when.jd1, when.jd2)
        return position.T + self.offset, velocity.T + self.velocity


HIGH = Beside("earth", [0.0, 3e7, 1e7])
FAR = Beside("moon", [0.0, 0.0, 5e6])


def test_gravity_of_the_earth_between_two_craft() -> None:
    """Shapiro's delay 2 GM/c^3 ln((r1 + r2 + d)/(r1 + r2 - d)), one way, of a body at rest.

    The rest, the motion of the Earth and its flattening, is below 1e-3 of it.
    Source: IERS Conventions (2010), TN36, 11.17.
    """
    answer = lt.one_way(EVENING, HIGH, FAR)
    when = lt.Epoch.parse(EVENING).to("tdb")
    earth = DE421.barycentric_body("earth", when.jd1, when.jd2)[0]
    near, far = (end.bcrs(when)[0] for end in (HIGH, FAR))
    r1, r2, d = (float(np.linalg.norm(v)) for v in (near - earth, far - earth, far - near))
    gm = DE421.gm("earth")
    expected = 2.0 * gm / SPEED_OF_LIGHT**3 * np.log((r1 + r2 + d) / (r1 + r2 - d))
    assert answer.terms["earth_gravity"] == pytest.approx(expected, rel=2e-3)


def test_bodies_that_an_ephemeris_lacks_are_not_felt() -> None:
    """Without planets there is no term of theirs.

    What is left of the difference, 0.06 ps, is their potential at the Earth, by which a station
    is nearer to the geocentre.
    """
    inner = {name: DE421.barycentric[name] for name in ("earth_moon_barycentre", "sun")}
    bare = lt.Model(ephemeris=replace(DE421, barycentric=inner, origin=()))
    station = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
    full = lt.Model().round_trip(EVENING, station, lt.reflector("Apollo 15"))
    less = bare.round_trip(EVENING, station, lt.reflector("Apollo 15"))
    assert 0.0 < full.terms["planet_gravity"] < 2e-11
    assert less.terms.get("planet_gravity", 0.0) == 0.0
    assert less.seconds == pytest.approx(full.seconds - full.terms["planet_gravity"], abs=1e-13)


def test_nothing_is_faster_than_light() -> None:
    fast = Beside("moon", [0.0, 0.0, 5e6], SPEED_OF_LIGHT)
    with pytest.raises(lt.InputError, match=r"velocity of craft is \d.*below the speed of light"):
        lt.one_way(EVENING, HIGH, fast)


def test_worksheet_between_two_craft() -> None:
    """Without a station no elevation, with blocks the same numbers."""
    answer = lt.round_trip([EVENING, "2020-03-01T20:00:00"], HIGH, FAR)
    sheet = answer.worksheet()
    assert "uplink.elevation_deg" not in sheet
    assert sheet["answer_s"] == pytest.approx(answer.seconds, abs=1e-15)
    distance = sheet["uplink.distance_m"] / SPEED_OF_LIGHT
    assert sheet["uplink.geometry_s"] == pytest.approx(distance, abs=1e-9)


# -- the equation itself -------------------------------------------------------------------------


@dataclass(frozen=True)
class Point:
    seconds: Any
    position: Any
    velocity: Any


HERE = Point(np.zeros(1), np.zeros((3, 1)), np.zeros((3, 1)))


def test_an_end_that_jumps_about_is_never_met() -> None:
    """Each time it is asked for it is elsewhere: no solution, and it is said so."""
    asked: list[float] = []

    def jumping(seconds: Any) -> Point:
        asked.append(float(seconds[0]))
        away = np.array([[4e8 * (1 + len(asked) % 2)], [0.0], [0.0]])
        return Point(seconds, away, np.zeros((3, 1)))

    message = rf"not solved after {MOST_ITERATIONS} evaluations: the last step was 1\.33 s, allowed"
    with pytest.raises(lt.ConvergenceError, match=message):
        solve_leg(HERE, jumping, 1, 1.3)
    assert len(asked) == MOST_ITERATIONS


@pytest.mark.parametrize("sense", [1, -1])
def test_uniform_motion_is_solved_exactly(sense: Any) -> None:
    """|r + v t| = c t along the line of sight: t = r / (c - v), or r / (c + v) backwards."""
    speed, away = 3e4, 4e8

    def flying(seconds: Any) -> Point:
        place = np.array([away + speed * seconds, 0 * seconds, 0 * seconds])
        return Point(seconds, place, np.array([[speed], [0.0], [0.0]]))

    solved = solve_leg(HERE, flying, sense, 1.0)
    expected = sense * away / (SPEED_OF_LIGHT - sense * speed)
    assert float(solved.found.seconds[0]) == pytest.approx(expected, rel=1e-15)


@pytest.mark.parametrize(
    ("ends", "more", "message"),
    [
        ((HIGH, FAR), {"tag": "bounce"}, "tag is 'bounce'; allowed: one of transmit, receive"),
        (
            (HIGH, FAR),
            {"weather": lt.Weather(770.0, 280.0, 0.4)},
            "weather is .*; allowed: None where no Station is at the end of the ray",
        ),
        (
            (lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0),) * 2,
            {},
            "reflector is .*; allowed: a Reflector, or an object with bcrs",
        ),
    ],
)
def test_light_that_is_not_to_be_had(ends: Any, more: dict[str, Any], message: str) -> None:
    with pytest.raises(lt.LighttimeError, match=message):
        lt.one_way(EVENING, *ends, **more)
