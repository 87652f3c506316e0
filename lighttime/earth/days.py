"""Days of UTC as spans of TT: between two midnights Earth orientation is one smooth piece."""

from __future__ import annotations

from functools import cache

import numpy as np
from numpy.typing import NDArray

from lighttime.constants import MJD_ZERO
from lighttime.timescales.scales import tai_to_tt, utc_to_tai
from lighttime.vectors import Array

Index = NDArray[np.int64]

FIRST_MJD, LAST_MJD = 36934, 88068
"""1960-01-01 and 2100-01-01, between which UTC is known."""


class UtcDays:
    """Spans from midnight to midnight of UTC, numbered by the modified Julian date."""

    def locate(self, tt1: Array, tt2: Array) -> tuple[Index, Array]:
        """See `piecewise.Spans`."""
        start1, start2 = _midnights()
        number = np.floor((tt1 - MJD_ZERO) + tt2).astype(np.int64) - FIRST_MJD
        number = np.clip(number, 0, LAST_MJD - FIRST_MJD - 1)  # UTC was checked on the way in
        # TT is ahead by 33 s to some minutes: the day has perhaps not yet begun
        number = number - ((tt1 - start1[number]) + (tt2 - start2[number]) < 0.0)
        number = np.maximum(number, 0)
        since = (tt1 - start1[number]) + (tt2 - start2[number])
        length = (start1[number + 1] - start1[number]) + (start2[number + 1] - start2[number])
        return number + FIRST_MJD, 2.0 * since / length - 1.0

    def instants(self, number: Index, x: Array) -> tuple[Array, Array]:
        """See `piecewise.Spans`."""
        start1, start2 = (a[:, None] for a in _starts(number - FIRST_MJD))
        end1, end2 = (a[:, None] for a in _starts(number - FIRST_MJD + 1))
        length = (end1 - start1) + (end2 - start2)
        return start1 + np.zeros_like(length * x), start2 + 0.5 * length * (1.0 + x)


@cache
def _midnights() -> tuple[Array, Array]:
    """0h UTC of every day from `FIRST_MJD` to `LAST_MJD`, as TT in two parts."""
    mjd = np.arange(FIRST_MJD, LAST_MJD, dtype=float)
    tt1, tt2 = tai_to_tt(*utc_to_tai(MJD_ZERO + mjd, np.zeros_like(mjd)))
    tt1, tt2 = np.append(tt1, tt1[-1] + 1.0), np.append(tt2, tt2[-1])
    tt1.flags.writeable = tt2.flags.writeable = False
    return tt1, tt2


def _starts(index: Index) -> tuple[Array, Array]:
    start1, start2 = _midnights()
    return start1[index], start2[index]
