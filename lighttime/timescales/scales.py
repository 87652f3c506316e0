"""From one time scale to another.

    ut1 - tai - tt - tdb - tcb - tcl    gps, gst: system times of the GPS and Galileo satellites,
           |     |                      constant offsets of TAI
      utc, gps  tcg                     tcl: of the Moon, known by integration only
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
from itertools import pairwise
from types import MappingProxyType
from typing import Final

from numpy.typing import ArrayLike

from lighttime.errors import UnknownNameError
from lighttime.timescales.inputs import Place, Rotation, TwoPart, date_pair
from lighttime.timescales.relation import Choice, chosen
from lighttime.timescales.tcl import tcb_to_tcl, tcl_to_tcb
from lighttime.timescales.tdb import tdb_to_tt, tt_to_tdb
from lighttime.timescales.twopart import plain
from lighttime.timescales.uniform import (
    gps_to_tai,
    gst_to_tai,
    tai_to_gps,
    tai_to_gst,
    tai_to_tt,
    tcb_to_tdb,
    tcg_to_tt,
    tdb_to_tcb,
    tt_to_tai,
    tt_to_tcg,
)
from lighttime.timescales.ut1 import tai_to_ut1, ut1_to_tai
from lighttime.timescales.utc import tai_minus_utc, tai_to_utc, utc_to_tai

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
        "tcl": "tcb",
    }
)
"""The tree of scales: each is defined by its relation to its parent."""

SCALES: Final = tuple(scale for scale in PARENT if scale != "tcl")
"""Scales that are known without an ephemeris."""

UNIFORM: Final = frozenset(PARENT) - {"utc", "ut1"}
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
        raise UnknownNameError(name, scale, PARENT)
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
    tdb: Choice = None,
) -> TwoPart:
    """A Julian date in one scale as one in another, through the scales between them.

    Parameters
    ----------
    jd1, jd2 : float or array
        Julian date in two parts, in `source`.
    source, target : str
        Scales, of `SCALES`, or ``tcl``.
    place : object with ``xyz_m``, optional
        Where the clock is, for steps between TT and TDB; the geocentre when not given.
    earth_orientation : object with ``at``, optional
        For steps to and from UT1, and between TT and TDB with a place; the bundled series when
        not given.
    tdb : {"series", "integrated"} or TimeEphemeris, optional
        For steps between TT and TDB, the series when not given; needed for TCL.
    """
    date: TwoPart = plain(date_pair(source, jd1, jd2))
    path = route(known_scale(source, "source"), known_scale(target, "target"))
    for here, there in pairwise(path):
        match here, there:
            case "tt", "tdb":
                date = tt_to_tdb(*date, place, earth_orientation, tdb)
            case "tdb", "tt":
                date = tdb_to_tt(*date, place, earth_orientation, tdb)
            case "tcb", "tcl":
                date = tcb_to_tcl(*date, chosen(tdb))
            case "tcl", "tcb":
                date = tcl_to_tcb(*date, chosen(tdb))
            case "tai", "ut1":
                date = tai_to_ut1(*date, earth_orientation)
            case "ut1", "tai":
                date = ut1_to_tai(*date, earth_orientation)
            case _:
                date = _STEPS[here, there](*date)
    return date
