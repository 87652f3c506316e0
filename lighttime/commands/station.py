"""``lighttime station``: what a station has and lacks, and the size of what moves it."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path
from textwrap import fill
from typing import Any, Final

import numpy as np

from lighttime.commands import options
from lighttime.commands.writing import print_json, station_json
from lighttime.earth import alone
from lighttime.earth.series import EarthOrientation
from lighttime.earth.sinex import read_sinex
from lighttime.earth.site_file import read_station
from lighttime.earth.station import Station
from lighttime.ephemeris import Ephemeris
from lighttime.errors import FileError, InputError, LighttimeError
from lighttime.textfile import opened
from lighttime.timescales import SCALES, Epoch
from lighttime.version import __version__

SUMMARY: Final = "What a station has and lacks, and the size of each displacement at an epoch."

KEYS: Final = """\
  lighttime            version of the library
  station              as in the command range
  sigma_m              of the position, or null
  not_modelled         displacements that nothing was given for
  geocentre            what the place is reckoned from, and what moves that: a list of sentences
  epoch_utc            (or _tai, ...) the epoch of --at, or null
  displacements        for each displacement:
    source               model and coefficients
    itrf_m, enu_m        at the epoch; null without --at, or where it is not modelled"""

FIGURES: Final = (".png", ".svg", ".pdf")

_SINEX = (b"%=SNX", b"\x1f\x8b", b"\x1f\x9d")  # plain, gzip, compress


def add(subparsers: Any) -> None:
    """Describe the command to argparse."""
    parser = options.command(subparsers, "station", run, SUMMARY, KEYS)
    parser.add_argument(
        "file", metavar="FILE", type=Path, help="station file (TOML), or SINEX file"
    )
    when = parser.add_argument_group("when")
    when.add_argument("--at", metavar="EPOCH", help="2026-12-01T20:00:00")
    when.add_argument(
        "--scale", choices=SCALES, default="utc", help="its time scale; utc when not given"
    )
    which = parser.add_argument_group("which station of a SINEX file")
    which.add_argument("--site", metavar="CODE", help="its code, or its DOMES number")
    which.add_argument(
        "--solution",
        metavar="NUMBER",
        help="its solution; the one that holds at the epoch when not given",
    )
    which.add_argument("--point", metavar="POINT", help="its point, if it has several")
    which.add_argument("--marker", action="store_true", help="do not add the eccentricity")
    options.add_data(parser.add_argument_group("data"))
    output = parser.add_argument_group("output")
    output.add_argument("--json", action="store_true", help="print JSON, for programs")
    output.add_argument(
        "--plot",
        metavar="FIGURE",
        type=Path,
        help="draw each displacement over a month from the epoch: .png, .svg or .pdf",
    )
    output.add_argument("--overwrite", action="store_true", help="let --plot replace a file")


def run(arguments: argparse.Namespace) -> int:
    """Do what was asked."""
    epoch = None
    if arguments.at is not None:
        epoch = options.instants("--at", [arguments.at], arguments.scale)
    if arguments.plot is not None:
        _check_figure(arguments, epoch)
    series = options.earth_orientation(arguments)
    ephemeris = options.ephemeris(arguments, needs_moon=False)
    station = _station(arguments, epoch)
    found = _found(station, epoch, series, ephemeris)
    if arguments.plot is not None:
        assert epoch is not None
        _draw(arguments, station, epoch, series, ephemeris)
    if arguments.json:
        print_json(found, sys.stdout)
    else:
        print(_text(station, found, epoch))
    return 0


def _station(arguments: argparse.Namespace, epoch: Epoch | None) -> Station:
    """The station of the file."""
    asked = {
        "--site": arguments.site,
        "--solution": arguments.solution,
        "--point": arguments.point,
        "--marker": arguments.marker or None,
    }
    if not _is_sinex(arguments.file):
        for option, value in asked.items():
            if value is not None:
                raise InputError(option, value, "only with a SINEX file")
        return read_station(arguments.file)
    file = read_sinex(arguments.file)
    if arguments.site is None:
        codes = list(dict.fromkeys(site.code for site in file.sites))
        more = f", ... ({len(codes)} in all)" if len(codes) > 10 else ""
        raise InputError("--site", None, f"one of {', '.join(codes[:10])}{more}")
    return file.station(
        arguments.site, epoch, arguments.solution, arguments.point, not arguments.marker
    )


def _is_sinex(path: Path) -> bool:
    with opened(path) as file:
        return file.read(8).startswith(_SINEX)


def _found(
    station: Station, epoch: Epoch | None, series: EarthOrientation, ephemeris: Ephemeris
) -> dict[str, Any]:
    """What is printed, for programs."""
    displacements = {}
    for name in alone.NAMES:
        moved = dict.fromkeys(("itrf_m", "enu_m"))
        if epoch is not None and alone.has(station, name):
            for frame in alone.FRAMES:
                value = alone.displacement(station, epoch, name, frame, series, ephemeris)
                moved[f"{frame}_m"] = value.tolist()
        displacements[name] = {"source": alone.source(station, name)} | moved
    return {
        "lighttime": __version__,
        "station": station_json(station),
        "sigma_m": None if station.sigma_m is None else list(station.sigma_m),
        "not_modelled": [name for name in alone.NAMES if not alone.has(station, name)],
        "geocentre": list(alone.geocentre(station)),
        "epoch_utc" if epoch is None else f"epoch_{epoch.scale}": (
            None if epoch is None else epoch.isoformat(12)
        ),
        "displacements": displacements,
    }


# -- for people ----------------------------------------------------------------------------------


def _text(station: Station, found: dict[str, Any], epoch: Epoch | None) -> str:
    has = [name for name in alone.NAMES if alone.has(station, name)]
    return "\n".join(
        [
            *_place_lines(station),
            "",
            *_displacement_lines(found["displacements"], has, epoch),
            "",
            f"not modelled (nothing was given): {', '.join(found['not_modelled']) or 'none'}",
            "",
            "Where they come from",
            *(_row(name, found["displacements"][name]["source"]) for name in has),
            "",
            "What the place is reckoned from",
            *(_row("", line) for line in found["geocentre"]),
        ]
    )


def _row(name: str, text: str) -> str:
    """A name and, beside it, text in lines of readable length."""
    begin = f"  {name:20}" if name else "  "
    return fill(text, 100, initial_indent=begin, subsequent_indent=" " * len(begin))


def _place_lines(station: Station) -> list[str]:
    def row(name: str, values: tuple[float, ...], digits: int, unit: str) -> str:
        return f"  {name:12}{' '.join(f'{v:16.{digits}f}' for v in values)} {unit}"

    lines = [
        str(station),
        row("ITRF x, y, z", station.xyz_m, 4, f"m at {station.epoch:.5f}"),
        row("velocity", station.velocity_m_per_yr, 5, "m/yr"),
    ]
    if station.sigma_m is not None:
        lines.append(row("one sigma", station.sigma_m, 4, "m"))
    lines.append(_row("", f"from {station.source or 'a source that was not given'}"))
    return lines


def _displacement_lines(
    displacements: dict[str, Any], has: list[str], epoch: Epoch | None
) -> list[str]:
    if epoch is None:
        return [f"modelled: {', '.join(has)}", "  (--at EPOCH tells how large they are)"]
    title = f"Displacements at {epoch}, mm"
    lines = [title, f"  {'':20}{'east':>10}{'north':>10}{'up':>10}{'length':>10}"]
    rows = {name: 1e3 * np.array(displacements[name]["enu_m"]) for name in has}
    rows["sum"] = np.sum(list(rows.values()), axis=0)
    for name, mm in rows.items():
        cells = "".join(f"{value:10.3f}" for value in (*mm, np.linalg.norm(mm)))
        lines.append(f"  {name:20}{cells}")
    return lines


# -- the figure ----------------------------------------------------------------------------------


def _check_figure(arguments: argparse.Namespace, epoch: Epoch | None) -> None:
    path = arguments.plot
    if epoch is None:
        raise InputError("--at", None, "an epoch, at which the month of --plot begins")
    if path.suffix.lower() not in FIGURES:
        raise InputError("--plot", str(path), f"a name that ends in {', '.join(FIGURES)}")
    if not path.parent.is_dir():
        raise InputError("--plot", str(path), "a file in a folder that exists")
    if path.exists() and not arguments.overwrite:
        raise FileError(path, None, "exists, and is left alone without --overwrite")
    if path.exists() and arguments.file.exists() and path.samefile(arguments.file):
        raise InputError("--plot", str(path), "another file than the one that is read")


def _draw(
    arguments: argparse.Namespace,
    station: Station,
    epoch: Epoch,
    series: EarthOrientation,
    ephemeris: Ephemeris,
) -> None:
    try:
        from lighttime.commands.station_figure import drawn
    except ImportError:
        reason = "a figure needs matplotlib: pip install 'lighttime[plot]'"
        raise LighttimeError(reason) from None
    path = arguments.plot
    content = drawn(station, epoch, series, ephemeris, path.suffix.lower().removeprefix("."))
    try:
        with path.open("wb" if arguments.overwrite else "xb") as file:
            file.write(content)
    except OSError as error:
        reason = f"cannot be written: {error.strerror}"
        raise FileError(path, None, reason) from error
