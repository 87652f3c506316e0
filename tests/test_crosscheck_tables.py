"""Other people's tables: every digit kept, every bad row named, nothing guessed in silence."""

from __future__ import annotations

import io
from datetime import UTC, datetime
from decimal import Decimal
from fractions import Fraction
from pathlib import Path
from typing import Any

import mpmath
import numpy as np
import pytest
from astropy import units
from astropy.table import QTable, Table
from astropy.time import Time
from hypothesis import given, settings
from hypothesis import strategies as st

import lighttime as lt
from lighttime.crosscheck.columns import UNITS, layout
from lighttime.crosscheck.decimals import numbers
from lighttime.crosscheck.gross import unit_of
from lighttime.crosscheck.ranges import Defaults, read_ranges
from lighttime.crosscheck.tables import MOST_ROWS

HILLTOP = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
ARRAY = lt.reflector("Apollo 15")
WHEN = [f"2020-03-{day:02d}T{hour:02d}:30:00" for day in range(3, 9) for hour in (18, 20, 22)]
SECONDS = lt.Model().round_trip(WHEN, HILLTOP, ARRAY).seconds


def exact(ranges: Any, row: int = 0) -> Fraction:
    return Fraction(float(ranges.high_s[row])) + Fraction(float(ranges.low_s[row]))


def csv_of(*lines: str) -> io.StringIO:
    return io.StringIO("\n".join(lines) + "\n")


# -- digits ----------------------------------------------------------------------------------------


def test_decimal_text_keeps_its_digits() -> None:
    text = "2594379123456.789012345678"
    ranges = read_ranges({"epoch": [WHEN[0]], "round_trip_ps": [text]})
    assert abs(exact(ranges) - Fraction(text) / 10**12) < Fraction(1, 10**31)
    assert ranges.last_digit_s[0] == pytest.approx(1e-24)


@given(
    digits=st.integers(1, 10**30 - 1),
    exponent=st.integers(-30, 0),
    unit=st.sampled_from(sorted(UNITS)),
)
def test_any_decimal_in_any_unit(digits: int, exponent: int, unit: str) -> None:
    text = f"{digits}e{exponent}"
    found = numbers([text], UNITS[unit])
    true = Fraction(Decimal(text)) * UNITS[unit]
    got = Fraction(float(found.high[0])) + Fraction(float(found.low[0]))
    assert abs(got - true) <= abs(true) * Fraction(1, 2**104)


@given(st.floats(1e-6, 1e18), st.sampled_from(sorted(UNITS)))
def test_floats_are_scaled_without_loss(value: float, unit: str) -> None:
    found = numbers(np.array([value]), UNITS[unit])
    true = Fraction(value) * UNITS[unit]
    got = Fraction(float(found.high[0])) + Fraction(float(found.low[0]))
    assert abs(got - true) <= abs(true) * Fraction(1, 2**98)


def test_many_kinds_of_numbers() -> None:
    with mpmath.workdps(40):
        precise = mpmath.mpf("2.6170710379889012345678")
    kinds = [Decimal("2.5"), Fraction(5, 2), 3, 2.5, precise, np.float64(2.5), "2.5D0"]
    found = numbers(np.array(kinds, dtype=object))
    assert not found.wrong
    assert found.high.tolist()[:4] == [2.5, 2.5, 3.0, 2.5]
    both = Fraction(float(found.high[4])) + Fraction(float(found.low[4]))
    assert abs(both - Fraction("2.6170710379889012345678")) < Fraction(1, 10**31)
    long = numbers(np.array(["2.5"], dtype=object).astype(np.longdouble))
    assert long.high[0] == 2.5


def test_what_is_no_number() -> None:
    bad = ["", "abc", None, "nan", "inf", True, "1e999", [1], "٣", "1_000"]
    found = numbers(np.array(bad, dtype=object))
    assert sorted(found.wrong) == list(range(len(bad)))
    assert np.isnan(found.high).all()
    assert numbers(np.array([1.0, np.nan, np.inf])).wrong.keys() == {1, 2}


# -- columns ---------------------------------------------------------------------------------------


def test_recognised_columns() -> None:
    found = layout(["Epoch UTC", "Round-Trip ns", "sigma_ps", "Array", "note", "t1.era_rad"])
    assert (found.epoch, found.value, found.sigma) == ("Epoch UTC", "Round-Trip ns", "sigma_ps")
    assert found.unit == Fraction(1, 10**9)
    assert found.others == {"array": "Array"}
    assert found.rungs == {"t1.era_rad": ("t1.era_rad", Fraction(1))}
    assert found.ignored == ("note",)


def test_columns_that_the_user_names() -> None:
    found = layout(["T", "tof", "e"], {"mjd_tai": "T", "half_round_trip_m": "tof", "sigma_mm": "e"})
    assert (found.epoch_form, found.epoch_scale, found.quantity) == (
        "mjd",
        "tai",
        "half_round_trip",
    )
    assert found.unit == Fraction(1, 299792458)


def test_output_of_lighttime_range_is_recognised() -> None:
    names = ["epoch_utc", "light_time_s", "uplink_tdb_s", "downlink_tdb_s", "term_clock_s"]
    found = layout(names)
    assert found.value == "light_time_s"
    assert {r for r, _ in found.rungs.values()} == {
        "uplink.seconds",
        "downlink.seconds",
        "term.clock_s",
    }


@pytest.mark.parametrize(
    ("names", "given", "words"),
    [
        (["a", "round_trip_s"], None, "one of epochs"),
        (["epoch", "a"], None, "one of ranges"),
        (["epoch", "one_way_s"], None, "half_round_trip_s, uplink_s or downlink_s"),
        (["epoch", "round_trip_s"], {"range": "epoch"}, "round_trip_s"),
        (["epoch", "round_trip_s"], {"epoch_utc": "tim"}, "columns['epoch_utc'] is 'tim'"),
        (["epoch", "round_trip_s"], {"epoch_lst": "epoch"}, "epoch_lst"),
    ],
)
def test_columns_that_do_not_do(names: list[str], given: Any, words: str) -> None:
    with pytest.raises(lt.InputError) as error:
        layout(names, given)
    assert words in str(error.value)


# -- kinds of tables -------------------------------------------------------------------------------


def test_the_same_from_every_kind_of_table(tmp_path: Path) -> None:
    pandas = pytest.importorskip("pandas")
    texts = [f"{s:.15f}" for s in SECONDS]
    plain = {"epoch_utc": WHEN, "round_trip_s": texts}
    rows = [f"{w},{s}" for w, s in zip(WHEN, texts, strict=True)]
    path = tmp_path / "other.csv"
    path.write_text("# by nobody\nepoch_utc,round_trip_s\n" + "\n".join(rows) + "\n")
    semicolons = csv_of("epoch_utc; round_trip_s", *(r.replace(",", ";") for r in rows))
    blanks = csv_of("epoch_utc   round_trip_s", *(r.replace(",", "   ") for r in rows))
    tables: list[Any] = [
        plain,
        path,
        str(path),
        semicolons,
        blanks,
        pandas.DataFrame(plain),
        Table(plain),
    ]
    first = read_ranges(plain)
    for table in tables:
        ranges = read_ranges(table)
        assert ranges.when == first.when
        assert np.array_equal(ranges.high_s, first.high_s)
        assert np.array_equal(ranges.low_s, first.low_s)
    assert read_ranges(path).lines[0] == 3
    assert read_ranges(path).row_word == "line"


def test_ecsv_keeps_digits_and_knows_units(tmp_path: Path) -> None:
    path = tmp_path / "other.ecsv"
    table = Table({"epoch_utc": WHEN, "round_trip": [f"{s * 1e9:.7f}" for s in SECONDS]})
    table["round_trip"].unit = "ns"
    table.write(path, format="ascii.ecsv")
    ranges = read_ranges(path)
    assert ranges.high_s == pytest.approx(SECONDS, abs=1e-15)
    assert ranges.last_digit_s[0] == pytest.approx(1e-16)


def test_quantities_and_time_objects() -> None:
    table = QTable({"epoch": Time(WHEN, scale="utc"), "light_time": SECONDS * 1e6 * units.us})
    ranges = read_ranges(table)
    assert ranges.high_s == pytest.approx(SECONDS, abs=2e-15)
    assert np.abs(ranges.when.seconds_since(lt.Epoch.parse(WHEN))).max() < 2e-11


def test_own_table_agrees_with_itself() -> None:
    answer = lt.Model().round_trip(WHEN, HILLTOP, ARRAY)
    report = lt.crosscheck(answer.table(), HILLTOP, ARRAY, tolerance_ps=0.01)
    assert report.agrees
    assert not report.findings
    assert {r.name for r in report.rungs} >= {"term.lunar_tide_s"}


@pytest.mark.parametrize(
    "column",
    [
        {"epoch": lt.Epoch.parse(WHEN[:3]).to("tai")},
        {"epoch": [datetime(2020, 3, 3, h, 30, tzinfo=UTC) for h in (18, 20, 22)]},
        {"epoch": np.array(WHEN[:3], dtype="datetime64[ns]")},
        {"epoch_tt": [f"2020-03-03T{h}:31:09.184" for h in (18, 20, 22)]},
        {"mjd_utc": ["58911.770833333333333333", "58911.85416666666666667", "58911.9375"]},
        {"jd_tai": ["2458912.27126157407407407", "2458912.354594907407407", "2458912.43792824074"]},
        {"epoch": [f"2020-03-03T{h}:30:37" for h in (18, 20, 22)], "scale": ["TAI"] * 3},
        {
            "epoch": ["2020-03-03T18:30:00", "2020-03-03T20:30:37", "2020-03-03T22:31:09.184"],
            "scale": ["utc", "tai", "tt"],
        },
    ],
)
def test_epochs_of_every_kind(column: dict[str, Any]) -> None:
    ranges = read_ranges(column | {"round_trip_s": SECONDS[:3]})
    assert np.abs(ranges.when.seconds_since(lt.Epoch.parse(WHEN[:3]))).max() < 1e-6


def test_weather_in_other_units() -> None:
    table = {
        "epoch": WHEN[:2],
        "round_trip_s": SECONDS[:2],
        "pressure_hpa": ["770", "771"],
        "temperature_c": [-5.0, 1.0],
        "humidity_percent": [30, 40],
    }
    weather = read_ranges(table).weather
    assert weather["temperature_k"].tolist() == [268.15, 274.15]
    assert weather["relative_humidity"].tolist() == [0.3, 0.4]


# -- hostile tables --------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("table", "words"),
    [
        ({}, "one of epochs"),
        ({"epoch": [], "round_trip_s": []}, "no rows"),
        ({"epoch": WHEN[:2], "round_trip_s": [2.5]}, "one length for all"),
        ({"epoch": WHEN[0], "round_trip_s": 2.5}, "an array"),
        ({"epoch": [WHEN[0]], "round_trip_s": [[2.5]]}, "one dimension"),
        ({"epoch": [WHEN[0]], "round_trip_s": [np.nan]}, "row 0: round_trip_s nan is not finite"),
        ({"epoch": [WHEN[0]], "round_trip_s": [-2.5]}, "row 0: round_trip_s is not above 0"),
        ({"epoch": [WHEN[0]], "round_trip_s": [2.5], "sigma_ps": [0.0]}, "sigma_ps is not above 0"),
        ({"epoch": [WHEN[0]], "round_trip_s": [2.5], "tag": ["sent"]}, "tag is none of transmit"),
        (
            {"epoch": [WHEN[0]], "round_trip_s": [2.5], "wavelength_nm": [0.532]},
            "wavelength_nm is 0.532; allowed: 355 to 1064",
        ),
        (
            {"epoch": [WHEN[0]], "round_trip_s": [2.5], "pressure_hpa": [770.0]},
            "temperature_k, relative_humidity is missing",
        ),
        ({"epoch": ["yesterday"], "round_trip_s": [2.5]}, "epoch is 'yesterday'; allowed: text"),
        ({"epoch": ["2016-12-31T23:59:61"], "round_trip_s": [2.5]}, "row 0: epoch is"),
        ({"epoch": [WHEN[0]], "round_trip_s": [2.5], "scale": ["lst"]}, "which is unknown"),
        ({"mjd_utc": ["58911.5", "x"], "round_trip_s": [2.5, 2.5]}, "row 1: mjd_utc 'x'"),
        (np.zeros(3), "a mapping of arrays"),
        (7, "a mapping of arrays"),
    ],
)
def test_tables_that_cannot_be_used(table: Any, words: str) -> None:
    with pytest.raises(lt.InputError) as error:
        read_ranges(table)
    assert words in str(error.value)


@pytest.mark.parametrize(
    ("lines", "words"),
    [
        ([""], "empty: no line names the columns"),
        (["2020-03-03T18:30:00,2.5"], "where columns are to be named"),
        (["58911.5,2.5"], "where columns are to be named"),
        (["epoch,epoch,round_trip_s"], "more than one column is called 'epoch'"),
        (["%ECSV"], "one of epochs"),
    ],
)
def test_files_that_cannot_be_used(lines: list[str], words: str) -> None:
    with pytest.raises((lt.FileError, lt.InputError)) as error:
        read_ranges(csv_of(*lines))
    assert words in str(error.value)


def test_missing_file_and_binary_file(tmp_path: Path) -> None:
    with pytest.raises(lt.FileError):
        read_ranges(tmp_path / "none.csv")
    path = tmp_path / "picture.csv"
    path.write_bytes(bytes(range(128, 256)) * 10)
    with pytest.raises(lt.FileError, match="not a text file"):
        read_ranges(path)


def test_bad_rows_are_named_and_may_be_left_out() -> None:
    good = [f"{w},{s:.15f}" for w, s in zip(WHEN, SECONDS, strict=True)]
    lines = ["epoch,round_trip_s", *good[:3], "2020-03-04T99:00:00,2.5", "", "2020-03-04T18:00:00"]
    lines += [*good[3:], "2020-03-05T18:00:00,two"]
    with pytest.raises(lt.InputError) as error:
        read_ranges(csv_of(*lines))
    assert "line 5: epoch is '2020-03-04T99:00:00'" in str(error.value)
    assert "line 7: 1 cells where 2 columns are named" in str(error.value)
    assert "skip_unreadable=True" in str(error.value)
    ranges = read_ranges(csv_of(*lines), skip_unreadable=True)
    assert len(ranges) == len(WHEN)
    assert [u.line for u in ranges.unreadable] == [5, 7, 23]
    assert ranges.unreadable[2].reason == "round_trip_s 'two' is no number"


def test_defaults_follow_rows_that_are_left_out() -> None:
    weather = lt.Weather(np.array([700.0, 710.0, 720.0]), 270.0, 0.3)
    table = {"epoch": WHEN[:3], "round_trip_s": [2.5, np.nan, 2.5]}
    ranges = read_ranges(table, None, True, Defaults(weather, [1.0, 2.0, 3.0]))
    assert ranges.weather["pressure_hpa"].tolist() == [700.0, 720.0]
    assert ranges.sigma_ps is not None
    assert ranges.sigma_ps.tolist() == [1.0, 3.0]
    for bad in (Defaults(lt.Weather(np.ones(2) * 700.0, 270.0, 0.3)), Defaults(None, [1.0, 2.0])):
        with pytest.raises(lt.InputError):
            read_ranges(table, None, True, bad)
    with pytest.raises(lt.InputError, match="sigma_ps"):
        read_ranges(table, None, True, Defaults(None, -1.0))


def test_ten_million_rows_are_refused_with_advice() -> None:
    count = 10_000_000
    table = {"mjd_utc": np.broadcast_to(58911.5, (count,)), "round_trip_s": np.zeros(count)}
    with pytest.raises(lt.InputError) as error:
        read_ranges(table)
    assert str(count) in str(error.value)
    assert f"up to {MOST_ROWS} rows at a time" in str(error.value)


# -- no ranges at all ------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("factor", "words"),
    [
        (1e3, "is it in milliseconds?"),
        (1e12, "is it in picoseconds?"),
        (1e9, "is it in nanoseconds?"),
        (1e-3, "ms where us are meant"),
        (0.5, "half of the round trip, or one leg"),
        (2.0, "where one leg or half of it is meant"),
        (299792458.0 / 2.0, "metres of distance, one way"),
        (1.07, "another instant, station or array"),
    ],
)
def test_wrong_unit(factor: float, words: str) -> None:
    with pytest.raises(lt.InputError) as error:
        lt.crosscheck({"epoch": WHEN, "round_trip_s": factor * SECONDS}, HILLTOP, ARRAY)
    assert words in str(error.value)
    assert "row 0" in str(error.value)


def test_one_row_in_another_unit() -> None:
    mixed = SECONDS.copy()
    mixed[4] *= 1e12
    with pytest.raises(lt.InputError, match="row 4"):
        lt.crosscheck({"epoch": WHEN, "round_trip_s": mixed}, HILLTOP, ARRAY)
    report = lt.crosscheck(
        {"epoch": WHEN, "round_trip_s": mixed}, HILLTOP, ARRAY, skip_unreadable=True
    )
    assert len(report) == len(WHEN) - 1
    assert report.ranges.unreadable[0].line == 4
    assert not report.findings


@given(st.sampled_from([1e3, 1e6, 1e9, 1e12, 0.5, 2.0]), st.floats(-1e-3, 1e-3))
def test_units_are_recognised_from_the_ratio(factor: float, off: float) -> None:
    assert unit_of(factor * (1.0 + off)) is not None
    assert unit_of(factor * 1.1) is None


# -- any text at all -------------------------------------------------------------------------------


@settings(deadline=None, max_examples=150)
@given(st.text(max_size=300))
def test_any_text_is_read_or_refused(text: str) -> None:
    try:
        read_ranges(io.StringIO(text))
    except lt.LighttimeError:
        return
    raise AssertionError("text without columns was read")


@settings(deadline=None, max_examples=150)
@given(st.lists(st.text(max_size=30), max_size=8))
def test_any_cells_are_read_or_refused(cells: list[str]) -> None:
    rows = [f"{a.replace(chr(10), ' ')},{a}" for a in cells]
    try:
        ranges = read_ranges(csv_of("epoch,round_trip_s", *rows), skip_unreadable=True)
    except lt.LighttimeError:
        return
    assert np.isfinite(ranges.high_s).all()
