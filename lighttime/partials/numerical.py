"""Derivatives by a parameter of one's own: whatever changes a model."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from lighttime.answer import RoundTrip
from lighttime.errors import InputError
from lighttime.model import BLOCK, Model
from lighttime.query import Query
from lighttime.vectors import Array

__all__ = ["Parameter"]

NOISE_S = 2.0e-15
"""What the arithmetic leaves in a range."""

ENOUGH = 1.0e-6
"""The two differences are to agree to this, as a fraction of the largest of them."""

TRIES = 8


@dataclass(frozen=True)
class Parameter:
    """A parameter of one's own, differentiated numerically.

    Parameters
    ----------
    name : str
    change : callable
        From a `Model` and an amount to the model with the parameter changed by that amount.
    step : float
        An amount to begin with: one that changes the range by nanoseconds or more.

    Raises
    ------
    InputError
        If the step is not a positive number.

    Examples
    --------
    >>> import dataclasses
    >>> import lighttime as lt
    >>> def stiffer(model, amount):
    ...     return dataclasses.replace(model, moon_h2=model.moon_h2 + amount)
    >>> hilltop = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
    >>> answer = lt.round_trip("2020-03-01T19:00:00", hilltop, lt.reflector("Apollo 15"))
    >>> mine = answer.partials([lt.Parameter("mine", stiffer, step=0.01), "h2_moon"])
    >>> bool(abs(mine["mine"] / mine["h2_moon"] - 1.0) < 1e-5)
    True
    """

    name: str
    change: Callable[[Model, float], Model]
    step: float

    def __post_init__(self) -> None:
        if not (np.isfinite(self.step) and self.step > 0.0):
            raise InputError(f"step of {self.name}", self.step, "a positive number")

    def slope(self, model: Model, query: Query) -> tuple[Array, str]:
        """Derivative of the flat round trips, and a word on how good it is.

        Central differences with a step and with half of it. If they disagree by more than the
        arithmetic explains, the step is too large, and a tenth of it is tried; if they drown in
        the arithmetic, ten times as much.

        Raises
        ------
        InputError
            If no step is found with which the two differences agree to a millionth.
        """
        step, worst = self.step, np.inf
        for _ in range(TRIES):
            whole = self._difference(model, query, step)
            half = self._difference(model, query, 0.5 * step)
            size = float(np.max(np.abs(half), initial=0.0))
            apart = float(np.max(np.abs(whole - half), initial=0.0))
            noise = NOISE_S / step
            if apart <= ENOUGH * size or (size <= noise and apart <= noise):
                share = apart / size if size else 0.0
                note = (
                    f"numerical: central differences with steps of {step:g} and {0.5 * step:g} "
                    f"agree to {share:.0e}"
                )
                return (4.0 * half - whole) / 3.0, note
            worst = min(worst, apart / size) if size else worst
            step *= 10.0 if apart <= 10.0 * noise else 0.1
        raise InputError(
            f"step of {self.name}",
            self.step,
            "one for which central differences of the range agree with those of half the step to "
            f"{ENOUGH:g} (the best of {TRIES} tried agree to {worst:.0e})",
        )

    def _difference(self, model: Model, query: Query, step: float) -> Array:
        (ahead, ahead_low), (behind, behind_low) = (
            _ranges(self.change(model, amount), query, self.name) for amount in (step, -step)
        )
        return ((ahead - behind) + (ahead_low - behind_low)) / (2.0 * step)


def _ranges(model: Model, query: Query, name: str) -> tuple[Array, Array]:
    if not isinstance(model, Model):
        raise InputError(f"change of {name}", model, "a function that gives a Model")
    seconds, low = np.empty(query.size), np.empty(query.size)
    for index, part in query.blocks(BLOCK):
        answer = RoundTrip.of(model, part, model.solve(part))
        seconds[index], low[index] = answer.seconds, answer.seconds_low
    return seconds, low
