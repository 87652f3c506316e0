"""Residual motion: a series of displacements that the user supplies, and its CSV file."""

from __future__ import annotations

import pickle
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

import lighttime as lt
from lighttime.earth.residual_motion import ResidualMotion
from lighttime.exact import round_trip as exact_round_trip

DAYS = ["2020-01-01", "2020-01-02", "2020-01-05"]
ENU_M = [[0.001, -0.002, 0.003], [0.002, -0.002, -0.003], [0.005, 0.001, 0.0]]
MOTION = ResidualMotion(DAYS, ENU_M, "a slow landslide")

FILE = """\
# Source: a slow landslide
# in the frame of the centre of mass
utc,east_mm,north_mm,up_mm,sigma_up_mm
2020-01-01T00:00:00,1.0,-2.0,3.0,0.4
2020-01-02T00:00:00Z, 2.0,-2.0,-3.0,0.4
2020-01-05,5.0,1.0,0,0.4
"""

generous = settings(
    max_examples=60,
    deadline=None,
    suppress_health_check=[HealthCheck.function_scoped_fixture],
)


@pytest.fixture
def path(tmp_path: Path) -> Path:
    return tmp_path / "motion.csv"


def at(motion: ResidualMotion, when: Any) -> np.ndarray:
    tt = lt.Epoch.parse(when).to("tt")
    return motion.at(tt.jd1, tt.jd2)


# -- the series ----------------------------------------------------------------------------------


def test_linear_between_its_instants() -> None:
    np.testing.assert_allclose(at(MOTION, DAYS), np.transpose(ENU_M), atol=1e-15)
    half, third = at(MOTION, ["2020-01-01T12:00:00", "2020-01-03"]).T
    np.testing.assert_allclose(half, [0.0015, -0.002, 0.0], atol=1e-15)
    np.testing.assert_allclose(third, [0.003, -0.001, -0.002], atol=1e-15)
    assert at(MOTION, [["2020-01-03"]]).shape == (3, 1, 1)


@given(share=st.floats(0.0, 1.0), k=st.integers(0, 1))
def test_linear_at_any_share(share: float, k: int) -> None:
    first = lt.Epoch.parse(DAYS[k])
    length = lt.Epoch.parse(DAYS[k + 1]).seconds_since(first)
    expected = (1.0 - share) * np.array(ENU_M[k]) + share * np.array(ENU_M[k + 1])
    np.testing.assert_allclose(at(MOTION, first.shift(share * length)), expected, atol=1e-13)


@pytest.mark.parametrize(
    "when", ["2019-12-31T23:59:59.999", "2020-01-05T00:00:00.001", "2026-01-01"]
)
def test_nothing_beyond_its_ends(when: str) -> None:
    with pytest.raises(lt.CoverageError) as caught:
        at(MOTION, ["2020-01-02", when])
    assert str(caught.value).startswith(f"when is '{when}")
    assert (
        "allowed: 2020-01-01T00:00:00.000 to 2020-01-05T00:00:00.000 UTC, "
        "the residual motion of the station: a slow landslide" in str(caught.value)
    )


def test_instants_that_are_none() -> None:
    with pytest.raises(lt.InputError, match="is nan; allowed: a finite Julian date"):
        MOTION.at(2458850.5, float("nan"))


@pytest.mark.parametrize(
    ("when", "enu_m", "message"),
    [
        (DAYS[:1], ENU_M[:1], r"epochs of shape \(1,\)'; allowed: two or more"),
        (DAYS[0], ENU_M[:1], r"epochs of shape \(\)'"),
        (DAYS[::-1], ENU_M, r"when\[1\] is '2020-01-02.*later than 2020-01-05"),
        ([DAYS[0], DAYS[1], DAYS[1]], ENU_M, r"when\[2\] is '2020-01-02"),
        (DAYS, ENU_M[:2], r"enu_m is 'an array of shape \(2, 3\)'; allowed: shape \(3, 3\)"),
        (DAYS, np.transpose(ENU_M) * np.nan, r"enu_m\[0, 0\] is nan; allowed: .*-20 to 20"),
        (DAYS, 1e6 * np.array(ENU_M), r"enu_m\[0, 0\] is 1000\.0; allowed"),
        (DAYS, [["a", "b", "c"]] * 3, "enu_m is .*; allowed: numbers"),
    ],
)
def test_series_that_are_none(when: Any, enu_m: Any, message: str) -> None:
    with pytest.raises(lt.InputError, match=message):
        ResidualMotion(when, enu_m)


def test_a_series_is_a_value() -> None:
    same = ResidualMotion(DAYS, np.array(ENU_M), "a slow landslide")
    assert same == MOTION
    assert hash(same) == hash(MOTION)
    assert pickle.loads(pickle.dumps(MOTION)) == MOTION
    assert ResidualMotion(DAYS, -np.array(ENU_M), "a slow landslide") != MOTION
    assert ResidualMotion(["2020-01-01", "2020-01-02", "2020-01-06"], ENU_M) != MOTION
    with pytest.raises(ValueError, match="read-only"):
        MOTION.enu_m[0, 0] = 1.0
    first, last = MOTION.coverage
    assert (str(first)[:10], str(last)[:10]) == ("2020-01-01", "2020-01-05")


# -- the file ------------------------------------------------------------------------------------


def test_file(path: Path) -> None:
    path.write_text(FILE)
    motion = ResidualMotion.read(path)
    np.testing.assert_allclose(motion.enu_m, ENU_M, atol=1e-18)
    assert motion.when == MOTION.when
    assert motion.source == "a slow landslide in the frame of the centre of mass (motion.csv)"


def test_file_in_mjd_and_metres(path: Path) -> None:
    """MJD 58849 is 2020-01-01."""
    path.write_text("Up_m;".replace(";", ",") + "mjd,north_m,east_m\n" + "\n".join(
        f"{up},{mjd},{north},{east}"
        for mjd, (east, north, up) in zip([58849, 58850, 58853.0], ENU_M, strict=True)
    ))  # fmt: skip
    motion = ResidualMotion.read(str(path))
    assert motion.when == MOTION.when
    np.testing.assert_array_equal(motion.enu_m, ENU_M)


@pytest.mark.parametrize(
    ("old", "new", "line", "message"),
    [
        ("utc,", "when,", 3, r"0 columns utc or mjd; one is needed, in \['when'"),
        ("north_mm", "north_cm", 3, "0 columns north_mm or north_m"),
        ("sigma_up_mm", "up_m", 3, "2 columns up_mm or up_m"),
        (",0.4\n2020-01-02", "\n2020-01-02", 4, "4 cells under 5 names of columns"),
        ("-3.0", "three", 5, "up_mm is 'three'; allowed: finite numbers"),
        ("-3.0", "nan", 5, "up_mm is 'nan'; allowed: finite numbers"),
        ("-3.0", "", 5, "up_mm is ''; allowed: finite numbers"),
        ("-3.0", "1_0", 5, "up_mm is '1_0'; allowed: finite numbers"),
        ("5.0,1.0", "20001,1.0", 6, "east_mm is 20001; allowed: up to 20 m in size"),
        ("2020-01-05,", "2020-01-32,", 6, "2020-01-32"),
        ("2020-01-05,", "05.01.2020,", 6, r"05\.01\.2020"),
        ("2020-01-05,", "2020-01-01T12:00:00,", 6, r"when\[2\] is '2020-01-01T12.*later than"),
        ("2020-01-05,", "2020-01-02,", 6, "later than 2020-01-02"),
        ("2020-01-05,", "1959-01-02,", 6, "1959-01-02"),
    ],
)
def test_broken_files(path: Path, old: str, new: str, line: int, message: str) -> None:
    assert old in FILE
    path.write_text(FILE.replace(old, new, 1))
    with pytest.raises(lt.FileError, match=message) as caught:
        ResidualMotion.read(path)
    assert str(caught.value).startswith(f"{path}, line {line}: ")


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"", "a line of column names and two rows or more"),
        (b"# a remark\nutc,east_mm,north_mm,up_mm\n2020-01-01,0,0,0\n", "two rows or more"),
        (b"\xff\xfe\x00", "not a text file"),
        (b"mjd,east_m,north_m,up_m\n12,0,0,0\n13,0,0,0\n", r"line 2: mjd is 12; allowed: 36935 to"),
        (b"mjd,east_m,north_m,up_m\n58849,0,0,0\nx,0,0,0\n", r"line 3: mjd is 'x'; allowed"),
    ],
)
def test_files_that_are_something_else(path: Path, content: bytes, message: str) -> None:
    path.write_bytes(content)
    with pytest.raises(lt.FileError, match=message):
        ResidualMotion.read(path)


def test_files_that_cannot_be_opened(tmp_path: Path) -> None:
    with pytest.raises(lt.FileError, match="No such file"):
        ResidualMotion.read(tmp_path / "absent.csv")


@generous
@given(start=st.integers(0, len(FILE)), length=st.integers(1, 60))
def test_a_piece_cut_out(path: Path, start: int, length: int) -> None:
    """A cut can shorten a number or drop a row; it never makes a series of another shape."""
    path.write_text(FILE[:start] + FILE[start + length :])
    try:
        motion = ResidualMotion.read(path)
    except lt.FileError:
        return
    assert motion.enu_m.shape == (motion.when.shape[0], 3)


@generous
@given(data=st.binary(max_size=500))
def test_any_bytes(path: Path, data: bytes) -> None:
    path.write_bytes(data)
    with pytest.raises(lt.FileError):
        ResidualMotion.read(path)


# -- in a range ----------------------------------------------------------------------------------

HILLTOP = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
SHOTS = lt.Epoch.parse(["2020-03-01T18:00:00", "2020-03-01T19:30:00"])


def test_a_constant_motion_is_another_place() -> None:
    """A motion of 20 mm up, 10 mm east is the same as a station put there, to 1e-16 s."""
    enu = [[0.010, 0.0, 0.020]] * 2
    motion = ResidualMotion(["2020-02-01", "2020-04-01"], enu)
    moving = lt.Station("Hilltop", HILLTOP.xyz_m, residual_motion=motion)
    shift = moving.displacement(SHOTS[0], "residual_motion")
    there = lt.Station("Hilltop", tuple(np.add(HILLTOP.xyz_m, shift)))
    model, array = lt.Model(), lt.reflector("Apollo 15")
    answer = model.round_trip(SHOTS, moving, array)
    assert np.abs(answer.seconds - model.round_trip(SHOTS, there, array).seconds).max() < 2e-15
    assert "residual_motion" in answer.terms
    assert np.abs(answer.terms["residual_motion"]).min() > 3e-11
    exact = exact_round_trip(SHOTS[0], moving, array, digits=25)
    assert abs(float(exact.seconds - answer.seconds[0])) < 3e-15


def test_outside_its_coverage_there_is_no_range() -> None:
    motion = ResidualMotion(["2020-03-01T18:00:00", "2020-03-01T19:30:00"], np.zeros((2, 3)))
    moving = lt.Station("Hilltop", HILLTOP.xyz_m, residual_motion=motion)
    array = lt.reflector("Apollo 15")
    assert lt.round_trip(SHOTS[0], moving, array).seconds > 2.3
    with pytest.raises(
        lt.CoverageError, match=r"when is '2020-03-01T19:30:02\.608.*residual motion"
    ):
        lt.round_trip(SHOTS[1], moving, array)  # it is the reception that is too late
    quiet = lt.Model(omit="residual_motion")
    assert quiet.round_trip("2024-03-01T19:30:00", moving, array).seconds > 2.3
