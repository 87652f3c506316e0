"""Round numbers and dates for the axes of a figure."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import date
from math import ceil, floor, log10

MJD_OF_ORDINAL = 678576
MONTHS = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")

Ticks = list[tuple[float, str]]


def numbers(low: float, high: float, most: int = 6) -> Ticks:
    """Round numbers between two, with their labels.

    Examples
    --------
    >>> numbers(-12.0, 31.0, 5)
    [(-10.0, '-10'), (0.0, '0'), (10.0, '10'), (20.0, '20'), (30.0, '30')]
    """
    if not high > low:
        return [(low, _label(low, abs(low) or 1.0))]
    rough = (high - low) / most
    power = 10.0 ** floor(log10(rough))
    step = next(m * power for m in (1.0, 2.0, 2.5, 5.0, 10.0) if m * power >= rough * 0.999)
    first, last = ceil(low / step - 1e-9), floor(high / step + 1e-9)
    return [(k * step, _label(k * step, step)) for k in range(first, last + 1)]


def _label(value: float, step: float) -> str:
    digits = max(0, -floor(log10(step) + 1e-9)) + (1 if _is_quarter(step) else 0)
    text = f"{value:.{digits}f}" if abs(value) < 1e6 else f"{value:.3g}"
    return "0" if float(text) == 0.0 else text


def _is_quarter(step: float) -> bool:
    return abs(step / 10.0 ** floor(log10(step)) - 2.5) < 1e-6


def dates(low: float, high: float, most: int = 6) -> Ticks:
    """First days of years or months, or days, between two modified Julian dates.

    Examples
    --------
    >>> [label for _, label in dates(58849.0, 59215.0, 4)]
    ['2020', 'Apr', 'Jul', 'Oct', '2021']
    """
    days = high - low
    if days <= 0.0:
        return [(low, _day(low).isoformat())]
    if days / most > 200.0:
        years = ceil(days / 365.25 / most)
        first, last = _day(low).year, _day(high).year
        whole = range(first - first % years, last + 2, years)
        return _between([(date(y, 1, 1), str(y)) for y in whole if y > 0], low, high)
    if days / most > 20.0:
        months = next(m for m in (1, 2, 3, 4, 6, 12) if m * 30.5 * most >= days * 0.98)
        return _between(_months(_day(low), _day(high), months), low, high)
    return [
        (at, f"{_day(at).day} {MONTHS[_day(at).month - 1]}") if at == floor(at) else (at, "")
        for at, _ in numbers(low, high, most)
        if at == floor(at)
    ] or [(low, _day(low).isoformat())]


def _months(first: date, last: date, step: int) -> list[tuple[date, str]]:
    found = []
    for year in range(first.year, last.year + 2):
        for month in range(1, 13, step):
            found.append((date(year, month, 1), str(year) if month == 1 else MONTHS[month - 1]))
    return found


def _between(marks: Sequence[tuple[date, str]], low: float, high: float) -> Ticks:
    placed = [(float(day.toordinal() - MJD_OF_ORDINAL), label) for day, label in marks]
    return [(at, label) for at, label in placed if low <= at <= high]


def _day(mjd: float) -> date:
    return date.fromordinal(floor(mjd) + MJD_OF_ORDINAL)


def scale_of(largest_ps: float) -> tuple[float, str]:
    """A unit in which a size in picoseconds is a number of few digits: factor and name.

    Examples
    --------
    >>> scale_of(2.5e7)
    (1e-06, '\u00b5s')
    """
    for limit, factor, unit in (
        (2e3, 1.0, "ps"),
        (2e6, 1e-3, "ns"),
        (2e9, 1e-6, "\u00b5s"),
        (2e12, 1e-9, "ms"),
    ):
        if largest_ps < limit:
            return factor, unit
    return 1e-12, "s"
