"""Ranges that are no ranges: the wrong unit, one leg for two, something else altogether."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Final

import numpy as np

from lighttime.constants import SPEED_OF_LIGHT
from lighttime.vectors import Array

TOLERANCE: Final = 0.002
"""Part of a range that a choice on our list may change. (1 km/s of range rate times some 1000 s
is 0.3 %; the distance of the Moon changes by 7 % on each side.)"""

FACTORS: Final[Mapping[float, str]] = {
    1e3: "milliseconds",
    1e6: "microseconds",
    1e9: "nanoseconds",
    1e12: "picoseconds",
    1e15: "femtoseconds",
    1e-3: "thousands of seconds, or ms where us are meant, us where ns are meant, ...",
    1.0 / 86400.0: "days",
    0.5: "half of the round trip, or one leg (half_round_trip, uplink, downlink)",
    2.0: "the round trip where one leg or half of it is meant",
    SPEED_OF_LIGHT: "metres of the whole path",
    SPEED_OF_LIGHT / 2.0: "metres of distance, one way (half_round_trip_m)",
    SPEED_OF_LIGHT / 1e3: "kilometres of the whole path",
    SPEED_OF_LIGHT / 2e3: "kilometres of distance, one way (half_round_trip_km)",
    5e2: "half of the round trip in milliseconds",
    5e5: "half of the round trip in microseconds",
    5e8: "half of the round trip in nanoseconds",
    5e11: "half of the round trip in picoseconds",
}
"""What a ratio of the other's number to ours tells of its unit."""


def unit_of(ratio: float) -> str | None:
    """The unit that a number is in, from its ratio to what it should be in seconds.

    Examples
    --------
    >>> unit_of(1.0000003e12)
    'picoseconds'
    """
    for factor, unit in FACTORS.items():
        if abs(ratio / factor - 1.0) < TOLERANCE:
            return unit
    return None


def misread(theirs_s: Array, ours_s: Array) -> dict[int, str]:
    """Rows that cannot be what they are said to be, and what they seem to be."""
    ratio = theirs_s / ours_s
    wrong = {}
    for i in np.flatnonzero(np.abs(ratio - 1.0) > TOLERANCE):
        unit = unit_of(float(ratio[i]))
        seems = (
            f"is it in {unit}?"
            if unit is not None
            else "another instant, station or array, or no range at all"
        )
        wrong[int(i)] = (
            f"{theirs_s[i]:.9g} s is {ratio[i]:.6g} times what our model gives "
            f"({ours_s[i]:.9f} s): {seems}"
        )
    return wrong
