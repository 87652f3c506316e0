"""What each of four usual roundings costs, alone, in arithmetic that is otherwise exact.

The twin knows the events of a round trip at all digits. Each function rounds one thing as a
float64 program does and tells how far that moves the round trip, in seconds. To first order the
range moves by what the ends move along the ray; the rest is smaller by v/c.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import mpmath
from rungs import vector

from lighttime.exact import ExactAnswer

C = 299792458
DAY = 86400
RECORDS_START_JD = 2414992.5
"""Where the records of DE421 begin."""

LOOK_UP = "record found by (Julian date - start)"
PLACES = "ends placed at day fractions"
BARYCENTRIC = "barycentric coordinates in float64"
DIFFERENCE = "answer from two day fractions"
NAMES = (LOOK_UP, DIFFERENCE, BARYCENTRIC, PLACES)


def losses(twin: ExactAnswer) -> dict[str, float]:
    """Change of the round trip by each rounding, seconds."""
    with mpmath.workdps(50):
        rungs = twin.worksheet()
        return {
            LOOK_UP: _look_up(rungs),
            PLACES: _places(rungs),
            BARYCENTRIC: _barycentric(rungs),
            DIFFERENCE: _difference(rungs),
        }


def _look_up(rungs: Mapping[str, Any]) -> float:
    """Bodies are taken where they are at start + fl(date - start), at each event."""
    shifts = []
    for event, body in (("t1", "earth"), ("t2", "moon"), ("t3", "earth")):
        exact = rungs[f"{event}_tdb_jd"] - RECORDS_START_JD
        late = (mpmath.mpf(float(exact)) - exact) * DAY
        velocity = vector(rungs, f"{event}_{body}_velocity", "m_per_s")
        shifts.append([late * v for v in velocity])
    return _lengthening(rungs, shifts)


def _places(rungs: Mapping[str, Any]) -> float:
    """Ends are taken where they are at instants whose day fractions are float64."""
    shifts = []
    for event, thing in (("t1", "station"), ("t2", "moon"), ("t3", "station")):
        late = _late(rungs[f"{event}_tdb_jd"])
        velocity = vector(rungs, f"{event}_{thing}_velocity", "m_per_s")
        shifts.append([late * v for v in velocity])
    return _lengthening(rungs, shifts)


def _barycentric(rungs: Mapping[str, Any]) -> float:
    """The three ends in barycentric coordinates, each rounded to the nearest float64."""
    shifts = []
    for name in ("t1_station_bcrs", "t2_reflector_bcrs", "t3_station_bcrs"):
        shifts.append([mpmath.mpf(float(x)) - x for x in vector(rungs, name)])
    return _lengthening(rungs, shifts)


def _difference(rungs: Mapping[str, Any]) -> float:
    """The answer as the difference of two instants whose day fractions are float64."""
    return float(_late(rungs["t3_tt_jd"]) - _late(rungs["t1_tt_jd"]))


def _late(jd: Any) -> Any:
    """By how many seconds the day fraction of a Julian date is late when it is a float64."""
    fraction = jd - mpmath.mpf(0.5) - mpmath.floor(jd - mpmath.mpf(0.5))
    return (mpmath.mpf(float(fraction)) - fraction) * DAY


def _lengthening(rungs: Mapping[str, Any], shifts: list[list[Any]]) -> float:
    """By how much both legs get longer when their three ends are shifted, s."""
    station1, reflector, station3 = (
        vector(rungs, name) for name in ("t1_station_bcrs", "t2_reflector_bcrs", "t3_station_bcrs")
    )
    first, middle, last = shifts
    return (
        _along(station1, reflector, first, middle) + _along(station3, reflector, last, middle)
    ) / C


def _along(near: Any, far: Any, near_shift: Any, far_shift: Any) -> float:
    line = [b - a for a, b in zip(near, far, strict=True)]
    length = mpmath.sqrt(mpmath.fdot(line, line))
    moved = [b - a for a, b in zip(near_shift, far_shift, strict=True)]
    return float(mpmath.fdot(line, moved) / length)
