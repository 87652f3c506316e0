"""What people hand in as an instant, read as a Julian date in two parts and its scale."""

from __future__ import annotations

import sys
from datetime import UTC, date, datetime
from typing import Any, TypeAlias

import numpy as np

from lighttime.constants import DAY, MJD_ZERO
from lighttime.errors import InputError
from lighttime.timescales import twopart
from lighttime.timescales.epoch import Epoch
from lighttime.timescales.leapseconds import DAY_TICKS, day_growth, utc_days, utc_table
from lighttime.timescales.scales import known_scale
from lighttime.timescales.text import parse_iso
from lighttime.timescales.uniform import DAY_PAIR

Read: TypeAlias = tuple[Any, Any, str]

_ALLOWED = (
    "ISO text, an aware datetime, numpy.datetime64, astropy Time, Epoch, or an array of one kind"
)
_UNIX_MJD = 40587.0
"""Modified Julian date of 1970-01-01, from which datetime64 counts."""

_PER_SECOND = {"s": 1, "ms": 10**3, "us": 10**6, "ns": 10**9, "ps": 10**12, "fs": 10**15}
_PER_SECOND["as"] = 10**18
_SECONDS_IN = {"m": 60, "h": 3600, "D": 86400, "W": 604800}


def read(value: Any, scale: str, name: str = "epoch") -> Read:
    """Julian date in two parts (scalars, or arrays of one shape) and the scale it is in.

    Parameters
    ----------
    value : object
        One of the kinds that `Epoch.parse` takes.
    scale : str
        For values that do not say theirs.
    name : str
        What errors call it.
    """
    if isinstance(value, str):
        return *parse_iso(str(value), scale, name), scale
    if isinstance(value, Epoch):
        return value.jd1, value.jd2, value.scale
    if isinstance(value, datetime):
        return _from_datetime(value, name)
    if isinstance(value, date):
        raise InputError(name, value, "an instant: a date alone does not say when in the day")
    if isinstance(value, np.datetime64):
        return *_from_datetime64(np.asarray(value), scale, name), scale
    if _is_astropy(value):
        return _from_astropy(value, name)
    if isinstance(value, (list, tuple)) or hasattr(value, "__array__"):
        return _from_many(value, scale, name)
    raise InputError(name, value, _ALLOWED)


def _from_datetime(value: datetime, name: str) -> Read:
    if value != value:  # pandas.NaT is a datetime, equal to nothing
        raise InputError(name, value, _ALLOWED)
    if value.utcoffset() is None:
        raise InputError(name, value, "a datetime with a time zone, as tzinfo=timezone.utc")
    in_utc = value.astimezone(UTC)
    text = in_utc.replace(tzinfo=None).isoformat(timespec="microseconds")[:26]
    # A pandas Timestamp is a datetime with three digits more.
    text += f"{getattr(in_utc, 'nanosecond', 0):03d}"
    return *parse_iso(text, "utc", name), "utc"


def _from_datetime64(values: Any, scale: str, name: str) -> tuple[Any, Any]:
    """Counted from 1970-01-01 in days of 86400 s: there is no way to write a leap second."""
    if np.any(np.isnat(values)):
        raise InputError(name, "NaT", "a datetime64 with a date")
    unit, step = np.datetime_data(values.dtype)
    if unit in ("Y", "M"):
        values, unit, step = values.astype("datetime64[D]"), "D", 1
    # Whole seconds and the rest apart, in integers: seconds * `per` would overflow at fs and as.
    counts = values.astype(np.int64) * step
    per = _PER_SECOND.get(unit, 1)
    whole, rest = np.divmod(counts, per)
    whole = whole * _SECONDS_IN.get(unit, 1)
    days, of_day = np.divmod(whole, int(DAY))
    rest_high = rest.astype(np.float64)
    rest_low = (rest - rest_high.astype(np.int64)).astype(np.float64)
    seconds = twopart.divide(twopart.pair(rest_high, rest_low), twopart.pair(per))
    seconds = twopart.add(twopart.pair(of_day), seconds)
    day = days + (_UNIX_MJD + MJD_ZERO)
    fraction = twopart.divide(seconds, _day_seconds(day, scale))
    return twopart.plain(twopart.add(twopart.pair(day), fraction))


def _day_seconds(day: Any, scale: str) -> twopart.Pair:
    if scale != "utc":
        return DAY_PAIR
    mjd = utc_days(day)
    known = utc_table()
    drift = known.drift[known.row(mjd)]
    ratio = twopart.divide(
        twopart.pair(DAY_TICKS + day_growth(mjd)), twopart.pair(DAY_TICKS + drift)
    )
    return twopart.multiply(DAY_PAIR, ratio)


def _is_astropy(value: Any) -> bool:
    # Whoever holds a Time has imported astropy; nobody else pays for it.
    module = sys.modules.get("astropy.time")
    return module is not None and isinstance(value, module.Time)


def _from_astropy(value: Any, name: str) -> Read:
    if np.any(value.mask):
        raise InputError(name, value, "an astropy Time without masked elements")
    return value.jd1, value.jd2, known_scale(value.scale, f"scale of {name}")


def _from_many(values: Any, scale: str, name: str) -> Read:
    array = values if hasattr(values, "__array__") else None
    if array is not None:
        array = np.asarray(array)
        if array.dtype.kind == "M":
            return *_from_datetime64(array, scale, name), scale
        if array.ndim == 0:
            return read(array.item(), scale, name)
        if array.dtype.kind not in "OU":
            raise InputError(name, f"an array of {array.dtype}", _ALLOWED)
        values = list(array)
    read_all = [read(one, scale, f"{name}[{i}]") for i, one in enumerate(values)]
    scales = {each[2] for each in read_all}
    if len(scales) > 1:
        raise InputError(f"scales of {name}", sorted(scales), "one scale for all")
    shapes = {np.shape(each[0]) for each in read_all}
    if len(shapes) > 1:
        raise InputError(f"shapes in {name}", sorted(shapes), "one shape for all")
    first = np.array([each[0] for each in read_all], dtype=np.float64)
    second = np.array([each[1] for each in read_all], dtype=np.float64)
    return first, second, scales.pop() if scales else scale
