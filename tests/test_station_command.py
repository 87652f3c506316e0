"""The command ``lighttime station``."""

from __future__ import annotations

import json
import shlex
import sys
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from ocean_case import ROWS
from sinex_case import HILL, MESA, blocks, written

import lighttime as lt
from lighttime.cli import main
from lighttime.earth.alone import NAMES

Run = Callable[[str], tuple[int, str, str]]

TOML = """\
name = "Hilltop"
latitude_deg = 46.2
longitude_deg = 7.1
height_m = 2310
sigma_m = [0.003, 0.004, 0.005]
source = "invented"

[ocean_loading]
blq = "hill.blq"

[residual_motion]
csv = "motion.csv"
"""
AT = "--at 2020-03-01T19:00:00"


@pytest.fixture
def run(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> Run:
    """Runs a command line in a folder with a station file and a SINEX file."""
    monkeypatch.chdir(tmp_path)
    Path("hilltop.toml").write_text(TOML)
    Path("hill.blq").write_text(f"$$ CMC: YES\n  HILLTOP\n$$ an invented ocean\n{ROWS}")
    Path("motion.csv").write_text(
        "utc,east_mm,north_mm,up_mm\n2020-01-01,1,2,3\n2021-01-01,1,2,3\n"
    )
    Path("all.snx").write_text(written(blocks([HILL, MESA])))

    def run(line: str) -> tuple[int, str, str]:
        status = main(shlex.split(f"station {line}"))
        told = capsys.readouterr()
        return status, told.out, told.err

    return run


def test_what_a_station_has_and_lacks(run: Run) -> None:
    status, out, err = run("hilltop.toml")
    assert (status, err) == (0, "")
    lines = out.splitlines()
    assert lines[0] == "Hilltop: 46.20000 deg N, 7.10000 deg E, 2310.00 m"
    assert "modelled: solid_earth_tide, pole_tide, ocean_loading, residual_motion" in lines
    assert "not modelled (nothing was given): ocean_pole_tide, atmosphere_loading" in lines
    assert "an invented ocean (hill.blq, HILLTOP)" in " ".join(out.split())
    assert "origin: the centre of mass of the whole Earth" in out


def test_sizes_at_an_epoch(run: Run) -> None:
    status, out, _ = run(f"hilltop.toml {AT}")
    assert status == 0
    table = [line.split() for line in out.splitlines()]
    table = [words for words in table if len(words) == 5 and words[0] in (*NAMES, "sum")]
    rows = {words[0]: words[1:] for words in table}
    assert rows["residual_motion"] == ["1.000", "2.000", "3.000", "3.742"]
    station = lt.Station.from_file("hilltop.toml")
    tide = station.displacement("2020-03-01T19:00:00", "solid_earth_tide", frame="enu") * 1e3
    assert [float(cell) for cell in rows["solid_earth_tide"][:3]] == pytest.approx(tide, abs=5e-4)
    total = sum(np.array(rows[name], dtype=float)[:3] for name in rows if name != "sum")
    assert np.array(rows["sum"], dtype=float)[:3] == pytest.approx(total, abs=2e-3)


def test_json(run: Run) -> None:
    found = json.loads(run(f"hilltop.toml {AT} --scale tt --json")[1])
    assert found["station"]["name"] == "Hilltop"
    assert found["sigma_m"] == [0.003, 0.004, 0.005]
    assert found["not_modelled"] == ["ocean_pole_tide", "atmosphere_loading"]
    assert found["epoch_tt"] == "2020-03-01T19:00:00.000000000000"
    assert found["displacements"]["residual_motion"]["enu_m"] == pytest.approx(
        [0.001, 0.002, 0.003]
    )
    assert found["displacements"]["ocean_pole_tide"]["itrf_m"] is None
    bare = json.loads(run("hilltop.toml --json")[1])
    assert bare["epoch_utc"] is None
    assert bare["displacements"]["pole_tide"]["enu_m"] is None


def test_stations_of_a_sinex_file(run: Run) -> None:
    assert "solution 2 (2001-02-19T00:05:00" in run("all.snx --site HILL --at 2005-01-01")[1]
    assert "solution 1 (1994-01-02" in run("all.snx --site HILL --solution 1 --point A")[1]
    assert "the marker, without" not in run("all.snx --site MESA")[1]


@pytest.mark.parametrize(
    ("line", "message"),
    [
        ("all.snx", "--site is None; allowed: one of HILL, MESA"),
        ("all.snx --site HALL", "site in all.snx is 'HALL'; allowed: did you mean HILL"),
        ("all.snx --site HILL", "solution is None; allowed: a solution of HILL or when"),
        ("hilltop.toml --site HILL", "--site is 'HILL'; allowed: only with a SINEX file"),
        ("hilltop.toml --marker", "--marker is True; allowed: only with a SINEX file"),
        ("none.toml", "none.toml: cannot be read: No such file"),
        ("hilltop.toml --at 2022-01-01", "the residual motion of the station"),
        ("hilltop.toml --at soon", "--at is 'soon'"),
        ("hilltop.toml --plot a.png", "--at is None; allowed: an epoch, at which the month"),
        (f"hilltop.toml {AT} --plot a.doc", "--plot is 'a.doc'; allowed: a name that ends in .png"),
        (f"hilltop.toml {AT} --plot there.png", "there.png: exists, and is left alone"),
        (
            f"hilltop.toml {AT} --plot none/a.png",
            "--plot is 'none/a.png'; allowed: a file in a folder that exists",
        ),
        ("hilltop.toml --at 2020-12-15 --plot a.png", "when is '2021-01-01T00:30:00.000000 UTC'"),
    ],
)
def test_refusals(run: Run, line: str, message: str) -> None:
    Path("there.png").write_text("precious")
    status, out, err = run(line)
    assert (status, out) == (2, "")
    assert err.startswith("lighttime station: error: ")
    assert err.count("\n") == 1
    assert message in err
    assert Path("there.png").read_text() == "precious"
    assert not Path("a.png").exists()


def test_what_a_bare_station_tells(run: Run) -> None:
    """No sigma, no source: none is printed, and that nobody gave one is."""
    Path("bare.toml").write_text("\n".join(TOML.splitlines()[:4]))
    status, out, _ = run("bare.toml")
    assert status == 0
    assert "one sigma" not in out
    assert "from a source that was not given" in " ".join(out.split())


def test_the_station_file_is_not_drawn_over(run: Run) -> None:
    Path("hill.png").write_text(Path("hilltop.toml").read_text())
    status, _, err = run(f"hill.png {AT} --plot ./hill.png --overwrite")
    assert status == 2
    assert "--plot is 'hill.png'; allowed: another file than the one that is read" in err
    assert Path("hill.png").read_text() == TOML


def test_a_figure_that_cannot_be_written(run: Run, monkeypatch: pytest.MonkeyPatch) -> None:
    pytest.importorskip("matplotlib")
    before = Path.open

    def full(path: Path, mode: str = "r", *more: object, **named: object) -> object:
        if "b" in mode and path.suffix == ".svg":
            raise OSError(28, "No space left on device")
        return before(path, mode, *more, **named)  # type: ignore[call-overload]

    monkeypatch.setattr(Path, "open", full)
    status, _, err = run(f"hilltop.toml {AT} --plot a.svg")
    assert status == 2
    assert "a.svg: cannot be written: No space left on device" in err


def test_figure(run: Run) -> None:
    pytest.importorskip("matplotlib")
    assert run(f"hilltop.toml {AT} --plot a.svg")[0] == 0
    assert Path("a.svg").read_text().count('<g id="axes_') == 4  # a panel for each
    Path("a.png").write_text("old")
    assert run(f"hilltop.toml {AT} --plot a.png --overwrite")[0] == 0
    assert Path("a.png").read_bytes().startswith(b"\x89PNG")


def test_matplotlib_is_loaded_only_when_asked(run: Run, monkeypatch: pytest.MonkeyPatch) -> None:
    for module in [name for name in sys.modules if name.startswith("lighttime.commands.station_f")]:
        monkeypatch.delitem(sys.modules, module)
    monkeypatch.setitem(sys.modules, "matplotlib", None)  # as if it were not installed
    for module in [name for name in sys.modules if name.startswith("matplotlib.")]:
        monkeypatch.delitem(sys.modules, module)
    assert run(f"hilltop.toml {AT}")[0] == 0
    status, _, err = run(f"hilltop.toml {AT} --plot a.png")
    assert status == 2
    assert "a figure needs matplotlib: pip install 'lighttime[plot]'" in err
