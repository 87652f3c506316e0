"""The fast path against the reference set: two hundred round trips by its extended-precision twin.

The set is in validation/reference and says what each number is. Bars are those of the accuracy
page; what has none, or is much better, is held to a few times what was measured.
"""

from __future__ import annotations

import csv
import re
import sys
from collections.abc import Iterator
from itertools import groupby
from pathlib import Path

import mpmath
import numpy as np
import pytest

import lighttime as lt

VALIDATION = Path(__file__).parents[1] / "validation"
sys.path[:0] = [str(VALIDATION), str(VALIDATION / "reference")]

import reading  # noqa: E402
import regenerate  # noqa: E402
import rungs  # noqa: E402

EVENTS = {"transmit": "t1", "bounce": "t2", "receive": "t3"}
FEMTOSECOND = 1e-15
LIMITS = rungs.BARS | {
    "Moon from the Earth": 1.5e-7,
    "change of TDB-TT, t1 to t3": 1e-17,
    "gravity, earth": 1e-20,
    "X, Y": 1e-17,
    "s": 1e-21,
    "Earth rotation angle": 2e-15,
    "pole": 1e-19,
    "UT1-TAI": 1e-13,
    "TDB-TT": 5e-14,  # the argument of the series, to 50 microseconds
    "TT of t1, t3": 1e-14,
    "libration": 2e-15,
    "troposphere": 1e-17,
    "elevation": 3e-11,  # the arc sine near the zenith
}
"""As `rungs.BARS`, metres, seconds and radians."""


@pytest.fixture(scope="module")
def twin() -> dict[int, dict[str, mpmath.mpf]]:
    """Every number of rungs.ecsv by case and by the name in the twin's worksheet."""
    suffix = {column.name: regenerate.SUFFIX.get(column.unit, "") for column in regenerate.RUNGS}
    with mpmath.workdps(50):
        return {int(row["case"]): _numbers(row, suffix) for row in reading.read("rungs.ecsv")}


def _numbers(row: dict[str, str], suffix: dict[str, str]) -> dict[str, mpmath.mpf]:
    numbers = {name + suffix[name]: mpmath.mpf(cell) for name, cell in row.items() if cell}
    for name in row:
        if name.endswith("_day"):
            instant = name.removesuffix("_day")
            seconds = mpmath.mpf(row[f"{instant}_s"])
            numbers[f"{instant}_jd"] = mpmath.mpf(row[name]) + seconds / 86400
    return numbers


@pytest.fixture(scope="module")
def cases() -> list[reading.Asked]:
    return reading.cases()


@pytest.fixture(scope="module")
def model() -> lt.Model:
    return lt.Model(earth_orientation=reading.earth_orientation())


def _groups(cases: list[reading.Asked]) -> Iterator[list[reading.Asked]]:
    """Cases that can be asked in one call."""

    def key(case: reading.Asked) -> tuple[str, ...]:
        place = case.station.name, case.array.name, str(case.wavelength_nm)
        return (*place, case.tag, case.when.scale, str(case.weather is None))

    for _, group in groupby(sorted(cases, key=key), key):
        yield list(group)


def _ask(model: lt.Model, group: list[reading.Asked]) -> lt.RoundTrip:
    first = group[0]
    when = lt.Epoch([c.when.jd1 for c in group], [c.when.jd2 for c in group], first.when.scale)
    weather = None
    if first.weather is not None:
        names = ("pressure_hpa", "temperature_k", "relative_humidity")
        weather = lt.Weather(*(np.array([getattr(c.weather, n) for c in group]) for n in names))
    return model.round_trip(
        when, first.station, first.array, first.tag, weather, first.wavelength_nm
    )


def test_every_rung(twin, cases, model):
    worst = dict.fromkeys(LIMITS, 0.0)
    off = []
    for group in _groups(cases):
        sheet = _ask(model, group).worksheet()
        for at, case in enumerate(group):
            exact = twin[case.number]
            found = rungs.differences(sheet, exact, EVENTS[case.tag], at)
            worst |= {name: max(worst[name], value) for name, value in found.items()}
            off.append(float(mpmath.mpf(float(sheet["answer_s"][at])) - exact["answer_s"]))
    assert len(off) == 200
    assert {name: value for name, value in worst.items() if value >= LIMITS[name]} == {}
    assert np.max(np.abs(off)) < 2.0 * FEMTOSECOND
    assert np.sqrt(np.mean(np.square(off))) < 0.7 * FEMTOSECOND


def test_every_tenth_with_tables(twin, cases):
    # the same instant as one of a dense series, of which the model makes tables
    model = lt.Model(earth_orientation=reading.earth_orientation())
    beside = 3.0 / 86400.0 * np.arange(25)
    for case in cases[::10]:
        dense = lt.Epoch(case.when.jd1, case.when.jd2 + beside, case.when.scale)
        answer = model.round_trip(
            dense, case.station, case.array, case.tag, case.weather, case.wavelength_nm
        )
        seconds = mpmath.mpf(float(answer.seconds[0]))
        assert abs(seconds - twin[case.number]["answer_s"]) < 2.0 * FEMTOSECOND
    built = re.findall(r"(\d+) days built", model.tables())
    assert sum(map(int, built)) >= len(cases[::10])


def test_found_event_beside_a_seam():
    # Transmission 18 ns before records of DE421 end; the Earth jumps there by 40 micrometres, and
    # an event that the solver carries over the seam along its velocity is off by 120 fs.
    station = lt.Station.from_geodetic("Ridge", -24.6, -70.4, 2400.0)
    when = lt.Epoch.parse("1977-10-24T00:00:02.550803997", "tdb")
    inputs = station, lt.reflector("Lunokhod 2"), "receive", lt.Weather(979.14, 298.27, 0.77)
    twin = lt.exact.round_trip(when, *inputs, digits=25)
    before_s = (mpmath.mpf(2443440.5) - twin.worksheet()["t1_tdb_jd"]) * 86400
    assert 1e-9 < before_s < 1e-7
    assert abs(lt.Model().round_trip(when, *inputs).seconds - twin.seconds) < 2.0 * FEMTOSECOND


@pytest.mark.parametrize("number", [2, 4])
def test_twin_still_says_so(cases, number):
    rows = {int(row["case"]): list(row.values()) for row in reading.read("rungs.ecsv")}
    with mpmath.workdps(40):
        assert regenerate.same(rows[number], regenerate.answer(cases[number - 1]))


def test_tables_are_documented():
    text = (VALIDATION / "reference" / "README.md").read_text(encoding="utf-8")
    for name, columns in (
        ("cases", regenerate.INPUTS),
        ("earth_orientation", regenerate.NODES),
        ("rungs", regenerate.RUNGS),
    ):
        with (VALIDATION / "reference" / f"{name}.ecsv").open(encoding="utf-8") as file:
            header = next(csv.reader((x for x in file if x[0] != "#"), delimiter=" "))
        assert header == [column.name for column in columns]
        for column in columns:
            assert f"| `{column.name}` | {column.unit} | {column.description} |" in text
