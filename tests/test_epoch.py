"""`Epoch`: what it keeps, what it reads and writes, and what it refuses."""

from __future__ import annotations

import copy
import pickle
import subprocess
import sys
from datetime import UTC, date, datetime, timedelta, timezone
from fractions import Fraction
from typing import Any

import numpy as np
import pytest

from lighttime.errors import CoverageError, InputError, UnknownNameError
from lighttime.timescales import SCALES, Epoch

DAY = 2454555.5  # 2008-03-30 0h


def test_a_julian_date_is_kept_to_the_last_bit_of_two_floats() -> None:
    epoch = Epoch(2454555.0, 0.1234567890123456, "tt")
    assert Fraction(epoch.jd1) + Fraction(epoch.jd2) == 2454555 + Fraction(0.1234567890123456)
    assert epoch.jd1 == 2454555.0 + 0.1234567890123456
    assert Epoch(0.1234567890123456, 2454555.0, "tt") == epoch


def test_scalars_are_floats_and_arrays_cannot_be_written_to() -> None:
    one = Epoch(np.float64(DAY), np.array(0.25), "TT")
    assert type(one.jd1) is float
    assert type(one.jd2) is float
    assert (one.scale, one.shape) == ("tt", ())
    many = Epoch(DAY, np.zeros((2, 3)), "tt")
    assert many.shape == (2, 3)
    with pytest.raises(ValueError, match="read-only"):
        many.jd1[0, 0] = 0.0
    with pytest.raises(AttributeError):
        one.scale = "utc"  # type: ignore[misc]


def test_what_the_caller_does_to_his_array_later_does_not_matter() -> None:
    theirs = np.zeros(3)
    epoch = Epoch(DAY, theirs, "tt")
    theirs[:] = 0.5
    assert epoch[1] == Epoch(DAY, 0.0, "tt")


def test_indexing_iteration_and_length() -> None:
    many = Epoch(DAY, np.arange(6).reshape(2, 3) / 8, "tt")
    assert len(many) == 2
    assert many[1, 2] == Epoch(DAY, 5 / 8, "tt")
    assert many[:, 1:].shape == (2, 2)
    assert [row.shape for row in many] == [(3,), (3,)]
    assert many[many.jd1 > DAY + 0.3].shape == (3,)
    one = many[0, 0]
    assert bool(one)
    for attempt in (lambda: len(one), lambda: one[0], lambda: list(one)):
        with pytest.raises(TypeError, match="one instant"):
            attempt()


def test_equality_hash_copies_and_pickles() -> None:
    a, b = Epoch(DAY, 0.1, "tt"), Epoch(DAY, np.full(2, 0.1), "tt")
    assert a == Epoch(0.1, DAY, "tt")
    assert a != Epoch(DAY, 0.1, "tai")
    assert a != b
    assert a != Epoch(DAY, 0.1 + 1e-17, "tt")
    assert a != DAY
    assert Epoch(DAY, -0.0, "tt") == Epoch(DAY, 0.0, "tt")
    assert hash(Epoch(DAY, -0.0, "tt")) == hash(Epoch(DAY, 0.0, "tt"))
    for epoch in (a, b):
        for twin in (pickle.loads(pickle.dumps(epoch)), copy.deepcopy(epoch)):
            assert twin == epoch
            assert hash(twin) == hash(epoch)


def test_printed_for_people() -> None:
    shot = Epoch.parse("2008-03-30T12:39:50.25")
    assert str(shot) == "2008-03-30T12:39:50.250000000000 UTC"
    assert repr(shot) == "Epoch.parse('2008-03-30T12:39:50.250000000000', 'utc')"
    assert eval(repr(shot)) == shot
    night = Epoch.parse(["2008-03-30T12:39:50", "2008-03-30T13:00:00"])
    text = (
        "2 instants from 2008-03-30T12:39:50.000000000000 to 2008-03-30T13:00:00.000000000000 UTC"
    )
    assert str(night) == text
    assert repr(night) == f"<Epoch: {text}>"
    assert str(Epoch([], [], "tt")) == "0 instants in TT"


def test_day_and_fraction() -> None:
    assert Epoch(DAY + 0.5, 0.125, "tt").day_and_fraction() == (DAY, 0.625)
    assert Epoch(DAY, -1e-9, "tt").day_and_fraction() == (DAY - 1, 1 - 1e-9)
    # Nearer to midnight than a fraction in one float64 can tell:
    assert Epoch(DAY, -1e-18, "tt").day_and_fraction() == (DAY, 0.0)
    day, fraction = Epoch(DAY, np.array([0.0, 0.25, 0.75]), "tt").day_and_fraction()
    assert day.tolist() == [DAY] * 3
    assert fraction.tolist() == [0.0, 0.25, 0.75]


# --- text -----------------------------------------------------------------------------------

TEXTS = [
    "2008-03-30T12:39:50.000000000000",
    "2008-03-30T12:39:50.000000000001",
    "2016-12-31T23:59:59.999999999999",
    "2016-12-31T23:59:60.000000000000",
    "2016-12-31T23:59:60.999999999999",
    "2017-01-01T00:00:00.000000000000",
    "1972-06-30T23:59:60.500000000000",
    "1960-01-01T00:00:00.000000000000",
    "1963-10-31T23:59:60.050000000000",  # the day was 0.1 s longer
    "1961-07-31T23:59:59.949999999999",  # the day was 0.05 s shorter
    "1971-12-31T23:59:60.107757000000",  # and this one 0.107758 s longer
    "2099-12-31T23:59:59.999999999999",
]


@pytest.mark.parametrize("text", TEXTS)
def test_text_to_the_picosecond_both_ways(text: str) -> None:
    assert Epoch.parse(text).isoformat(12) == text


@pytest.mark.parametrize("scale", SCALES)
def test_text_in_every_scale(scale: str) -> None:
    text = "2016-12-31T23:59:59.123456789012"
    assert Epoch.parse(text, scale).isoformat() == text
    assert Epoch.parse(text, scale).scale == scale


def test_every_digit_of_a_fraction_counts() -> None:
    epoch = Epoch.parse("2008-03-30T00:00:00.123456789012345678901", "tt")
    assert epoch.isoformat(18) == "2008-03-30T00:00:00.123456789012345679"
    exact = Fraction(123456789012345678901, 10**21) / 86400 + Fraction(DAY)
    error = Fraction(epoch.jd1) + Fraction(epoch.jd2) - exact
    assert abs(error) < Fraction(1, 2**85)  # half a unit in the last place of jd2
    far = Epoch.parse("2008-03-30T00:00:00." + "0" * 100 + "1", "tt")
    assert far.jd1 == DAY
    assert far.jd2 == pytest.approx(1e-101 / 86400, rel=1e-15)


@pytest.mark.parametrize(
    ("text", "same"),
    [
        ("2008-03-30 12:39:50", "2008-03-30T12:39:50"),
        ("2008-03-30T12:39:50Z", "2008-03-30T12:39:50"),
        ("2008-03-30T12:39:50+00:00", "2008-03-30T12:39:50"),
        ("2008-03-30T12:39:50.0-0000", "2008-03-30T12:39:50"),
        ("2008-03-30T12:39", "2008-03-30T12:39:00"),
        ("2008-03-30", "2008-03-30T00:00:00"),
        (" 2008-03-30T12:39:50\n", "2008-03-30T12:39:50"),
    ],
)
def test_forms_of_text(text: str, same: str) -> None:
    assert Epoch.parse(text) == Epoch.parse(same)


@pytest.mark.parametrize(
    ("text", "digits", "rounded"),
    [
        ("2008-03-30T12:39:59.9999999999996", 12, "2008-03-30T12:40:00.000000000000"),
        ("2008-03-30T12:59:59.96", 1, "2008-03-30T13:00:00.0"),
        ("2008-12-30T23:59:59.9996", 3, "2008-12-31T00:00:00.000"),
        ("2016-12-31T23:59:59.9999999999996", 12, "2016-12-31T23:59:60.000000000000"),
        ("2016-12-31T23:59:60.9999999999996", 12, "2017-01-01T00:00:00.000000000000"),
        ("2016-12-31T23:59:60.4", 0, "2016-12-31T23:59:60"),
        ("2015-12-31T23:59:59.6", 0, "2016-01-01T00:00:00"),
        ("1963-10-31T23:59:60.09", 1, "1963-11-01T00:00:00.0"),
        ("2008-03-30T12:39:50.24", 1, "2008-03-30T12:39:50.2"),
    ],
)
def test_rounding_carries_into_minute_day_and_leap_second(
    text: str, digits: int, rounded: str
) -> None:
    assert Epoch.parse(text).isoformat(digits) == rounded


def test_text_of_arrays_keeps_the_shape() -> None:
    text = np.array([["2008-03-30T00:00:00", "2016-12-31T23:59:60"]])
    epoch = Epoch.parse(text)
    assert epoch.shape == (1, 2)
    assert epoch.isoformat(0).tolist() == text.tolist()


# --- other kinds of value -------------------------------------------------------------------

SHOT = Epoch.parse("2008-03-30T12:39:50.125")


def test_aware_datetimes_of_any_zone() -> None:
    moment = datetime(2008, 3, 30, 12, 39, 50, 125000, tzinfo=UTC)
    assert Epoch.parse(moment) == SHOT
    assert Epoch.parse(moment.astimezone(timezone(timedelta(hours=-7)))) == SHOT
    assert Epoch.parse(moment, "tt") == SHOT  # a datetime says itself that it is UTC
    assert Epoch.parse([moment, moment]).shape == (2,)
    before = datetime(2016, 12, 31, 23, 59, 59, 999999, tzinfo=UTC)
    assert Epoch.parse(before) == Epoch.parse("2016-12-31T23:59:59.999999")


@pytest.mark.parametrize("unit", ["ms", "us", "ns"])
def test_datetime64_is_taken_in_the_scale_given(unit: str) -> None:
    moment = np.datetime64("2008-03-30T12:39:50.125", unit)
    assert Epoch.parse(moment) == SHOT
    assert Epoch.parse(moment, "tt") == Epoch.parse("2008-03-30T12:39:50.125", "tt")
    many = Epoch.parse(np.array([[moment], [moment]]))
    assert many.shape == (2, 1)
    assert many[1, 0] == SHOT


@pytest.mark.parametrize(
    "text",
    ["2008-03-30T12:39:50.123456789", "2016-12-31T23:59:59.999999999", "1969-07-21T02:56:15.1"],
)
def test_datetime64_agrees_with_text(text: str) -> None:
    difference = Epoch.parse(np.datetime64(text, "ns")).seconds_since(Epoch.parse(text))
    assert abs(difference) < 1e-20  # measured 0 to 4e-21


def test_datetime64_of_coarse_and_of_the_finest_units() -> None:
    assert Epoch.parse(np.datetime64("2008")).isoformat(0) == "2008-01-01T00:00:00"
    assert Epoch.parse(np.datetime64("2008-03")).isoformat(0) == "2008-03-01T00:00:00"
    assert Epoch.parse(np.datetime64("2008-03-30")).isoformat(0) == "2008-03-30T00:00:00"
    assert Epoch.parse(np.datetime64("2008-03-30T12")).isoformat(0) == "2008-03-30T12:00:00"
    atto = np.array([-1, 9_123_456_789_012_345_678], dtype="datetime64[as]")
    assert Epoch.parse(atto, "tt").isoformat(18).tolist() == [
        "1969-12-31T23:59:59.999999999999999999",
        "1970-01-01T00:00:09.123456789012345678",
    ]


def test_lists_of_anything_readable() -> None:
    moment = datetime(2008, 3, 30, 12, 39, 50, 125000, tzinfo=UTC)
    mixed = Epoch.parse(
        [SHOT, moment, "2008-03-30T12:39:50.125", np.datetime64(moment.replace(tzinfo=None))]
    )
    assert mixed.shape == (4,)
    assert set(mixed) == {SHOT}
    nested = Epoch.parse([["2008-03-30", "2008-03-31"], ["2008-04-01", "2008-04-02"]], "tt")
    assert (nested.shape, nested.scale) == ((2, 2), "tt")
    assert Epoch.parse([]).shape == (0,)
    assert Epoch.parse(np.array("2008-03-30T12:39:50.125")) == SHOT
    assert Epoch.parse(SHOT, "tt") is not None
    assert Epoch.parse(SHOT, "tt") == SHOT


def test_astropy_time_both_ways() -> None:
    from astropy.time import Time

    for text in ("2008-03-30T12:39:50.125", "2016-12-31T23:59:60.500", "1969-07-21T02:56:15.000"):
        for scale in ("utc", "tai", "tt", "tdb"):
            told = text if scale == "utc" else text.replace("60.", "59.")
            mine, theirs = Epoch.parse(told, scale), Time(told, scale=scale, precision=3)
            assert mine.astropy().scale == scale
            assert mine.astropy().to_value("isot", subfmt="date_hms") == theirs.value
            # astropy keeps a day number and a fraction of up to half a day: 5 ps at the most.
            read = Epoch.parse(theirs)
            assert read.scale == scale
            assert abs(read.seconds_since(mine)) < 6e-12
            assert abs(Epoch.parse(mine.astropy()).seconds_since(mine)) < 6e-12
    assert Epoch.parse("2008-03-30", "gps").astropy().scale == "tai"
    many = Epoch.parse(Time([[2454555.5, 2454556.5]], format="jd", scale="tt"), "utc")
    assert (many.shape, many.scale) == ((1, 2), "tt")


# --- shifts and differences -----------------------------------------------------------------


def test_elapsed_seconds_pass_through_a_leap_second() -> None:
    before = Epoch.parse("2016-12-31T23:59:59")
    for elapsed, text in [(0.5, "59.5"), (1.0, "60.0"), (1.5, "60.5")]:
        after = before.shift(elapsed)
        assert after.isoformat(1) == f"2016-12-31T23:59:{text}"
        assert after.seconds_since(before) == elapsed
    assert before.shift(2.0).isoformat(0) == "2017-01-01T00:00:00"
    assert abs(before.shift(2.0).shift(-2.0).seconds_since(before)) < 5e-21  # measured 2e-21


def test_a_second_of_1969_was_not_a_second_of_tai() -> None:
    start = Epoch.parse("1969-07-21T00:00:00")
    end = Epoch.parse("1969-07-22T00:00:00")
    assert end.seconds_since(start) == 86400.002592  # USNO/IERS tai-utc: the drift of 1966-1972
    assert start.shift(86400.002592).seconds_since(end) == pytest.approx(0.0, abs=1e-11)


def test_a_shift_in_two_parts_keeps_them_both() -> None:
    base = Epoch(DAY, 0.3, "tt")
    moved = base.shift(2.617071037988912, 1.23e-17)
    assert moved.shift(-2.617071037988912).seconds_since(base) == pytest.approx(1.23e-17, abs=3e-21)
    assert base.shift(np.array([0.0, 1e-15])).seconds_since(base)[1] == pytest.approx(
        1e-15, abs=3e-21
    )
    assert base.shift([[1.0], [2.0]]).shape == (2, 1)


def test_seconds_since_counts_in_the_scale_of_the_later_named_epoch() -> None:
    a, b = Epoch.parse("2000-01-01", "tt"), Epoch.parse("2010-01-01", "tt")
    assert b.seconds_since(a) == 3653 * 86400.0
    assert a.seconds_since(b) == -3653 * 86400.0
    tcg = b.to("tcg").seconds_since(a.to("tcg"))
    assert tcg == pytest.approx(3653 * 86400.0 / (1 - 6.969290134e-10), rel=2e-16)  # IAU 2000 B1.9
    assert b.seconds_since(a.to("tcb")) == pytest.approx(3653 * 86400.0, abs=1e-7)
    assert b.to("utc").seconds_since(a.to("utc")) == 3653 * 86400.0
    assert Epoch(DAY, [0.0, 0.5], "tt").seconds_since(Epoch(DAY, 0.0, "tt")).tolist() == [
        0.0,
        43200.0,
    ]


def test_to_the_same_scale_is_the_same_epoch() -> None:
    assert SHOT.to("UTC") is SHOT


# --- what is refused ------------------------------------------------------------------------

NAIVE = datetime(2008, 3, 30, 12, 39, 50)

BAD: list[tuple[Any, str, str]] = [
    ("2008-03-30T23:59:60", "utc", "seconds below 60: 2008-03-30 does not end in a leap second"),
    ("2016-12-31T12:00:60", "utc", "seconds below 60: 2016-12-31 has its leap second at 23:59:60"),
    ("2016-12-31T23:59:61", "utc", "seconds below 61 in the last minute of 2016-12-31"),
    ("1961-07-31T23:59:59.96", "utc", "seconds below 59.95 in the last minute of 1961-07-31"),
    ("2016-12-31T23:59:60", "tt", "tt has no leap seconds"),
    ("0000-03-30T00:00:00", "tt", "years 0001 to 9999"),
    ("2008-13-30T00:00:00", "utc", "months 01 to 12"),
    ("2008-00-30T00:00:00", "utc", "months 01 to 12"),
    ("2007-02-29T00:00:00", "utc", "a day that 2007-02 has"),
    ("2008-03-32T00:00:00", "utc", "a day that 2008-03 has"),
    ("2008-03-30T24:00:00", "utc", "hours 00 to 23"),
    ("2008-03-30T12:60:00", "utc", "minutes 00 to 59"),
    ("yesterday", "utc", "text like 2008-03-30T12:39:50.123"),
    ("2008-03-30T12:39:50,5", "utc", "text like"),
    ("2008-03-30T12:39:50.5.5", "utc", "text like"),
    ("2008-03-30T12:39:5٠", "utc", "text like"),
    ("", "utc", "text like"),
    ("2008-03-30T12:39:50+02:00", "utc", "UTC itself, Z or [+]00:00; an aware datetime"),
    ("2008-03-30T12:39:50Z", "tt", "no offset from UTC on text in the scale tt"),
    (NAIVE, "utc", "a datetime with a time zone, as tzinfo=timezone.utc"),
    (date(2008, 3, 30), "utc", "an instant: a date alone does not say when"),
    (np.datetime64("NaT"), "utc", "'NaT'; allowed: a datetime64 with a date"),
    (np.array(["2008-03-30", "NaT"], dtype="datetime64[s]"), "utc", "a datetime64 with a date"),
    (2454555.5, "utc", "2454555.5; allowed: ISO text, an aware datetime"),
    (None, "utc", "None; allowed: ISO text"),
    (np.array([2454555.5]), "utc", "an array of float64'; allowed: ISO text"),
    (np.timedelta64(1, "s"), "utc", "allowed: ISO text"),
    ([["2008-03-30"], "2008-03-30"], "utc", r"shapes in epoch is \[\(\), \(1,\)\]; allowed: one"),
    ([SHOT, SHOT.to("tt")], "utc", r"scales of epoch is \['tt', 'utc'\]; allowed: one scale"),
    (
        ["2008-03-30", "2008-03-30T99:00"],
        "utc",
        r"epoch\[1\] is '2008-03-30T99:00'; allowed: hours",
    ),
]


@pytest.mark.parametrize(("value", "scale", "message"), BAD)
def test_bad_values_are_named(value: Any, scale: str, message: str) -> None:
    with pytest.raises(InputError, match=message):
        Epoch.parse(value, scale)


@pytest.mark.parametrize(
    "value",
    [
        "1959-12-31T23:59:59",
        "2100-01-01",
        "0001-01-01",
        np.datetime64("1959-12-31T23:59:59"),
        datetime(1959, 12, 31, tzinfo=UTC),
    ],
)
def test_utc_outside_its_years_is_refused(value: Any) -> None:
    with pytest.raises(CoverageError, match="1960-01-01 to 2099-12-31"):
        Epoch.parse(value)


@pytest.mark.parametrize("jd", [2436934.5 - 1e-9, 2488069.5])
def test_utc_outside_its_years_is_refused_as_a_julian_date(jd: float) -> None:
    with pytest.raises(CoverageError, match=r"UTC date is '.*'; allowed: 1960-01-01 to 2099-12-31"):
        Epoch([2454555.5, jd], 0.0, "utc")
    with pytest.raises(CoverageError, match="1960-01-01 to 2099-12-31"):
        Epoch(jd, 0.0, "tai").shift(-3.0 if jd < 2454555.5 else 38.0).to("utc")


@pytest.mark.parametrize("bad", [np.nan, np.inf, -np.inf])
def test_numbers_that_are_not_finite(bad: float) -> None:
    for parts in [(bad, 0.0), (DAY, bad), ([DAY, bad], 0.0)]:
        for scale in ("tt", "utc"):
            with pytest.raises(InputError, match=r"Julian date is (nan|-?inf); allowed: finite"):
                Epoch(*parts, scale)
    with pytest.raises(InputError, match=r"seconds is -?(nan|inf); allowed: finite numbers"):
        SHOT.to("tt").shift(bad)
    with pytest.raises(InputError, match=r"seconds is -?(nan|inf); allowed: finite numbers"):
        SHOT.shift(bad)


def test_dates_outside_the_calendar() -> None:
    for jd in (1721425.0, 5373484.0, 1e300):
        with pytest.raises(InputError, match="the years 1 to 9999"):
            Epoch(jd, 0.0, "tt")


def test_unknown_scales_suggest_the_near_ones() -> None:
    for attempt in (
        lambda: Epoch(DAY, 0.0, "tdt"),
        lambda: Epoch.parse("2008-03-30", "tdt"),
        lambda: SHOT.to("tdt"),
    ):
        with pytest.raises(
            UnknownNameError, match=r"scale is 'tdt'; allowed: did you mean tt or tdb"
        ):
            attempt()
    with pytest.raises(UnknownNameError, match="scale is None"):
        Epoch(DAY, 0.0, None)  # type: ignore[arg-type]


def test_an_astropy_scale_that_is_not_a_time_scale_here() -> None:
    from astropy.time import Time

    with pytest.raises(UnknownNameError, match="scale of epoch is 'local'"):
        Epoch.parse(Time(DAY, format="jd", scale="local"))
    masked = Time([DAY, DAY + 1], format="jd", scale="tt")
    masked[1] = np.ma.masked
    with pytest.raises(InputError, match="without masked elements"):
        Epoch.parse(masked)


def test_mismatched_shapes() -> None:
    with pytest.raises(InputError, match=r"shapes of jd1 and jd2 is '\(2,\) and \(3,\)'"):
        Epoch([DAY, DAY], [0.0, 0.0, 0.0], "tt")
    pair = Epoch([DAY, DAY], 0.0, "tt")
    with pytest.raises(InputError, match=r"seconds is 'shape \(3,\) for epochs of shape \(2,\)'"):
        pair.shift([1.0, 2.0, 3.0])
    with pytest.raises(InputError, match=r"shape of other is \(3,\)"):
        pair.seconds_since(Epoch(DAY, np.zeros(3), "tt"))


def test_other_wrong_arguments() -> None:
    with pytest.raises(InputError, match=r"Julian date is .*; allowed: two numbers"):
        Epoch("soon", 0.0, "tt")
    with pytest.raises(InputError, match=r"other is 1\.0; allowed: an Epoch"):
        SHOT.seconds_since(1.0)  # type: ignore[arg-type]
    for digits in (-1, 22, 3.0):
        with pytest.raises(InputError, match=r"digits is .*; allowed: whole numbers 0 to 21"):
            SHOT.isoformat(digits)  # type: ignore[arg-type]
    with pytest.raises(InputError, match="place is 'here'; allowed: an object with xyz_m"):
        SHOT.to("tdb", place="here")  # type: ignore[arg-type]
    with pytest.raises(
        InputError, match=r"earth_orientation is 0\.3; allowed: an EarthOrientation"
    ):
        SHOT.to("ut1", earth_orientation=0.3)  # type: ignore[arg-type]


def test_importing_the_room_does_not_import_astropy() -> None:
    program = "import sys, lighttime.timescales; print('astropy' in sys.modules)"
    out = subprocess.run(
        [sys.executable, "-c", program], capture_output=True, text=True, check=True
    )
    assert out.stdout.strip() == "False"


def test_pandas_timestamps_to_the_nanosecond() -> None:
    pandas = pytest.importorskip("pandas")
    stamp = pandas.Timestamp("2008-03-30T12:39:50.125000001", tz="America/Los_Angeles")
    assert Epoch.parse(stamp).isoformat(9) == "2008-03-30T19:39:50.125000001"
    assert Epoch.parse(pandas.Series([stamp, stamp])).shape == (2,)
    with pytest.raises(InputError, match="NaT; allowed: ISO text"):
        Epoch.parse(pandas.NaT)
