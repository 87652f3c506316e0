"""UTC and TAI."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from lighttime.constants import MJD_ZERO
from lighttime.timescales.inputs import TwoPart, date_pair
from lighttime.timescales.leapseconds import (
    DAY_TICKS,
    FIRST_MJD,
    TICK,
    day_growth,
    utc_days,
    utc_table,
)
from lighttime.timescales.twopart import (
    Array,
    Pair,
    add,
    day_and_fraction,
    divide,
    multiply,
    pair,
    plain,
    subtract,
)


def _tai_minus_utc_days(utc: Pair) -> Pair:
    """TAI - UTC in days of the quasi-Julian date, within the day a straight line."""
    day, fraction = day_and_fraction(utc)
    mjd = utc_days(day)
    start = pair(utc_table().at(mjd))
    growth = pair(day_growth(mjd))
    return divide(add(start, multiply(fraction, growth)), pair(DAY_TICKS))


def tai_minus_utc(utc1: ArrayLike, utc2: ArrayLike) -> Any:
    """TAI - UTC, seconds: whole from 1972 on, with drift from 1960 to 1971.

    Raises
    ------
    CoverageError
        For UTC before 1960-01-01 or not before 2100-01-01.

    Examples
    --------
    >>> tai_minus_utc(2457753.5, 0.999999)  # within the leap second at the end of 2016
    36.0
    >>> tai_minus_utc(2457754.5, 0.0)
    37.0
    >>> tai_minus_utc(2440423.5, 0.0)  # 1969-07-21, in the years of the drifting UTC
    7.574994
    """
    day, fraction = day_and_fraction(date_pair("utc", utc1, utc2))
    mjd = utc_days(day)
    known = utc_table()
    drift = known.drift[known.row(mjd)]
    # The fraction of a day that ends in a step counts a day of that length.
    length = (DAY_TICKS + day_growth(mjd)) / (DAY_TICKS + drift)
    seconds = (known.at(mjd) + fraction[0] * drift * length) / TICK
    return float(seconds) if np.ndim(seconds) == 0 else seconds


def utc_to_tai(utc1: ArrayLike, utc2: ArrayLike) -> TwoPart:
    """TAI from UTC (quasi-Julian date), exact.

    Raises
    ------
    CoverageError
        For UTC before 1960-01-01 or not before 2100-01-01.

    Notes
    -----
    Source: USNO/IERS, table tai-utc. On the few days of 1960-1971 that end in a step, TAI is
    continuous through the step here, where ERFA is off by step times drift: 3.2 ns at the most.
    """
    utc = date_pair("utc", utc1, utc2)
    return plain(add(utc, _tai_minus_utc_days(utc)))


def tai_to_utc(tai1: ArrayLike, tai2: ArrayLike) -> TwoPart:
    """UTC (quasi-Julian date) from TAI, exact.

    Raises
    ------
    CoverageError
        For UTC before 1960-01-01 or not before 2100-01-01.

    Notes
    -----
    Source: USNO/IERS, table tai-utc.
    """
    known = utc_table()
    day, fraction = day_and_fraction(date_pair("tai", tai1, tai2))

    def since_midnight(utc_day: Array, passed: Pair) -> Pair:
        """Days of TAI from 0h UTC of a day to `passed` days after 0h TAI of it."""
        # Days before the table take its first row here; `utc_days` refuses them below.
        mjd = np.maximum(utc_day - MJD_ZERO, FIRST_MJD).astype(np.int64)
        return subtract(passed, divide(pair(known.at(mjd)), pair(DAY_TICKS)))

    # TAI is ahead of UTC by less than a day: the day of UTC is that of TAI or the one before.
    before = since_midnight(day, fraction)[0] < 0.0
    day = day - before
    elapsed = since_midnight(day, add(fraction, pair(before)))
    length = divide(pair(DAY_TICKS + day_growth(utc_days(day))), pair(DAY_TICKS))
    return plain(add(pair(day), divide(elapsed, length)))
