"""Series of Earth orientation: reading, interpolation, coverage."""

from __future__ import annotations

import pickle
import subprocess
import sys
from dataclasses import FrozenInstanceError
from pathlib import Path

import erfa
import numpy as np
import pytest
from astropy_iers_data import IERS_A_FILE, IERS_B_FILE

from lighttime.constants import ARCSECOND, DAY, MILLIARCSECOND, TT_MINUS_TAI
from lighttime.earth.series import EarthOrientation
from lighttime.earth.series_files import (
    FINAL,
    PREDICTED,
    RAPID,
    UNKNOWN_DXDY_SIGMA_MAS,
    joined,
    read_days,
)
from lighttime.earth.series_text import calendar
from lighttime.earth.zonal import zonal_ut1
from lighttime.errors import CoverageError, FileError, InputError

C04_LINES = Path(IERS_B_FILE).read_text(encoding="ascii").splitlines()
FINALS_LINES = Path(IERS_A_FILE).read_text(encoding="ascii").splitlines()


@pytest.fixture(scope="module")
def bundled() -> EarthOrientation:
    return EarthOrientation.bundled()


# --- reading -----------------------------------------------------------------------------------


def test_numbers_of_the_c04_are_those_printed(bundled: EarthOrientation) -> None:
    """Split at blanks and read with float(), as a person would: every number, bit for bit."""
    rows = [line.split() for line in C04_LINES if not line.startswith("#")]
    fields = np.array(rows, dtype=float)[:, 4:]
    days = len(rows)
    assert np.array_equal(bundled.mjd[:days], fields[:, 0])
    assert np.array_equal(bundled.xp_arcsec[:days], fields[:, 1])
    assert np.array_equal(bundled.yp_arcsec[:days], fields[:, 2])
    assert bundled.dx_mas[:days] == pytest.approx(1e3 * fields[:, 4], abs=1e-13)
    assert bundled.dy_mas[:days] == pytest.approx(1e3 * fields[:, 5], abs=1e-13)
    assert np.array_equal(bundled.sigma_xp_arcsec[:days], fields[:, 9])
    assert np.array_equal(bundled.sigma_yp_arcsec[:days], fields[:, 10])
    assert np.array_equal(bundled.sigma_ut1_s[:days], fields[:, 11])
    assert bundled.sigma_dx_mas[:days] == pytest.approx(1e3 * fields[:, 12], abs=1e-13)
    year, month, day = np.array(rows, dtype=float)[:, :3].astype(int).T
    ut1_tai = fields[:, 3] - erfa.dat(year, month, day, 0.0)
    assert bundled.ut1_tai_s[:days] == pytest.approx(ut1_tai, rel=0.0, abs=1e-14)


def test_finals_go_on_after_the_c04(bundled: EarthOrientation) -> None:
    last = float(C04_LINES[-1].split()[4])
    line = next(line for line in FINALS_LINES if float(line[7:15]) == last + 1.0)
    node = int(np.searchsorted(bundled.mjd, last + 1.0))
    assert bundled.xp_arcsec[node] == float(line[18:27])
    assert bundled.yp_arcsec[node] == float(line[37:46])
    assert bundled.sigma_ut1_s[node] == float(line[68:78])
    assert bundled.dx_mas[node] == float(line[97:106])
    assert bundled.kind[node - 1] == FINAL
    assert bundled.kind[node] == (RAPID if line[16] == line[57] == "I" else PREDICTED)
    assert np.all(np.diff(bundled.mjd) == 1.0)
    assert np.all(np.diff(bundled.kind) >= 0)


def test_what_is_not_published_is_zero_with_a_sigma(bundled: EarthOrientation) -> None:
    given = [line for line in FINALS_LINES if line[97:106].strip()]
    assert bundled.last_dxdy_mjd == float(given[-1][7:15])
    assert bundled.last_measured_mjd < bundled.last_dxdy_mjd < bundled.coverage[1]
    later = bundled.mjd > bundled.last_dxdy_mjd
    assert not bundled.dx_mas[later].any()
    assert np.all(bundled.sigma_dy_mas[later] == UNKNOWN_DXDY_SIGMA_MAS)
    assert f"zero, with one sigma of {UNKNOWN_DXDY_SIGMA_MAS} mas" in str(bundled)


def test_reading_a_file_of_either_kind(tmp_path: Path) -> None:
    path = tmp_path / "series.txt"
    path.write_text("\n".join(C04_LINES[:30]) + "\n", encoding="ascii")
    c04 = EarthOrientation.read(path)
    assert c04.name.startswith("IERS 20 C04")
    assert c04.coverage == (37665.0, 37688.0)
    assert np.all(c04.kind == FINAL)
    path.write_text("\r\n".join(FINALS_LINES[-500:]), encoding="ascii")
    finals = EarthOrientation.read(str(path))
    assert finals.name.startswith("finals2000A")
    assert set(np.unique(finals.kind)) == {RAPID, PREDICTED}
    assert "after that zero" in str(finals)
    assert finals.coverage[1] == float([x for x in FINALS_LINES if x[58:68].strip()][-1][7:15])


def test_a_file_of_predictions_alone(tmp_path: Path) -> None:
    path = tmp_path / "predictions.txt"
    without = [x for x in FINALS_LINES if x[58:68].strip() and not x[97:106].strip()]
    path.write_text("\n".join(without), encoding="ascii")
    series = EarthOrientation.read(path)
    assert np.all(series.kind == PREDICTED)
    assert series.last_dxdy_mjd == series.last_measured_mjd == -np.inf
    assert not series.at(series.tai1[5], 0.5).dx_rad
    assert "dX, dY    zero" in str(series)


def test_blank_lines_around_the_days(tmp_path: Path) -> None:
    path = tmp_path / "padded.txt"
    path.write_text("\n".join(["", *C04_LINES[:12], "", "   ", ""]), encoding="ascii")
    days = [line for line in C04_LINES[:12] if not line.startswith("#")]
    assert EarthOrientation.read(path).mjd.size == len(days)


def test_files_that_do_not_meet(tmp_path: Path) -> None:
    """Two parts of one file with a day between them that is in neither."""
    parts = []
    for name, lines in (("a", FINALS_LINES[100:110]), ("b", FINALS_LINES[111:120])):
        (tmp_path / name).write_text("\n".join(lines), encoding="ascii")
        parts.append(read_days(tmp_path / name))
    last = float(FINALS_LINES[109][7:15])
    with pytest.raises(FileError, match=rf"b: the series does not go on after MJD {last:.0f}"):
        joined(parts, tmp_path / "b")
    assert joined([parts[0], parts[0]][:1], tmp_path / "a")["mjd"][-1] == last


def _broken(tmp_path: Path, lines: list[str]) -> str:
    path = tmp_path / "broken.txt"
    path.write_text("\n".join(lines), encoding="ascii")
    with pytest.raises(FileError) as caught:
        EarthOrientation.read(path)
    return str(caught.value).removeprefix(str(path))


def _with(lines: list[str], row: int, start: int, text: str) -> list[str]:
    line = lines[row]
    return [*lines[:row], line[:start] + text + line[start + len(text) :], *lines[row + 1 :]]


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("   -0.01x700", "xp_arcsec is no decimal: '   -0.01x700'"),
        ("   0-.015900", "xp_arcsec is no decimal"),
        ("   - .015900", "xp_arcsec is no decimal"),
        ("   --0.01590", "xp_arcsec is no decimal"),
        ("     0,01590", "xp_arcsec is no decimal"),
        ("  -12.700000", "xp_arcsec is -12.7; allowed: -2.0 to 2.0"),
        ("            ", "no value of xp_arcsec"),
    ],
)
def test_a_broken_number_is_named_with_its_line(tmp_path: Path, text: str, message: str) -> None:
    broken = _broken(tmp_path, _with(C04_LINES[:30], 8, 26, text))
    assert broken.startswith(", line 9: ")
    assert message in broken


def test_other_broken_files(tmp_path: Path) -> None:
    lines = C04_LINES[:30]
    assert _broken(tmp_path, lines[:8] + lines[9:]) == (
        ", line 9: the day does not follow that of the line before"
    )
    assert "no value of sigma_dx_mas" in _broken(tmp_path, [*lines[:29], lines[29][:158]])
    assert "line 1: neither" in _broken(tmp_path, ["2000-01-01 0.1 0.2 0.3"])
    assert "neither" in _broken(tmp_path, [])
    assert "3 days; at least 4" in _broken(tmp_path, lines[:9])
    finals = _with(FINALS_LINES[:10], 4, 57, "X")
    assert _broken(tmp_path, finals) == ", line 5: expected I or P in column 58"
    finals = _with(FINALS_LINES[:10], 4, 58, " " * 10)
    assert _broken(tmp_path, finals) == ", line 5: no value of ut1_utc_s"
    finals = _with(FINALS_LINES[:10], 4, 7, " " * 8)
    assert _broken(tmp_path, finals) == ", line 5: no modified Julian date"
    finals = _with(FINALS_LINES[:10], 4, 13, "25")
    assert _broken(tmp_path, finals) == ", line 5: the values are not of 0h UTC"
    with pytest.raises(FileError, match="No such file"):
        EarthOrientation.read(tmp_path / "absent")
    with pytest.raises(FileError):
        EarthOrientation.read(tmp_path)


# --- interpolation -----------------------------------------------------------------------------


def _series(**columns: np.ndarray) -> EarthOrientation:
    """40 days without a leap second, all zero but for what is given."""
    n = 40
    zero = np.zeros(n)
    names = ("ut1_tai_s", "xp_arcsec", "yp_arcsec", "dx_mas", "dy_mas")
    sigmas = ("ut1_s", "xp_arcsec", "yp_arcsec", "dx_mas", "dy_mas")
    values = {name: columns.get(name, zero) for name in names}
    values |= {f"sigma_{name}": columns.get(f"sigma_{name}", zero) for name in sigmas}
    return EarthOrientation(
        name="made up",
        mjd=55000.0 + np.arange(n),
        kind=np.zeros(n, dtype=np.int8),
        last_dxdy_mjd=55039.0,
        **values,
    )


def test_nodes_are_met(bundled: EarthOrientation) -> None:
    at = bundled.at(bundled.tai1, bundled.tai2)
    assert np.max(np.abs(at.ut1_tai_s - bundled.ut1_tai_s)) < 1.5e-14
    assert np.max(np.abs(at.xp_rad - bundled.xp_arcsec * ARCSECOND)) < 1e-21
    assert np.max(np.abs(at.dy_rad - bundled.dy_mas * MILLIARCSECOND)) < 1e-23


def test_a_cubic_is_met_everywhere() -> None:
    day = np.arange(40.0)

    def cubic(t: np.ndarray) -> np.ndarray:
        return 0.1 + 0.01 * t - 3e-4 * t**2 + 5e-6 * t**3

    tides = zonal_ut1(2455000.5 + day, (34.0 + TT_MINUS_TAI) / DAY)
    series = _series(xp_arcsec=cubic(day), dx_mas=cubic(day), ut1_tai_s=cubic(day) + tides)
    t = np.array([0.0, 0.1, 0.9, 1.0, 1.5, 20.25, 37.9, 38.0, 38.6, 39.0])
    at = series.at(2455000.5, t + 34.0 / DAY)
    assert at.xp_rad / ARCSECOND == pytest.approx(cubic(t), abs=1e-15)
    assert at.dx_rad / MILLIARCSECOND == pytest.approx(cubic(t), abs=1e-15)
    restored = at.ut1_tai_s - zonal_ut1(2455000.5, t + (34.0 + TT_MINUS_TAI) / DAY)
    assert restored == pytest.approx(cubic(t), abs=1e-15)
    slope = 0.01 - 6e-4 * t + 1.5e-5 * t**2
    rates = series.rates(2455000.5, t + 34.0 / DAY)
    assert rates.xp_rad * DAY / ARCSECOND == pytest.approx(slope, abs=1e-15)


def test_zonal_tides_make_the_interpolation_better(bundled: EarthOrientation) -> None:
    """Every sixth day kept and the middle day found again: without its tides, UT1 comes back
    four times as well (measured 89 against 398 microseconds)."""
    kept = np.arange(17000, 20000, 6)  # 2008 to 2016

    def error(values: np.ndarray) -> float:
        a, b, c, d = (values[kept[k : kept.size - 3 + k]] for k in range(4))
        return float(np.std((9.0 * (b + c) - (a + d)) / 16.0 - values[kept[1:-2] + 3]))

    assert error(bundled.ut1_tai_tide_free_s) < 0.3 * error(bundled.ut1_tai_s)


def test_a_leap_second_is_not_seen(bundled: EarthOrientation) -> None:
    """UT1-UTC jumps by 1 s on 2017-01-01; UT1-TAI goes on by its 1.5 ms a day."""
    seconds = np.array([-1.0, -0.5, 0.5, 1.0, 1.5])
    at = bundled.at(2457754.5, (37.0 + seconds) / DAY)
    assert np.max(np.abs(np.diff(at.ut1_tai_s))) < 2e-8
    node = int(np.searchsorted(bundled.mjd, 57754.0))
    steps = np.diff(bundled.tai1 + bundled.tai2)[node - 2 : node + 1]
    assert (steps - 1.0) * DAY == pytest.approx([0.0, 1.0, 0.0], abs=1e-4)


def test_rate_offsets_of_utc_in_1969(bundled: EarthOrientation) -> None:
    """TAI-UTC = 4.2131700 s + (MJD - 39126) 0.002592 s (USNO, tai-utc) at 1969-07-20 0h."""
    node = int(np.searchsorted(bundled.mjd, 40422.0))
    line = next(line for line in C04_LINES if line[16:26].strip() == "40422.00")
    tai_utc = 4.2131700 + (40422.0 - 39126.0) * 0.002592
    assert bundled.ut1_tai_s[node] == pytest.approx(float(line[50:62]) - tai_utc, abs=1e-14)
    assert bundled.tai2[node] == pytest.approx(tai_utc / DAY, rel=1e-15)


def test_rates_are_the_slopes(bundled: EarthOrientation) -> None:
    tai2 = np.linspace(0.0, 200.0, 57)
    step = 0.01
    late, early = bundled.at(2456000.5, tai2 + step), bundled.at(2456000.5, tai2 - step)
    rates = bundled.rates(2456000.5, tai2)
    for name, tolerance in (("ut1_tai_s", 6e-13), ("xp_rad", 1e-17), ("dy_rad", 1e-18)):
        slope = (getattr(late, name) - getattr(early, name)) / (2.0 * step * DAY)
        # the LOD of the tides is rounded to 1e-9 s a day; the slope has a kink at the nodes
        smooth = np.abs(tai2 % 1.0 - 0.5) < 0.45
        assert np.max(np.abs(getattr(rates, name) - slope)[smooth]) < tolerance


def test_sigmas_are_linear_between_nodes() -> None:
    series = _series(sigma_ut1_s=1e-5 * np.arange(40.0), sigma_dx_mas=np.full(40, 0.2))
    sigma = series.sigmas(2455010.5, 34.0 / DAY + 0.25)
    assert sigma.ut1_tai_s == pytest.approx(10.25e-5, rel=1e-12)
    assert sigma.dx_rad == pytest.approx(0.2 * MILLIARCSECOND, rel=1e-12)


def test_order_of_questions_does_not_matter() -> None:
    text = EarthOrientation.bundled()
    one, other = pickle.loads(pickle.dumps(text)), pickle.loads(pickle.dumps(text))
    days = np.array([100.3, 12000.7, 23000.1])
    single = [float(one.at(2437665.5, day).ut1_tai_s) for day in days[::-1]][::-1]
    assert np.array_equal(other.at(2437665.5, days).ut1_tai_s, single)
    assert np.array_equal(one.ut1_tai_tide_free_s, other.ut1_tai_tide_free_s)


# --- limits ------------------------------------------------------------------------------------


def test_outside_coverage(bundled: EarthOrientation) -> None:
    with pytest.raises(CoverageError, match=r"37665.000021 TAI.*1962-01-01 to 20\d\d-"):
        bundled.at(2437665.5, 1.8 / DAY)
    with pytest.raises(CoverageError, match="2060-"):
        bundled.at(np.array([2455000.5, 2473500.5]), 0.0)
    with pytest.raises(CoverageError):
        bundled.sigmas(2473500.5, 0.0)
    with pytest.raises(InputError, match="finite"):
        bundled.at(np.nan, 0.0)
    one_part = bundled.tai1[-1] + bundled.tai2[-1]
    rest = (bundled.tai1[-1] - one_part) + bundled.tai2[-1]
    assert (
        bundled.at(one_part, rest).xp_rad == bundled.at(bundled.tai1[-1], bundled.tai2[-1]).xp_rad
    )
    with pytest.raises(CoverageError):
        bundled.at(bundled.tai1[-1], bundled.tai2[-1] + 1e-12)
    last = bundled.at(bundled.tai1[-1], bundled.tai2[-1])
    assert float(last.xp_rad) == pytest.approx(bundled.xp_arcsec[-1] * ARCSECOND)


def test_fixed() -> None:
    """UT1 of the worked example in IAU SOFA, Time Scale and Calendar Tools: 21:24:37.834100."""
    series = EarthOrientation.fixed(0.3341, 0.1, 0.2, 0.3, -0.4)
    tai2 = (21 * 3600 + 25 * 60 + 10.5) / DAY
    at = series.at(2453750.5, tai2)
    ut1 = tai2 * DAY + at.ut1_tai_s
    assert ut1 == pytest.approx(21 * 3600 + 24 * 60 + 37.8341, abs=1e-10)
    assert (at.xp_rad, at.yp_rad) == (0.1 * ARCSECOND, 0.2 * ARCSECOND)
    assert (at.dx_rad, at.dy_rad) == (0.3 * MILLIARCSECOND, -0.4 * MILLIARCSECOND)
    many = series.at(np.full((2, 3), 2453750.5), tai2)
    assert many.ut1_tai_s.shape == many.dx_rad.shape == (2, 3)
    assert series.sigmas(2453750.5, [0.1, 0.2]).dx_rad.tolist() == [0.0, 0.0]
    assert series.coverage == (-np.inf, np.inf)
    assert series.last_measured_mjd == np.inf
    assert "without zonal tides" in str(series)
    assert series.mjd.size == 0


def test_fixed_refuses_what_is_no_orientation() -> None:
    with pytest.raises(InputError, match=r"ut1_utc_s is 33.4; allowed: -2.0 to 2.0"):
        EarthOrientation.fixed(33.4)
    with pytest.raises(InputError, match="xp_arcsec is nan"):
        EarthOrientation.fixed(0.1, np.nan)
    with pytest.raises(InputError, match="dx_mas"):
        EarthOrientation.fixed(0.1, dx_mas=175.0)
    with pytest.raises(InputError, match="finite"):
        EarthOrientation.fixed(0.1).at(np.inf, 0.0)


# --- as a value --------------------------------------------------------------------------------


def test_nothing_can_be_changed(bundled: EarthOrientation) -> None:
    with pytest.raises(FrozenInstanceError):
        bundled.name = "mine"  # type: ignore[misc]
    for array in (bundled.xp_arcsec, bundled.tai1, bundled.tai2, bundled.ut1_tai_tide_free_s):
        with pytest.raises(ValueError, match="read-only"):
            array[0] = 1.0
    assert EarthOrientation.bundled() is bundled


def test_pickled_and_compared(bundled: EarthOrientation) -> None:
    again = pickle.loads(pickle.dumps(bundled))
    assert again == bundled
    assert hash(again) == hash(bundled)
    assert not again.xp_arcsec.flags.writeable
    fixed = EarthOrientation.fixed(0.1)
    assert fixed == EarthOrientation.fixed(0.1) != EarthOrientation.fixed(0.2)
    assert fixed != bundled
    assert pickle.loads(pickle.dumps(fixed)) == fixed


def test_scalars_and_shapes(bundled: EarthOrientation) -> None:
    assert np.ndim(bundled.at(2455000.5, 0.0).ut1_tai_s) == 0
    at = bundled.at(np.full((2, 1), 2455000.5), np.array([0.1, 0.2, 0.3]))
    assert at.ut1_tai_s.shape == at.xp_rad.shape == (2, 3)


def test_astropy_is_not_imported() -> None:
    code = (
        "import sys; from lighttime.earth.series import EarthOrientation;"
        "EarthOrientation.bundled().at(2455000.5, 0.0); print('astropy' in sys.modules)"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "False"


def test_dates_for_people() -> None:
    """MJD 51544 is 2000-01-01; what no calendar has is told as a number."""
    assert calendar(51544.9) == "2000-01-01"
    assert calendar(np.inf) == "MJD inf"
    assert calendar(1e7) == "MJD 10000000.0"
