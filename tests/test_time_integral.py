"""TDB - TT integrated from the ephemeris: against the series, the metric, other quadrature."""

from __future__ import annotations

import pickle
from functools import cache
from pathlib import Path
from typing import Any

import erfa
import mpmath
import numpy as np
import pytest

import lighttime as lt
from lighttime.constants import DAY, L_B, L_C, L_G, SCALES_ORIGIN, SPEED_OF_LIGHT, TDB_0
from lighttime.ephemeris import asteroids, panels, time_file, time_integral
from lighttime.ephemeris.panels import Panels
from lighttime.ephemeris.quadrature import antiderivative, nodes
from lighttime.ephemeris.time_integral import TimeEphemeris
from lighttime.ephemeris.time_rate import State, place_term, slowing, tdb_minus_tt_rate
from lighttime.errors import CoverageError, FileError, InputError, UnknownNameError
from lighttime.timescales.tdb import topocentric

c = SPEED_OF_LIGHT
ORIGIN = (SCALES_ORIGIN[0], SCALES_ORIGIN[1] + TDB_0 / DAY)
HILLTOP = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)


@cache
def integrated() -> TimeEphemeris:
    return TimeEphemeris.integrate(first="1950-01-01", last="2050-01-01")


def test_against_the_series_of_erfa_over_a_century() -> None:
    """Fairhead & Bretagnon's series was adjusted to DE200-era orbits: 10.3 ns were measured."""
    jd = 2433282.5 + np.arange(0.0, 36525.0, 1.7)
    apart = 1e9 * (integrated().tdb_minus_tt(jd, 0.0) - erfa.dtdb(jd, 0.0, 0.0, 0.0, 0.0, 0.0))
    assert np.abs(apart).max() < 12.0
    centuries = (jd - SCALES_ORIGIN[0]) / 36525.0
    rate, constant = np.polyfit(centuries, apart, 1)
    assert abs(rate) < 12.0
    assert abs(constant) < 5.0
    assert np.abs(apart - np.polyval([rate, constant], centuries)).max() < 7.0


def test_constants_of_iau_2006_b3_are_met() -> None:
    assert integrated().tdb_minus_tt(*ORIGIN) == pytest.approx(TDB_0, abs=1e-18)
    tt = lt.Epoch(*SCALES_ORIGIN, "tt")
    assert tt.to("tcb", tdb=integrated()).seconds_since(lt.Epoch(*SCALES_ORIGIN, "tcb")) == (
        pytest.approx(0.0, abs=1e-16)
    )
    assert integrated().tcb_minus_tcl_periodic(*ORIGIN) == pytest.approx(0.0, abs=1e-18)


def test_mean_rate_is_l_c() -> None:
    """1.48082686741e-8 +- 2e-17 is published (IERS TN36, table 1.1, for DE405)."""
    jd = 2433282.5 + np.arange(0.0, 36525.0, 1.0)
    t = (jd - 2451545.0) * DAY
    turns = np.outer([1.0, 2.0, 399.18 / 365.25, 365.25 / 398.88], t / (365.2596 * DAY))
    waves = [f(2.0 * np.pi * turns) for f in (np.cos, np.sin)]
    columns = np.concatenate([[np.ones_like(t), t / 1e9], *waves])
    rate = np.linalg.lstsq(columns.T, integrated().tdb_minus_tt(jd, 0.0), rcond=None)[0][1] / 1e9
    mean_slowing = (rate * (1.0 - L_B) + L_B - L_G) / (1.0 - L_G)
    assert mean_slowing == pytest.approx(L_C, abs=1e-15)  # planetary terms of decades remain


def test_integration_error_by_order_doubling() -> None:
    time = integrated()
    assert 0.0 < time.error_s < 1e-14
    x, gm = nodes(2 * time_integral.SAMPLES + 1), _gm(time.ephemeris)
    some = Panels(2451544.5, 4.0, 500)
    rates = tdb_minus_tt_rate(slowing("earth", panels.states(time.ephemeris, some, x), gm))
    rates = rates + asteroids.mean_potential(time.ephemeris.constants) / c**2
    ends = np.cumsum((rates @ antiderivative(x.size).T).sum(axis=-1) * 2.0 * DAY)
    jd = 2451544.5 + 4.0 * np.arange(501)
    stored = time.tdb_minus_tt(jd, 0.0)
    np.testing.assert_allclose(stored[1:] - stored[0], ends, rtol=0, atol=2e-16)


def test_against_gauss_legendre_on_other_panels() -> None:
    """The same integrand from the public methods of the ephemeris, term by term."""
    ephemeris, time = lt.Ephemeris.default(), integrated()
    start, days, count = 2455000.75, 2.5, 40
    x, w = np.polynomial.legendre.leggauss(20)
    jd = start + days * (np.arange(count)[:, None] + 0.5 + 0.5 * x)
    bodies = {n: State(*ephemeris.barycentric_body(n, jd, 0.0)) for n in _gm(ephemeris)}
    slow = slowing("earth", bodies, _gm(ephemeris), asteroids.mean_potential(ephemeris.constants))
    total = np.sum(tdb_minus_tt_rate(slow) @ w) * 0.5 * days * DAY
    found = time.tdb_minus_tt(start + days * count, 0.0) - time.tdb_minus_tt(start, 0.0)
    assert found == pytest.approx(total, abs=3e-16)


def test_slowing_is_that_of_the_metric() -> None:
    """dtau/dt from the metric of IAU 2000 B1.3, in 60 digits, field of the body itself left out."""
    ephemeris = lt.Ephemeris.default()
    jd, gm = 2451545.0, _gm(ephemeris)
    bodies = {n: State(*ephemeris.barycentric_body(n, jd, 0.0)) for n in gm}
    with mpmath.workdps(60):
        for centre in ("earth", "moon"):
            x, v = (mpmath.matrix(a.tolist()) for a in bodies[centre])
            w, w_v = mpmath.mpf(0), mpmath.mpf(0)
            for name, (p, q) in bodies.items():
                if name != centre:
                    part = gm[name] / mpmath.norm(mpmath.matrix(p.tolist()) - x)
                    w += part
                    w_v += part * sum(a * b for a, b in zip(q.tolist(), v, strict=True))
            v2 = sum(a * a for a in v)
            g00 = -1 + 2 * w / c**2 - 2 * w**2 / mpmath.mpf(c) ** 4
            g0i_v = -4 * w_v / mpmath.mpf(c) ** 4
            gij_v = v2 / mpmath.mpf(c) ** 2 * (1 + 2 * w / mpmath.mpf(c) ** 2)
            slow = 1 - mpmath.sqrt(-g00 - 2 * g0i_v - gij_v)
            found = slowing(centre, bodies, gm)
            assert abs(float(found - slow)) < 1e-23  # 1/c^6: 1e-24


def test_place_on_the_earth_against_astropy() -> None:
    """v.r/c^2 with astropy's place of the station and the Earth's velocity of DE421."""
    from astropy.coordinates import EarthLocation
    from astropy.time import Time
    from astropy.utils import iers

    jd = 2457000.25 + np.arange(0.0, 40.0, 0.37)
    when = lt.Epoch(jd, 0.0, "tdb")
    series = lt.EarthOrientation.bundled()
    tai = when.to("tai")
    pole = series.at(tai.jd1, tai.jd2)
    fraction = when.to("ut1").day_and_fraction()[1]
    with iers.conf.set_temp("auto_download", False):
        at = EarthLocation.from_geocentric(*HILLTOP.xyz_m, unit="m")
        r = at.get_gcrs_posvel(Time(when.to("utc").jd1, when.to("utc").jd2, format="jd"))[0]
    velocity = lt.Ephemeris.default().earth(jd, 0.0)[1]
    expected = np.sum(velocity * r.xyz.to_value("m"), axis=0) / c**2
    time = integrated()
    centre = time.tdb_minus_tt(jd, 0.0)
    found = time.tdb_minus_tt(jd, 0.0, fraction, HILLTOP.xyz_m, pole.xp_rad, pole.yp_rad) - centre
    # daily tides in UT1 and pole, 1e-8 rad; factor 1 + 2 w/c^2
    np.testing.assert_allclose(found, expected, rtol=0, atol=2e-13)
    without = time.tdb_minus_tt(jd, 0.0, fraction, HILLTOP.xyz_m) - centre
    assert 5e-13 < np.abs(without - found).max() < 3e-12
    # the series leaves out the Moon along the axis, and nutation
    np.testing.assert_allclose(topocentric(jd, 0.0, fraction, HILLTOP.xyz_m), found, atol=1.5e-9)
    assert np.abs(topocentric(jd, 0.0, fraction, HILLTOP.xyz_m) - found).max() > 3e-10


def test_place_term_to_higher_order() -> None:
    velocity, r = np.array([3e4, 0.0, 0.0]), np.array([6.4e6, 0.0, 0.0])
    assert place_term(r, velocity) == pytest.approx(3e4 * 6.4e6 / c**2, rel=1e-15)
    assert place_term(r, velocity, 9e8) / place_term(r, velocity) - 1.0 == pytest.approx(
        2.0 * 9e8 / c**2, rel=1e-6
    )


def test_panels_with_and_without_common_seams() -> None:
    ephemeris = lt.Ephemeris.default()
    x = nodes(7)
    for some in (Panels(2451544.5, 4.0, 3), Panels(2451545.5, 3.0, 5), Panels(2451544.5, 32.0, 2)):
        found = panels.states(ephemeris, some, x)
        jd = some.start_jd + some.days * (np.arange(some.count)[:, None] + 0.5 + 0.5 * x)
        assert set(found) == {*_gm(ephemeris)}
        for name, state in found.items():
            position, velocity = ephemeris.barycentric_body(name, jd, 0.0)
            # the grid of one float64 Julian date, 2e-5 s, at up to 50 km/s
            np.testing.assert_allclose(state.position, position, rtol=0, atol=2.0)
            np.testing.assert_allclose(state.velocity, velocity, rtol=0, atol=1e-5)


def test_panels_cover_what_is_asked_and_no_more_than_the_ephemeris() -> None:
    ephemeris = lt.Ephemeris.default()
    begin, end = ephemeris.coverage
    whole = Panels.over(ephemeris, begin, end)
    assert (whole.start_jd, whole.start_jd + whole.days * whole.count) == (begin, end)
    one = Panels.over(ephemeris, 2451545.2, 2451545.3)
    assert one.count == 1
    assert one.start_jd <= 2451545.2 < 2451545.3 <= one.start_jd + one.days


def test_quadrature_is_exact_for_polynomials() -> None:
    x = nodes(7)
    np.testing.assert_allclose(nodes(15)[1::2], x, rtol=0, atol=1e-15)
    for power in range(7):
        series = antiderivative(7) @ x**power
        ends = np.polynomial.chebyshev.chebval([-1.0, 1.0], series)
        total = (1.0 - (-1.0) ** (power + 1)) / (power + 1)
        np.testing.assert_allclose(ends, [0.0, total], rtol=0, atol=1e-14)


# -- asteroids -----------------------------------------------------------------------------------


def test_asteroids_by_number_and_in_all() -> None:
    """The main belt weighs 1.2e-9 of the Sun (Pitjeva & Pitjev 2018: 1.33e-10 ring besides)."""
    ephemeris = lt.Ephemeris.default()
    gm = asteroids.masses(ephemeris.constants)
    assert len(gm) == 68  # 67 of their own, and one for all small ones
    assert gm[1] / ephemeris.gm("sun") == pytest.approx(4.7e-10, rel=0.01)  # Ceres
    assert sum(gm.values()) / ephemeris.gm("sun") == pytest.approx(1.15e-9, rel=0.05)
    assert asteroids.masses({}) == {}
    assert asteroids.mean_potential({}) == 0.0


def test_asteroids_act_as_a_ring() -> None:
    au = 1.495978707e11
    constants = {"file:MA0001": 1e-13, "au_m": au}
    angle = np.arange(3600) * 2.0 * np.pi / 3600
    a = 2.77
    mean = np.mean(1.0 / np.hypot(a * np.cos(angle) - 1.0, a * np.sin(angle))) / au
    gm = asteroids.masses(constants)[1]
    assert asteroids.mean_potential(constants) == pytest.approx(gm * mean, rel=1e-4)


def test_asteroids_are_a_rate_and_can_be_left_out() -> None:
    without = TimeEphemeris.integrate(first="1950-01-01", last="2050-01-01", asteroids=False)
    jd = np.array([2433283.0, 2469807.0])
    gained = integrated().tdb_minus_tt(jd, 0.0) - without.tdb_minus_tt(jd, 0.0)
    assert (gained[1] - gained[0]) / ((jd[1] - jd[0]) * DAY) == pytest.approx(4.2e-18, rel=0.02)


# -- use -----------------------------------------------------------------------------------------


def test_epochs_both_ways_to_the_last_digit() -> None:
    when = lt.Epoch(2451544.5 + np.linspace(-9000.0, 9500.0, 60), 0.123456789, "tt")
    for scale in ("tdb", "tcb", "tcl"):
        for place in (None, HILLTOP):
            there = when.to(scale, place, tdb=integrated())
            back = there.to("tt", place, tdb=integrated())
            assert np.abs(back.seconds_since(when)).max() < 1e-19
    one = when[7].to("tcl", tdb=integrated())
    assert one == when.to("tcl", tdb=integrated())[7]


def test_words_for_the_choice() -> None:
    when = lt.Epoch.parse("2020-03-01T19:00:00")
    assert when.to("tdb", tdb="series") == when.to("tdb")
    exact = when.to("tdb", tdb="integrated").seconds_since(when.to("tdb", tdb=integrated()))
    assert abs(exact) < 1e-15
    assert 1e-11 < abs(when.to("tdb", tdb="integrated").seconds_since(when.to("tdb"))) < 1.1e-8
    with pytest.raises(UnknownNameError, match="tdb is 'integral'; allowed: did you mean integra"):
        when.to("tdb", tdb="integral")
    with pytest.raises(InputError, match="tdb is 'series'; allowed: \"integrated\" or a TimeEphem"):
        when.to("tcl")
    ephemeris = lt.Ephemeris.default()
    assert time_integral.chosen("series", ephemeris) is None
    assert time_integral.chosen("integrated", ephemeris) is time_integral.of(ephemeris)
    assert time_integral.chosen(integrated(), ephemeris) is integrated()
    with pytest.raises(UnknownNameError, match="tdb is 'integral'"):
        time_integral.chosen("integral", ephemeris)


def test_arrays_are_scalars_one_by_one() -> None:
    time = integrated()
    jd = np.array([[2451545.25, 2451546.0], [2460000.5, 2440000.5]])
    many = time.tdb_minus_tt(jd, 0.01, 0.3, HILLTOP.xyz_m)
    assert many.shape == (2, 2)
    for at in np.ndindex(2, 2):
        alone = time.tdb_minus_tt(float(jd[at]), 0.01, 0.3, HILLTOP.xyz_m)
        assert isinstance(alone, float)
        assert alone == pytest.approx(many[at], abs=1e-18)


def test_refusals() -> None:
    with pytest.raises(
        CoverageError, match=r"first is 2396027.5; allowed: JD 2414992.5 to 2524624.5 TDB"
    ):
        TimeEphemeris.integrate(first="1848-01-01")
    with pytest.raises(InputError, match=r"first, last is .*an earlier and a later instant"):
        TimeEphemeris.integrate(first="2000-01-01", last="1999-01-01")
    with pytest.raises(CoverageError, match="epoch"):
        integrated().tdb_minus_tt(2500000.5, 0.0)
    with pytest.raises(InputError, match=r"xyz_m is 5.0"):
        integrated().tdb_minus_tt(2451545.0, 0.0, 0.0, 5.0)
    with pytest.raises(InputError, match=r"tdb is .*finite Julian dates"):
        integrated().tdb_minus_tt(np.nan, 0.0)
    with pytest.raises(InputError, match="known is"):
        TimeEphemeris.integrate(known=("2000-01-01", np.nan))
    with pytest.raises(InputError, match="ends of the span"):
        TimeEphemeris.integrate(first=["2000-01-01", "2000-01-02"])


def test_an_ephemeris_without_1977_needs_a_constant() -> None:
    short = _cut(2451544.5)
    with pytest.raises(CoverageError, match=r"origin of TDB - TT is '1977-01-01 0h TAI'.*known="):
        TimeEphemeris.integrate(short, last="2010-01-01")
    value = integrated().tdb_minus_tt(2452000.5, 0.0)
    time = TimeEphemeris.integrate(
        short, "2000-02-01", "2010-01-01", known=(lt.Epoch(2452000.5, 0.0, "tdb"), value)
    )
    assert "given on 2001-04-01T00:00:00 TDB" in repr(time)
    jd = np.linspace(2451600.5, 2455000.5, 50)
    np.testing.assert_allclose(
        time.tdb_minus_tt(jd, 0.0), integrated().tdb_minus_tt(jd, 0.0), rtol=0, atol=1e-16
    )


def test_another_ephemeris_is_not_taken_for_this() -> None:
    with pytest.raises(InputError, match=r"tdb is .*one integrated from other"):
        time_integral.chosen(integrated(), _cut(2414992.5, "other"))


def test_pickles_and_prints() -> None:
    time = pickle.loads(pickle.dumps(integrated()))
    assert time.tdb_minus_tt(2455000.5, 0.1) == integrated().tdb_minus_tt(2455000.5, 0.1)
    assert repr(time).startswith("<TimeEphemeris of DE421: JD 24331")
    with pytest.raises(AttributeError):
        time.origin = "elsewhere"
    with pytest.raises(ValueError, match="read-only"):
        integrated().earth.coefficients[0, 0, 0] = 1.0


def test_sigma_grows_from_1977() -> None:
    time = integrated()
    assert time.sigma_s(SCALES_ORIGIN[0], 0.0) == pytest.approx(1e-9, rel=1e-6)
    assert 7e-9 < time.sigma_s(2461545.0, 0.0) < 9e-9


# -- on disk -------------------------------------------------------------------------------------


def test_saved_and_read(tmp_path: Path) -> None:
    time = TimeEphemeris.integrate(first="1999-01-01", last="2001-01-01")
    path = tmp_path / "time.of_de421"
    time.save(path)
    assert [p.name for p in tmp_path.iterdir()] == ["time.of_de421"]
    back = TimeEphemeris.read(path)
    assert back.tdb_minus_tt(2451545.0, 0.3) == time.tdb_minus_tt(2451545.0, 0.3)
    assert back.tcb_minus_tcl_periodic(2451545.0, 0.3) == time.tcb_minus_tcl_periodic(
        2451545.0, 0.3
    )
    assert (back.error_s, back.origin) == (time.error_s, time.origin)


def test_files_that_are_none(tmp_path: Path) -> None:
    with pytest.raises(FileError, match="cannot be read: No such file"):
        TimeEphemeris.read(tmp_path / "missing")
    damaged = tmp_path / "damaged.npz"
    damaged.write_bytes(b"PK\x03\x04 and no more")
    with pytest.raises(FileError, match="not a time ephemeris"):
        TimeEphemeris.read(damaged)
    damaged.write_bytes(b"")
    with pytest.raises(FileError, match="not a time ephemeris"):
        TimeEphemeris.read(damaged)


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"format": "another"}, "not a time ephemeris: format another"),
        ({"earth": np.zeros((3, 1))}, r"coefficients of shape \(3, 1\)"),
        ({"earth": np.full((1000, 1, 5), np.nan)}, "coefficients that are no numbers"),
        ({"span_days": -4.0}, "spans that are none"),
        ({"ephemeris": "DE440"}, "integrated from DE440, not from <Ephemeris DE421"),
    ],
)
def test_files_of_something_else(tmp_path: Path, change: dict[str, Any], words: str) -> None:
    path = tmp_path / "time.npz"
    TimeEphemeris.integrate(first="1977-01-01", last="1978-01-01").save(path)
    with np.load(path) as file:
        held = dict(file)
    np.savez(path, **{**held, **change})
    with pytest.raises(FileError, match=words):
        TimeEphemeris.read(path)


def test_files_whose_orbits_are_others(tmp_path: Path) -> None:
    path = tmp_path / "time.npz"
    time = TimeEphemeris.integrate(first="1977-01-01", last="1978-01-01")
    time_file.save(time, path)
    with np.load(path) as file:
        held = dict(file)
    np.savez(path, **{**held, "earth": held["earth"] * (1.0 + 1e-5)})
    with pytest.raises(FileError, match="integrated from DE421, not from <Ephemeris DE421"):
        TimeEphemeris.read(path)


# -- tools ---------------------------------------------------------------------------------------


def _gm(ephemeris: lt.Ephemeris) -> dict[str, float]:
    names = [n for n in ephemeris.barycentric if n != "earth_moon_barycentre"]
    return {name: ephemeris.gm(name) for name in ("earth", "moon", *names)}


def _cut(first_jd: float, name: str = "short") -> lt.Ephemeris:
    """DE421 from a date on."""
    from dataclasses import replace

    def later(records: Any) -> Any:
        skip = int(np.ceil((first_jd - records.start_jd) / records.span_days))
        start = records.start_jd + skip * records.span_days
        return replace(records, start_jd=start, coefficients=records.coefficients[skip:])

    whole = lt.Ephemeris.default()
    barycentric = {n: later(r) for n, r in whole.barycentric.items()}
    return replace(
        whole, name=name, barycentric=barycentric, moon_from_earth=later(whole.moon_from_earth),
        angles=later(whole.orientation()), origin=(),
    )  # fmt: skip
