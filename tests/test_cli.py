"""The command line: what it prints and writes, and what it says to bad input."""

from __future__ import annotations

import csv
import io
import json
import os
import re
import shlex
import subprocess
import sys
from collections.abc import Callable
from datetime import date, timedelta
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from daf_case import write_de421

import lighttime as lt
from lighttime.cli import main
from lighttime.commands import epoch_file
from lighttime.progress import Progress

c = 299792458.0

PLACE = '--place "Hilltop,46.2,7.1,2310"'
WHERE = f'{PLACE} --array "Apollo 15"'
AIR = "--pressure-hpa 765 --temperature-k 271 --humidity 0.3"
EVENING = [f"2020-03-01T{h}:{m:02d}:00" for h in (19, 20) for m in (0, 15, 30, 45)]
NIGHT = "2020-03-01T05:00:00"
"""The Moon is below the horizon."""

HILLTOP = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
APOLLO_15 = lt.reflector("Apollo 15")

Run = Callable[[str], tuple[int, str, str]]


@pytest.fixture
def run(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> Run:
    """Runs a command line in an empty folder; gives status, output and errors."""
    monkeypatch.chdir(tmp_path)

    def run(line: str) -> tuple[int, str, str]:
        try:
            status = main(shlex.split(line))
        except SystemExit as end:
            status = int(end.code or 0)
        told = capsys.readouterr()
        return status, told.out, told.err

    return run


def write_epochs(epochs: list[str], name: str = "shots.csv") -> None:
    rows = [f"{k},{epoch},{760 + k},{271 + k / 10},0.3" for k, epoch in enumerate(epochs)]
    head = "id, when, p, t, rh"
    Path(name).write_text("\n".join(["# one night", head, "", *rows, ""]), encoding="utf-8")


def process(*arguments: str, **more: Any) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-B", *arguments]
    return subprocess.run(command, capture_output=True, text=True, check=False, **more)


# -- range ---------------------------------------------------------------------------------------


def test_range_for_people_is_the_printed_answer(run: Run) -> None:
    status, out, err = run(f"range --at {EVENING[0]} {WHERE}")
    assert (status, err) == (0, "")
    assert out == f"{lt.round_trip(EVENING[0], HILLTOP, APOLLO_15)}\n"


def test_published_normal_point(run: Run) -> None:
    """A measured range, with a station file and weather.

    Source: T. W. Murphy, UC San Diego, the example of a normal-point record; coordinates of the
    station from memory. The array's coordinates are those of another ephemeris, an
    inconsistency of up to about a metre: -0.57 m are found.
    """
    Path("site.toml").write_text(
        'name = "test station"\nxyz_m = [-1463998.9085, -5166632.7635, 3435012.8835]\n'
        "velocity_m_per_yr = [-0.0141, 0.0008, -0.0015]\nepoch = 2000.0\n",
        encoding="utf-8",
    )
    status, out, _ = run(
        'range --at 2008-03-30T12:39:50.000 --station site.toml --array "Apollo 15" --json '
        "--pressure-hpa 724.39 --temperature-k 268.05 --humidity 0.34 --wavelength-nm 532"
    )
    told = json.loads(out)
    assert status == 0
    assert abs(2.6170710379889 - told["ranges"][0]["light_time_s"]) * c / 2 < 0.85
    assert told["station"]["velocity_m_per_yr"] == [-0.0141, 0.0008, -0.0015]


def test_json_has_every_digit_and_what_it_rests_on(run: Run) -> None:
    _, out, _ = run(
        f"range --at {' '.join(EVENING)} {WHERE} {AIR} --wavelength-nm 1064 --tag receive "
        "--omit pole_tide,lunar_tide --omit clock --gamma 1.001 --json"
    )
    told = json.loads(out)
    model = lt.Model(omit=("pole_tide", "lunar_tide", "clock"), gamma=1.001)
    answer = model.round_trip(
        EVENING, HILLTOP, APOLLO_15, "receive", lt.Weather(765.0, 271.0, 0.3), 1064.0
    )
    ranges = told.pop("ranges")
    assert [each["light_time_s"] for each in ranges] == answer.seconds.tolist()
    for name, values in answer.terms.items():
        assert [each["terms_s"][name] for each in ranges] == values.tolist()
    assert [each["uplink_tdb_s"] for each in ranges] == answer.uplink.seconds.tolist()
    assert [each["elevation_downlink_deg"] for each in ranges] == (
        answer.downlink.elevation_deg.tolist()
    )
    assert ranges[1]["epoch_utc"] == "2020-03-01T19:15:00.000000000000"
    assert ranges[1]["pressure_hpa"] == 765.0
    assert told["notes"] == list(answer.notes)
    assert told["not_modelled"] == ["ocean_loading", "ocean_pole_tide", "atmosphere_loading"]
    assert told["model"]["omit"] == ["clock", "lunar_tide", "pole_tide"]
    assert told["model"]["gamma"] == 1.001
    assert (told["tag"], told["wavelength_nm"]) == ("receive", 1064.0)
    assert told["array"]["xyz_m"] == [1554678.104, 98094.498, 765005.863]
    assert told["lighttime"] == lt.__version__


def test_array_by_its_coordinates(run: Run) -> None:
    where = f'{PLACE} --array "1554678.104, 98094.498, 765005.863" --axes DE421'
    _, out, _ = run(f"range --at {EVENING[0]} {where} --json")
    told = json.loads(out)
    expected = lt.round_trip(EVENING[0], HILLTOP, APOLLO_15).seconds
    assert told["ranges"][0]["light_time_s"] == expected
    assert not any("principal axes" in note for note in told["notes"])


def test_epochs_in_another_scale(run: Run) -> None:
    tdb = lt.Epoch.parse(EVENING[0]).to("tdb", place=HILLTOP)
    _, out, _ = run(f"range --at {tdb.isoformat(21)} --scale tdb {WHERE} --json")
    told = json.loads(out)["ranges"][0]
    expected = lt.round_trip(EVENING[0], HILLTOP, APOLLO_15).seconds
    assert told["light_time_s"] == pytest.approx(expected, abs=1e-15)
    assert told["epoch_tdb"] == tdb.isoformat(12)


def test_data_files_of_ones_own(run: Run, tmp_path: Path) -> None:
    """The files of the bundled series and DE421 itself, given by name, are found and used."""
    from astropy_iers_data import IERS_B_FILE

    bsp, bpc = write_de421(tmp_path)
    line = f"range --at 2010-01-20T19:00:00 {WHERE} --json --earth-orientation {IERS_B_FILE}"
    _, out, _ = run(f"{line} --ephemeris {bsp} --orientation {bpc}")
    told = json.loads(out)
    model = lt.Model(lt.Ephemeris.open(bsp, orientation=bpc), lt.EarthOrientation.read(IERS_B_FILE))
    expected = model.round_trip("2010-01-20T19:00:00", HILLTOP, APOLLO_15).seconds
    assert told["ranges"][0]["light_time_s"] == expected
    assert told["model"]["ephemeris"] == "made"
    assert str(IERS_B_FILE) in told["model"]["earth_orientation"]
    status, out, _ = run(f"coverage --ephemeris {bsp} --earth-orientation {IERS_B_FILE}")
    assert status == 0
    assert "lunar orientation missing: no reflector can be placed on the Moon" in out
    assert "predicted" not in out


# -- many epochs ---------------------------------------------------------------------------------


def by_columns(epochs: list[str]) -> lt.RoundTrip:
    k = np.arange(len(epochs))
    weather = lt.Weather(760.0 + k, 271.0 + k / 10, np.full(k.size, 0.3))
    return lt.round_trip(epochs, HILLTOP, APOLLO_15, weather=weather)


FILE = f"range --epochs shots.csv --column when {WHERE}"
COLUMNS = "--pressure-hpa p --temperature-k t --humidity rh"


def test_csv_in_and_out(run: Run) -> None:
    write_epochs(EVENING)
    status, out, err = run(f"{FILE} {COLUMNS} --output out.csv")
    assert (status, err) == (0, "")
    answer = by_columns(EVENING)
    assert out.splitlines() == [
        "8 ranges Hilltop - Apollo 15 written to out.csv",
        "  not modelled (nothing was given): ocean_loading, ocean_pole_tide, atmosphere_loading",
        *(f"  {note}" for note in answer.notes),
    ]
    rows = list(csv.DictReader(io.StringIO(Path("out.csv").read_text(encoding="utf-8"))))
    assert [row["epoch_utc"] for row in rows] == [f"{epoch}.000000000000" for epoch in EVENING]
    assert [float(row["light_time_s"]) for row in rows] == answer.seconds.tolist()
    assert [float(row["temperature_k"]) for row in rows] == [271.0 + k / 10 for k in range(8)]
    for name, values in answer.terms.items():
        assert [float(row[f"term_{name}_s"]) for row in rows] == values.tolist()


def test_ecsv_is_read_by_astropy(run: Run) -> None:
    from astropy.table import QTable

    write_epochs(EVENING)
    run(f"{FILE} {COLUMNS} --output out.ecsv")
    table = QTable.read("out.ecsv")
    answer = by_columns(EVENING)
    assert table["light_time"].to_value("s").tolist() == answer.seconds.tolist()
    assert table["elevation_uplink"].unit == "deg"
    assert table["pressure"].to_value("Pa")[1] == pytest.approx(76100.0)
    assert table.meta["notes"] == list(answer.notes)
    assert set(table.colnames) >= set(answer.table().colnames)


@pytest.mark.parametrize("kind", ["csv", "ecsv", "json"])
def test_chunks_do_not_show(run: Run, monkeypatch: pytest.MonkeyPatch, kind: str) -> None:
    """Rows come in the order given, the same for any length of a chunk, but for a last digit."""
    write_epochs([EVENING[k] for k in (4, 0, 7, 1, 2, 3, 6, 5)])
    run(f"{FILE} {COLUMNS} --output whole.{kind}")
    monkeypatch.setattr(epoch_file, "CHUNK", 3)
    run(f"{FILE} {COLUMNS} --output parts.{kind}")
    number = re.compile(r"-?\d+\.\d+(?:e-?\d+)?")
    whole, parts = (Path(f"{name}.{kind}").read_text("utf-8") for name in ("whole", "parts"))
    assert number.sub("", parts) == number.sub("", whole)
    values = [[float(each) for each in number.findall(text)] for text in (whole, parts)]
    assert len(values[0]) > 8 * 15
    np.testing.assert_allclose(values[1], values[0], rtol=2e-15)


def test_a_json_file_is_what_is_printed(run: Run) -> None:
    write_epochs(EVENING)
    _, printed, _ = run(f"{FILE} --json")
    status, summary, _ = run(f"{FILE} --json --output out.json")
    assert status == 0
    assert Path("out.json").read_text(encoding="utf-8") == printed
    told = json.loads(summary)
    assert (told["file"], told["count"]) == ("out.json", 8)
    assert told["notes"] == json.loads(printed)["notes"]


def test_notes_are_those_of_the_latest_epoch(run: Run) -> None:
    last = lt.EarthOrientation.bundled().last_measured_mjd
    latest = lt.Epoch(2400000.5, last + 20.0, "utc").isoformat(0)
    write_epochs([EVENING[0], latest, EVENING[1]])
    _, out, _ = run(f"{FILE} --json")
    assert any("are predicted" in note for note in json.loads(out)["notes"])


def test_many_epochs_for_people(run: Run) -> None:
    write_epochs([f"2020-03-{day:02d}T19:00:00" for day in range(1, 15)])
    _, out, _ = run(FILE)
    assert "Round trip Hilltop - Apollo 15, 14 epochs, transmit" in out
    assert out.count(" s   elevation ") == 10
    assert out.endswith("10 of 14 epochs are shown: --output FILE and --json have all\n")


def test_too_many_to_print(run: Run, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("lighttime.commands.range.CHUNK", 7)
    write_epochs(EVENING)
    status, out, err = run(FILE)
    assert (status, out) == (2, "")
    assert "--epochs is 'shots.csv with 8 rows'; allowed: up to 7 to print; --output" in err


def test_a_single_column_needs_no_name(run: Run) -> None:
    Path("one.csv").write_bytes(b"\xef\xbb\xbfepoch\r\n2020-03-01T19:00:00Z\r\n")
    _, out, _ = run(f"range --epochs one.csv {WHERE} --json")
    expected = lt.round_trip(EVENING[0], HILLTOP, APOLLO_15).seconds
    assert json.loads(out)["ranges"][0]["light_time_s"] == expected


# -- files that are written ----------------------------------------------------------------------


def files() -> dict[str, bytes]:
    return {path.name: path.read_bytes() for path in Path().iterdir()}


def test_no_file_is_replaced_unasked(run: Run) -> None:
    Path("out.csv").write_text("precious", encoding="utf-8")
    line = f"range --at {EVENING[0]} {WHERE} --output out.csv"
    status, out, err = run(line)
    assert (status, out) == (2, "")
    assert "out.csv: exists, and is left alone without --overwrite" in err
    assert files() == {"out.csv": b"precious"}
    status, _, _ = run(f"{line} --overwrite")
    assert status == 0
    assert files()["out.csv"].startswith(b"epoch_utc,light_time_s,")
    assert list(files()) == ["out.csv"]


def test_a_file_half_written_is_left_alone(run: Run) -> None:
    """That of another run that is still writing, or was killed."""
    for name in ("out.csv", "out.csv.part"):
        Path(name).write_text("precious", encoding="utf-8")
    had = files()
    status, _, err = run(f"range --at {EVENING[0]} {WHERE} --output out.csv --overwrite")
    assert status == 2
    assert "out.csv.part: exists, and is left alone" in err
    assert files() == had


def test_what_was_left_out_is_said(run: Run) -> None:
    _, out, _ = run(f"range --at {EVENING[0]} {WHERE} --omit clock --output out.csv")
    assert "  left out on request: clock\n" in out
    assert "term_clock_s" not in Path("out.csv").read_text(encoding="utf-8")


@pytest.mark.parametrize("before", [None, b"precious"])
def test_a_run_that_fails_leaves_no_trace(
    run: Run, monkeypatch: pytest.MonkeyPatch, before: bytes | None
) -> None:
    """The row below the horizon is found in the third chunk, after two were written."""
    monkeypatch.setattr(epoch_file, "CHUNK", 3)
    write_epochs([*EVENING[:7], NIGHT, EVENING[7]])
    if before is not None:
        Path("out.csv").write_bytes(before)
    had = files()
    status, _, err = run(f"{FILE} {AIR} --output out.csv --overwrite")
    assert status == 2
    assert "shots.csv, line 11: elevation_deg" in err
    assert files() == had


def test_the_file_of_epochs_is_not_replaced(run: Run) -> None:
    write_epochs(EVENING)
    had = files()
    status, _, err = run(f"{FILE} --output ./shots.csv --overwrite")
    assert status == 2
    assert "--output is 'shots.csv'; allowed: another file than those that are read" in err
    assert files() == had


WATCH = """
import os, sys
touched = []
def watch(event, arguments):
    if event == "open" and arguments[2] & (os.O_WRONLY | os.O_RDWR | os.O_CREAT):
        touched.append(str(arguments[0]))
    elif event.startswith(("os.rename", "os.mkdir", "os.remove", "os.link", "tempfile", "socket")):
        touched.append(event)
sys.addaudithook(watch)
from lighttime.cli import main
for line in sys.argv[1].splitlines():
    assert main(line.split()) == 0
print(touched, file=sys.stderr)
print(sorted({"astropy", "scipy", "mpmath", "jplephem"} & set(sys.modules)), file=sys.stderr)
"""


def test_nothing_else_is_written_and_nothing_slow_imported(tmp_path: Path) -> None:
    where = "--place Hilltop,46.2,7.1,2310 --array apollo15"
    lines = [
        f"range --at {EVENING[0]} {where}",
        f"range --at {EVENING[0]} {where} --json",
        f"range --at {EVENING[0]} {where} --output out.ecsv",
        f"scales {EVENING[0]}",
        "coverage",
    ]
    done = process("-c", WATCH, "\n".join(lines), cwd=tmp_path)
    assert done.stderr.splitlines() == ["['out.ecsv']", "[]"]
    assert [path.name for path in tmp_path.iterdir()] == ["out.ecsv"]


# -- scales --------------------------------------------------------------------------------------


def test_scales_of_the_cookbook(run: Run) -> None:
    """An instant told in every scale, to a microsecond as printed there.

    Source: IAU SOFA, Time Scale and Calendar Tools, 4.2 (a place at 19.48 N, 155.93 W); its
    UT1 is made from UT1 - UTC = 0.3341 s, 17 us from the series of the IERS.
    """
    status, out, err = run("scales 2006-01-15T21:24:37.5 --place Cookbook,19.48,-155.93,0 --json")
    assert (status, err) == (0, "")
    told = json.loads(out)
    printed = {
        "utc": "21:24:37.500000", "ut1": "21:24:37.834100", "tai": "21:25:10.500000",
        "tt": "21:25:42.684000", "tcg": "21:25:43.322690", "tdb": "21:25:42.684373",
        "tcb": "21:25:56.893952",
    }  # fmt: skip
    for scale, clock in printed.items():
        found = lt.Epoch.parse(told["scales"][scale]["iso"], "tt")
        off = found.seconds_since(lt.Epoch.parse(f"2006-01-15T{clock}", "tt"))
        assert abs(off) < (0.51e-6 if scale != "ut1" else 20e-6)
    assert told["differences_s"]["ut1_minus_utc"] == pytest.approx(0.3341, abs=20e-6)
    assert told["differences_s"]["tai_minus_utc"] == 33.0
    assert told["scales"]["tt"]["mjd_day"] == 53750
    assert told["scales"]["tt"]["day_fraction"] == pytest.approx(0.892855139)  # SOFA, as printed


def test_scales_for_people(run: Run) -> None:
    _, out, _ = run("scales 2016-12-31T23:59:60.25")
    lines = [line.split() for line in out.splitlines()]
    assert lines[0] == ["2016-12-31T23:59:60.250000000000", "UTC"]
    assert lines[9][:3] == ["GPS", "2017-01-01T00:00:17.250000000000", "MJD"]
    assert ["TT", "-", "TAI", "+32.184000000000", "s"] in lines
    assert ["TAI", "-", "UTC", "+36.000000000000", "s"] in lines
    assert "clock at the geocentre: at a station they differ by up to 3 us" in out


def test_lunar_time_comes_with_integrated_tdb(run: Run) -> None:
    """TCL - TT from one new Moon to another, between which its monthly swing of 0.13 ms is gone.

    Source: Ashby & Patla 2024, Astron. J. 168, 112 (from memory): clocks on the surfaces part by
    56.02 us a day, and by 3.1403e-11 or 2.713 us a day more without the Moon's own potential.
    """
    moons = [lt.Epoch.parse(epoch) for epoch in ("2024-01-11T11:57", "2025-01-29T12:36")]
    told = [run(f"scales {epoch.isoformat()} --tdb integrated --json")[1] for epoch in moons]
    first, later = (json.loads(each)["differences_s"]["tcl_minus_tt"] for each in told)
    days = moons[1].seconds_since(moons[0]) / 86400.0
    assert 1e6 * (later - first) / days == pytest.approx(56.02 + 2.713, abs=0.02)
    status, _, err = run("scales 2024-01-01 --scale tcl")
    assert (status, err) == (2, "lighttime scales: error: --scale tcl needs --tdb integrated\n")


def test_a_clock_at_a_station_of_a_file(run: Run) -> None:
    place = "latitude_deg = 46.2\nlongitude_deg = 7.1\nheight_m = 2310\n"
    Path("hill.toml").write_text(f'name = "Hilltop"\n{place}', encoding="utf-8")
    _, by_file, _ = run("scales 2020-03-01T19:00:00 --at hill.toml")
    _, by_numbers, _ = run("scales 2020-03-01T19:00:00 --at Hilltop,46.2,7.1,2310")
    assert "clock at rest on the Earth, at Hilltop" in by_file
    assert by_file == by_numbers


def test_a_scale_that_is_out_of_reach_is_said(run: Run) -> None:
    _, out, _ = run("scales 1955-01-01 --scale tt --json")
    told = json.loads(out)
    assert set(told["unavailable"]) == {"utc", "ut1"}
    assert "1960-01-01 to 2099-12-31" in told["unavailable"]["utc"]
    assert told["ut1_sigma_s"] is None
    _, out, _ = run("scales 1955-01-01 --scale tt")
    assert "  UT1 not known: epoch is '1954-12-31" in out


def test_predicted_ut1_is_said(run: Run) -> None:
    last = lt.EarthOrientation.bundled().last_measured_mjd
    epoch = lt.Epoch(2400000.5, last + 20.0, "utc").isoformat(0)
    _, out, _ = run(f"scales {epoch}")
    assert "UT1 is predicted: the last measured day is" in out


# -- coverage ------------------------------------------------------------------------------------


def test_coverage_is_that_of_the_files(run: Run) -> None:
    """The last days, as astropy reads the same files of the IERS."""
    from astropy.utils.iers import IERS_A, IERS_A_FILE, IERS_B

    _, out, _ = run("coverage --json")
    told = json.loads(out)
    series = told["earth_orientation"]
    final = IERS_B.open()["MJD"].value[-1]
    assert series["last_final_utc"] == _day(final)
    rapid = IERS_A.read(IERS_A_FILE)
    known = rapid[~rapid["UT1_UTC_A"].mask] if hasattr(rapid["UT1_UTC_A"], "mask") else rapid
    assert series["last_utc"] == _day(known["MJD"].value[-1])
    measured = known["MJD"].value[known["UT1Flag_A"] == "I"][-1]
    assert series["last_measured_utc"] == _day(measured)
    assert series["sigmas"][-1]["ut1_s"] == pytest.approx(known["e_UT1_UTC_A"].to_value("s")[-1])
    assert (told["utc"]["latest_step"], told["utc"]["tai_minus_utc_s"]) == ("2017-01-01", 37.0)
    assert told["utc"]["list_agrees"] is True
    assert told["ephemeris"]["lunar_orientation"] == "DE421"
    assert [array["name"] for array in told["arrays"]] == [r.name for r in lt.reflectors()]


def _day(mjd: float) -> str:
    return (date(1858, 11, 17) + timedelta(days=int(mjd))).isoformat()


def test_coverage_of_predictions_alone(run: Run) -> None:
    """Nothing in it is measured: sigmas are told from its first day on."""
    from astropy_iers_data import IERS_A_FILE

    lines = Path(IERS_A_FILE).read_text(encoding="ascii").splitlines()
    predicted = [line for line in lines if line[57:58] == "P" and not line[97:106].strip()]
    Path("p.txt").write_text("\n".join(predicted), encoding="ascii")
    status, out, _ = run("coverage --earth-orientation p.txt --json")
    told = json.loads(out)["earth_orientation"]
    assert status == 0
    assert [told[f"last_{kind}_utc"] for kind in ("final", "measured", "dxdy")] == [None] * 3
    first = told["sigmas"][0]
    assert (first["day_utc"], first["days_after_measured"]) == (told["first_utc"], 0)
    assert first["ut1_s"] == float(predicted[0][68:78])
    assert run("coverage --earth-orientation p.txt")[0] == 0


def test_coverage_for_people(run: Run) -> None:
    status, out, err = run("coverage")
    assert (status, err) == (0, "")
    assert "Ephemeris DE421\n  1899-12-04 to 2200-02-01 TDB" in out
    assert "  TAI - UTC is 37 s since 2017-01-01; the list of the IERS, good until" in out
    assert "  Lunokhod 2     1339363.598    801870.996    756359.260 m" in out


# -- bad input -----------------------------------------------------------------------------------

AT = f"range --at {EVENING[0]}"


@pytest.mark.parametrize(
    ("line", "message"),
    [
        ("", "lighttime: error: the following arguments are required: COMMAND"),
        ("ranges", "invalid choice: 'ranges'"),
        (f"{AT} {PLACE}", "the following arguments are required: --array"),
        (f'{AT} --array "Apollo 15"', "one of the arguments --station --place is required"),
        (f"{AT} {WHERE} --tag bouncing", "invalid choice: 'bouncing' (choose from"),
        (f"{AT} {WHERE} --gamma one", "argument --gamma: invalid float value: 'one'"),
        (f"{AT} {WHERE} --gamma nan", "gamma is nan; allowed: a finite number"),
        (f"range --at tomorrow {WHERE}", "--at is 'tomorrow'; allowed: text like 2008-"),
        (f"range --at 2020-02-30 {WHERE}", "--at is '2020-02-30'; allowed: a day that 2020-02"),
        (f"range --at 2020-01-01T23:59:60 {WHERE}", "2020-01-01 does not end in a leap second"),
        (f"range --at 1850-01-01 --scale tt {WHERE}", "the span of DE421"),
        (f"range --at 2060-01-01 {WHERE}", "epoch is '2060-01-01 (MJD 73"),
        (f"range --at {NIGHT} {WHERE} {AIR}", "the target is below the horizon); --omit tropos"),
        (f'{AT} {PLACE} --array "Apolo 15"', "did you mean Apollo 15"),
        (f"{AT} {PLACE} --array 1,2", "--array is '1,2'; allowed: a name, or X,Y,Z in metres"),
        (f"{AT} {PLACE} --array 1737.4,0,0", "1717400 to 1757400 m from the centre of the Moon"),
        (f"{AT} {WHERE} --axes DE421", "--axes goes with --array X,Y,Z only"),
        (f"{AT} --place 46.2,7.1,9 --array apollo15", "--place is '46.2,7.1,9'; allowed: NAME,"),
        (f"{AT} --place a,96.2,7.1,9 --array apollo15", "latitude_deg is 96.2; allowed: -90 to 90"),
        (f"{AT} --place a,nan,7.1,9 --array apollo15", "latitude_deg is nan; allowed: -90 to 90"),
        (f"{AT} --place a,6,7,2e6 --array apollo15", "height_m is 2000000.0; allowed: -100000"),
        (f"{AT} --station none.toml --array apollo15", "none.toml: cannot be read: No such file"),
        (f"{AT} {WHERE} --omit sun_gravty", "did you mean sun_gravity"),
        (f"{AT} {WHERE} --omit geometry", "omit is 'geometry'; allowed: any of sun_gravity"),
        (f"{AT} {WHERE} --pressure-hpa 765", "--temperature-k is missing: --pressure-hpa, --te"),
        (f"{AT} {WHERE} {AIR} --pressure-hpa 76500", "(in pascals? then 765)"),
        (f"{AT} {WHERE} {AIR} --temperature-k -2", "(in degrees Celsius? then 271.15)"),
        (f"{AT} {WHERE} {AIR} --humidity 30", "(in percent? then 0.3)"),
        (f"{AT} {WHERE} {AIR} --humidity rh", "--humidity is 'rh'; allowed: a number (the name"),
        (f"{AT} {WHERE} {AIR} --wavelength-nm 0.532", "wavelength_nm is 0.532; allowed: 355 to"),
        (f"{AT} {WHERE} --orientation a.bpc", "--orientation goes with --ephemeris only"),
        (f"{AT} {WHERE} --ephemeris a.bsp", "--orientation is missing: the FILE.bpc"),
        (f"{AT} {WHERE} --ephemeris a.bsp --orientation a.bpc", "a.bsp: cannot be read: No such"),
        (f"{AT} {WHERE} --earth-orientation bad.csv", "bad.csv, line 1: neither"),
        (f"{AT} {WHERE} --output out.txt", "a name that ends in .csv, .ecsv, .json"),
        (f"{AT} {WHERE} --output no/out.csv", "out.csv: cannot be written: No such file"),
        (f"{AT} {WHERE} --column when", "--column goes with --epochs only"),
        (f"range --epochs none.csv {WHERE}", "none.csv: cannot be read: No such file"),
        (f"range --epochs bad.csv {WHERE}", "--column is missing: one of when, p"),
        (f"range --epochs bad.csv --column wen {WHERE}", "did you mean when? one of when, p"),
        (f"range --epochs bad.csv --column when {WHERE}", "bad.csv, line 4: epoch is '2020-13"),
        (
            f"range --epochs bad.csv --column when {WHERE} {AIR} --pressure-hpa q",
            "column of pressure_hpa is 'q'; allowed: one of when, p",
        ),
        ("scales", "the following arguments are required: INSTANT"),
        ("scales 2006-01-15T24:00:00", "INSTANT is '2006-01-15T24:00:00'; allowed: hours 00 to 23"),
        ("scales 2060-01-01 --scale ut1", "epoch is '2060-01-01"),
        ("scales 2006-01-15 --place here", "--place is 'here'; allowed: NAME,LATITUDE_DEG"),
        ("scales 2006-01-15 --place Hill,46N,7E,2310", "--place is 'Hill,46N,7E,2310'; allowed: "),
        ("scales 2006-01-15 --at none.toml", "none.toml: cannot be read: No such file"),
        (f"{AT} {PLACE} --array 1,2,z", "--array is '1,2,z'; allowed: a name, or X,Y,Z in metres"),
        ("coverage --ephemeris none.bsp", "none.bsp: cannot be read: No such file"),
    ],
)
def test_bad_input_is_told_in_one_line(run: Run, line: str, message: str) -> None:
    Path("bad.csv").write_text("when,p\n# no\n2020-03-01T19:00,760\n2020-13-01,760\n", "utf-8")
    status, out, err = run(line)
    assert (status, out) == (2, "")
    assert message in err
    assert err.startswith("lighttime")
    assert len(err.splitlines()) == 1


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"", "bad.csv: empty"),
        (b"when\n", "bad.csv: no rows below the names of the columns"),
        (b"2020-03-01\n2020-03-02\n", "bad.csv: '2020-03-01' is an epoch, where the columns"),
        (b"when,p\n2020-03-01,7,8\n", "bad.csv, line 2: 3 cells, but 2 columns have names"),
        (b"when,when\n2020-03-01,7\n", "bad.csv: 2 columns have the name when"),
        (b"when\n\xff\n", "bad.csv: not a text file (UTF-8)"),
        (b'when\n"2020-03-01\n', "bad.csv, line 2: not CSV: unexpected end of data"),
        (b"when,p\n2020-03-01T19:00,high\n", "line 2: pressure_hpa is 'high'; allowed: a number"),
        (b"when,p\n2020-03-01T19:00,nan\n", "line 2: pressure_hpa is nan; allowed: 300 to 1100"),
        (
            b"when,p\n2020-03-01T19:00,760\n2020-03-01T19:01,76000\n2020-03-01T19:02,760\n",
            "bad.csv, line 3: pressure_hpa is 76000.0; allowed: 300 to 1100 hPa (in pascals?",
        ),
        (
            b"when,p\n2020-03-01T19:00,760\n2060-03-01T19:01,760\n2020-03-01T19:02,760\n",
            "bad.csv, line 3: epoch is '2060-03-01",
        ),
    ],
)
def test_bad_file_of_epochs(run: Run, content: bytes, message: str) -> None:
    Path("bad.csv").write_bytes(content)
    air = "--pressure-hpa p --temperature-k 271 --humidity 0.3" if b",p" in content else ""
    status, out, err = run(f"range --epochs bad.csv --column when {WHERE} {air}")
    assert (status, out) == (2, "")
    assert message in err
    assert len(err.splitlines()) == 1


# -- the process ---------------------------------------------------------------------------------


def test_version_and_help(run: Run) -> None:
    assert run("--version") == (0, f"lighttime {lt.__version__}\n", "")
    for command in ("range", "scales", "coverage"):
        status, out, _ = run(f"{command} --help")
        assert status == 0
        assert "keys of the JSON output:" in out


def test_the_module_runs_and_a_closed_pipe_is_silent(tmp_path: Path) -> None:
    done = process("-m", "lighttime", "scales", "2060-01-01", "--scale", "ut1", cwd=tmp_path)
    assert (done.returncode, done.stdout) == (2, "")
    assert done.stderr.startswith("lighttime scales: error: epoch is '2060-01-01")
    read, write = os.pipe()
    os.close(read)
    command = [sys.executable, "-m", "lighttime", "coverage"]
    closed = subprocess.run(command, stdout=write, stderr=subprocess.PIPE, check=False)
    os.close(write)
    assert (closed.returncode, closed.stderr) == (141, b"")


# -- the progress bar ----------------------------------------------------------------------------


class Terminal(io.StringIO):
    def isatty(self) -> bool:
        return True


def told_by_progress(stream: io.StringIO, quiet: bool = False) -> str:
    clock = iter([0.0, 0.5, 2.0, 2.01, 4.0]).__next__
    with Progress(100, stream, quiet, clock) as progress:
        for done in (10, 50, 51, 100):
            progress.update(done)
    return stream.getvalue()


def test_progress_is_shown_on_a_terminal_and_goes_away() -> None:
    shown = told_by_progress(Terminal()).split("\r")
    assert shown[1] == "[###############---------------]  50 %  50 of 100, 2 s left"
    assert shown[2].rstrip() == "[##############################] 100 %  100 of 100, 0 s left"
    assert [part.strip() for part in shown[3:]] == ["", ""]


def test_progress_is_not_shown_elsewhere() -> None:
    assert told_by_progress(io.StringIO()) == ""
    assert told_by_progress(Terminal(), quiet=True) == ""
