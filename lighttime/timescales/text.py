"""Calendar text in the form of ISO 8601, to and from Julian dates in two parts, exactly.

Text is decimal and a Julian date in two float64 is binary: both are rational numbers, and are
turned into each other as such, in integers, so that nothing is lost but the last rounding to
1e-21 s.
"""

from __future__ import annotations

import re
from datetime import date
from fractions import Fraction
from typing import Final

from lighttime.constants import MJD_ZERO
from lighttime.errors import CoverageError, InputError
from lighttime.timescales.leapseconds import (
    END_MJD,
    FIRST_MJD,
    MJD_OF_ORDINAL,
    utc_day_seconds,
)

_PATTERN: Final = re.compile(
    r"(\d{4})-(\d{2})-(\d{2})"
    r"(?:[T ](\d{2}):(\d{2})(?::(\d{2})(?:\.(\d{1,1000}))?)?(Z|[+-]\d{2}:?\d{2})?)?",
    re.ASCII,
)
_FORM: Final = "text like 2008-03-30T12:39:50.123"
_TWICE_ZERO: Final = int(2 * MJD_ZERO)
_PLAIN_DAY: Final = Fraction(86400)


def day_seconds(mjd: int, scale: str) -> Fraction:
    """Seconds in a day of a scale: 86400, but in UTC for days that end in a leap second."""
    return utc_day_seconds(mjd) if scale == "utc" else _PLAIN_DAY


def parse_iso(text: str, scale: str, name: str = "epoch") -> tuple[float, float]:
    """The Julian date of calendar text.

    Parameters
    ----------
    text : str
        ``YYYY-MM-DD``, then optionally ``T`` or a space and ``hh:mm``, ``hh:mm:ss`` or
        ``hh:mm:ss.fraction`` with any number of digits; in UTC optionally ``Z`` or ``+00:00``.
    scale : str
        The scale it is told in. In UTC the last minute of a day that ends in a leap second
        has 61 seconds.
    name : str, optional
        What errors call it.

    Returns
    -------
    jd1, jd2 : float
        Normalised; for UTC the quasi-Julian date.
    """
    found = _PATTERN.fullmatch(text.strip())
    if found is None:
        raise InputError(name, text, _FORM)
    year, month, day, hour, minute, whole, decimals, offset = found.groups()
    mjd = _mjd(text, name, int(year), int(month), int(day))
    if offset is not None:
        _check_offset(text, name, offset, scale)
    if scale == "utc" and not FIRST_MJD <= mjd < END_MJD:
        raise CoverageError(name, text, "UTC from 1960-01-01 to 2099-12-31")
    hours, minutes = int(hour or 0), int(minute or 0)
    if hours > 23:
        raise InputError(name, text, "hours 00 to 23")
    if minutes > 59:
        raise InputError(name, text, "minutes 00 to 59")
    unit = 10 ** len(decimals or "")
    of_minute = int(whole or 0) * unit + int(decimals or 0)
    length = day_seconds(mjd, scale)
    if of_minute >= 59 * unit:  # no minute is shorter than that
        _check_second(text, name, Fraction(of_minute, unit), (hours, minutes), length, scale)
    ticks = (3600 * hours + 60 * minutes) * unit + of_minute
    day, part = length.numerator * unit, length.denominator * ticks
    return _nearest_and_rest((_TWICE_ZERO + 2 * mjd) * day + 2 * part, 2 * day)


def _nearest_and_rest(numerator: int, denominator: int) -> tuple[float, float]:
    """A rational number as the nearest float64 and the rest: Python divides integers exactly."""
    high = numerator / denominator
    n, d = high.as_integer_ratio()
    return high, (numerator * d - n * denominator) / (denominator * d)


def _mjd(text: str, name: str, year: int, month: int, day: int) -> int:
    if year < 1:
        raise InputError(name, text, "years 0001 to 9999")
    if not 1 <= month <= 12:
        raise InputError(name, text, "months 01 to 12")
    try:
        return date(year, month, day).toordinal() - MJD_OF_ORDINAL
    except ValueError:
        raise InputError(name, text, f"a day that {year:04d}-{month:02d} has") from None


def _check_offset(text: str, name: str, offset: str, scale: str) -> None:
    if scale != "utc":
        raise InputError(name, text, f"no offset from UTC on text in the scale {scale}")
    if offset.replace(":", "") not in ("Z", "+0000", "-0000"):
        raise InputError(name, text, "UTC itself, Z or +00:00; an aware datetime takes any zone")


def _check_second(
    text: str,
    name: str,
    seconds: Fraction,
    clock: tuple[int, int],
    length: Fraction,
    scale: str,
) -> None:
    day = text.strip()[:10]
    limit = Fraction(60)
    if clock == (23, 59):
        limit += length - _PLAIN_DAY
    if seconds < limit:
        return
    if scale != "utc":
        raise InputError(name, text, f"seconds 00 to 59.9...; {scale} has no leap seconds")
    if length == _PLAIN_DAY:
        raise InputError(name, text, f"seconds below 60: {day} does not end in a leap second")
    if clock != (23, 59):
        raise InputError(name, text, f"seconds below 60: {day} has its leap second at 23:59:60")
    raise InputError(name, text, f"seconds below {float(limit):.10g} in the last minute of {day}")


def format_iso(jd1: float, jd2: float, scale: str, digits: int) -> str:
    """Calendar text ``YYYY-MM-DDThh:mm:ss.fraction`` of a Julian date, rounded to `digits`."""
    (n1, d1), (n2, d2) = jd1.as_integer_ratio(), jd2.as_integer_ratio()
    grid = max(d1, d2, 2)  # powers of two
    since_mjd_zero = n1 * (grid // d1) + n2 * (grid // d2) - _TWICE_ZERO * (grid // 2)
    mjd, rest = divmod(since_mjd_zero, grid)
    length = day_seconds(mjd, scale)
    unit = 10**digits
    day = length.numerator * unit
    ticks = _rounded(rest * day, grid * length.denominator)
    if ticks * length.denominator >= day:
        # rounded up to midnight, through the leap second if there is one
        mjd, ticks = mjd + 1, 0
    whole, decimals = divmod(ticks, unit)
    minutes = min(whole // 60, 24 * 60 - 1)
    hour, minute = divmod(minutes, 60)
    calendar = date.fromordinal(mjd + MJD_OF_ORDINAL).isoformat()
    fraction = f".{decimals:0{digits}d}" if digits else ""
    return f"{calendar}T{hour:02d}:{minute:02d}:{whole - 60 * minutes:02d}{fraction}"


def _rounded(numerator: int, denominator: int) -> int:
    """The nearest integer to a rational number, the even one of two."""
    whole, rest = divmod(numerator, denominator)
    return whole + (2 * rest + (whole & 1) > denominator)
