"""``lighttime crosscheck``: why another program's ranges differ from ours."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import TYPE_CHECKING, Any, Final

from lighttime import crosscheck
from lighttime.commands import options, writing
from lighttime.ephemeris import Ephemeris
from lighttime.errors import FileError, InputError
from lighttime.model import TAGS
from lighttime.moon.reflector import Reflector
from lighttime.progress import Progress

if TYPE_CHECKING:
    from lighttime.crosscheck.report import Report
    from lighttime.earth.station import Station

SUMMARY: Final = "Name the choices that explain why another program's ranges differ from ours."

AGREE, DIFFER = 0, 1

KEYS: Final = """\
  source, station, array, model, quantity, ranges
  agrees               within tolerance_ps; without one: nothing significant was found
  summary              in words
  difference_rms_ps, difference_largest_ps, residual_rms_ps
  findings             name, family, says, look_for, amplitude, sigma, fitted, exact, reading,
                       unit, effect_ps, without_ps, chance
  inseparable          findings, rivals, odds, apart_sigma, singular_value, advice
  rest                 what remains: rms_ps, largest_ps, correlation, order, chance
  rungs                name, largest, rms, effect_ps, departs
  untested, invisible  suspects that these ranges say nothing about
  unreadable           rows that were left out: line, reason
  set_aside            rows that stand apart

exit status: 0 when the models agree, 1 when they do not, 2 after an error of input"""


def add(subparsers: Any) -> None:
    """Describe the command to argparse."""
    parser = options.command(subparsers, "crosscheck", run, SUMMARY, KEYS)
    parser.add_argument(
        "table", metavar="FILE",
        help="CSV or ECSV with UTC epochs and light times, a row each; - for standard input",
    )  # fmt: skip
    _add_table(parser.add_argument_group("table"))
    where = parser.add_argument_group("from where to where")
    where.add_argument(
        "--station", metavar="FILE.toml", action="append", default=[],
        help="station file; several with a column 'station' in the table",
    )  # fmt: skip
    where.add_argument(
        "--place", metavar="NAME,LAT,LON,HEIGHT", action="append", default=[],
        help='station by geodetic coordinates in degrees (east positive) and metres, "Hilltop,'
        '46.2,7.1,2310"',
    )  # fmt: skip
    where.add_argument(
        "--array", metavar="NAME|X,Y,Z", action="append", default=[],
        help="reflector array, as in the command range; not needed with a column 'array' in the "
        "table",
    )  # fmt: skip
    where.add_argument(
        "--axes", metavar="EPHEMERIS",
        help="whose principal axes X,Y,Z are in; DE430 when not given",
    )  # fmt: skip
    options.add_model(parser.add_argument_group("model"))
    _add_judgement(parser.add_argument_group("judgement"))
    _add_output(parser.add_argument_group("output"))


def _add_table(group: Any) -> None:
    group.add_argument(
        "--column", metavar="OURS=THEIRS", action="append", default=[],
        help="what a column is: epoch_utc=T0, round_trip_ns=tof, sigma_ps=err, ...",
    )  # fmt: skip
    group.add_argument(
        "--tag", choices=TAGS, default="transmit",
        help="what the epochs are, where no column says; transmit when not given",
    )  # fmt: skip
    group.add_argument(
        "--wavelength-nm", metavar="NM", type=float, default=532.0,
        help="355 to 1064, where no column says; 532 when not given",
    )  # fmt: skip
    group.add_argument(
        "--skip-unreadable", action="store_true",
        help="go on without rows that cannot be used, and list them",
    )  # fmt: skip


def _add_judgement(group: Any) -> None:
    group.add_argument(
        "--tolerance-ps", metavar="PS", type=float,
        help="the largest difference that is agreement (exit status 0)",
    )  # fmt: skip
    group.add_argument(
        "--sigma-ps", metavar="PS", type=float,
        help="noise of the ranges, where no column says; estimated when not given",
    )  # fmt: skip
    group.add_argument(
        "--most", metavar="NUMBER", type=int, default=6, help="findings at once; 6 when not given"
    )
    group.add_argument(
        "--chance", metavar="P", type=float, default=0.005,
        help="probability of a chance find above which nothing is found; 0.005 when not given",
    )  # fmt: skip
    group.add_argument(
        "--suspect-ephemeris", metavar="FILE.bsp[,FILE.bpc]", action="append", default=[],
        help="an ephemeris that the other program may use",
    )  # fmt: skip


def _add_output(group: Any) -> None:
    group.add_argument("--json", action="store_true", help="print JSON, for programs")
    group.add_argument(
        "--report", metavar="FILE", type=Path, action="append", default=[],
        help="write the report, too: .html (one page), .json or .ecsv",
    )  # fmt: skip
    group.add_argument("--overwrite", action="store_true", help="let --report replace files")
    group.add_argument("--quiet", action="store_true", help="no progress bar")


def run(arguments: argparse.Namespace) -> int:
    """Do what was asked; the exit status says whether the models agree."""
    from lighttime.crosscheck.files import form_of, rendered, report_json

    for path in arguments.report:
        form_of(path)
        if path.exists() and not arguments.overwrite:
            raise FileError(path, None, "exists, and is left alone without --overwrite")
    report = _report(arguments)
    for path in arguments.report:
        with writing.new_file(path, arguments.overwrite) as file:
            file.write(rendered(report, form_of(path)))
    if arguments.json:
        writing.print_json(report_json(report, rows=False), sys.stdout)
    else:
        print(report)
    return AGREE if report.agrees else DIFFER


def _report(arguments: argparse.Namespace) -> Report:
    stations, arrays = _stations(arguments), _arrays(arguments)
    with Progress(1, quiet=arguments.quiet) as bar:
        return crosscheck(
            sys.stdin if arguments.table == "-" else arguments.table,
            stations,
            arrays or None,
            options.model(arguments),
            columns=_columns(arguments.column),
            tag=arguments.tag,
            wavelength_nm=arguments.wavelength_nm,
            sigma_ps=arguments.sigma_ps,
            tolerance_ps=arguments.tolerance_ps,
            ephemerides=[_ephemeris(text) for text in arguments.suspect_ephemeris],
            skip_unreadable=arguments.skip_unreadable,
            most=arguments.most,
            chance=arguments.chance,
            progress=_shown_by(bar),
        )


def _shown_by(bar: Progress) -> Callable[[int, int], None]:
    def show(done: int, total: int) -> None:
        bar.total = total  # grows when the search goes on
        bar.update(done)

    return show


def _stations(arguments: argparse.Namespace) -> list[Station]:
    named = [(file, None) for file in arguments.station]
    named += [(None, text) for text in arguments.place]
    if not named:
        raise InputError("--station", None, "a station file, or --place NAME,LAT,LON,HEIGHT")
    found = (options.station(argparse.Namespace(station=f, place=p)) for f, p in named)
    return [station for station in found if station is not None]


def _arrays(arguments: argparse.Namespace) -> list[Reflector]:
    return [
        options.array(argparse.Namespace(array=text, axes=arguments.axes))
        for text in arguments.array
    ]


def _columns(texts: list[str]) -> Mapping[str, str]:
    columns = {}
    for text in texts:
        ours, equals, theirs = text.partition("=")
        if not (equals and ours.strip() and theirs.strip()):
            raise InputError("--column", text, "OURS=THEIRS, as round_trip_ns=tof")
        columns[ours.strip()] = theirs.strip()
    return columns


def _ephemeris(text: str) -> Ephemeris:
    bsp, comma, bpc = text.partition(",")
    return Ephemeris.open(bsp, orientation=bpc if comma else None)
