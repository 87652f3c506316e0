"""What remains: how large it is, whether it is noise, and whether it is rounding."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from math import inf, sqrt

import numpy as np
from numpy.typing import NDArray

from lighttime.crosscheck.chance import of_any, tail
from lighttime.vectors import Array

STRUCTURED = 1e-3
"""Probability by chance below which what remains is said to have structure."""

APART = 8.0
"""A range so many robust sigmas from the others stands apart."""

MAD_OF_NORMAL = 1.482602218505602
"""Standard deviation over median absolute deviation of a normal distribution."""

OURS_PS = 0.001
"""What our own arithmetic may leave."""


@dataclass(frozen=True)
class Rest:
    """What the findings do not explain.

    Attributes
    ----------
    rms_ps : float
    largest_ps : float
    correlation : float
        Of neighbours, in the order in which it is largest.
    order : str
        That order: time, hour angle, elevation, phase of the Moon.
    chance : float
        Probability that noise shows as much.
    """

    rms_ps: float
    largest_ps: float
    correlation: float
    order: str
    chance: float

    @property
    def has_structure(self) -> bool:
        """Whether it is more than noise."""
        return self.chance < STRUCTURED


def rest(residual: Array, sigma: Array, orders: Mapping[str, Array]) -> Rest:
    """Describe what remains.

    Neighbours in time, hour angle, elevation or phase are compared: where they agree better than
    noise does, something else is in the ranges.

    Parameters
    ----------
    residual, sigma : ndarray, shape (n,)
        ps.
    orders : mapping of str to ndarray
        Quantities by which the ranges can be put in order.
    """
    rms = float(np.sqrt(np.mean(residual**2)))
    largest = float(np.max(np.abs(residual)))
    scaled = (residual / sigma) - np.mean(residual / sigma)
    total, n = float(scaled @ scaled), len(scaled)
    if n < 8 or total == 0.0:
        return Rest(rms, largest, 0.0, "time", 1.0)
    best = (0.0, "time", 1.0)
    for name, values in orders.items():
        ordered = scaled[np.argsort(values, kind="stable")]
        correlation = float(ordered[1:] @ ordered[:-1]) / total
        chance = tail((correlation + 1.0 / n) * sqrt(n), inf)
        if chance < best[2]:
            best = (correlation, name, chance)
    return Rest(rms, largest, best[0], best[1], of_any(best[2], len(orders)))


def standing_apart(residual: Array, sigma: Array) -> NDArray[np.bool_]:
    """Which rows are far from all the others: a mask, at most a twentieth of the rows."""
    scaled = residual / sigma
    centred = np.abs(scaled - np.median(scaled))
    robust = max(MAD_OF_NORMAL * float(np.median(centred)), 1.0)
    apart: NDArray[np.bool_] = centred > APART * robust
    if np.count_nonzero(apart) > len(residual) // 20:
        return np.zeros(len(residual), dtype=bool)
    return apart


# -- rounding --------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Rounding:
    """A way in which digits are lost, and the noise that it makes in a round trip, ps rms."""

    what: str
    least_ps: float
    most_ps: float


def roundings(last_digit_s: float, ps_per_us: float) -> tuple[Rounding, ...]:
    """Known losses of digits.

    Parameters
    ----------
    last_digit_s : float
        Of the ranges as they were given.
    ps_per_us : float
        What a microsecond of the epoch changes, rms.

    Notes
    -----
    A grid of spacing g makes a noise of g / sqrt(12). Barycentric coordinates (1.5e11 m) are a
    grid of 2^-15 m; three sums on the way to a distance, two ends and two legs make 0.05 to 0.2
    ps. A day fraction in [1/4, 1) is a grid of 5 or 10 ps in each of three instants. Days since
    the start of an ephemeris, 40 000, are a grid of 0.6 us, in which the Earth moves by 19 mm at
    each of three events. A Julian date in one number is a grid of 40 us.
    """
    grid = 1.0 / sqrt(12.0)
    digit = 1e12 * last_digit_s * grid
    date_ps = 40.2 * grid * ps_per_us
    return (
        Rounding("the last digit of the ranges as given", 0.7 * digit, 1.4 * digit),
        Rounding("barycentric coordinates in one float64 (a grid of 0.03 mm)", 0.03, 0.3),
        Rounding("instants held as a day fraction in one float64 (a grid of 5 to 10 ps)", 0.7, 8.0),
        Rounding(
            "records of the ephemeris found by days since its start in one float64 (a grid of "
            "0.6 us)",
            8.0,
            60.0,
        ),
        Rounding(
            "an epoch held as a Julian date in one float64 (a grid of 40 us)",
            0.5 * date_ps,
            2.0 * date_ps,
        ),
    )


def rounding_of(rms_ps: float, known: tuple[Rounding, ...]) -> tuple[Rounding, ...]:
    """Losses of digits that are of this size."""
    return tuple(r for r in known if r.least_ps <= rms_ps <= r.most_ps)
