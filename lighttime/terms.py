"""The names of the terms of a range, in the order in which they are told."""

from __future__ import annotations

from collections.abc import Iterable

from lighttime.errors import InputError, UnknownNameError

GRAVITY = ("sun_gravity", "earth_gravity", "moon_gravity", "planet_gravity")
STATION = (
    "solid_earth_tide",
    "pole_tide",
    "ocean_loading",
    "ocean_pole_tide",
    "atmosphere_loading",
    "residual_motion",
    "subdaily_rotation",
)
TERMS = (
    "geometry",
    *GRAVITY,
    "troposphere",
    *STATION,
    "lunar_tide",
    "station_contraction",
    "reflector_contraction",
    "clock",
)


def omitted(omit: Iterable[str], own: Iterable[str] = ()) -> frozenset[str]:
    """Check names of terms to leave out; `own` are those of a user's delay terms.

    Raises
    ------
    UnknownNameError
        For a name that is no term.
    InputError
        For ``"geometry"``, without which there is no range.
    """
    names = frozenset((omit,) if isinstance(omit, str) else omit)
    known = (*TERMS, *own)
    for name in sorted(names):
        if name not in known:
            raise UnknownNameError("omit", name, known[1:])
        if name == "geometry":
            raise InputError("omit", name, f"any of {', '.join(known[1:])}")
    return names
