"""A block of solved epochs with the derivatives that all parameters share."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from typing import Any

from lighttime.earth.station import Station
from lighttime.ephemeris.frame import EarthFrame
from lighttime.model import Model
from lighttime.moon.reflector import Reflector
from lighttime.partials.leg import leg_slopes
from lighttime.partials.motion import Motion
from lighttime.partials.reflector_end import ReflectorEnd
from lighttime.partials.side import Side
from lighttime.partials.station_end import StationEnd
from lighttime.path.legs import Leg, Legs
from lighttime.query import Query
from lighttime.vectors import Array


@dataclass(frozen=True, eq=False)
class Block:
    """A flat block of epochs.

    Parameters
    ----------
    model : Model
    query : Query
    frame : EarthFrame
        In which it was solved.
    legs : Legs
        Solved.
    """

    model: Model
    query: Query
    frame: EarthFrame
    legs: Legs

    @classmethod
    def of(cls, model: Model, query: Query) -> Block:
        """Solve a block."""
        return cls(model, query, *model.solve_in_frame(query))

    @cached_property
    def sides(self) -> tuple[Side, Side]:
        """The way up and the way down."""
        return self._side(self.legs.up, True), self._side(self.legs.down, False)

    def _side(self, leg: Leg, upward: bool) -> Side:
        model, query = self.model, self.query
        omit: Any = model.omit
        slopes = leg_slopes(model, query, leg, upward)
        station = reflector = None
        if isinstance(query.station, Station):
            clock = 0 if "clock" in omit else 1 if upward else -1
            station = StationEnd(query.station, leg.near, slopes, clock, omit)
        if isinstance(query.reflector, Reflector):
            reflector = ReflectorEnd(model, query.reflector, leg.far, slopes)
        return Side(leg, slopes, station, reflector)

    @cached_property
    def motion(self) -> Motion:
        """How fast the legs change."""
        return Motion.of(*self.sides)

    @cached_property
    def response(self) -> tuple[Array, Array]:
        """What a second more on either leg adds to the round trip."""
        return self.motion.response(self.legs.tag)

    def total(self, of_side: Callable[[Side], Array]) -> Array:
        """The round trip's derivative from that of each leg with the events held."""
        up, down = (of_side(side) * r for side, r in zip(self.sides, self.response, strict=True))
        return up + down

    def clock(self, of_end: Callable[[StationEnd], Array]) -> Array:
        """What the clock adds: no leg is longer by it, and so nothing responds."""
        up, down = self.sides
        assert up.station is not None
        assert down.station is not None
        return of_end(up.station) + of_end(down.station)
