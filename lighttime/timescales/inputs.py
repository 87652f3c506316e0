"""What the functions of this room take: Julian dates in two parts, places, the Earth's rotation."""

from __future__ import annotations

from typing import Any, Protocol

import numpy as np
from numpy.typing import ArrayLike

from lighttime.errors import InputError
from lighttime.timescales.twopart import Pair, pair

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


class Relation(Protocol):
    """Anything that knows TDB - TT and TCB - TCL: a `TimeEphemeris`."""

    def tdb_minus_tt(self, tdb1: Any, tdb2: Any, ut1_fraction: Any = 0.0, xyz_m: Any = None) -> Any:
        """TDB - TT at a place on the Earth, s."""

    def tcb_minus_tcl_periodic(self, tdb1: Any, tdb2: Any) -> Any:
        """TCB - TCL at the centre of the Moon, less its mean rate, s."""


def date_pair(name: str, jd1: ArrayLike, jd2: ArrayLike) -> Pair:
    """A Julian date handed in, as a pair; refused when not finite or of two shapes."""
    if not (np.all(np.isfinite(jd1)) and np.all(np.isfinite(jd2))):
        raise InputError(name, (jd1, jd2), "finite Julian dates in two parts")
    try:
        return pair(jd1, jd2)
    except ValueError:
        shapes = f"{np.shape(jd1)} and {np.shape(jd2)}"
        raise InputError(f"shapes of {name}", shapes, "two that broadcast to one") from None
