"""``lighttime coverage``: which data are in use, and how far they reach."""

from __future__ import annotations

import argparse
import re
import sys
from datetime import datetime
from importlib.metadata import version
from pathlib import Path
from typing import Any, Final

import numpy as np

from lighttime.commands import options
from lighttime.commands.writing import print_json
from lighttime.constants import EARTH_EQUATORIAL_RADIUS, EARTH_ROTATION_RATE
from lighttime.earth.series import EarthOrientation
from lighttime.earth.series_files import FINAL
from lighttime.ephemeris import Ephemeris
from lighttime.moon.reflector import reflectors
from lighttime.timescales import Epoch
from lighttime.timescales.leapseconds import END_MJD, FIRST_MJD, TICK, day_text, utc_table
from lighttime.version import __version__

SUMMARY: Final = "Which data are in use, and how far they reach."

KEYS: Final = """\
  lighttime            version of the library
  packages             versions of the packages that carry data or read them
  ephemeris            name, first_tdb, last_tdb, bodies, lunar_orientation (null if there is
                       none), gm_from
  earth_orientation    name, first_utc, last_utc, last_final_utc, last_measured_utc,
                       last_dxdy_utc (null: every day, or none), and sigmas: a list with, for
                       some days, day_utc, days_after_measured, ut1_s, xp_arcsec, yp_arcsec,
                       dx_mas, dy_mas (one sigma each)
  utc                  first, last, tai_minus_utc_s (the latest), latest_step; list_expires,
                       list_agrees: when the list of the IERS that is at hand expires, and
                       whether its last step is the same
  arrays               a list of name, axes, scale, xyz_m, source"""

AFTER_DAYS: Final = (-365, 0, 1, 10, 30, 90, 180, 365)
"""Days after the last measured one for which sigmas are told."""


def add(subparsers: Any) -> None:
    """Describe the command to argparse."""
    parser = options.command(subparsers, "coverage", run, SUMMARY, KEYS)
    options.add_data(parser)
    parser.add_argument("--json", action="store_true", help="print JSON, for programs")


def run(arguments: argparse.Namespace) -> int:
    """Do what was asked."""
    ephemeris = options.ephemeris(arguments, needs_moon=False)
    series = options.earth_orientation(arguments)
    found = {
        "lighttime": __version__,
        "packages": {name: version(name) for name in ("de421", "astropy-iers-data", "pyerfa")},
        "ephemeris": _ephemeris(ephemeris),
        "earth_orientation": _earth_orientation(series),
        "utc": _utc(),
        "arrays": [
            {"name": a.name, "axes": a.axes, "scale": a.scale, "xyz_m": list(a.xyz_m)}
            | {"source": a.source}
            for a in reflectors()
        ],
    }
    if arguments.json:
        print_json(found, sys.stdout)
    else:
        print(_text(found))
    return 0


def _ephemeris(ephemeris: Ephemeris) -> dict[str, Any]:
    first, last = (str(Epoch(jd, 0.0, "tdb").isoformat(0)) for jd in ephemeris.coverage)
    moon = ephemeris.orientation_name.removeprefix("lunar orientation of ")
    return {
        "name": ephemeris.name,
        "first_tdb": first,
        "last_tdb": last,
        "bodies": ["earth", "moon", *(b for b in ephemeris.barycentric if "bary" not in b)],
        "lunar_orientation": None if ephemeris.angles is None else moon,
        "gm_from": ephemeris.constants_from,
    }


def _earth_orientation(series: EarthOrientation) -> dict[str, Any]:
    final = series.mjd[series.kind == FINAL]
    measured = series.last_measured_mjd
    within = np.isfinite(measured) and series.last_dxdy_mjd >= series.mjd[0]
    return {
        "name": series.name,
        "first_utc": day_text(float(series.mjd[0])),
        "last_utc": day_text(float(series.mjd[-1])),
        "last_final_utc": day_text(float(final[-1])) if final.size else None,
        "last_measured_utc": day_text(measured) if np.isfinite(measured) else None,
        "last_dxdy_utc": day_text(series.last_dxdy_mjd) if within else None,
        "sigmas": _sigmas(series),
    }


def _sigmas(series: EarthOrientation) -> list[dict[str, Any]]:
    """One sigma at some days around the last measured one, and at the last day."""
    start = series.last_measured_mjd
    if not np.isfinite(start):
        start = float(series.mjd[0])
    days = [start + after for after in AFTER_DAYS]
    last = float(series.mjd[-1])
    days = [day for day in days if series.mjd[0] <= day < last] + [last]
    rows = []
    for day in days:
        k = int(day - series.mjd[0])
        row: dict[str, Any] = {"day_utc": day_text(day), "days_after_measured": int(day - start)}
        for name in ("ut1_s", "xp_arcsec", "yp_arcsec", "dx_mas", "dy_mas"):
            row[name] = float(getattr(series, f"sigma_{name}")[k])
        rows.append(row)
    return rows


def _utc() -> dict[str, Any]:
    table = utc_table()
    latest = (float(table.mjd[-1]), float(table.offset[-1] / TICK))
    listed, expires = _leap_second_list()
    return {
        "first": day_text(FIRST_MJD),
        "last": day_text(END_MJD - 1),
        "tai_minus_utc_s": latest[1],
        "latest_step": day_text(latest[0]),
        "list_expires": expires,
        "list_agrees": listed == latest,
    }


def _leap_second_list() -> tuple[tuple[float, float] | None, str | None]:
    """The last step in the list of the IERS (MJD, TAI - UTC), and when the list expires.

    The list is the one of ``astropy-iers-data``, which is younger than the table of ERFA in use.
    """
    from astropy_iers_data import IERS_LEAP_SECOND_FILE

    text = Path(IERS_LEAP_SECOND_FILE).read_text(encoding="utf-8")
    found = re.search(r"File expires on\s+(\d+ \w+ \d{4})", text)
    expires = datetime.strptime(found[1], "%d %B %Y").date().isoformat() if found else None
    rows = [line.split() for line in text.splitlines() if line.strip() and line[0] != "#"]
    return (float(rows[-1][0]), float(rows[-1][4])) if rows else None, expires


# -- for people ----------------------------------------------------------------------------------


def _text(found: dict[str, Any]) -> str:
    packages = ", ".join(f"{name} {number}" for name, number in found["packages"].items())
    lines = [f"lighttime {__version__}, with {packages}", ""]
    lines += [*_ephemeris_lines(found["ephemeris"]), ""]
    lines += [*_orientation_lines(found["earth_orientation"]), ""]
    lines += [*_utc_lines(found["utc"]), ""]
    lines += [
        "Reflector arrays",
    ]
    for array in found["arrays"]:
        x, y, z = array["xyz_m"]
        lines.append(
            f"  {array['name']:12}{x:14.3f}{y:14.3f}{z:14.3f} m   principal axes of {array['axes']}"
        )
    return "\n".join(lines)


def _utc_lines(utc: dict[str, Any]) -> list[str]:
    agrees = "says the same" if utc["list_agrees"] else "HAS ANOTHER LAST STEP: update pyerfa"
    return [
        f"UTC\n  {utc['first']} to {utc['last']}",
        f"  TAI - UTC is {utc['tai_minus_utc_s']:g} s since {utc['latest_step']}; the list of the "
        f"IERS, good until {utc['list_expires'] or 'a day not said'}, {agrees}",
    ]


def _ephemeris_lines(told: dict[str, Any]) -> list[str]:
    moon = told["lunar_orientation"]
    orientation = f"of {moon}" if moon else "missing: no reflector can be placed on the Moon"
    return [
        f"Ephemeris {told['name']}",
        f"  {told['first_tdb'][:10]} to {told['last_tdb'][:10]} TDB",
        f"  bodies  {', '.join(told['bodies'])}; GMs of {told['gm_from']}",
        f"  lunar orientation {orientation}",
    ]


def _reaches(told: dict[str, Any]) -> list[str]:
    """How far each kind of value reaches, where it ends before the series does."""
    final, measured, dxdy = (told[f"last_{kind}_utc"] for kind in ("final", "measured", "dxdy"))
    last = told["last_utc"]
    parts = [f"final to {final}"] if final else []
    if measured != final:
        parts.append(f"measured to {measured}" if measured else "nothing measured")
    if measured != last:
        parts.append("then predicted")
    if dxdy != last:
        parts.append(f"dX and dY to {dxdy}, then zero" if dxdy else "dX and dY zero")
    return parts


def _orientation_lines(told: dict[str, Any]) -> list[str]:
    equator_m_per_s = EARTH_ROTATION_RATE * EARTH_EQUATORIAL_RADIUS
    lines = [
        f"Earth orientation {told['name']}",
        f"  {told['first_utc']} to {told['last_utc']} UTC",
        f"  {', '.join(_reaches(told))}",
        "  one sigma (of UT1 also as what it moves a place on the equator):",
        f"    {'day':12}{'UT1, ms':>10}{'UT1, mm':>10}{'x, mas':>10}{'y, mas':>10}"
        f"{'dX, mas':>10}{'dY, mas':>10}   days after measured",
    ]
    for row in told["sigmas"]:
        lines.append(
            f"    {row['day_utc']:12}{1e3 * row['ut1_s']:10.3f}"
            f"{1e3 * equator_m_per_s * row['ut1_s']:10.1f}"
            f"{1e3 * row['xp_arcsec']:10.3f}{1e3 * row['yp_arcsec']:10.3f}"
            f"{row['dx_mas']:10.3f}{row['dy_mas']:10.3f}{row['days_after_measured']:+8d}"
        )
    return lines
