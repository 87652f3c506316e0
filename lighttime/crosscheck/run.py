"""The cross-check itself: read, compare, search, judge."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from typing import Any

import numpy as np

from lighttime.constants import J2000, JULIAN_YEAR
from lighttime.crosscheck.answering import Question, answered
from lighttime.crosscheck.assembly import assembled
from lighttime.crosscheck.bench import Base, Bench, by_name
from lighttime.crosscheck.findings import CHANCE
from lighttime.crosscheck.gross import misread
from lighttime.crosscheck.noise import OURS_PS
from lighttime.crosscheck.ranges import Ranges, read_ranges
from lighttime.crosscheck.report import Report
from lighttime.crosscheck.search import MOST
from lighttime.crosscheck.suspects import all_suspects
from lighttime.earth.station import Station
from lighttime.ephemeris import Ephemeris
from lighttime.errors import HorizonError, InputError, UnknownNameError
from lighttime.model import TAGS, Model
from lighttime.moon.reflector import Reflector
from lighttime.path.weather import Weather
from lighttime.vectors import Array

Progress = Callable[[int, int], None]


def crosscheck(
    ranges: Any,
    station: Any,
    reflector: Any,
    model: Model | None = None,
    *,
    columns: Mapping[str, str] | None = None,
    tag: str = "transmit",
    weather: Weather | None = None,
    wavelength_nm: float = 532.0,
    sigma_ps: Any = None,
    tolerance_ps: float | None = None,
    ephemerides: Sequence[Ephemeris] = (),
    skip_unreadable: bool = False,
    most: int = MOST,
    chance: float = CHANCE,
    progress: Progress | None = None,
) -> Report:
    """Name the choices that explain why another program's ranges differ from ours.

    Parameters
    ----------
    ranges : path, text file, astropy Table, DataFrame, or mapping of arrays
        UTC epochs and the other program's light times, one row each; optionally sigma, station,
        array, tag, weather, wavelength, and rungs of the worksheet. See
        `lighttime.crosscheck.columns` for the names that are recognised.
    station : Station, or several, or a mapping from names
        With several, the column ``station`` says which.
    reflector : Reflector or name, or several, or a mapping from names
        With several, or None, the column ``array`` says which; the arrays of
        `lighttime.reflectors` are known.
    model : Model, optional
        Ours: the default one when not given.
    columns : mapping of str to str, optional
        Our name of a column, and its name in the table: ``{"round_trip_ns": "tof"}``.
    tag : {"transmit", "bounce", "receive"}
        Which event the epochs are, where no column says.
    weather : Weather, optional
        At the station, where no columns say. Without any, ours has no troposphere.
    wavelength_nm : float
        Where no column says.
    sigma_ps : float or array, optional
        The noise of the ranges, where no column says; estimated from what remains when not known.
    tolerance_ps : float, optional
        For `Report.agrees`: the largest difference that is agreement.
    ephemerides : sequence of Ephemeris
        Others, which the other program may use.
    skip_unreadable : bool
        Go on without rows that cannot be used, and list them in the report.
    most : int
        Findings at once.
    chance : float
        A find that noise would make with more than this probability is none.
    progress : callable, optional
        Called with (rows done, rows in all).

    Returns
    -------
    Report

    Raises
    ------
    LighttimeError
        If the table cannot be used, with the line and the reason.

    Examples
    --------
    >>> import lighttime as lt
    >>> hilltop = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
    >>> array = lt.reflector("Apollo 15")
    >>> when = [f"2020-03-{day:02d}T{hour}:30:00" for day in range(3, 9) for hour in (18, 20, 22)]
    >>> theirs = lt.Model(omit=["pole_tide"]).round_trip(when, hilltop, array)
    >>> report = lt.crosscheck({"epoch": when, "round_trip_s": theirs.seconds}, hilltop, array)
    >>> [(f.name, f.exact, f.reading) for f in report.findings]
    [('pole_tide', 1.0, 'left out')]
    """
    bench = _bench(
        ranges, station, reflector, model, columns, tag, weather, wavelength_nm, skip_unreadable
    )
    _check(most, chance, tolerance_ps)
    bench = _with_sigma(bench, sigma_ps)
    bench, base = _compared(bench, skip_unreadable, progress)
    places = bench.groups()
    suspects = all_suspects(
        bench.model,
        list({g.station.name: g.station for g in places}.values()),
        list({g.array.name: g.array for g in places}.values()),
        _middle(bench.ranges),
        ephemerides,
    )
    known = bench.ranges.sigma_ps
    sigma = _floor(bench.ranges) if known is None else known
    question = Question(bench, suspects, sigma, known is not None, most, chance)
    return assembled(question, base, answered(question), tolerance_ps)


# -- what is compared ------------------------------------------------------------------------------


def _bench(
    ranges: Any, station: Any, reflector: Any, model: Model | None, columns: Any, tag: str,
    weather: Weather | None, wavelength_nm: float, skip: bool,
) -> Bench:  # fmt: skip
    if tag not in TAGS:
        raise UnknownNameError("tag", tag, TAGS)
    stations, arrays = (
        by_name("station", station, Station),
        by_name("reflector", reflector, Reflector),
    )
    if not stations:
        raise InputError("station", station, "a Station, or several")
    read = read_ranges(ranges, columns, skip)
    if not arrays and read.array is None:
        raise InputError("reflector", reflector, "a Reflector, or a column 'array' in the table")
    if weather is not None and not isinstance(weather, Weather):
        raise InputError("weather", weather, "a Weather, or None")
    if weather is not None and weather.shape not in ((), (len(read),)):
        raise InputError("weather", f"values of shape {weather.shape}", f"shape ({len(read)},)")
    if weather is not None and weather.shape and read.unreadable:
        raise InputError("weather", "one value for each row", "columns in the table, some rows of "
                         "which cannot be used")  # fmt: skip
    return Bench(read, model or Model(), stations, arrays, tag, weather, float(wavelength_nm))


def _check(most: int, chance: float, tolerance_ps: float | None) -> None:
    if not 1 <= most <= 20:
        raise InputError("most", most, "1 to 20")
    if not 0.0 < chance < 1.0:
        raise InputError("chance", chance, "between 0 and 1")
    if tolerance_ps is not None and not (tolerance_ps >= 0.0 and np.isfinite(tolerance_ps)):
        raise InputError("tolerance_ps", tolerance_ps, "0 or more, ps")


def _with_sigma(bench: Bench, sigma_ps: Any) -> Bench:
    """The stated noise: that of a column goes before the argument."""
    count = len(bench.ranges)
    if bench.ranges.sigma_ps is not None or sigma_ps is None:
        return bench
    try:
        sigma = np.broadcast_to(np.asarray(sigma_ps, dtype=float), (count,)).copy()
    except (TypeError, ValueError):
        raise InputError("sigma_ps", sigma_ps, f"a number, or {count} numbers") from None
    if not np.all((sigma > 0.0) & np.isfinite(sigma)):
        raise InputError("sigma_ps", sigma_ps, "above 0, ps")
    return replace(bench, ranges=replace(bench.ranges, sigma_ps=sigma))


def _compared(bench: Bench, skip: bool, progress: Progress | None) -> tuple[Bench, Base]:
    """Ours beside theirs, without rows that are of no use."""
    bench = bench.less(bench.not_covered(), skip)
    try:
        base = bench.base(progress=progress)
    except HorizonError:
        bench = bench.less(bench.too_low(), skip)
        base = bench.base(progress=progress)
    wrong = misread(bench.ranges.high_s, base.ours_s)
    if wrong:
        bench = bench.less(wrong, skip)
        base = bench.base()
    return bench, base


def _middle(ranges: Ranges) -> float:
    return 2000.0 + float(np.mean(ranges.when.jd1 - J2000)) / JULIAN_YEAR


def _floor(ranges: Ranges) -> Array:
    """What the noise cannot be below: the last digit, and our own arithmetic, ps."""
    digit = 1e12 * float(np.median(ranges.last_digit_s)) / 12.0**0.5
    return np.full(len(ranges), np.hypot(digit, OURS_PS))
