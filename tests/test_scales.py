"""Time scales against the outside: SOFA's worked example and tests, ERFA, astropy, the tables."""

from __future__ import annotations

import warnings
from dataclasses import dataclass
from datetime import date
from fractions import Fraction
from types import SimpleNamespace
from typing import Any

import erfa
import numpy as np
import pytest

from lighttime.errors import CoverageError, InputError, LighttimeError, UnknownNameError
from lighttime.timescales import SCALES, Epoch, scales
from lighttime.timescales.leapseconds import utc_day_seconds, utc_table
from lighttime.timescales.tdb import tdb_minus_tt, tdb_to_tt, tt_to_tdb

PS = 1e-12


@dataclass(frozen=True)
class Ut1:
    """UT1 - TAI as a constant."""

    ut1_tai_s: float

    def at(self, tai1: Any, tai2: Any) -> Ut1:
        return self


# --- IAU SOFA, Time Scale and Calendar Tools: the worked example -----------------------------

SITE = SimpleNamespace(
    xyz_m=erfa.gd2gc(
        1,
        -np.radians(155 + 55 / 60 + 59.6 / 3600),
        np.radians(19 + 28 / 60 + 52.5 / 3600),
        0.0,
    )
)
SOFA_UT1 = Ut1(0.3341 - 33.0)  # UT1 - UTC = +0.3341 s, TAI - UTC = 33 s
SOFA_EXAMPLE = {
    "utc": "2006-01-15T21:24:37.500000",
    "ut1": "2006-01-15T21:24:37.834100",
    "tai": "2006-01-15T21:25:10.500000",
    "tt": "2006-01-15T21:25:42.684000",
    "tcg": "2006-01-15T21:25:43.322690",
    "tdb": "2006-01-15T21:25:42.684373",
    "tcb": "2006-01-15T21:25:56.893952",
}


@pytest.mark.parametrize("source", SOFA_EXAMPLE)
@pytest.mark.parametrize("target", SOFA_EXAMPLE)
def test_sofa_worked_example(source: str, target: str) -> None:
    """Every scale from UTC to all printed digits; from every other within their rounding."""
    given = Epoch.parse(SOFA_EXAMPLE[source], source)
    answer = given.to(target, SITE, SOFA_UT1)
    if source in ("utc", "tai", "tt", "ut1"):  # exact to the printed digits
        assert answer.isoformat(6) == SOFA_EXAMPLE[target]
    error = answer.to("tai", SITE, SOFA_UT1).seconds_since(
        Epoch.parse(SOFA_EXAMPLE["utc"]).to("tai")
    )
    assert abs(error) < 0.5001e-6


# --- IAU SOFA, test program of the library (from memory) ------------------------------------


@pytest.mark.parametrize(
    ("source", "fraction", "target", "answer"),
    [
        ("utc", 0.892100694, "tai", 0.8924826384444444444),
        ("tai", 0.892482639, "utc", 0.8921006945555555556),
        ("tai", 0.892482639, "tt", 0.892855139),
        ("tt", 0.892482639, "tai", 0.892110139),
        ("tt", 0.892482639, "tcg", 0.8924900312508587113),
        ("tcg", 0.892862531, "tt", 0.8928551387488816828),
        ("tdb", 0.892855137, "tcb", 0.8930195997253656716),
        ("tcb", 0.893019599, "tdb", 0.8928551362746343397),
    ],
)
def test_sofa_library_values(source: str, fraction: float, target: str, answer: float) -> None:
    day, found = Epoch(2453750.5, fraction, source).to(target).day_and_fraction()
    assert day == 2453750.5
    assert found == pytest.approx(answer, abs=1.2e-16)  # one unit in the last place


def test_sofa_library_value_of_tdb_minus_tt() -> None:
    """Place given by longitude 5.0123 rad, 5525.242 km from the axis, 3190 km north."""
    xyz_m = (5525242.0 * np.cos(5.0123), 5525242.0 * np.sin(5.0123), 3190000.0)
    answer = tdb_minus_tt(2448939.5, 0.123, 0.76543, xyz_m)
    assert answer == pytest.approx(-0.1280368005936998991e-2, abs=1e-17)


# --- UTC: the published table ---------------------------------------------------------------


def test_the_table_is_that_of_erfa() -> None:
    known, published = utc_table(), erfa.leap_seconds.get()
    assert len(known.mjd) == len(published)
    dates = [date.fromordinal(int(mjd) + 678576) for mjd in known.mjd]
    assert [(d.year, d.month, d.day) for d in dates] == [
        (int(row["year"]), int(row["month"]), 1) for row in published
    ]
    assert (known.offset / 1e7).tolist() == published["tai_utc"].tolist()


@pytest.mark.parametrize(
    ("day", "tai_minus_utc"),
    # USNO/IERS tai-utc, evaluated by hand: offset + (MJD - reference) * drift
    [
        ("1961-01-01", "1.4228180"),  # MJD 37300
        ("1961-08-01", "1.6475700"),  # 1.3728180 + 212 * 0.001296
        ("1962-01-01", "1.8458580"),
        ("1963-11-01", "2.6972788"),  # 1.9458580 + 669 * 0.0011232
        ("1965-09-01", "4.1550580"),  # 3.8401300 + 243 * 0.001296
        ("1968-02-01", "6.1856820"),  # 4.2131700 + 761 * 0.002592
        ("1969-07-21", "7.5749940"),
        ("1971-12-31", "9.8896500"),  # 4.2131700 + 2190 * 0.002592
        ("1972-01-01", "10"),
        ("1972-06-30", "10"),
        ("1972-07-01", "11"),
        ("2016-12-31", "36"),
        ("2017-01-01", "37"),
        ("2050-01-01", "37"),
    ],
)
def test_tai_minus_utc_at_midnight(day: str, tai_minus_utc: str) -> None:
    epoch = Epoch.parse(day)
    assert scales.tai_minus_utc(epoch.jd1, epoch.jd2) == float(tai_minus_utc)
    midnight = Epoch.parse(day, "tai").shift(float(tai_minus_utc))
    assert abs(epoch.to("tai").seconds_since(midnight)) < 1e-15


def test_drift_within_a_day_of_1969() -> None:
    noon = Epoch.parse("1969-07-21T12:00:00")
    assert scales.tai_minus_utc(noon.jd1, noon.jd2) == pytest.approx(7.574994 + 0.001296, abs=1e-15)
    assert noon.to("tai").isoformat(9) == "1969-07-21T12:00:07.576290000"


def test_drift_goes_on_through_the_last_lengthened_minute() -> None:
    """USNO/IERS tai-utc at 86400.1 s of 1971-12-31: 9.88965 + 0.002592 * 86400.1 / 86400."""
    late = Epoch.parse("1971-12-31T23:59:60.1")
    assert scales.tai_minus_utc(late.jd1, late.jd2) == pytest.approx(9.892242003, abs=2e-14)
    assert late.to("tai").isoformat(12) == "1972-01-01T00:00:09.992242003000"


def test_length_of_days() -> None:
    assert utc_day_seconds(57753) == 86401  # 2016-12-31
    assert utc_day_seconds(57754) == 86400
    known = utc_table()
    steps = {int(mjd) - 1: utc_day_seconds(int(mjd) - 1) - 86400 for mjd in known.mjd[1:]}
    late = {day: step for day, step in steps.items() if day >= 41317}
    assert len(late) == 27  # leap seconds from 1972 to 2016
    assert set(late.values()) == {Fraction(1)}
    early = [float(step) for day, step in steps.items() if day < 41317]
    # USNO/IERS tai-utc, the steps of 1961-01-01 to 1972-01-01, in s; those of 0 changed the rate
    published = [0.005, -0.05, 0, 0.1, 0, 0.1, 0.1, 0.1, 0.1, 0.1, 0.1, 0, -0.1, 0.107758]
    # A second of UTC was longer than one of TAI by up to 3e-8.
    assert early == pytest.approx(published, abs=4e-9)


def test_seconds_of_the_longest_minute() -> None:
    minute = Epoch.parse([f"2016-12-31T23:59:{s:02d}" for s in range(61)] + ["2017-01-01"])
    tai = minute.to("tai")
    elapsed = tai[1:].seconds_since(tai[:-1])
    assert elapsed.tolist() == [1.0] * 61
    assert tai.to("utc").isoformat(0).tolist() == minute.isoformat(0).tolist()


def test_coverage_of_utc() -> None:
    start = Epoch.parse("1960-01-01").to("tai")
    assert start.isoformat(9) == "1960-01-01T00:00:00.943482000"  # 1.4178180 - 366 * 0.001296
    assert scales.tai_to_utc(start.jd1, start.jd2)[0] == 2436934.5


def test_systems_of_navigation_satellites() -> None:
    """GPS week 0 began on 1980-01-06 0h UTC (IS-GPS-200); Galileo's, at 1999-08-21T23:59:47 UTC
    (Galileo OS SIS ICD: 13 s before midnight)."""
    assert Epoch.parse("1980-01-06").to("gps").isoformat(9) == "1980-01-06T00:00:00.000000000"
    galileo = Epoch.parse("1999-08-21T23:59:47").to("gst")
    assert galileo.isoformat(9) == "1999-08-22T00:00:00.000000000"
    assert Epoch.parse("2020-01-01").to("gps").isoformat(0) == "2020-01-01T00:00:18"


# --- against ERFA ---------------------------------------------------------------------------


def instants(count: int, first: int, last: int, seed: int) -> Epoch:
    """UTC instants, a third of them on days that end in a leap second, in their last minute."""
    rng = np.random.default_rng(seed)
    day = rng.integers(first, last, count)
    fraction = rng.random(count)
    ends = utc_table().mjd[1:] - 1
    ends = ends[(ends >= first) & (ends < last)]
    day[::3] = rng.choice(ends, len(day[::3]))
    fraction[::3] = 1 - fraction[::3] / 1440
    return Epoch(day + 2400000.5, fraction, "utc")


def difference(mine: Epoch, theirs: tuple[Any, Any]) -> float:
    return float(np.max(np.abs(mine.seconds_since(Epoch(*theirs, mine.scale)))))


def test_against_erfa_from_1972_on() -> None:
    """What is left is ERFA's rounding: a day fraction in one float64 has a grid of 5 to 10 ps."""
    utc = instants(2000, 41317, 58849, 1)
    tai, tt, tdb = utc.to("tai"), utc.to("tt"), utc.to("tdb")
    assert difference(tai, erfa.utctai(utc.jd1, utc.jd2)) < 30 * PS  # measured 21
    assert difference(utc, erfa.taiutc(tai.jd1, tai.jd2)) < 30 * PS  # measured 22
    # The others handle pairs as they come, and the small second part loses much less.
    assert difference(tt, erfa.taitt(tai.jd1, tai.jd2)) < 0.02 * PS  # measured 0.007
    assert difference(tt.to("tcg"), erfa.tttcg(tt.jd1, tt.jd2)) < 0.002 * PS
    tcg, tcb = tt.to("tcg"), tdb.to("tcb")
    assert difference(tt, erfa.tcgtt(tcg.jd1, tcg.jd2)) < 0.002 * PS
    assert difference(tcb, erfa.tdbtcb(tdb.jd1, tdb.jd2)) < 0.02 * PS
    assert difference(tdb, erfa.tcbtdb(tcb.jd1, tcb.jd2)) < 0.02 * PS


def test_against_erfa_before_1972() -> None:
    """On days that end in a step, TAI here is continuous through midnight; ERFA's has a step of
    size * rate, at the most 0.107758 s * 3e-8 = 3.2 ns on 1971-12-31."""
    utc = instants(2000, 36934, 41317, 2)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", erfa.ErfaWarning)
        theirs = Epoch(*erfa.utctai(utc.jd1, utc.jd2), "tai")
    apart = np.abs(utc.to("tai").seconds_since(theirs))
    step_day = np.isin(np.floor(utc.jd1 + utc.jd2 - 2400000.5), utc_table().mjd - 1)
    assert apart[~step_day].max() < 30 * PS
    assert 3.0e-9 < apart[step_day].max() < 3.3e-9


# --- TDB ------------------------------------------------------------------------------------


def test_tdb_is_the_solution_of_its_equation() -> None:
    tt = instants(300, 36934, 69807, 3).to("tt")
    rotation = Ut1(-33.0)
    for place in (None, SITE):
        tdb = Epoch(*tt_to_tdb(tt.jd1, tt.jd2, place, rotation), "tdb")
        back = Epoch(*tdb_to_tt(tdb.jd1, tdb.jd2, place, rotation), "tt")
        assert np.abs(back.seconds_since(tt)).max() < 2e-20  # measured 9e-21
        if place is None:
            series = tdb_minus_tt(tdb.jd1, tdb.jd2)
            told = Epoch(tt.jd1, tt.jd2, "tdb").shift(series)
            assert np.abs(told.seconds_since(tdb)).max() < 1e-20


def test_a_place_changes_tdb_by_its_velocity_times_its_position() -> None:
    """TDB - TT at a place less that at the geocentre is V.r/c**2, V the barycentric velocity of
    the Earth, r the place from its centre (IAU 2006 B3, note 4, through the 4-dimensional
    transformation of IAU 2000 B1.3); here with ERFA's epv00 and c2t06a."""
    hours = Epoch(2454555.5, np.linspace(0.0, 365.0, 400), "tt")
    rotation = Ut1(-33.0)
    daily = hours.to("tdb", SITE, rotation).seconds_since(hours.to("tdb"))
    ut1 = hours.to("ut1", earth_orientation=rotation)
    velocity = erfa.epv00(hours.jd1, hours.jd2)[1]["v"] * (erfa.DAU / erfa.DAYSEC)
    to_itrs = erfa.c2t06a(hours.jd1, hours.jd2, ut1.jd1, ut1.jd2, 0.0, 0.0)
    position = np.einsum("nji,j->ni", to_itrs, SITE.xyz_m)
    expected = np.einsum("ni,ni->n", velocity, position) / erfa.CMPS**2
    assert np.ptp(expected) > 3.8e-6
    assert np.abs(daily - expected).max() < 1e-9  # measured 0.63


def test_tdb_minus_tt_has_the_shape_of_its_arguments() -> None:
    assert isinstance(tdb_minus_tt(2454555.5, 0.1), float)
    assert tdb_minus_tt(2454555.5, np.zeros((2, 3))).shape == (2, 3)
    many = np.stack([SITE.xyz_m, SITE.xyz_m], axis=1)
    both = tdb_minus_tt(2454555.5, 0.1, 0.3, many)
    assert both.tolist() == [tdb_minus_tt(2454555.5, 0.1, 0.3, SITE.xyz_m)] * 2


# --- UT1 ------------------------------------------------------------------------------------


def test_ut1_is_what_the_series_says_and_comes_back() -> None:
    @dataclass(frozen=True)
    class Slowing:
        def at(self, tai1: Any, tai2: Any) -> Ut1:
            return Ut1(-30.0 - 2e-3 * ((tai1 - 2453000.5) + tai2))

    tai = Epoch(2453750.5, np.linspace(0, 1, 11), "tai")
    ut1 = tai.to("ut1", earth_orientation=Slowing())
    expected = tai.shift(Slowing().at(tai.jd1, tai.jd2).ut1_tai_s)
    assert ut1 == Epoch(expected.jd1, expected.jd2, "ut1")
    back = ut1.to("tai", earth_orientation=Slowing())
    # UT1 - TAI is a float64 of 32 s, with a grid of 7e-15 s.
    assert np.abs(back.seconds_since(tai)).max() < 1e-14


def test_ut1_of_the_bundled_series() -> None:
    """IERS 20 C04, its line of 2000-01-01 0h UTC: UT1 - UTC = +0.3554724 s."""
    utc = Epoch.parse("2000-01-01")
    ut1 = utc.to("ut1")
    assert ut1.isoformat(6) == "2000-01-01T00:00:00.355472"
    assert abs(ut1.to("utc").seconds_since(utc)) < 1e-14
    assert abs(ut1.shift(10.0).seconds_since(utc) - 10.0) < 1e-14


# --- against astropy ------------------------------------------------------------------------


def test_against_astropy() -> None:
    """500 instants of 1972 to 2026. A fraction of a day in one float64, which is what astropy
    keeps, has a grid of up to 10 ps; TT to TDB it does with TT as argument of the series, which
    is 2 ms * 3e-10 = 0.6 ps off."""
    from astropy.time import Time

    utc = instants(500, 41317, 61406, 4)
    theirs = Time(utc.jd1, utc.jd2, format="jd", scale="utc")
    mine = Epoch.parse(theirs)
    for scale, bar in {"tai": 30, "tt": 30, "tcg": 30, "tdb": 30, "tcb": 30}.items():
        told = getattr(theirs, scale)
        assert difference(mine.to(scale), (told.jd1, told.jd2)) < bar * PS  # measured 15 to 20


# --- refused --------------------------------------------------------------------------------


def test_functions_refuse_what_is_not_a_date() -> None:
    names = [name for name in scales.__all__ if "_to_" in name]
    assert len(names) == 16
    for name in names:
        function = getattr(scales, name)
        source = name.split("_")[0]
        for bad in (np.nan, np.inf):
            with pytest.raises(InputError, match=rf"{source} is .*; allowed: finite Julian dates"):
                function(2454555.5, bad)
        with pytest.raises(InputError, match=rf"shapes of {source} is '\(2,\) and \(3,\)'"):
            function(np.full(2, 2454555.5), np.zeros(3))


def test_utc_outside_its_years() -> None:
    for function in (scales.utc_to_tai, scales.tai_to_utc, scales.tai_minus_utc):
        for day in (2415020.5, 2488080.5):
            with pytest.raises(CoverageError, match=r"UTC date is .* 1960-01-01 to 2099-12-31"):
                function(np.array([2454555.5, day]), 0.0)


def test_names_and_places() -> None:
    with pytest.raises(UnknownNameError, match=r"source is 'et'; allowed: .*one of tai, utc"):
        scales.convert(2454555.5, 0.0, "et", "tt")
    with pytest.raises(UnknownNameError, match="target is 'utc1'; allowed: did you mean ut"):
        scales.convert(2454555.5, 0.0, "tt", "utc1")
    for bad in (1.0, (1.0, 2.0), (np.nan, 0.0, 0.0)):
        with pytest.raises(InputError, match=r"xyz_m is .*; allowed: three finite coordinates"):
            tdb_minus_tt(2454555.5, 0.0, 0.0, bad)
    with pytest.raises(InputError, match=r"tdb is .*; allowed: finite"):
        tdb_minus_tt(2454555.5, np.nan)


def test_every_scale_reaches_every_other() -> None:
    for source in SCALES:
        start = Epoch(2454555.5, 0.25, source)
        for target in SCALES:
            there = start.to(target, earth_orientation=Ut1(-33.4))
            back = there.to(source, earth_orientation=Ut1(-33.4))
            assert abs((back.jd1 - start.jd1) + (back.jd2 - start.jd2)) * 86400 < 2e-20


def test_terms_of_the_place_are_those_of_erfa() -> None:
    """The topocentric terms are what ERFA's dtdb has with a place less what it has without."""
    from lighttime.timescales.tdb import tdb_minus_tt, topocentric

    rng = np.random.default_rng(5)
    day, fraction, ut1 = (
        rng.uniform(36934, 88068, 500) // 1 + 2400000.5,
        *rng.uniform(0, 1, (2, 500)),
    )
    xyz = (4.0e6, -1.0e6, 4.8e6)
    expected = tdb_minus_tt(day, fraction, ut1, xyz) - tdb_minus_tt(day, fraction, ut1)
    assert np.abs(topocentric(day, fraction, ut1, xyz) - expected).max() < 1e-18
    assert np.abs(expected).max() > 1.8e-6


def test_leap_seconds_are_those_of_the_iers_list() -> None:
    """The longer of ERFA's table and the list of `astropy-iers-data`, read through astropy."""
    from astropy.utils import iers

    from lighttime.timescales.leapseconds import utc_table

    listed = iers.LeapSeconds.from_iers_leap_seconds(iers.IERS_LEAP_SECOND_FILE)
    ours = utc_table()
    late = ours.mjd >= 41317
    assert ours.mjd[late].tolist() == [int(m) for m in listed["mjd"][: late.sum()]]
    assert (ours.offset[late] / 1e7).tolist() == [float(v) for v in listed["tai_utc"][: late.sum()]]


def test_a_newer_list_is_used(monkeypatch: pytest.MonkeyPatch) -> None:
    """An old pyerfa beside a new list: as if ERFA did not know of 2017."""
    import erfa

    from lighttime.timescales import leapseconds

    old = erfa.leap_seconds.get()[:-1]
    monkeypatch.setattr(erfa.leap_seconds, "get", lambda: old)
    assert leapseconds._leap_seconds()[-1].tolist() == [2017, 1, 37]
    wrong = erfa.leap_seconds.get().copy()
    wrong["tai_utc"][-1] = 99.0
    monkeypatch.setattr(erfa.leap_seconds, "get", lambda: wrong)
    with pytest.raises(LighttimeError, match="contradict each other"):
        leapseconds._leap_seconds()


@pytest.mark.parametrize(
    ("jd", "told"),
    [(2500000.5, "2132-09-01"), (2e9, r"MJD 1997599999\.0")],
)
def test_days_that_utc_does_not_have(jd: float, told: str) -> None:
    """Those of no calendar are told as a number."""
    with pytest.raises(CoverageError, match=f"UTC date is '{told}'; allowed: 1960-01-01 to"):
        scales.tai_minus_utc(jd, 0.0)
