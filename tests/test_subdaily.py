"""Ocean tides and libration in the Earth's rotation against published numbers."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from lighttime.constants import ARCSECOND, MICROARCSECOND
from lighttime.data import table
from lighttime.earth.arguments import (
    centuries,
    doodson_arguments,
    fundamental_arguments,
    mean_sidereal_angle,
)
from lighttime.earth.subdaily import (
    BLOCK,
    OCEAN_EPOCH,
    ORTHOTIDE,
    Lines,
    libration_lines,
    libration_sums,
    ocean_tides,
    pole_libration,
    subdaily,
    ut1_libration,
)

# IERS Conventions (2010) software, headers of ORTHO_EOP, PMSDNUT2 and UTLIBR.
OCEAN_47100 = (-162.8386373279636530, 117.7907525842668974, -23.39092370609808214)
POLE_54335 = (24.83144238273364834, -14.09240692041837661)
UT1_44239 = (2.441143834386761746, -14.78971247349449492)


def test_ocean_tides_of_the_conventions() -> None:
    """Within the rounding of the published computation, whose angles reach 1e5 rad: the same
    sum at 40 digits gives -162.83863732738867, 117.79075258303639, -23.39092370594039."""
    dx, dy, dut1 = ocean_tides(2400000.5, 47100.0)
    found = (dx / MICROARCSECOND, dy / MICROARCSECOND, dut1 * 1e6)
    assert found == pytest.approx(OCEAN_47100, rel=0.0, abs=2e-9)
    assert found == pytest.approx(
        (-162.83863732738867, 117.79075258303639, -23.39092370594039), rel=0.0, abs=2e-9
    )


def test_ocean_tide_tables_to_every_printed_digit() -> None:
    """The three-epoch form of the conventions, in its order of roundings, on our tables."""
    lines, weights = table("ocean_tide_rotation_lines"), table("ocean_tide_rotation_orthoweights")
    partials = []
    for order, (p1, p2, p3, p4, p5, p6) in enumerate(ORTHOTIDE, start=1):
        rows = np.flatnonzero(lines["order"] == order)
        a, b = {}, {}
        for lag in (-1, 0, 1):
            days = (47100.0 - 2.0 * lag) - OCEAN_EPOCH[1]
            a[lag] = b[lag] = 0.0
            for row in rows:
                turned = math.fmod(lines["frequency_rad_per_day"][row] * days, 2.0 * math.pi)
                quarter = (order % 2) * math.pi / 2.0
                angle = math.fmod(lines["phase_rad"][row], 2.0 * math.pi) + turned - quarter
                a[lag] += lines["height_mm"][row] * math.cos(angle)
                b[lag] -= lines["height_mm"][row] * math.sin(angle)
        partials += [p1 * a[0], p1 * b[0]]
        partials += [p2 * a[0] - p3 * (a[1] + a[-1]), p2 * b[0] - p3 * (b[1] + b[-1])]
        partials += [
            p4 * a[0] - p5 * (a[1] + a[-1]) + p6 * (b[1] - b[-1]),
            p4 * b[0] - p5 * (b[1] + b[-1]) - p6 * (a[1] - a[-1]),
        ]
    names = (("xp_u_uas", "xp_v_uas"), ("yp_u_uas", "yp_v_uas"), ("ut1_u_us", "ut1_v_us"))
    for (u, v), printed in zip(names, OCEAN_47100, strict=True):
        row = np.stack([weights[u], weights[v]], axis=1).ravel()
        total = sum(p * w for p, w in zip(partials, row, strict=True))
        assert total == pytest.approx(printed, rel=1e-14)


def test_ocean_tide_lines_are_the_doodson_numbers_in_ut1() -> None:
    """Phases and frequencies of the table from the Doodson arguments; that they agree for UT1
    of the epoch to 0.8 mrad shows the scale: with TT they would be 2.4 and 4.8 mrad off."""
    lines = table("ocean_tide_rotation_lines")
    digits = [f"{number:07.3f}".replace(".", "") for number in lines["doodson"]]
    multipliers = np.array([[int(d[0]), *(int(c) - 5 for c in d[1:])] for d in digits])
    assert np.all(multipliers[:, 0] == lines["order"])

    def arguments(days: float) -> np.ndarray:
        jd = (OCEAN_EPOCH[0], OCEAN_EPOCH[1] + days)
        return doodson_arguments(fundamental_arguments(centuries(*jd)), mean_sidereal_angle(*jd))

    def off(angle: np.ndarray) -> np.ndarray:
        return np.mod(angle + np.pi, 2.0 * np.pi) - np.pi

    phase = off(multipliers @ arguments(0.0) - lines["phase_rad"])
    assert np.max(np.abs(phase)) < 8e-4
    assert abs(np.mean(phase[lines["order"] == 2])) < 2e-4
    moved = off(multipliers @ (arguments(1.0) - arguments(0.0)) - lines["frequency_rad_per_day"])
    assert np.max(np.abs(moved)) < 5e-8


def _single(lines: Lines) -> Lines:
    """The same with amplitudes rounded to single precision."""
    sines, cosines = (a.astype(np.float32).astype(float) for a in (lines.sines, lines.cosines))
    return replace(lines, sines=sines, cosines=cosines)


def _published_arguments(mjd: float) -> np.ndarray:
    """As the routines had them: l' and D with constants rounded to 1e-5 arcseconds."""
    fundamental = fundamental_arguments(centuries(2400000.5, mjd))
    fundamental[1] += 0.000002 * ARCSECOND
    fundamental[3] -= 0.000002 * ARCSECOND
    return np.array([mean_sidereal_angle(2400000.5, mjd) + np.pi, *fundamental])[:, None]


def test_libration_tables_to_every_printed_digit() -> None:
    """With what shows in the printed digits: amplitudes written in single precision."""
    pole = _single(libration_lines("libration_pole", ("xp", "yp")))
    found = libration_sums(pole, _published_arguments(54335.0))[:, 0]
    assert found == pytest.approx(POLE_54335, rel=3e-14)
    ut1 = _single(libration_lines("libration_ut1", ("ut1", "lod")))
    found = libration_sums(ut1, _published_arguments(44239.1))[:, 0]
    assert found == pytest.approx(UT1_44239, rel=3e-13)


def test_libration_in_full_precision() -> None:
    instant = (2400000.5, 54335.0)
    pole = np.array(pole_libration(*instant, *instant)) / MICROARCSECOND
    assert pole == pytest.approx(POLE_54335, abs=5e-7)
    instant = (2400000.5, 44239.1)
    ut1 = np.array(ut1_libration(*instant, *instant)) * 1e6
    assert ut1 == pytest.approx(UT1_44239, abs=3e-7)


def test_length_of_day_is_the_slope_of_ut1() -> None:
    """Two columns of table 5.1b against each other, to their last digits (0.5 of 0.1 us/day)."""
    day = np.linspace(0.0, 30.0, 200)
    step = 1e-3
    slope = [ut1_libration(2455000.5, day + h, 2455000.5, day + h)[0] for h in (step, -step)]
    _, lod = ut1_libration(2455000.5, day, 2455000.5, day)
    assert -(slope[0] - slope[1]) / (2.0 * step) == pytest.approx(lod, abs=0.4e-6)


def test_sum_and_sizes() -> None:
    """Up to about 1 mas and 0.1 ms (TN36, chapter 8: tables of the largest terms)."""
    day = np.linspace(0.0, 60.0, 2 * BLOCK + 5)
    total = subdaily(2455000.5, day, 2455000.5, day + 7.7e-4)
    ocean = ocean_tides(2455000.5, day)
    pole = pole_libration(2455000.5, day, 2455000.5, day + 7.7e-4)
    ut1, _ = ut1_libration(2455000.5, day, 2455000.5, day + 7.7e-4)
    for got, parts in zip(total, zip(ocean, (*pole, ut1), strict=True), strict=True):
        assert got == pytest.approx(parts[0] + parts[1], abs=1e-20)
    assert 300.0 < np.max(np.abs(total[0])) / MICROARCSECOND < 1000.0
    assert 30e-6 < np.max(np.abs(total[2])) < 100e-6
    assert np.ndim(subdaily(2455000.5, 0.0, 2455000.5, 0.0)[0]) == 0
