"""The light-time equation for one leg, solved for the event that is not known.

Between a known event a and an unknown event b on the other end,

    sense * (t_b - t_a) = |x_b(t_b) - x_a| / c + delay,     sense = +1 (b later) or -1 (earlier)

Instants are seconds after the tagged instant, positions are in the working frame. Newton's
method with the velocity of the unknown end converges quadratically; an end that is predicted
to some nanoseconds is evaluated once.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from typing import Any, Protocol, TypeVar

import numpy as np
from numpy.typing import ArrayLike

from lighttime.constants import SPEED_OF_LIGHT
from lighttime.errors import ConvergenceError
from lighttime.vectors import Array, dot, norm

ACCEPTED_STEP_S = 1.0e-7
"""A last step below this is taken along the velocity; what it neglects (the change of TDB - TT,
5e-10 of the step, that of the delays, and the curvature of the motion) stays below 1e-16 s."""

SETTLED_S = 1.0e-12
"""A step below this is the last one, even over a place where the motion jumps: within a jump of
0.14 mm, 0.5 ps, the equation may have two solutions or none."""

MOST_ITERATIONS = 12


class Event(Protocol):
    """An end of the ray at an instant."""

    @property
    def seconds(self) -> Array:
        """TDB seconds after the tagged instant, shape (n,)."""

    @property
    def position(self) -> Array:
        """m, in the working frame, shape (3, n)."""

    @property
    def velocity(self) -> Array:
        """m/s, BCRS, shape (3, n)."""


E = TypeVar("E", bound=Any)


@dataclass(frozen=True, eq=False)
class Solved:
    """One leg: both events, the ray between them, and how the solution came about.

    Attributes
    ----------
    known, found : Event
        The event that was given and the one that was found.
    direction : ndarray, shape (3, n)
        Unit vector from the known to the found event.
    distance : ndarray, shape (n,)
        m.
    delays : mapping of str to ndarray, shape (n,)
        What delays the light beyond distance over c, by name, s.
    iterations : int
        Evaluations of the unknown end.
    last_step_s : float
        The largest step that was taken last: a measure of convergence.
    """

    known: Any
    found: Any
    direction: Array
    distance: Array
    delays: Mapping[str, Array]
    iterations: int
    last_step_s: float

    @property
    def seconds(self) -> Array:
        """Duration of the leg, TDB seconds."""
        return self.distance / SPEED_OF_LIGHT + sum(self.delays.values())


def solve_leg(
    known: Event,
    end: Callable[[Array], E],
    sense: int,
    guess_s: ArrayLike,
    delays: Callable[[Any, E], Mapping[str, Array]] | None = None,
    jumps: Callable[[Array, Array], bool] | None = None,
) -> Solved:
    """Find the event on the other end that the light joins to a known one.

    Parameters
    ----------
    known : Event
        The event that is given.
    end : callable
        From seconds after the tagged instant, shape (n,), to the event there.
    sense : {+1, -1}
        +1 if the unknown event is the later one.
    guess_s : float or array
        A first guess of the light time, s.
    delays : callable, optional
        From (known, unknown) event to the delays beyond geometry, by name, s.
    jumps : callable, optional
        Whether the motion of the unknown end jumps between two instants, as it does where two
        records of an ephemeris meet: no step is then taken along the velocity.

    Raises
    ------
    ConvergenceError
        If the equation is not solved to `ACCEPTED_STEP_S`.
    """
    seconds = known.seconds + sense * np.broadcast_to(guess_s, np.shape(known.seconds))
    for iteration in range(1, MOST_ITERATIONS + 1):
        event = end(seconds)
        separation = event.position - known.position
        distance = norm(separation)
        late = {} if delays is None else delays(known, event)
        travel = distance / SPEED_OF_LIGHT + sum(late.values())
        miss = sense * (seconds - known.seconds) - travel
        slope = sense - dot(separation, event.velocity) / distance / SPEED_OF_LIGHT
        step = -miss / slope
        largest = float(np.max(np.abs(step), initial=0.0))
        smooth = jumps is None or largest <= SETTLED_S or not jumps(seconds, seconds + step)
        if largest <= ACCEPTED_STEP_S and smooth:
            event = moved(event, step)
            separation = event.position - known.position
            distance = norm(separation)
            ray = separation / distance
            return Solved(known, event, ray, distance, late, iteration, largest)
        seconds = seconds + step
    raise ConvergenceError(
        f"the light-time equation is not solved after {MOST_ITERATIONS} evaluations: "
        f"the last step was {largest:.3g} s, allowed: {ACCEPTED_STEP_S:g} s"
    )


def moved(event: E, step: Array) -> E:
    """The event a moment later, carried along its velocity."""
    moved_event: E = replace(
        event, seconds=event.seconds + step, position=event.position + event.velocity * step
    )
    return moved_event
