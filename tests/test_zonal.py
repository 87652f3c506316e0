"""Fundamental arguments and zonal tides against published numbers."""

from __future__ import annotations

import erfa
import numpy as np
import pytest
from mpmath import mp, mpf

from lighttime.constants import ARCSECOND
from lighttime.data import table
from lighttime.earth.arguments import (
    FUNDAMENTAL,
    centuries,
    doodson_arguments,
    fundamental_arguments,
    mean_sidereal_angle,
)
from lighttime.earth.zonal import BLOCK, zonal_sums, zonal_tides, zonal_ut1

# IERS Conventions (2010) software, headers of the routines FUNDARG and RG_ZONT2, MJD 54465.
T = 0.07995893223819302
PRINTED_ARGUMENTS = (
    2.291187512612069099,
    6.212931111003726414,
    3.658025792050572989,
    4.554139562402433228,
    -0.5167379217231804489,
)
PRINTED_UT1, PRINTED_LOD, PRINTED_OMEGA = (
    7.983287678576557467e-2,
    5.035303035410713729e-5,
    -4.249711616463017e-14,
)

ANNUAL = 54


def test_fundamental_arguments_of_the_conventions() -> None:
    """To the rounding of the published computation: half a unit in the last place of 1.4e8
    arcseconds is 7e-14 rad, and the printed numbers were made with another rounding."""
    assert fundamental_arguments(T) == pytest.approx(PRINTED_ARGUMENTS, rel=0.0, abs=1.5e-13)


def test_fundamental_arguments_against_exact_arithmetic_and_erfa() -> None:
    t = np.linspace(-0.6, 0.6, 25)
    found = fundamental_arguments(t)
    with mp.workdps(30):
        for k, coefficients in enumerate(FUNDAMENTAL):
            for value, time in zip(found[k], t, strict=True):
                exact = sum(
                    mpf(repr(c)) * mpf(float(time)) ** n for n, c in enumerate(coefficients)
                )
                turns = (exact / 1296000) - mpf(float(value)) / (2 * mp.pi)
                assert abs(turns - mp.nint(turns)) * 2 * mp.pi < 1e-12
    for k, function in enumerate((erfa.fal03, erfa.falp03, erfa.faf03, erfa.fad03, erfa.faom03)):
        assert found[k] == pytest.approx(function(t), abs=1e-12)


def test_zonal_tides_of_the_conventions() -> None:
    """To every printed digit, with l' and D as the routine had them: their constants were then
    rounded to 1e-5 arcseconds (1287104.79305 and 1072260.70369)."""
    arguments = fundamental_arguments(T)[:, None]
    arguments[1] += 0.000002 * ARCSECOND
    arguments[3] -= 0.000002 * ARCSECOND
    ut1, lod, omega = zonal_sums(arguments)[:, 0]
    assert ut1 == pytest.approx(PRINTED_UT1, rel=2e-15)
    assert lod == pytest.approx(PRINTED_LOD, rel=2e-15)
    assert omega == pytest.approx(PRINTED_OMEGA, rel=4e-15)


def test_both_printed_lengths_of_day() -> None:
    """The two versions of the header differ by the sine of the annual line: 0.0267 as in the
    table, or 0.0263, which its UT1 and omega columns ask for (4e-9 s per day apart)."""
    lod = zonal_tides(2451545.0, T * 36525.0).lod_s
    change = (0.0263 - table("zonal_tides")["lod_sin"][ANNUAL]) * 1e-5
    older = lod + change * np.sin(fundamental_arguments(T)[1])
    assert older == pytest.approx(5.035331113978199288e-5, rel=0.0, abs=3e-15)


def test_zonal_tides_with_the_constants_of_today() -> None:
    tides = zonal_tides(2451545.0, T * 36525.0)
    assert tides.ut1_s == pytest.approx(PRINTED_UT1, abs=1e-13)
    assert tides.lod_s == pytest.approx(PRINTED_LOD, abs=3e-15)
    assert tides.omega_rad_s == pytest.approx(PRINTED_OMEGA, abs=2e-24)


def test_each_tide_is_consistent_with_itself() -> None:
    """LOD = -86400 dUT1/dt line by line, and omega = -0.843994809 LOD (TN36, table 8.1): the
    three columns of the table are one, to the rounding of their last digit."""
    tides = table("zonal_tides")
    assert tides["l"].size == 62
    multipliers = np.stack([tides[k] for k in ("l", "l_sun", "F", "D", "Omega")], axis=1)
    rates = np.array([row[1] for row in FUNDAMENTAL]) * ARCSECOND / 36525.0
    frequency = multipliers @ rates  # rad per day
    rounding = 6e-5 + 6e-4 * np.abs(frequency)
    assert np.all(np.abs(tides["lod_cos"] + 10.0 * frequency * tides["ut1_sin"]) < rounding)
    # UT1's cosines have a digit less.
    rounding = 6e-5 + 6e-3 * np.abs(frequency)
    odd = np.abs(tides["lod_sin"] - 10.0 * frequency * tides["ut1_cos"]) >= rounding
    assert np.flatnonzero(odd).tolist() == [ANNUAL]
    assert tides["omega_cos"] == pytest.approx(-0.843994809 * tides["lod_cos"], abs=1.3e-4)


def test_zonal_shapes_and_blocks() -> None:
    assert np.ndim(zonal_ut1(2455000.5, 0.0)) == 0
    days = np.linspace(0.0, 400.0, 2 * BLOCK + 3)
    long = zonal_ut1(2455000.5, days)
    pieces = [zonal_ut1(2455000.5, day) for day in days[[0, BLOCK - 1, BLOCK, -1]]]
    assert long[[0, BLOCK - 1, BLOCK, -1]] == pytest.approx(pieces, abs=1e-16)
    assert zonal_tides(2455000.5, days[:12].reshape(4, 3)).ut1_s.shape == (4, 3)


def test_doodson_arguments_have_the_periods_of_the_tides() -> None:
    """Periods as in any table of the tide-generating potential: mean lunar day, tropical month
    and year, 8.847 and 18.613 years, 20940 years (from memory)."""
    step = 0.01
    before, after = (
        doodson_arguments(
            fundamental_arguments(centuries(2455000.5, day)), mean_sidereal_angle(2455000.5, day)
        )
        for day in (-step, step)
    )
    change = np.mod(after - before + np.pi, 2.0 * np.pi) - np.pi
    periods = 4.0 * np.pi * step / change
    assert periods[0] == pytest.approx(1.0350501, rel=1e-6)
    assert periods[1] == pytest.approx(27.3215817, rel=1e-6)
    assert periods[2] == pytest.approx(365.2421897, rel=1e-6)
    assert periods[3] / 365.25 == pytest.approx(8.847, rel=1e-3)
    assert periods[4] / 365.25 == pytest.approx(18.613, rel=1e-3)
    assert periods[5] / 365.25 == pytest.approx(20940.0, rel=2e-2)


def test_sidereal_angle_is_that_of_1982() -> None:
    """ERFA gmst82, test value 1.754174981860675096 at 2400000.5 + 53736 (t_erfa_c)."""
    assert mean_sidereal_angle(2400000.5, 53736.0) == pytest.approx(1.754174981860675096, abs=1e-11)
