"""TCL and clocks at rest on the Moon and the Earth."""

from __future__ import annotations

import json
from functools import cache

import numpy as np
import pytest

import lighttime as lt
from lighttime.cli import main
from lighttime.constants import DAY, L_G, SPEED_OF_LIGHT
from lighttime.earth.clock import earth_clock_minus_tt, faster_than_tt
from lighttime.ephemeris.time_integral import TimeEphemeris
from lighttime.errors import InputError
from lighttime.moon.clock import (
    lunar_clock_minus_tt,
    mean_rate_minus_tt,
    slower_than_tcl,
    tcl_minus_tcg,
)

c = SPEED_OF_LIGHT
PER_DAY_US = 1e6 * DAY
ON_SPHERE = (1737400.0, 0.0, 0.0)


@cache
def integrated() -> TimeEphemeris:
    return TimeEphemeris.integrate(first="1950-01-01", last="2050-01-01")


# -- TCL -----------------------------------------------------------------------------------------


def test_rate_of_tcl_against_tcg_seen_from_the_earth() -> None:
    """In the GCRS the Moon is a body at 1 km/s in the Earth's field and the tides of others.

    dTCL/dTCG = 1 - (v^2/2 + GM_E/r - 2 GM_M/r + tidal potential of degrees 2 and 3)/c^2: no
    large motion about the Sun cancels here, as it does in the difference of two barycentric
    integrals. The Moon's own field is not felt in TCL; what is left of it, -2 GM_M/r, is what
    it does at the geocentre, to the rate of TCG and to the acceleration of its axes.
    """
    ephemeris, time = lt.Ephemeris.default(), integrated()
    jd = 2455000.5 + np.arange(0.0, 400.0, 1.3)
    r, v = ephemeris.moon_geocentric(jd, 0.0)
    distance, tide = np.linalg.norm(r, axis=0), 0.0
    for body in ("sun", "venus", "mars", "jupiter"):
        s = ephemeris.barycentric_body(body, jd, 0.0)[0] - ephemeris.earth(jd, 0.0)[0]
        far = np.linalg.norm(s, axis=0)
        cosine, ratio = np.sum(r * s, axis=0) / (distance * far), distance / far
        p2, p3 = (3.0 * cosine**2 - 1.0) / 2.0, (5.0 * cosine**3 - 3.0 * cosine) / 2.0
        tide = tide + ephemeris.gm(body) / far * (ratio**2 * p2 + ratio**3 * p3)
    earth = ephemeris.gm("earth") / distance
    own = -2.0 * ephemeris.gm("moon") / distance
    newton = -(0.5 * np.sum(v * v, axis=0) + earth + own + tide) / c**2
    step = 0.005
    ends = [tcl_minus_tcg(time, jd, sign * step) for sign in (-1.0, 1.0)]
    found = (ends[1] - ends[0]) / (2.0 * step * DAY)
    # Velocities and distances are barycentric here: Lorentz contraction, 1e-8 of 1.7e-11; degree
    # 4 and the grid of the dates are 1e-18.
    assert np.abs(found - newton).max() < 3e-18
    assert np.abs(newton).max() > 1.7e-11


def test_secular_rates_as_published() -> None:
    """Rates in microseconds a day.

    TCL - TCG: -1.4769 (Kopeikin & Kaplan 2024, Phys. Rev. D 110, 084047; from memory). A clock
    on the Moon against one on the geoid: 56.02 (Ashby & Patla 2024, Astron. J. 168, 112; from
    memory). TCL - TT: 58.7 (in use at NASA and in policy papers of 2024; from memory).
    """
    time = integrated()
    tcl_tt = mean_rate_minus_tt(time, None) * PER_DAY_US
    assert tcl_tt - L_G * PER_DAY_US == pytest.approx(-1.4769, abs=1e-4)
    assert tcl_tt == pytest.approx(58.7, abs=0.05)
    assert mean_rate_minus_tt(time, ON_SPHERE) * PER_DAY_US == pytest.approx(56.02, abs=0.01)


def test_epochs_in_tcl_are_the_clock_at_the_centre() -> None:
    time = integrated()
    when = lt.Epoch(2455000.5 + np.arange(5.0), 0.25, "tdb")
    tcl, tt = when.to("tcl", tdb=time), when.to("tt", tdb=time)
    apart = ((tcl.jd1 - tt.jd1) + (tcl.jd2 - tt.jd2)) * DAY
    centre = lunar_clock_minus_tt(time, None, when.jd1, when.jd2)
    np.testing.assert_allclose(apart, centre, rtol=0, atol=3e-15)


def test_tcl_agrees_with_tcb_in_1977() -> None:
    time = integrated()
    tcb = lt.Epoch(2443144.5, 0.0003725, "tcb")
    assert tcb.to("tcl", tdb=time).jd1 == tcb.jd1
    assert abs(tcb.to("tcl", tdb=time).jd2 - tcb.jd2) * DAY < 1e-15
    assert tcl_minus_tcg(time, 2443144.5, 0.0003725) == pytest.approx(0.0, abs=1.4e-4)


# -- clocks on the Moon --------------------------------------------------------------------------


def test_potential_on_the_mean_sphere() -> None:
    """L_L = 3.14027e-11 for a level surface near the mean sphere (Turyshev 2025, from memory)."""
    ephemeris = lt.Ephemeris.default()
    places = [(1737400.0 * np.array(u)).tolist() for u in ((1, 0, 0), (0, 1, 0), (0, 0, 1))]
    rates = [slower_than_tcl(p, ephemeris) for p in places]
    assert rates == sorted(rates, reverse=True)  # the long axis, the short equatorial one, the pole
    assert np.mean(rates) == pytest.approx(3.1403e-11, rel=3e-4)
    # J2 = 2.03e-4: from equator to pole 3/2 J2 GM/r and the rotation, 0.65e-14 + 1.2e-16
    gm = ephemeris.gm("moon") / 1737400.0
    flattening = 1.5 * 2.0327e-4 * gm * (1738.0 / 1737.4) ** 2 + 0.5 * (2.6617e-6 * 1737400.0) ** 2
    assert np.mean(rates[:2]) - rates[2] == pytest.approx(flattening / c**2, rel=1e-3)


def test_higher_clocks_run_faster_by_gravity() -> None:
    """g/c^2 with g = 1.625 m/s^2 on the Moon."""
    ephemeris = lt.Ephemeris.default()
    low, high = (slower_than_tcl((1737400.0 + h, 0.0, 0.0), ephemeris) for h in (0.0, 1000.0))
    assert (low - high) / 1000.0 == pytest.approx(1.625 / c**2, rel=2e-3)


def test_a_clock_on_the_surface_shows_its_velocity() -> None:
    """TCL at a place differs from TCL at the centre by v.r/c^2, 0.58 us in half a month."""
    time = integrated()
    jd = 2455000.5 + np.arange(0.0, 54.0, 0.25)
    site = lt.reflector("Apollo 15").xyz_m
    there = lunar_clock_minus_tt(time, site, jd, 0.0) - lunar_clock_minus_tt(time, None, jd, 0.0)
    steady = -slower_than_tcl(site, time.ephemeris) * (jd - 2443144.5) * DAY
    moved = there - steady
    velocity = time.ephemeris.barycentric_body("moon", jd, 0.0)[1]
    largest = 1737400.0 * np.linalg.norm(velocity, axis=0).max() / c**2
    assert 0.8 * largest < np.abs(moved).max() < largest
    assert lunar_clock_minus_tt(time, site, float(jd[3]), 0.0) == pytest.approx(
        lunar_clock_minus_tt(time, site, jd, 0.0)[3], abs=1e-18
    )


def test_a_place_of_the_wrong_shape() -> None:
    with pytest.raises(InputError, match="xyz_m is"):
        slower_than_tcl((1737400.0, 0.0), lt.Ephemeris.default())
    with pytest.raises(InputError, match="xyz_m is"):
        lunar_clock_minus_tt(integrated(), (np.nan, 0.0, 0.0), 2455000.5, 0.0)


# -- clocks on the Earth -------------------------------------------------------------------------


def test_a_clock_on_a_hill() -> None:
    """1.09e-16 a metre; normal gravity 9.8061993 m/s^2 at 45 degrees (GRS80)."""
    level, hill = (lt.Station.from_geodetic("H", 45.0, 7.0, h) for h in (0.0, 1000.0))
    gained = faster_than_tt(hill) - faster_than_tt(level)
    mean_gravity = 9.8061993 - 3.086e-6 * 500.0  # free-air gradient
    assert gained == pytest.approx(mean_gravity * 1000.0 / c**2, rel=1e-5)
    # the level ellipsoid of GRS80 is 0.5 m from the geoid of TT (W0 = 62636856.0 m^2/s^2)
    assert faster_than_tt(level) == pytest.approx((62636856.0 - 62636860.85) / c**2, rel=1e-3)


def test_what_a_clock_on_a_hill_gains() -> None:
    hill = lt.Station.from_geodetic("H", 46.2, 7.1, 2310.0)
    years = np.array([0.0, 1.0, 2.0])
    gained = earth_clock_minus_tt(hill, 2443144.5 + 365.25 * years, 0.0003725)
    assert gained == pytest.approx(years * 365.25 * DAY * faster_than_tt(hill), rel=1e-12)
    assert gained[1] == pytest.approx(8.0e-6, rel=0.02)  # 22 ns a day


# -- command line --------------------------------------------------------------------------------


def _scales(capsys: pytest.CaptureFixture[str], *arguments: str) -> tuple[int, str, str]:
    status = main(["scales", "2020-03-01T19:00:00", *arguments])
    told = capsys.readouterr()
    return status, told.out, told.err


@pytest.mark.parametrize("where", ["Apollo 15", "1554678.104,98094.498,765005.863"])
def test_scales_at_a_lunar_site(capsys: pytest.CaptureFixture[str], where: str) -> None:
    status, out, _ = _scales(capsys, "--at", where, "--json")
    told = json.loads(out)
    assert status == 0
    assert told["place"]["xyz_m"] == [1554678.104, 98094.498, 765005.863]
    clock = told["clock"]
    assert clock["on"] == "Moon"
    assert clock["mean_rate_minus_tt"] * PER_DAY_US == pytest.approx(56.02, abs=0.01)
    tdb = told["scales"]["tdb"]
    site = told["place"]["xyz_m"]
    reading = lunar_clock_minus_tt(integrated(), site, tdb["jd1"], tdb["jd2"])
    assert clock["minus_tt_s"] == pytest.approx(reading, abs=1e-12)
    assert told["scales"]["tcl"]["sigma_s"] == tdb["sigma_s"] == pytest.approx(6.9e-9, rel=0.1)
    assert told["scales"]["tai"]["sigma_s"] == 0.0
    assert told["scales"]["ut1"]["sigma_s"] == told["ut1_sigma_s"] > 0.0


def test_scales_at_a_station(capsys: pytest.CaptureFixture[str]) -> None:
    _, by_at, _ = _scales(capsys, "--at", "Hilltop,46.2,7.1,2310", "--json")
    _, by_place, _ = _scales(capsys, "--place", "Hilltop,46.2,7.1,2310", "--json")
    assert by_at == by_place
    clock = json.loads(by_at)["clock"]
    hill = lt.Station.from_geodetic("H", 46.2, 7.1, 2310.0)
    assert clock["rate_minus_tt"] == faster_than_tt(hill)
    assert json.loads(by_at)["scales"]["tdb"]["sigma_s"] == 5e-9
    _, out, _ = _scales(capsys, "--at", "Hilltop,46.2,7.1,2310")
    assert "clock at rest on the Earth, at Hilltop\n    rate against TT   +0.0217" in out


def test_scales_for_people_on_the_moon(capsys: pytest.CaptureFixture[str]) -> None:
    _, out, _ = _scales(capsys, "--at", "Apollo 15")
    assert "clock at rest on the Moon, at Apollo 15" in out
    assert "rate against TCL  -2.716" in out
    assert "  TCL 2020-03-01T19:01:10.110" in out


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (("--at", "Apollo 16"), "reflector is 'Apollo 16'; allowed: did you mean Apollo 1"),
        (("--at", "a,b,c"), "--at is 'a,b,c'; allowed: a station, as --station or --place, or on"),
        (("--at", "1,2,3"), "xyz_m is (1.0, 2.0, 3.0); allowed: 1717400 to 1757400 m"),
        (("--at", "Apollo 15", "--tdb", "series"), "--at on the Moon needs --tdb integrated"),
        (("--at", "Apollo 15", "--place", "H,1,2,3"), "--at is 'Apollo 15'; allowed: not together"),
    ],
)
def test_places_that_are_none(
    capsys: pytest.CaptureFixture[str], arguments: tuple[str, ...], words: str
) -> None:
    status, out, err = _scales(capsys, *arguments)
    assert (status, out) == (2, "")
    assert err.startswith(f"lighttime scales: error: {words}")
