"""What other libraries hold is taken as it is: instants, columns, places, quantities.

pandas, polars and xarray are no dependencies: their tests are skipped where they are absent.
"""

from __future__ import annotations

import datetime as dt
import json
from typing import Any

import numpy as np
import pytest
from astropy import units
from astropy.coordinates import EarthLocation
from astropy.time import Time

import lighttime as lt

STATION = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
ARRAY = lt.reflector("Apollo 15")
EAST = dt.timezone(dt.timedelta(hours=1))
TEXT = ["2025-12-02T22:00:00", "2025-12-02T22:10:00"]
STAMPS = np.array(TEXT, dtype="datetime64[ns]")
EXPECTED = lt.round_trip(TEXT, STATION, ARRAY).seconds


def check(when: Any) -> None:
    """The same two ranges, whatever the instants come in."""
    answer = lt.round_trip(when, STATION, ARRAY)
    assert answer.query.when.scale == "utc"
    # two parts of an astropy Time are rounded to some picoseconds, in which the range changes
    # by 1e-15 s
    assert np.ravel(answer.seconds) == pytest.approx(EXPECTED, abs=1e-14, rel=0.0)


# -- instants ------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "when",
    [
        TEXT,
        tuple(TEXT),
        np.array(TEXT),
        np.array(TEXT, dtype=object),
        STAMPS,
        STAMPS.astype("datetime64[s]"),
        list(STAMPS),
        [dt.datetime(2025, 12, 2, 22, m, tzinfo=dt.UTC) for m in (0, 10)],
        [
            dt.datetime(2025, 12, 2, 23, m, tzinfo=dt.timezone(dt.timedelta(hours=1)))
            for m in (0, 10)
        ],
        Time(TEXT, scale="utc"),
        [Time(text, scale="utc") for text in TEXT],
        list(lt.Epoch.parse(TEXT)),
    ],
    ids=lambda when: f"{type(when).__name__} of {type(when[0]).__name__}",
)
def test_instants_in_many_kinds(when: Any) -> None:
    check(when)


def test_columns_of_pandas() -> None:
    pandas = pytest.importorskip("pandas")
    naive = pandas.Series(STAMPS, index=[7, 9])
    aware = naive.dt.tz_localize("UTC")
    for column in (
        naive,
        aware,
        aware.dt.tz_convert("Asia/Tokyo"),
        pandas.DatetimeIndex(STAMPS),
        pandas.Series(TEXT),
        pandas.DataFrame({"at": STAMPS})["at"],
    ):
        check(column)
    with pytest.raises(lt.InputError, match="NaT"):
        lt.round_trip(pandas.Series([STAMPS[0], None]), STATION, ARRAY)
    with pytest.raises(lt.InputError, match="time zone"):
        lt.round_trip(pandas.Timestamp(TEXT[0]), STATION, ARRAY)


def test_columns_of_polars() -> None:
    polars = pytest.importorskip("polars")
    column = polars.Series("at", STAMPS)
    aware = column.dt.replace_time_zone("UTC")
    for each in (column, aware, aware.dt.convert_time_zone("Asia/Tokyo"), polars.Series(TEXT)):
        check(each)
    with pytest.raises(lt.InputError, match="NaT"):
        lt.round_trip(polars.Series([dt.datetime(2025, 12, 2), None]), STATION, ARRAY)


def test_arrays_of_xarray() -> None:
    xarray = pytest.importorskip("xarray")
    check(xarray.DataArray(STAMPS, dims="at"))
    grid = xarray.DataArray(STAMPS[:, None], dims=("night", "shot"))
    assert lt.round_trip(grid, STATION, ARRAY).seconds.shape == (2, 1)


@pytest.mark.parametrize("kind", ["pandas", "polars"])
def test_weather_in_columns(kind: str) -> None:
    library = pytest.importorskip(kind)
    columns = ([770.0, 771.0], [272.0, 273.0], [0.4, 0.5])
    plain = lt.round_trip(TEXT, STATION, ARRAY, weather=lt.Weather(*map(np.array, columns)))
    table = lt.Weather(*(library.Series(values) for values in columns))
    answer = lt.round_trip(TEXT, STATION, ARRAY, weather=table)
    assert np.array_equal(answer.seconds, plain.seconds)


# -- what comes back -----------------------------------------------------------------------------


def test_one_instant_gives_python_numbers_that_json_takes() -> None:
    answer = lt.round_trip(TEXT[0], STATION, ARRAY)
    assert type(answer.seconds) is float
    told = json.loads(json.dumps({"seconds": answer.seconds, "terms": dict(answer.terms)}))
    assert told["seconds"] == answer.seconds


def test_scalars_of_numpy_stay_scalars() -> None:
    when = lt.Epoch(np.float64(2461012.5), np.array(0.25), "utc")
    assert type(when.jd1) is float
    weather = lt.Weather(np.float64(770.0), np.array(272.0), np.float32(0.5))
    answer = lt.round_trip(when, STATION, ARRAY, weather=None)
    assert type(weather.relative_humidity) is type(answer.seconds) is float
    assert all(type(value) is float for value in answer.terms.values())
    assert type(lt.round_trip(STAMPS[0], STATION, ARRAY).seconds) is float


def test_table_carries_units_and_becomes_a_data_frame() -> None:
    table = lt.round_trip(TEXT, STATION, ARRAY).table()
    assert table["light_time"].unit == units.s
    pandas = pytest.importorskip("pandas")
    frame = table.to_pandas()
    assert isinstance(frame, pandas.DataFrame)
    assert frame["light_time"].tolist() == EXPECTED.tolist()


# -- places and quantities -----------------------------------------------------------------------


def test_station_from_an_earth_location() -> None:
    place = EarthLocation.from_geodetic(7.1, 46.2, 2310.0, ellipsoid="GRS80")
    station = lt.Station.from_earth_location("Hilltop", place, velocity_m_per_yr=(0.01, 0.0, 0.0))
    assert station.xyz_m == pytest.approx(STATION.xyz_m, abs=1e-8)  # two ways of rounding
    assert station.velocity_m_per_yr == (0.01, 0.0, 0.0)


@pytest.mark.parametrize(
    "location", ["Hilltop", EarthLocation.from_geodetic([7.1, 8.1], [46.2, 47.2])]
)
def test_what_is_no_single_earth_location(location: Any) -> None:
    with pytest.raises(lt.InputError, match=r"location is 'Hilltop'|x_m is .* allowed: one number"):
        lt.Station.from_earth_location("Hilltop", location)


def test_quantities_are_converted_to_the_unit_of_the_input() -> None:
    station = lt.Station(
        "Hilltop",
        units.Quantity(STATION.xyz_m, units.m).to(units.km),
        velocity_m_per_yr=[14.1, -8.0, 0.5] * units.mm / units.yr,
    )
    assert station.xyz_m == pytest.approx(STATION.xyz_m, abs=1e-8)
    assert station.velocity_m_per_yr == pytest.approx((0.0141, -0.008, 0.0005), rel=1e-14)
    again = lt.Station.from_geodetic(
        "Hilltop", np.deg2rad(46.2) * units.rad, 426.0 * units.arcmin, 2.31 * units.km
    )
    assert again.xyz_m == pytest.approx(STATION.xyz_m, abs=1e-8)
    weather = lt.Weather(77.0 * units.kPa, -1.15 * units.deg_C, 40.0 * units.percent)
    assert weather.pressure_hpa == pytest.approx(770.0)
    assert weather.temperature_k == pytest.approx(272.0)
    assert weather.relative_humidity == pytest.approx(0.4)
    array = lt.Reflector("array", [1554.678104, 98.094498, 765.005863] * units.km)
    assert array.xyz_m == pytest.approx(ARRAY.xyz_m)
    green = lt.round_trip(TEXT[0], STATION, ARRAY, weather=weather, wavelength_nm=0.532 * units.um)
    assert green.query.wavelength_nm == pytest.approx(532.0)
    shot = lt.Epoch.parse(TEXT[0])
    assert shot.shift(2.5 * units.min) == shot.shift(150.0)


def test_a_list_of_quantities() -> None:
    place = EarthLocation.from_geodetic(7.1, 46.2, 2310.0, ellipsoid="GRS80")
    station = lt.Station("Hilltop", [place.x.to(units.km), place.y, place.z])
    assert station.xyz_m == pytest.approx(STATION.xyz_m, abs=1e-8)


@pytest.mark.parametrize(
    ("make", "message"),
    [
        (lambda: lt.Weather(770.0 * units.m, 272.0, 0.4), "pressure_hpa is '770.0 m'; .* hPa"),
        (lambda: lt.Weather(770.0, 272.0, 0.4 * units.m), "relative_humidity .* without a unit"),
        (lambda: lt.Station("x", STATION.xyz_m * units.s), "xyz_m is .* converted to m"),
        (
            lambda: lt.Station.from_geodetic("x", 46.2 * units.m, 7.1, 0.0),
            "latitude_deg is '46.2 m'; .* deg",
        ),
        (
            lambda: lt.round_trip(TEXT, STATION, ARRAY, wavelength_nm=[532.0, 1064.0]),
            "wavelength_nm is .* one number",
        ),
    ],
)
def test_quantities_of_something_else(make: Any, message: str) -> None:
    with pytest.raises(lt.InputError, match=message):
        make()
