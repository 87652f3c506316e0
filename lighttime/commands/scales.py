"""``lighttime scales``: an instant in every time scale."""

from __future__ import annotations

import argparse
import sys
from typing import Any, Final

import numpy as np

from lighttime.commands import clock as clocks
from lighttime.commands import options
from lighttime.commands.writing import print_json, station_json
from lighttime.constants import DAY, MJD_ZERO
from lighttime.earth.series import EarthOrientation
from lighttime.earth.station import Station
from lighttime.errors import LighttimeError
from lighttime.moon.reflector import Reflector
from lighttime.timescales import Epoch
from lighttime.timescales.relation import INTEGRATED, SERIES
from lighttime.timescales.scales import tai_minus_utc
from lighttime.version import __version__

SUMMARY: Final = "An instant in every time scale, to the picosecond."

KEYS: Final = """\
  lighttime            version of the library
  given                text and scale of the instant
  place                null for the geocentre, or as `station` of the command range; for a
                       site on the Moon its name and xyz_m
  scales               for each scale:
    iso                  calendar text, to the picosecond
    mjd_day, day_fraction
                         modified Julian date: whole days and the rest (of UTC, the fraction
                         of that day, leap second included)
    jd1, jd2             Julian date, as a sum of two floats that loses nothing
    sigma_s              one sigma, given TAI; 0 for what is exact by definition
  differences_s        tai_minus_utc, tt_minus_tai, ...
  ut1_sigma_s          one sigma of UT1
  clock                a clock at rest at the place: on (Earth or Moon), rate_minus_tt and its
                       rate_sigma, minus_tt_s since 1977-01-01; on the Moon, where the rate
                       is that of the day, mean_rate_minus_tt and slower_than_tcl too; null
                       without a place
  unavailable          why, for each scale that is missing
  notes                what the numbers rest on"""

ORDER: Final = ("utc", "tai", "tt", "tdb", "ut1", "tcg", "tcb", "tcl", "gps", "gst")

PAIRS: Final = (
    ("tt", "tai"), ("gps", "tai"), ("gst", "tai"), ("ut1", "tai"), ("ut1", "utc"),
    ("tdb", "tt"), ("tcg", "tt"), ("tcb", "tdb"), ("tcl", "tt"),
)  # fmt: skip
"""Differences that are told, after TAI - UTC."""


def add(subparsers: Any) -> None:
    """Describe the command to argparse."""
    parser = options.command(subparsers, "scales", run, SUMMARY, KEYS)
    parser.add_argument("instant", metavar="INSTANT", help="2006-01-15T21:24:37.5")
    parser.add_argument(
        "--scale", choices=ORDER, default="utc", help="its time scale; utc when not given"
    )
    options.add_station(parser.add_argument_group("where the clock is, for TDB and TCB"), False)
    parser.add_argument(
        "--at",
        metavar="WHERE",
        help=f"where a clock is: {clocks.WHERE}",
    )
    parser.add_argument(
        "--earth-orientation",
        metavar="FILE",
        help="IERS series that UT1 is from (C04 or finals2000A); the bundled when not given",
    )
    parser.add_argument(
        "--tdb",
        choices=(SERIES, INTEGRATED),
        help="TDB - TT by the series of Fairhead and Bretagnon, or integrated from DE421, which "
        "takes a second and gives TCL as well; the series when not given, but for a place on the "
        "Moon",
    )
    parser.add_argument("--json", action="store_true", help="print JSON, for programs")


def run(arguments: argparse.Namespace) -> int:
    """Do what was asked."""
    where = clocks.place(arguments.at, arguments)
    on_moon = isinstance(where, Reflector)
    tdb = arguments.tdb or (INTEGRATED if on_moon else SERIES)
    if tdb == SERIES and on_moon:
        raise LighttimeError("--at on the Moon needs --tdb integrated")
    if tdb == SERIES and arguments.scale == "tcl":
        raise LighttimeError("--scale tcl needs --tdb integrated")
    given = options.instants("INSTANT", [arguments.instant], arguments.scale)
    place = where if isinstance(where, Station) else None
    series = options.earth_orientation(arguments)
    told, unavailable = _in_every_scale(given, place, series, tdb)
    ut1_sigma = _ut1_sigma(told, series)
    sigmas = clocks.sigmas(told, tdb, ut1_sigma)
    found = {
        "lighttime": __version__,
        "given": {"text": arguments.instant, "scale": arguments.scale},
        "place": _place_json(where),
        "scales": {s: _instant(epoch) | {"sigma_s": sigmas[s]} for s, epoch in told.items()},
        "differences_s": _differences(told),
        "ut1_sigma_s": ut1_sigma,
        "clock": clocks.clock(where, told),
        "unavailable": unavailable,
        "notes": _notes(told, place, series, tdb),
    }
    if arguments.json:
        print_json(found, sys.stdout)
    else:
        print(_text(given, found, where))
    return 0


def _place_json(where: Station | Reflector | None) -> dict[str, Any] | None:
    if isinstance(where, Reflector):
        return {"name": where.name, "xyz_m": list(where.xyz_m)}
    return None if where is None else station_json(where)


def _in_every_scale(
    given: Epoch, place: Any, series: EarthOrientation, tdb: str
) -> tuple[dict[str, Epoch], dict[str, str]]:
    """The instant in each scale that it can be told in, and why not in the others."""
    told, unavailable = {}, {}
    tai = given.to("tai", place, series, tdb)
    for scale in ORDER:
        if scale == "tcl" and tdb == SERIES:
            continue
        try:
            told[scale] = (given if scale == given.scale else tai).to(scale, place, series, tdb)
        except LighttimeError as error:
            unavailable[scale] = str(error)
    return told, unavailable


def _instant(epoch: Epoch) -> dict[str, Any]:
    day, fraction = epoch.day_and_fraction()
    return {
        "iso": epoch.isoformat(12),
        "mjd_day": int(day - MJD_ZERO),
        "day_fraction": float(fraction),
        "jd1": epoch.jd1,
        "jd2": epoch.jd2,
    }


def _differences(told: dict[str, Epoch]) -> dict[str, float]:
    """Readings of one scale minus those of another at the instant, s."""
    found: dict[str, float] = {}
    if "utc" in told:
        found["tai_minus_utc"] = float(tai_minus_utc(told["utc"].jd1, told["utc"].jd2))
    for a, b in PAIRS:
        if a not in told or b not in told:
            continue
        if (a, b) == ("ut1", "utc"):
            found["ut1_minus_utc"] = found["ut1_minus_tai"] + found["tai_minus_utc"]
        else:
            first, second = told[a], told[b]
            days = (first.jd1 - second.jd1) + (first.jd2 - second.jd2)
            found[f"{a}_minus_{b}"] = days * DAY
    return found


def _ut1_sigma(told: dict[str, Epoch], series: EarthOrientation) -> float | None:
    if "ut1" not in told:
        return None
    return float(series.sigmas(told["tai"].jd1, told["tai"].jd2).ut1_tai_s)


def _notes(told: dict[str, Epoch], place: Any, series: EarthOrientation, tdb: str) -> list[str]:
    if tdb == SERIES:
        notes = ["TDB - TT by the series of Fairhead and Bretagnon"]
    else:
        notes = ["TDB - TT integrated from DE421; TCL is that of a clock at the centre of the Moon"]
    if place is None:
        notes.append(
            "TDB and TCB of a clock at the geocentre: at a station they differ by up to 3 us"
        )
    else:
        notes.append(f"TDB and TCB of a clock at {place}")
    if "ut1" in told:
        notes.append(f"UT1 from {series.name}, without its variations within a day")
        if "utc" in told and told["utc"].jd1 - MJD_ZERO > series.last_measured_mjd:
            last = Epoch(MJD_ZERO, series.last_measured_mjd, "utc").isoformat(0)[:10]
            notes.append(f"UT1 is predicted: the last measured day is {last}")
    return notes


# -- for people ----------------------------------------------------------------------------------


def _text(given: Epoch, found: dict[str, Any], where: Station | Reflector | None) -> str:
    lines = [str(given), ""]
    for scale, value in found["scales"].items():
        fraction = np.format_float_positional(value["day_fraction"], precision=16, min_digits=16)
        sigma = f"   one sigma {value['sigma_s']:.1e} s" if value["sigma_s"] else ""
        told = f"  {scale.upper():4}{value['iso']}    MJD {value['mjd_day']}{fraction[1:]}"
        lines.append(told + sigma)
    for scale, reason in found["unavailable"].items():
        lines.append(f"  {scale.upper():4}not known: {reason}")
    lines.append("")
    for name, seconds in found["differences_s"].items():
        first, second = name.upper().split("_MINUS_")
        sigma = f"   one sigma {found['ut1_sigma_s']:.6f} s" if name == "ut1_minus_utc" else ""
        lines.append(f"  {first:3} - {second:3} {seconds:+22.12f} s{sigma}")
    if found["clock"] is not None and where is not None:
        lines += ["", *(f"  {line}" for line in clocks.told_clock(where, found["clock"]))]
    return "\n".join([*lines, "", *(f"  {note}" for note in found["notes"])])
