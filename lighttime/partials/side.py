"""One leg of a solved block with the derivatives at its ends."""

from __future__ import annotations

from dataclasses import dataclass

from lighttime.partials.leg import LegSlopes
from lighttime.partials.reflector_end import ReflectorEnd
from lighttime.partials.station_end import StationEnd
from lighttime.path.legs import Leg


@dataclass(frozen=True, eq=False)
class Side:
    """The way up, or the way down.

    Attributes
    ----------
    leg : Leg
    slopes : LegSlopes
    station : StationEnd or None
        None where the end is no `Station`.
    reflector : ReflectorEnd or None
        None where the end is no `Reflector`.
    """

    leg: Leg
    slopes: LegSlopes
    station: StationEnd | None
    reflector: ReflectorEnd | None
