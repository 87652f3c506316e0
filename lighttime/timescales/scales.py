"""From one time scale to another.

    ut1 - tai - tt - tdb - tcb          gps, gst: system times of the GPS and Galileo satellites,
           |     |                      constant offsets of TAI
      utc, gps  tcg
          gst

Each function takes and returns a Julian date in two parts (scalars or arrays of any
broadcastable shape), normalised so that the first part is the float64 nearest to the sum; all
steps are done in pairs of float64, so that their own error is near 1e-21 s. UTC is ERFA's
quasi-Julian date: its fraction runs from 0 to 1 over the whole day, leap second included.

UT1 here is that of the series of Earth orientation, as interpolated by the object given, without
the sub-daily terms of ocean tides and libration (which belong to the rotation of the Earth).
"""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from itertools import pairwise
from types import MappingProxyType
from typing import Any, Final, Protocol

import numpy as np
from numpy.typing import ArrayLike

from lighttime.constants import DAY, L_B, L_G, MJD_ZERO, SCALES_ORIGIN, TDB_0, TT_MINUS_TAI
from lighttime.errors import InputError, UnknownNameError
from lighttime.timescales.leapseconds import (
    DAY_TICKS,
    FIRST_MJD,
    TICK,
    day_growth,
    utc_days,
    utc_table,
)
from lighttime.timescales.tdb import tdb_minus_tt
from lighttime.timescales.twopart import (
    Array,
    Pair,
    add,
    day_and_fraction,
    divide,
    exact,
    multiply,
    pair,
    plain,
    subtract,
)

TwoPart = tuple[Any, Any]
"""A Julian date: two floats, or two arrays of one shape."""


class Place(Protocol):
    """Anything with a place on the Earth."""

    @property
    def xyz_m(self) -> Any:
        """ITRF position, three coordinates in metres."""


class Rotation(Protocol):
    """Anything that knows UT1."""

    def at(self, tai1: Any, tai2: Any) -> Any:
        """An object with the attribute `ut1_tai_s` at an instant of TAI."""


def _date(name: str, jd1: ArrayLike, jd2: ArrayLike) -> Pair:
    """A Julian date handed in, as a pair; refused when not finite or of two shapes."""
    try:
        date = pair(jd1, jd2)
    except ValueError:
        shapes = f"{np.shape(jd1)} and {np.shape(jd2)}"
        raise InputError(f"shapes of {name}", shapes, "two that broadcast to one") from None
    if not np.all(np.isfinite(date[0])):
        raise InputError(name, (jd1, jd2), "finite Julian dates in two parts")
    return date


# --- offsets that never change --------------------------------------------------------------

_DAY: Final = exact(DAY)
_TT_MINUS_TAI_D: Final = exact(Fraction(repr(TT_MINUS_TAI)) / int(DAY))
_SATELLITE_MINUS_TAI_D: Final = exact(Fraction(-19, int(DAY)))
"""GPS time was UTC on 1980-01-06; Galileo's was set 13 s ahead of UTC on 1999-08-22, which is
the same offset. Source: IS-GPS-200, 3.3.4; Galileo OS SIS ICD, 5.1.2."""


def tai_to_tt(tai1: ArrayLike, tai2: ArrayLike) -> TwoPart:
    """TT = TAI + 32.184 s. Source: IAU 1991 A4."""
    return plain(add(_date("tai", tai1, tai2), _TT_MINUS_TAI_D))


def tt_to_tai(tt1: ArrayLike, tt2: ArrayLike) -> TwoPart:
    """TAI = TT - 32.184 s. Source: IAU 1991 A4."""
    return plain(subtract(_date("tt", tt1, tt2), _TT_MINUS_TAI_D))


def tai_to_gps(tai1: ArrayLike, tai2: ArrayLike) -> TwoPart:
    """GPS time = TAI - 19 s. Source: IS-GPS-200, 3.3.4."""
    return plain(add(_date("tai", tai1, tai2), _SATELLITE_MINUS_TAI_D))


def gps_to_tai(gps1: ArrayLike, gps2: ArrayLike) -> TwoPart:
    """TAI = GPS time + 19 s. Source: IS-GPS-200, 3.3.4."""
    return plain(subtract(_date("gps", gps1, gps2), _SATELLITE_MINUS_TAI_D))


def tai_to_gst(tai1: ArrayLike, tai2: ArrayLike) -> TwoPart:
    """Galileo system time = TAI - 19 s. Source: Galileo OS SIS ICD, 5.1.2."""
    return tai_to_gps(tai1, tai2)


def gst_to_tai(gst1: ArrayLike, gst2: ArrayLike) -> TwoPart:
    """TAI = Galileo system time + 19 s. Source: Galileo OS SIS ICD, 5.1.2."""
    return gps_to_tai(gst1, gst2)


# --- UTC ------------------------------------------------------------------------------------


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
    day, fraction = day_and_fraction(_date("utc", utc1, utc2))
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
    continuous through the step here, which differs from ERFA by up to 4 ns (step times drift).
    """
    utc = _date("utc", utc1, utc2)
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
    day, fraction = day_and_fraction(_date("tai", tai1, tai2))

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


# --- coordinate times -----------------------------------------------------------------------

_ORIGIN: Final = add(exact(SCALES_ORIGIN[0]), exact(SCALES_ORIGIN[1]))
_LG: Final = Fraction(repr(L_G))
_LB: Final = Fraction(repr(L_B))
_TDB_0_D: Final = exact(Fraction(repr(TDB_0)) / int(DAY))


def _stretch(date: Pair, rate: Pair) -> Pair:
    """rate * (date - 1977-01-01 0h TAI)."""
    return multiply(rate, subtract(date, _ORIGIN))


def tt_to_tcg(tt1: ArrayLike, tt2: ArrayLike) -> TwoPart:
    """TCG = TT + L_G/(1 - L_G) (TT - T0). Source: IAU 2000 B1.9."""
    tt = _date("tt", tt1, tt2)
    return plain(add(tt, _stretch(tt, exact(_LG / (1 - _LG)))))


def tcg_to_tt(tcg1: ArrayLike, tcg2: ArrayLike) -> TwoPart:
    """TT = TCG - L_G (TCG - T0). Source: IAU 2000 B1.9."""
    tcg = _date("tcg", tcg1, tcg2)
    return plain(subtract(tcg, _stretch(tcg, exact(_LG))))


def tcb_to_tdb(tcb1: ArrayLike, tcb2: ArrayLike) -> TwoPart:
    """TDB = TCB - L_B (TCB - T0) + TDB0. Source: IAU 2006 B3."""
    tcb = _date("tcb", tcb1, tcb2)
    return plain(add(subtract(tcb, _stretch(tcb, exact(_LB))), _TDB_0_D))


def tdb_to_tcb(tdb1: ArrayLike, tdb2: ArrayLike) -> TwoPart:
    """TCB, the inverse of `tcb_to_tdb`. Source: IAU 2006 B3."""
    tdb = subtract(_date("tdb", tdb1, tdb2), _TDB_0_D)
    return plain(add(tdb, _stretch(tdb, exact(_LB / (1 - _LB)))))


# --- TDB ------------------------------------------------------------------------------------


def _days(seconds: Any) -> Pair:
    return divide(pair(seconds), _DAY)


def _xyz_m(place: Place | None) -> Array | None:
    if place is None:
        return None
    if not hasattr(place, "xyz_m"):
        raise InputError("place", place, "an object with xyz_m, its ITRF position in metres")
    return np.asarray(place.xyz_m, dtype=np.float64)


def tt_to_tdb(
    tt1: ArrayLike,
    tt2: ArrayLike,
    place: Place | None = None,
    earth_orientation: Rotation | None = None,
) -> TwoPart:
    """TDB from TT of a clock at a place on the Earth (at the geocentre when none is given).

    Parameters
    ----------
    tt1, tt2 : float or array
        Julian date, TT, in two parts.
    place : object with ``xyz_m``, optional
        Where the clock is. Without one the daily term of up to 2 microseconds is left out.
    earth_orientation : object with ``at``, optional
        Gives UT1, needed with a place; the bundled series when not given.

    Notes
    -----
    Source: `tdb_minus_tt`. Its slope is below 6e-10, so that the second of two steps towards
    its argument, TDB, leaves 1e-21 s.
    """
    tt = _date("tt", tt1, tt2)
    xyz_m = _xyz_m(place)
    ut1_fraction = 0.0 if xyz_m is None else _ut1_fraction(tt, earth_orientation)
    tdb = tt
    for _ in range(2):
        tdb = add(tt, _days(tdb_minus_tt(*tdb, ut1_fraction, xyz_m)))
    return plain(tdb)


def tdb_to_tt(
    tdb1: ArrayLike,
    tdb2: ArrayLike,
    place: Place | None = None,
    earth_orientation: Rotation | None = None,
) -> TwoPart:
    """TT of a clock at a place on the Earth (at the geocentre when none is given) from TDB.

    The inverse of `tt_to_tdb`, with the same arguments. UT1 is found from TT, so that with a
    place TT is approached in two steps: the daily term moves by 2e-16 s for the 2 microseconds
    by which the first is wrong.
    """
    tdb = _date("tdb", tdb1, tdb2)
    xyz_m = _xyz_m(place)
    tt = subtract(tdb, _days(tdb_minus_tt(*tdb)))
    if xyz_m is not None:
        for _ in range(2):
            ut1_fraction = _ut1_fraction(tt, earth_orientation)
            tt = subtract(tdb, _days(tdb_minus_tt(*tdb, ut1_fraction, xyz_m)))
    return plain(tt)


# --- UT1 ------------------------------------------------------------------------------------


def _rotation(earth_orientation: Rotation | None) -> Rotation:
    if earth_orientation is not None:
        if not hasattr(earth_orientation, "at"):
            raise InputError("earth_orientation", earth_orientation, "an EarthOrientation")
        return earth_orientation
    # Imported when called: the Earth's room is built on this one and imports it.
    from lighttime.earth.series import EarthOrientation

    bundled: Rotation = EarthOrientation.bundled()
    return bundled


def _ut1_minus_tai_days(tai: Pair, rotation: Rotation) -> Pair:
    return _days(rotation.at(*plain(tai)).ut1_tai_s)


def _ut1_fraction(tt: Pair, earth_orientation: Rotation | None) -> Array:
    """The fraction of the UT1 day since midnight at an instant of TT."""
    tai = subtract(tt, _TT_MINUS_TAI_D)
    ut1 = add(tai, _ut1_minus_tai_days(tai, _rotation(earth_orientation)))
    return day_and_fraction(ut1)[1][0]


def tai_to_ut1(
    tai1: ArrayLike, tai2: ArrayLike, earth_orientation: Rotation | None = None
) -> TwoPart:
    """UT1 from TAI by UT1 - TAI of a series of Earth orientation, without sub-daily terms.

    Parameters
    ----------
    tai1, tai2 : float or array
        Julian date, TAI, in two parts.
    earth_orientation : object with ``at``, optional
        ``at(tai1, tai2).ut1_tai_s`` is UT1 - TAI in seconds; the bundled series when not given.
    """
    tai = _date("tai", tai1, tai2)
    return plain(add(tai, _ut1_minus_tai_days(tai, _rotation(earth_orientation))))


def ut1_to_tai(
    ut1_1: ArrayLike, ut1_2: ArrayLike, earth_orientation: Rotation | None = None
) -> TwoPart:
    """TAI from UT1, the inverse of `tai_to_ut1`, with the same arguments.

    UT1 - TAI changes by less than 1e-7 of time: from a start within a second three steps
    leave less than 1e-20 s.
    """
    ut1 = _date("ut1", ut1_1, ut1_2)
    rotation = _rotation(earth_orientation)
    tai = pair(*utc_to_tai(*ut1))  # UTC is kept within 0.9 s of UT1
    for _ in range(3):
        tai = subtract(ut1, _ut1_minus_tai_days(tai, rotation))
    return plain(tai)


# --- from any to any ------------------------------------------------------------------------

PARENT: Final = MappingProxyType(
    {
        "tai": None,
        "utc": "tai",
        "ut1": "tai",
        "gps": "tai",
        "gst": "tai",
        "tt": "tai",
        "tcg": "tt",
        "tdb": "tt",
        "tcb": "tdb",
    }
)
"""The tree of scales: each is defined by its relation to its parent."""

SCALES: Final = tuple(PARENT)

UNIFORM: Final = frozenset(SCALES) - {"utc", "ut1"}
"""Scales whose seconds do not depend on the rotation of the Earth."""

_STEPS: Final[MappingProxyType[tuple[str, str], Callable[..., TwoPart]]] = MappingProxyType(
    {
        ("utc", "tai"): utc_to_tai,
        ("tai", "utc"): tai_to_utc,
        ("gps", "tai"): gps_to_tai,
        ("tai", "gps"): tai_to_gps,
        ("gst", "tai"): gst_to_tai,
        ("tai", "gst"): tai_to_gst,
        ("tt", "tai"): tt_to_tai,
        ("tai", "tt"): tai_to_tt,
        ("tcg", "tt"): tcg_to_tt,
        ("tt", "tcg"): tt_to_tcg,
        ("tcb", "tdb"): tcb_to_tdb,
        ("tdb", "tcb"): tdb_to_tcb,
    }
)


def known_scale(scale: str, name: str = "scale") -> str:
    """The scale, in lower case, or an `UnknownNameError`."""
    found = scale.lower() if isinstance(scale, str) else scale
    if found not in PARENT:
        raise UnknownNameError(name, scale, SCALES)
    return found


def _ancestry(scale: str | None) -> list[str]:
    chain = []
    while scale is not None:
        chain.append(scale)
        scale = PARENT[scale]
    return chain


def route(source: str, target: str) -> list[str]:
    """The scales passed through, both ends included.

    Examples
    --------
    >>> route("utc", "tcb")
    ['utc', 'tai', 'tt', 'tdb', 'tcb']
    >>> route("tdb", "tcg")
    ['tdb', 'tt', 'tcg']
    """
    up, down = _ancestry(source), _ancestry(target)
    meeting = next(scale for scale in up if scale in down)
    return up[: up.index(meeting) + 1] + down[: down.index(meeting)][::-1]


def convert(
    jd1: ArrayLike,
    jd2: ArrayLike,
    source: str,
    target: str,
    place: Place | None = None,
    earth_orientation: Rotation | None = None,
) -> TwoPart:
    """A Julian date in one scale as one in another, through the scales between them.

    Parameters
    ----------
    jd1, jd2 : float or array
        Julian date in two parts, in `source`.
    source, target : str
        Scales, of `SCALES`.
    place : object with ``xyz_m``, optional
        Where the clock is, for steps between TT and TDB; the geocentre when not given.
    earth_orientation : object with ``at``, optional
        For steps to and from UT1, and between TT and TDB with a place; the bundled series when
        not given.
    """
    date: TwoPart = plain(_date(source, jd1, jd2))
    path = route(known_scale(source, "source"), known_scale(target, "target"))
    for here, there in pairwise(path):
        match here, there:
            case "tt", "tdb":
                date = tt_to_tdb(*date, place, earth_orientation)
            case "tdb", "tt":
                date = tdb_to_tt(*date, place, earth_orientation)
            case "tai", "ut1":
                date = tai_to_ut1(*date, earth_orientation)
            case "ut1", "tai":
                date = ut1_to_tai(*date, earth_orientation)
            case _:
                date = _STEPS[here, there](*date)
    return date


__all__ = [
    "SCALES",
    "UNIFORM",
    "convert",
    "gps_to_tai",
    "gst_to_tai",
    "known_scale",
    "route",
    "tai_minus_utc",
    "tai_to_gps",
    "tai_to_gst",
    "tai_to_tt",
    "tai_to_ut1",
    "tai_to_utc",
    "tcb_to_tdb",
    "tcg_to_tt",
    "tdb_to_tcb",
    "tdb_to_tt",
    "tt_to_tai",
    "tt_to_tcg",
    "tt_to_tdb",
    "ut1_to_tai",
    "utc_to_tai",
]
