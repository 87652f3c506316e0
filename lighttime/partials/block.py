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
from lighttime.partials.leg import LegSlopes, leg_slopes
from lighttime.partials.reflector_end import ReflectorEnd
from lighttime.partials.station_end import StationEnd
from lighttime.path.legs import Leg, Legs
from lighttime.query import Query
from lighttime.vectors import Array


@dataclass(frozen=True, eq=False)
class Side:
    """One leg: its slopes, its ends, and what a second more on it adds to the round trip."""

    leg: Leg
    slopes: LegSlopes
    response: Array
    station: StationEnd | None
    reflector: ReflectorEnd | None


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
        up, down = (
            self._side(leg, response, upward)
            for leg, response, upward in zip(
                (self.legs.up, self.legs.down), self.legs.response(), (True, False), strict=True
            )
        )
        return up, down

    def _side(self, leg: Leg, response: Array, upward: bool) -> Side:
        model, query = self.model, self.query
        omit: Any = model.omit
        slopes = leg_slopes(model, query, leg, upward)
        station = reflector = None
        if isinstance(query.station, Station):
            clock = 0 if "clock" in omit else 1 if upward else -1
            station = StationEnd(query.station, leg.near, slopes, clock, omit)
        if isinstance(query.reflector, Reflector):
            reflector = ReflectorEnd(model, query.reflector, leg.far, slopes)
        return Side(leg, slopes, response, station, reflector)

    def total(self, of_side: Callable[[Side], Array]) -> Array:
        """The round trip's derivative from that of each leg with the events held."""
        up, down = self.sides
        return up.response * of_side(up) + down.response * of_side(down)

    def clock(self, of_end: Callable[[StationEnd], Array]) -> Array:
        """What the clock adds: no leg is longer by it, and so nothing responds."""
        up, down = self.sides
        assert up.station is not None
        assert down.station is not None
        return of_end(up.station) + of_end(down.station)
