"""The five numbers that say how the Earth is turned beyond what models predict."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any


@dataclass(frozen=True)
class PoleAndUT1:
    """UT1 and the pole at some instants, or their sigmas, or their rates per second of TAI.

    Every attribute is a float or an array of the shape of the instants. The effects of ocean
    tides and of libration with periods of a day and less are not contained.
    """

    ut1_tai_s: Any
    """UT1 - TAI, s."""
    xp_rad: Any
    """Coordinate x_p of the pole in the ITRF, rad."""
    yp_rad: Any
    """Coordinate y_p of the pole in the ITRF, rad."""
    dx_rad: Any
    """Correction dX to the pole of IAU 2006/2000A in the GCRS, rad."""
    dy_rad: Any
    """Correction dY to the pole of IAU 2006/2000A in the GCRS, rad."""
