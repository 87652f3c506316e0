"""The cross-check itself: read, compare, search, judge."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from lighttime.constants import J2000, JULIAN_YEAR
from lighttime.crosscheck.answering import Question, answered, expected
from lighttime.crosscheck.assembly import assembled
from lighttime.crosscheck.bench import Base, Bench, Meter, Progress, by_name
from lighttime.crosscheck.gross import misread
from lighttime.crosscheck.noise import OURS_PS
from lighttime.crosscheck.ranges import Defaults, Ranges, read_ranges
from lighttime.crosscheck.report import Report
from lighttime.crosscheck.suspects import all_suspects
from lighttime.earth.station import Station
from lighttime.ephemeris import Ephemeris
from lighttime.errors import HorizonError, InputError, UnknownNameError
from lighttime.model import TAGS, Model
from lighttime.moon.reflector import Reflector
from lighttime.path.weather import Weather
from lighttime.vectors import Array


@dataclass(frozen=True, eq=False)
class Settings:
    """What `lighttime.crosscheck` was asked for besides; see there."""

    tag: str
    weather: Weather | None
    wavelength_nm: float
    sigma_ps: Any
    tolerance_ps: float | None
    ephemerides: tuple[Ephemeris, ...]
    skip_unreadable: bool
    most: int
    chance: float

    def __post_init__(self) -> None:
        if self.tag not in TAGS:
            raise UnknownNameError("tag", self.tag, TAGS)
        if self.weather is not None and not isinstance(self.weather, Weather):
            raise InputError("weather", self.weather, "a Weather, or None")
        if not 355.0 <= self.wavelength_nm <= 1064.0:
            raise InputError("wavelength_nm", self.wavelength_nm, "355 to 1064")
        if not 1 <= self.most <= 20:
            raise InputError("most", self.most, "1 to 20")
        if not 0.0 < self.chance < 1.0:
            raise InputError("chance", self.chance, "between 0 and 1")
        tolerance = self.tolerance_ps
        if tolerance is not None and not (tolerance >= 0.0 and np.isfinite(tolerance)):
            raise InputError("tolerance_ps", tolerance, "0 or more, ps")
        for each in self.ephemerides:
            if not isinstance(each, Ephemeris):
                raise InputError("ephemerides", each, "a sequence of Ephemeris")


def run(
    ranges: Any,
    station: Any,
    reflector: Any,
    model: Model | None,
    columns: Mapping[str, str] | None,
    settings: Settings,
    progress: Progress | None,
) -> Report:
    """See `lighttime.crosscheck`."""
    bench = _bench(ranges, station, reflector, model, columns, settings)
    bench = replace(bench, meter=Meter(progress))
    bench.meter.expect(expected(len(bench.ranges)))
    bench, base = _compared(bench, settings.skip_unreadable)
    places = bench.groups()
    suspects = all_suspects(
        bench.model,
        list({g.station.name: g.station for g in places}.values()),
        list({g.array.name: g.array for g in places}.values()),
        _middle(bench.ranges),
        settings.ephemerides,
    )
    known = bench.ranges.sigma_ps
    sigma = _floor(bench.ranges) if known is None else known
    question = Question(bench, suspects, sigma, known is not None, settings.most, settings.chance)
    return assembled(question, base, answered(question), settings.tolerance_ps)


# -- what is compared ------------------------------------------------------------------------------


def _bench(
    ranges: Any, station: Any, reflector: Any, model: Any, columns: Any, settings: Settings
) -> Bench:
    if model is not None and not isinstance(model, Model):
        raise InputError("model", model, "a Model, or None")
    stations = by_name("station", station, Station)
    arrays = by_name("reflector", reflector, Reflector)
    if not stations:
        raise InputError("station", station, "a Station, or several")
    defaults = Defaults(settings.weather, settings.sigma_ps)
    read = read_ranges(ranges, columns, settings.skip_unreadable, defaults)
    if not arrays and read.array is None:
        raise InputError("reflector", reflector, "a Reflector, or a column 'array' in the table")
    return Bench(
        read, model or Model(), stations, arrays, settings.tag, float(settings.wavelength_nm)
    )


def _compared(bench: Bench, skip: bool) -> tuple[Bench, Base]:
    """Ours beside theirs, without rows that are of no use."""
    bench = bench.less(bench.not_covered(), skip)
    try:
        base = bench.base()
    except HorizonError:
        bench = bench.less(bench.too_low(), skip)
        base = bench.base()
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
