"""Rung by rung: what the fast path finds on the way to a range, less what the twin finds.

Both list their intermediate values; here the entries that mean the same are set against each
other. Differences are formed in extended precision where the twin's number is not a float64.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import mpmath
import numpy as np

MICROMETRE = 1e-6
BODIES = (
    "sun",
    "earth",
    "moon",
    "mercury",
    "venus",
    "mars",
    "jupiter",
    "saturn",
    "uranus",
    "neptune",
)

BARS = {
    "station, GCRS": 0.3 * MICROMETRE,
    "station, BCRS, from the Earth": 0.3 * MICROMETRE,
    "Earth's displacement between events": 0.3 * MICROMETRE,
    "Moon from the Earth": 0.3 * MICROMETRE,
    "reflector from the Moon, ICRS": 0.3 * MICROMETRE,
    "reflector, BCRS, from the Earth": 0.3 * MICROMETRE,
    "change of TDB-TT, t1 to t3": 1e-16,
    **{f"gravity, {body}": 1e-18 for body in BODIES},
}
"""Metres for positions, seconds for the rest."""

UNBARRED = {
    "X, Y": "rad",
    "s": "rad",
    "Earth rotation angle": "rad",
    "pole": "rad",
    "UT1-TAI": "s",
    "TDB-TT": "s",
    "TT of t1, t3": "s",
    "libration": "rad",
    "troposphere": "s",
    "elevation": "rad",
}
"""What is printed beside them, with its unit."""


def vector(rungs: Mapping[str, Any], name: str, unit: str = "m") -> tuple[Any, Any, Any]:
    """Three components of the twin's worksheet."""
    x, y, z = (rungs[f"{name}_{axis}_{unit}"] for axis in "xyz")
    return x, y, z


def differences(
    fast: Mapping[str, Any], exact: Mapping[str, Any], tagged: str, at: int = 0
) -> dict[str, float]:
    """Absolute differences by the names in `BARS` and `UNBARRED`; of vectors, their length.

    Parameters
    ----------
    fast : mapping
        Worksheet of the fast path.
    exact : mapping
        Worksheet of the twin, or the numbers that it had, as mpf.
    tagged : {"t1", "t2", "t3"}
        The event where the Earth is the origin of the fast path's frame.
    at : int
        Which epoch of `fast`.
    """
    with mpmath.workdps(50):
        out = _Largest()
        origin = vector(exact, f"{tagged}_earth")
        for event in ("t1", "t3"):
            _station(out, fast, exact, event, at)
        for event in ("t1", "t2", "t3"):
            _travel(out, fast, exact, event, origin, at)
        _reflector(out, fast, exact, at)
        _legs(out, fast, exact, at)
        clock = exact["t3_tdb_minus_tt_s"] - exact["t1_tdb_minus_tt_s"]
        ours = fast["t3.tdb_minus_tt_s"][at] - fast["t1.tdb_minus_tt_s"][at]
        out.add("change of TDB-TT, t1 to t3", ours - clock)
        return dict(out)


class _Largest(dict[str, float]):
    """The largest of what is added, by name."""

    def add(self, name: str, difference: Any) -> None:
        self[name] = max(self.get(name, 0.0), abs(float(difference)))

    def add_vector(self, name: str, ours: Any, theirs: Any) -> None:
        apart = [float(mpmath.mpf(float(a)) - b) for a, b in zip(ours, theirs, strict=True)]
        self.add(name, float(np.linalg.norm(apart)))


def _station(out: _Largest, fast: Any, exact: Any, event: str, at: int) -> None:
    """Time, rotation and place of the station at one event."""
    for ours, name, theirs in (
        ("x_rad", "X, Y", "cip_x_rad"),
        ("y_rad", "X, Y", "cip_y_rad"),
        ("s_rad", "s", "s_rad"),
        ("xp_rad", "pole", "xp_rad"),
        ("yp_rad", "pole", "yp_rad"),
        ("tdb_minus_tt_s", "TDB-TT", "tdb_minus_tt_s"),
    ):
        out.add(name, fast[f"{event}.{ours}"][at] - exact[f"{event}_{theirs}"])
    era = fast[f"{event}.era_rad"][at] - exact[f"{event}_era_rad"]
    out.add("Earth rotation angle", mpmath.sin(era))
    days = mpmath.mpf(float(fast[f"{event}.tt1"][at])) - exact[f"{event}_tt_jd"]
    out.add("TT of t1, t3", (days + float(fast[f"{event}.tt2"][at])) * 86400)
    ut1_tai = mpmath.mpf(float(fast[f"{event}.ut1_2"][at])) - float(fast[f"{event}.tai2"][at])
    theirs = exact[f"{event}_ut1_jd"] - exact[f"{event}_tai_jd"]
    out.add("UT1-TAI", (ut1_tai - theirs) * 86400)
    out.add_vector(
        "station, GCRS", fast[f"{event}.gcrs_m"][:, at], vector(exact, f"{event}_station_gcrs")
    )


def _travel(out: _Largest, fast: Any, exact: Any, event: str, origin: Any, at: int) -> None:
    """Where an event and the Earth are in the frame of the Earth at the tagged instant."""
    thing = "reflector" if event == "t2" else "station"
    earth = vector(exact, f"{event}_earth")
    place = vector(exact, f"{event}_{thing}_bcrs")
    if event == "t2":
        ours = fast["t2.moon_m"][:, at] - fast["t2.moon_geocentric_m"][:, at]
    else:
        ours = fast[f"{event}.earth_m"][:, at]
    moved = [a - b for a, b in zip(earth, origin, strict=True)]
    out.add_vector("Earth's displacement between events", ours, moved)
    out.add_vector(
        f"{thing}, BCRS, from the Earth",
        fast[f"{event}.position_m"][:, at],
        [a - b for a, b in zip(place, origin, strict=True)],
    )


def _reflector(out: _Largest, fast: Any, exact: Any, at: int) -> None:
    """Moon, libration and reflector."""
    earth, moon = vector(exact, "t2_earth"), vector(exact, "t2_moon")
    geocentric = [a - b for a, b in zip(moon, earth, strict=True)]
    out.add_vector("Moon from the Earth", fast["t2.moon_geocentric_m"][:, at], geocentric)
    # The twin scales coordinates to TDB before it turns them, the fast path after.
    icrs = fast["t2.icrs_m"][:, at]
    icrs = icrs + fast["t2.scale_change"][at] * icrs
    out.add_vector("reflector from the Moon, ICRS", icrs, vector(exact, "t2_reflector_icrs"))
    for ours, name in zip(fast["t2.libration_rad"][:, at], ("phi", "theta", "psi"), strict=True):
        out.add("libration", mpmath.sin(mpmath.mpf(float(ours)) - exact[f"t2_{name}_rad"]))


def _legs(out: _Largest, fast: Any, exact: Any, at: int) -> None:
    """Delays of both legs."""
    for leg in ("uplink", "downlink"):
        for body in BODIES:
            theirs = exact[f"{leg}_{body}_gravity_s"]
            out.add(f"gravity, {body}", mpmath.mpf(float(fast[f"{leg}.{body}_s"][at])) - theirs)
        angle = mpmath.mpf(float(fast[f"{leg}.elevation_deg"][at])) - exact[f"{leg}_elevation_deg"]
        out.add("elevation", mpmath.radians(angle))
        if f"{leg}.troposphere_s" in fast:
            air = mpmath.mpf(float(fast[f"{leg}.troposphere_s"][at]))
            out.add("troposphere", air - exact[f"{leg}_troposphere_s"])
