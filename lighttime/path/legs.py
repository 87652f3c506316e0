"""Both legs of a round trip, solved from whichever event is tagged.

t1 is the transmission, t2 the bounce and t3 the reception; a transponder that answers after a
while makes the bounce two events, t2 and t2 + turnaround.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any, Literal, Protocol

from lighttime.constants import SPEED_OF_LIGHT
from lighttime.path.solver import Solved, solve_leg
from lighttime.vectors import Array, dot

c = SPEED_OF_LIGHT

Tag = Literal["transmit", "bounce", "receive"]
Delays = Callable[[Any, Any], Mapping[str, Array]]


class End(Protocol):
    """Something that moves, at either end of the ray."""

    def at(self, seconds: Array) -> Any:
        """The event there, `seconds` after the tagged instant."""


@dataclass(frozen=True, eq=False)
class Leg:
    """A solved leg between an event near the Earth and one far away.

    Attributes
    ----------
    near, far : Event
    direction : ndarray, shape (3, n)
        Unit vector along which the light travels, BCRS.
    distance : ndarray, shape (n,)
        m, BCRS.
    delays : mapping of str to ndarray
        Beyond geometry, s.
    iterations : int
    last_step_s : float
        See `Solved`.
    """

    near: Any
    far: Any
    direction: Array
    distance: Array
    delays: Mapping[str, Array]
    iterations: int
    last_step_s: float

    @property
    def geometry(self) -> Array:
        """Distance over c, s."""
        return self.distance / c

    @property
    def seconds(self) -> Array:
        """Duration of the leg, TDB seconds."""
        return self.geometry + sum(self.delays.values())


@dataclass(frozen=True, eq=False)
class Legs:
    """The way up and the way down."""

    up: Leg
    down: Leg
    tag: Tag

    def response(self) -> tuple[Array, Array]:
        """What one second more on the way up, and one on the way down, add to the round trip.

        Differentiate the two light-time equations with the tagged event held: the others move,
        and the ends move with them. Close to 1, but for v/c.

        Returns
        -------
        up, down : ndarray, shape (n,)
        """
        up, down = self.up, self.down
        leaves = 1.0 - dot(up.direction, up.near.velocity) / c
        arrives = 1.0 - dot(up.direction, up.far.velocity) / c
        departs = 1.0 - dot(down.direction, down.far.velocity) / c
        returns = 1.0 - dot(down.direction, down.near.velocity) / c
        if self.tag == "transmit":
            return departs / (arrives * returns), 1.0 / returns
        if self.tag == "bounce":
            return 1.0 / leaves, 1.0 / returns
        return 1.0 / leaves, arrives / (leaves * departs)


def solve_round_trip(
    near: Any,
    far: End,
    tagged: Array,
    tag: Tag,
    delays_up: Delays,
    delays_down: Delays,
    guess_s: float,
    turnaround_s: float = 0.0,
) -> Legs:
    """Solve both legs.

    Parameters
    ----------
    near, far : End
        Station and reflector, or what stands for them. If `near` can predict itself from a
        known event (`predicted_from`) the second leg is begun from there.
    tagged : ndarray, shape (n,)
        Seconds of the tagged event after the tagged instant: zeros.
    tag : {"transmit", "bounce", "receive"}
    delays_up, delays_down : callable
        From (near, far) event to the delays of that leg.
    guess_s : float
        A first guess of the light time of one leg.
    turnaround_s : float
        Between arrival and departure at the far end, TDB seconds.
    """
    down_from_far = _known_far(delays_down)
    up_from_far = _known_far(delays_up)
    if tag == "bounce":
        arrival = far.at(tagged)
        up = solve_leg(arrival, near.at, -1, guess_s, up_from_far, _jumps(near))
        departure = _after(far, arrival, turnaround_s)
        guess = _predict(near, up.found, departure, +1, up.seconds)
        down = solve_leg(departure, near.at, +1, guess, down_from_far, _jumps(near))
        return Legs(_leg(up, True, True), _leg(down, True, False), tag)
    if tag == "transmit":
        start = near.at(tagged)
        guess = _rough(far, start, +1, guess_s)
        up = solve_leg(start, far.at, +1, guess, delays_up, _jumps(far))
        departure = _after(far, up.found, turnaround_s)
        guess = _predict(near, up.known, departure, +1, up.seconds)
        down = solve_leg(departure, near.at, +1, guess, down_from_far, _jumps(near))
        return Legs(_leg(up, False, True), _leg(down, True, False), tag)
    stop = near.at(tagged)
    guess = _rough(far, stop, -1, guess_s)
    down = solve_leg(stop, far.at, -1, guess, delays_down, _jumps(far))
    arrival = _after(far, down.found, -turnaround_s)
    guess = _predict(near, down.known, arrival, -1, down.seconds)
    up = solve_leg(arrival, near.at, -1, guess, up_from_far, _jumps(near))
    return Legs(_leg(up, True, True), _leg(down, False, False), tag)


def solve_one_way(
    near: Any,
    far: Any,
    tagged: Array,
    known_near: bool,
    sense: int,
    upward: bool,
    delays: Delays,
    guess_s: float,
) -> Leg:
    """Solve a single leg, from the near (`known_near`) or the far end, forwards or backwards."""
    if known_near:
        found = solve_leg(near.at(tagged), far.at, sense, guess_s, delays, _jumps(far))
        return _leg(found, False, upward)
    found = solve_leg(far.at(tagged), near.at, sense, guess_s, _known_far(delays), _jumps(near))
    return _leg(found, True, upward)


def _jumps(end: Any) -> Callable[[Array, Array], bool] | None:
    """Whether the motion of an end jumps between two instants, if it can say so."""
    jumps: Callable[[Array, Array], bool] | None = getattr(end, "jumps", None)
    return jumps


def _after(far: End, event: Any, seconds: float) -> Any:
    return event if seconds == 0.0 else far.at(event.seconds + seconds)


def _rough(far: Any, known: Any, sense: int, guess_s: float) -> Any:
    """Light time to the far end as it is known roughly, if it knows itself so."""
    if not hasattr(far, "rough"):
        return guess_s
    return solve_leg(known, far.rough, sense, guess_s).seconds


def _predict(near: Any, known: Any, far_event: Any, sense: int, guess: Array) -> Array:
    """Light time from the far event to the near end as it is predicted from a known event."""
    if not hasattr(near, "predicted_from"):
        return guess
    return solve_leg(far_event, near.predicted_from(known), sense, guess).seconds


def _known_far(delays: Delays) -> Delays:
    return lambda known, found: delays(found, known)


def _leg(solved: Solved, known_is_far: bool, upward: bool) -> Leg:
    """A solved leg told by place (near, far) instead of by what was known first."""
    if known_is_far:
        near, far, outward = solved.found, solved.known, -solved.direction
    else:
        near, far, outward = solved.known, solved.found, solved.direction
    ray = outward if upward else -outward
    return Leg(
        near, far, ray, solved.distance, solved.delays, solved.iterations, solved.last_step_s
    )
