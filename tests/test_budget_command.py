"""The error budget on the command line: printed, as JSON, in tables, drawn."""

from __future__ import annotations

import csv
import json
import shlex
from collections.abc import Callable
from pathlib import Path

import pytest

import lighttime as lt
from lighttime.cli import main

Run = Callable[[str], tuple[int, str, str]]
LINE = 'range --place "Hilltop,46.2,7.1,2310" --array "Apollo 15" --at'
EPOCHS = ("2020-03-01T19:00:00", "2020-03-01T20:00:00", "2020-03-01T21:00:00")


@pytest.fixture
def run(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> Run:
    """Runs a command line in an empty folder; gives status, output and errors."""
    monkeypatch.chdir(tmp_path)

    def run(line: str) -> tuple[int, str, str]:
        status = main(shlex.split(line))
        told = capsys.readouterr()
        return status, told.out, told.err

    return run


def expected(epoch: str) -> lt.RoundTrip:
    hilltop = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
    return lt.round_trip(epoch, hilltop, lt.reflector("Apollo 15"))


def test_printed(run: Run) -> None:
    status, out, _ = run(f"{LINE} {EPOCHS[0]} --budget")
    assert status == 0
    assert str(expected(EPOCHS[0]).budget) in out
    assert "Error budget" not in run(f"{LINE} {EPOCHS[0]}")[1]


def test_json(run: Run) -> None:
    _, out, _ = run(f"{LINE} {' '.join(EPOCHS)} --budget --json")
    rows = json.loads(out)["ranges"]
    for epoch, row in zip(EPOCHS, rows, strict=True):
        answer = expected(epoch)
        assert row["sigma_s"] == pytest.approx(answer.sigma_s, rel=1e-9)
        assert row["budget_s"].keys() == answer.budget.parts.keys()
        squares = sum(sigma**2 for sigma in row["budget_s"].values())
        assert squares == pytest.approx(row["sigma_s"] ** 2, rel=1e-12)
    assert "sigma_s" not in json.loads(run(f"{LINE} {EPOCHS[0]} --json")[1])["ranges"][0]


def test_csv(run: Run) -> None:
    run(f"{LINE} {' '.join(EPOCHS)} --budget --output out.csv")
    rows = list(csv.DictReader(Path("out.csv").read_text().splitlines()))
    assert len(rows) == 3
    assert float(rows[1]["sigma_s"]) == pytest.approx(expected(EPOCHS[1]).sigma_s, rel=1e-9)
    assert float(rows[1]["budget_reflector_s"]) < float(rows[1]["sigma_s"])


def test_drawn(run: Run) -> None:
    pytest.importorskip("matplotlib")
    status, _, _ = run(f"{LINE} {' '.join(EPOCHS)} --plot out.svg")
    assert status == 0
    text = Path("out.svg").read_text()
    assert "<svg" in text
    status, _, err = run(f"{LINE} {' '.join(EPOCHS)} --plot out.svg")
    assert status != 0
    assert "exists, and is left alone without --overwrite" in err
    assert run(f"{LINE} {' '.join(EPOCHS)} --plot out.svg --overwrite")[0] == 0


@pytest.mark.parametrize(
    ("option", "said"),
    [
        ("--plot out.bmp", "a name that ends in .png, .svg, .pdf"),
        ("--plot nowhere/out.png", "a file in a folder that exists"),
        ("--plot out.png", "2 or more, to draw over time"),
    ],
)
def test_figures_that_cannot_be(run: Run, option: str, said: str) -> None:
    status, _, err = run(f"{LINE} {EPOCHS[0]} {option}")
    assert status != 0
    assert said in err
    assert not list(Path().glob("*.png"))
