"""UT1, by a series of Earth orientation."""

from __future__ import annotations

from numpy.typing import ArrayLike

from lighttime.errors import InputError
from lighttime.timescales.inputs import Rotation, TwoPart, date_pair
from lighttime.timescales.twopart import (
    Array,
    Pair,
    add,
    day_and_fraction,
    divide,
    pair,
    plain,
    subtract,
)
from lighttime.timescales.uniform import DAY_PAIR, TT_MINUS_TAI_D
from lighttime.timescales.utc import utc_to_tai


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
    return divide(pair(rotation.at(*plain(tai)).ut1_tai_s), DAY_PAIR)


def ut1_day_fraction(tt: Pair, earth_orientation: Rotation | None) -> Array:
    """The fraction of the UT1 day since midnight at an instant of TT."""
    tai = subtract(tt, TT_MINUS_TAI_D)
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
    tai = date_pair("tai", tai1, tai2)
    return plain(add(tai, _ut1_minus_tai_days(tai, _rotation(earth_orientation))))


def ut1_to_tai(
    ut1_1: ArrayLike, ut1_2: ArrayLike, earth_orientation: Rotation | None = None
) -> TwoPart:
    """TAI from UT1, the inverse of `tai_to_ut1`, with the same arguments.

    UT1 - TAI changes by less than 1e-7 of time: from a start within a second three steps
    leave less than 1e-20 s.
    """
    ut1 = date_pair("ut1", ut1_1, ut1_2)
    rotation = _rotation(earth_orientation)
    tai = pair(*utc_to_tai(*ut1))  # UTC is kept within 0.9 s of UT1
    for _ in range(3):
        tai = subtract(ut1, _ut1_minus_tai_days(tai, rotation))
    return plain(tai)
