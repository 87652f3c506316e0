"""The other program's ranges, read: instants, light times with all digits, circumstances."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from lighttime.constants import MJD_ZERO
from lighttime.crosscheck.columns import Layout, layout
from lighttime.crosscheck.decimals import Numbers, numbers, plain_floats, texts
from lighttime.crosscheck.tables import RawTable, open_table
from lighttime.errors import InputError, LighttimeError
from lighttime.model import TAGS
from lighttime.path.weather import HUMIDITY, PRESSURE_HPA, TEMPERATURE_K, Weather
from lighttime.timescales import SCALES, Epoch, twopart
from lighttime.timescales.text import parse_iso
from lighttime.vectors import Array

SHOWN = 3
"""So many unreadable rows are named in an error."""

WEATHER = ("pressure_hpa", "temperature_k", "relative_humidity")


class Unreadable(NamedTuple):
    """A row that could not be used."""

    line: int
    reason: str


@dataclass(frozen=True, eq=False)
class Ranges:
    """What the other program says, one row for each range; arrays are (n,).

    Attributes
    ----------
    source : str
    when : Epoch
        UTC.
    high_s, low_s : ndarray
        The compared quantity as an unevaluated sum, s.
    last_digit_s : ndarray
        The size of its last digit.
    quantity : {"round_trip", "uplink", "downlink"}
    sigma_ps : ndarray or None
    station, array, tag : ndarray of str, or None where the table does not say
    weather : mapping of str to ndarray
        Pressure (hPa), temperature (K), relative humidity; empty where the table does not say.
    wavelength_nm : ndarray or None
    rungs : mapping of str to Numbers
        Intermediate values that the other program gives.
    lines : ndarray of int
        What a row is called: its line in the file, or its number from 0.
    row_word : str
    unreadable : tuple of Unreadable
        Rows that were left out.
    layout : Layout
    """

    source: str
    when: Epoch
    high_s: Array
    low_s: Array
    last_digit_s: Array
    quantity: Any
    sigma_ps: Array | None
    station: NDArray[np.str_] | None
    array: NDArray[np.str_] | None
    tag: NDArray[np.str_] | None
    weather: Mapping[str, Array]
    wavelength_nm: Array | None
    rungs: Mapping[str, Numbers]
    lines: NDArray[np.int_]
    row_word: str
    layout: Layout
    unreadable: tuple[Unreadable, ...] = field(default=())

    def __len__(self) -> int:
        return len(self.lines)

    def take(self, rows: Any, unreadable: tuple[Unreadable, ...] = ()) -> Ranges:
        """Some of the rows, by a mask or an index; and what was wrong with others."""

        def part(values: Any) -> Any:
            return None if values is None else values[rows]

        return replace(
            self,
            when=Epoch(self.when.jd1[rows], self.when.jd2[rows], "utc"),
            high_s=self.high_s[rows],
            low_s=self.low_s[rows],
            last_digit_s=self.last_digit_s[rows],
            sigma_ps=part(self.sigma_ps),
            station=part(self.station),
            array=part(self.array),
            tag=part(self.tag),
            weather={k: v[rows] for k, v in self.weather.items()},
            wavelength_nm=part(self.wavelength_nm),
            rungs={
                k: Numbers(v.high[rows], v.low[rows], v.last_digit[rows], {})
                for k, v in self.rungs.items()
            },
            lines=self.lines[rows],
            unreadable=tuple(sorted((*self.unreadable, *unreadable))),
        )

    def without(self, wrong: Mapping[int, str], skip: bool) -> Ranges:
        """Without rows that are of no use; InputError that names them, unless they may be skipped.

        Parameters
        ----------
        wrong : mapping of int to str
            Index of a row to the reason.
        skip : bool
            Go on with the rest.
        """
        if not wrong:
            return self
        left_out = tuple(Unreadable(int(self.lines[i]), wrong[i]) for i in sorted(wrong))
        if not skip:
            raise refusal(self.source, self.row_word, left_out, len(self))
        keep = np.ones(len(self), dtype=bool)
        keep[list(wrong)] = False
        if not keep.any():
            raise refusal(self.source, self.row_word, left_out, len(self))
        return self.take(keep, left_out)


def refusal(source: str, row_word: str, wrong: tuple[Unreadable, ...], count: int) -> InputError:
    """An error that names the first rows that are of no use."""
    shown = "; ".join(f"{row_word} {w.line}: {w.reason}" for w in wrong[:SHOWN])
    more = f"; and {len(wrong) - SHOWN} more" if len(wrong) > SHOWN else ""
    rest = (
        "rows that can be used (skip_unreadable=True goes on with the others)"
        if len(wrong) < count
        else "rows that can be used (there is none)"
    )
    return InputError(f"ranges ({source})", f"{shown}{more}", rest)


@dataclass(frozen=True, eq=False)
class Defaults:
    """What is taken where no column says: weather, and one sigma of the ranges in ps."""

    weather: Weather | None = None
    sigma_ps: Any = None

    def weather_of(self, count: int) -> dict[str, Array]:
        """As columns."""
        weather = self.weather
        if weather is None:
            return {}
        if weather.shape not in ((), (count,)):
            raise InputError("weather", f"values of shape {weather.shape}", f"shape ({count},)")
        return {name: np.broadcast_to(getattr(weather, name), (count,)) for name in WEATHER}

    def sigma_of(self, count: int) -> Array | None:
        """As a column."""
        if self.sigma_ps is None:
            return None
        try:
            sigma = np.broadcast_to(np.asarray(self.sigma_ps, dtype=float), (count,))
        except (TypeError, ValueError):
            raise InputError("sigma_ps", self.sigma_ps, f"a number, or {count} numbers") from None
        if not np.all((sigma > 0.0) & np.isfinite(sigma)):
            raise InputError("sigma_ps", self.sigma_ps, "above 0, ps")
        return sigma


NO_DEFAULTS = Defaults()


def read_ranges(
    source: Any,
    columns: Mapping[str, str] | None = None,
    skip_unreadable: bool = False,
    defaults: Defaults = NO_DEFAULTS,
) -> Ranges:
    """Read a table of ranges.

    Parameters
    ----------
    source : path, text file, astropy Table, DataFrame, mapping, or Ranges
        See `lighttime.crosscheck.tables`.
    columns : mapping of str to str, optional
        What is in which column: see `lighttime.crosscheck.columns`.
    skip_unreadable : bool
        Leave out rows that cannot be used, and say which; otherwise they are an error.
    defaults : Defaults
        What is taken where no column says.

    Raises
    ------
    InputError, FileError, UnknownNameError
        With the line and the reason.

    Examples
    --------
    >>> table = {"epoch_utc": ["2020-03-01T19:00:00"], "round_trip_ns": ["2594379123.4567"]}
    >>> ranges = read_ranges(table)
    >>> print(ranges.high_s[0], f"{ranges.last_digit_s[0]:.0e}")
    2.5943791234567 1e-13
    """
    if isinstance(source, Ranges):
        return source
    table = open_table(source)
    found = layout(table.columns, columns, table.units)
    count = len(table.lines)
    if count == 0:
        raise InputError(f"ranges ({table.source})", "no rows", "1 or more")
    wrong = dict(table.wrong)

    def note(name: str, reasons: Mapping[int, str]) -> None:
        for row, reason in reasons.items():
            wrong.setdefault(row, f"{name} {reason}")

    whole = 2 if found.quantity == "half_round_trip" else 1
    values = numbers(table.columns[found.value], found.unit * whole)
    note(found.value, values.wrong)
    note(found.value, _where(~(values.high > 0.0), "is not above 0"))
    sigma = defaults.sigma_of(count)
    if found.sigma is not None:
        read = numbers(table.columns[found.sigma], found.sigma_unit * whole * 10**12)
        note(found.sigma, read.wrong)
        note(found.sigma, _where(~(read.high > 0.0), "is not above 0"))
        sigma = read.high
    when, bad_epochs = _epochs(table, found)
    note(found.epoch, bad_epochs)
    weather = _weather(table, found, note) or defaults.weather_of(count)
    wavelength = None
    if "wavelength_nm" in found.others:
        wavelength, reasons = plain_floats(table.columns[found.others["wavelength_nm"]])
        note("wavelength_nm", reasons)
        note("wavelength_nm", _outside(wavelength, 355.0, 1064.0))
    tag = _names(table, found, "tag")
    if tag is not None:
        tag = np.char.lower(tag)
        unknown = np.array([t not in TAGS for t in tag])
        note("tag", _where(unknown, f"is none of {', '.join(TAGS)}"))
    rungs = {
        name: numbers(table.columns[column], factor)
        for column, (name, factor) in found.rungs.items()
    }
    for name, read in rungs.items():
        note(name, read.wrong)
    return Ranges(
        source=table.source,
        when=when,
        high_s=values.high,
        low_s=values.low,
        last_digit_s=values.last_digit,
        quantity="round_trip" if whole == 2 else found.quantity,
        sigma_ps=sigma,
        station=_names(table, found, "station"),
        array=_names(table, found, "array"),
        tag=tag,
        weather=weather,
        wavelength_nm=wavelength,
        rungs=rungs,
        lines=np.asarray(table.lines, dtype=int),
        row_word=table.row_word,
        layout=found,
    ).without(wrong, skip_unreadable)


def _names(table: RawTable, found: Layout, role: str) -> Any:
    return texts(table.columns[found.others[role]]) if role in found.others else None


def _where(mask: Any, reason: str) -> dict[int, str]:
    return {int(i): reason for i in np.flatnonzero(mask)}


def _outside(values: Array, low: float, high: float) -> dict[int, str]:
    bad = ~((values >= low) & (values <= high))
    return {int(i): f"is {values[i]:g}; allowed: {low:g} to {high:g}" for i in np.flatnonzero(bad)}


def _weather(table: RawTable, found: Layout, note: Any) -> dict[str, Array]:
    given = [k for k in ("pressure_hpa", "temperature_k", "temperature_c", "relative_humidity",
                         "humidity_percent") if k in found.others]  # fmt: skip
    if not given:
        return {}
    read: dict[str, Array] = {}
    for name in given:
        values, reasons = plain_floats(table.columns[found.others[name]])
        note(name, reasons)
        if name == "temperature_c":
            name, values = "temperature_k", values + 273.15
        if name == "humidity_percent":
            name, values = "relative_humidity", values / 100.0
        read[name] = values
    missing = [name for name in WEATHER if name not in read]
    if missing:
        allowed = f"pressure, temperature and humidity ({', '.join(missing)} is missing)"
        raise InputError("columns", ", ".join(given), allowed)
    for name, limits in zip(WEATHER, (PRESSURE_HPA, TEMPERATURE_K, HUMIDITY), strict=True):
        note(name, _outside(read[name], *limits))
    return read


# -- instants --------------------------------------------------------------------------------------


def _epochs(table: RawTable, found: Layout) -> tuple[Epoch, dict[int, str]]:
    """Instants in UTC; those that could not be read stand at J2000 and are named."""
    column, wrong = table.columns[found.epoch], dict.fromkeys(table.wrong, "is missing")
    count = len(table.lines)
    scales = np.full(count, found.epoch_scale)
    if "scale" in found.others:
        scales = np.char.lower(texts(table.columns[found.others["scale"]]))
    if hasattr(column, "jd1"):  # an Epoch or an astropy Time, which knows its scale
        epoch = Epoch.parse(column).to("utc")
        return Epoch(np.atleast_1d(epoch.jd1), np.atleast_1d(epoch.jd2), "utc"), wrong
    jd1, jd2 = np.full(count, 2451545.0), np.zeros(count)
    for scale in np.unique(scales).tolist():
        rows = np.flatnonzero(scales == scale)
        if scale not in SCALES:
            wrong |= dict.fromkeys(rows.tolist(), f"is in the scale {scale!r}, which is unknown")
            continue
        some = column[rows] if isinstance(column, np.ndarray) else [column[i] for i in rows]
        first, second, reasons = _in_scale(some, scale, found)
        jd1[rows], jd2[rows] = first, second
        wrong |= {int(rows[i]): reason for i, reason in reasons.items()}
    return Epoch(jd1, jd2, "utc"), wrong


def _in_scale(values: Any, scale: str, found: Layout) -> tuple[Any, Any, dict[int, str]]:
    """Instants of one scale as two-part Julian dates of UTC."""
    if found.epoch_form != "calendar":
        read = numbers(values)
        zero = MJD_ZERO if found.epoch_form == "mjd" else 0.0
        high, low = twopart.add((read.high, read.low), twopart.pair(np.full(read.high.shape, zero)))
        pairs = [(a, b) for a, b in zip(high.tolist(), low.tolist(), strict=True)]
        return _to_utc(pairs, scale, dict(read.wrong))
    if isinstance(values, np.ndarray) and values.dtype.kind == "M":
        missing = np.isnat(values)
        filled = np.where(missing, np.datetime64("2000-01-01T12:00:00"), values)
        epoch = Epoch.parse(filled, scale).to("utc")
        return epoch.jd1, epoch.jd2, _where(missing, "is missing")
    pairs, wrong = [], {}
    for i, value in enumerate(values):
        pair = (2451545.0, 0.0)
        try:
            if isinstance(value, str):
                pair = parse_iso(value, scale, "it")
            else:
                one = Epoch.parse(value, scale)
                one = one if one.scale == scale else one.to(scale)
                pair = (one.jd1, one.jd2)
        except LighttimeError as error:
            wrong[i] = _told(error, value)
        pairs.append(pair)
    return _to_utc(pairs, scale, wrong)


def _told(error: LighttimeError, value: Any) -> str:
    if value is None or (isinstance(value, str) and not value.strip()):
        return "is empty"
    shown = repr(str(value)) if isinstance(value, str) else repr(value)
    return f"is {shown}; allowed: {error.allowed}" if isinstance(error, InputError) else str(error)


def _to_utc(
    pairs: list[tuple[float, float]], scale: str, wrong: dict[int, str]
) -> tuple[Any, Any, dict[int, str]]:
    jd1, jd2 = (np.array(part, dtype=float) for part in zip(*pairs, strict=True))
    jd1[list(wrong)], jd2[list(wrong)] = 2451545.0, 0.0
    try:
        epoch = Epoch(jd1, jd2, scale).to("utc")
    except LighttimeError:
        for i in range(len(jd1)):  # find those that are not on the calendar, or not in UTC
            try:
                Epoch(float(jd1[i]), float(jd2[i]), scale).to("utc")
            except LighttimeError as error:
                wrong[i] = _told(error, float(jd1[i]))
                jd1[i], jd2[i] = 2451545.0, 0.0
        epoch = Epoch(jd1, jd2, scale).to("utc")
    return np.atleast_1d(epoch.jd1), np.atleast_1d(epoch.jd2), wrong
