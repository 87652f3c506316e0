"""Ends of the ray that others bring: anything with a position in the BCRS."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Protocol, runtime_checkable

import numpy as np

from lighttime.constants import DAY, SPEED_OF_LIGHT
from lighttime.ephemeris.frame import EarthFrame
from lighttime.errors import InputError
from lighttime.timescales import Epoch
from lighttime.vectors import Array, norm


@runtime_checkable
class Trajectory(Protocol):
    """Anything that can say where it is: a lander, an orbiter, a planet.

    One method is enough. It is asked for many instants at once.
    """

    def bcrs(self, when: Epoch) -> Any:
        """Position, or position and velocity, in the BCRS.

        Parameters
        ----------
        when : Epoch
            TDB, shape (n,).

        Returns
        -------
        position : array, shape (n, 3)
            Metres from the barycentre of the solar system, axes of the ICRS; alone, or as
            the first of a pair with
        velocity : array, shape (n, 3)
            m/s. Without it the velocity is found from positions one second apart.
        """


@dataclass(frozen=True, eq=False)
class TrajectoryEvent:
    """Something at an instant, in the working frame; see `solver.Event`."""

    seconds: Array
    position: Array
    velocity: Array


@dataclass(frozen=True, eq=False)
class TrajectoryMotion:
    """A `Trajectory` as an end of the ray, around one tagged instant.

    Notes
    -----
    Barycentric positions in float64 are a grid of 30 micrometres, 0.1 ps per leg: no better
    can be had of a trajectory that is given so.
    """

    trajectory: Trajectory
    frame: EarthFrame
    name: str

    def at(self, seconds: Array) -> TrajectoryEvent:
        """The event `seconds` (TDB, shape (n,)) after the tagged instant."""
        answer = self._ask(seconds)
        if isinstance(answer, tuple):
            position, velocity = (self._checked(a, seconds) for a in answer)
        else:
            position = self._checked(answer, seconds)
            before, after = (self._checked(self._ask(seconds + d), seconds) for d in (-0.5, 0.5))
            velocity = after - before
        fastest = float(np.max(norm(velocity), initial=0.0))
        if not fastest < SPEED_OF_LIGHT:
            raise InputError(f"velocity of {self.name}", fastest, "below the speed of light, m/s")
        return TrajectoryEvent(seconds, position - self.frame.origin[0], velocity)

    def _ask(self, seconds: Array) -> Any:
        when = Epoch(self.frame.tdb1, self.frame.tdb2 + seconds / DAY, "tdb")
        return self.trajectory.bcrs(when)

    def _checked(self, value: Any, seconds: Array) -> Array:
        array = np.asarray(value, dtype=float)
        if array.shape != (seconds.size, 3) or not np.all(np.isfinite(array)):
            what = f"an array of shape {array.shape}"
            raise InputError(
                f"bcrs() of {self.name}", what, f"finite numbers of shape ({seconds.size}, 3)"
            )
        return array.T
