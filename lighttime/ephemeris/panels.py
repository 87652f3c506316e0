"""The solar system at the nodes of equal panels of time, by one matrix product for each body.

Where the records of a body begin with a panel and are whole panels long, its nodes are at the
same places in every record: one product of coefficients and polynomials gives them all.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.polynomial import chebyshev
from numpy.typing import NDArray

from lighttime.constants import DAY
from lighttime.ephemeris.bodies import Ephemeris
from lighttime.ephemeris.chebyshev import Records
from lighttime.ephemeris.time_rate import State

Array = NDArray[np.float64]

LONGEST_DAYS = 4.0
"""In four days the Moon goes a seventh of its way: a series of degree 14 holds it."""

TOGETHER = 1024
"""Panels evaluated together: some 20 MB."""


@dataclass(frozen=True)
class Panels:
    """Equal panels of time, TDB.

    Parameters
    ----------
    start_jd, days : float
        Beginning of the first and length of each; whole or half, and whole, numbers.
    count : int
    """

    start_jd: float
    days: float
    count: int

    @staticmethod
    def over(ephemeris: Ephemeris, first_jd: float, last_jd: float) -> Panels:
        """The fewest panels from before `first_jd` to after `last_jd`.

        The seams of the Moon's records, the shortest, are seams of panels, so that what is
        integrated is smooth in each.
        """
        moon = ephemeris.moon_from_earth
        days = moon.span_days
        while days > LONGEST_DAYS and days % 2.0 == 0.0:
            days /= 2.0
        begin, end = ephemeris.coverage
        if days % 1.0 or days > LONGEST_DAYS:
            days = 1.0
        zero = moon.start_jd
        lowest, highest = np.ceil((begin - zero) / days), np.floor((end - zero) / days)
        low = max(np.floor((first_jd - zero) / days), lowest)
        high = min(np.ceil((last_jd - zero) / days), highest)
        return Panels(zero + low * days, days, int(high - low))

    def blocks(self) -> Iterator[Panels]:
        """The same panels, `TOGETHER` at a time."""
        for k in range(0, self.count, TOGETHER):
            count = min(TOGETHER, self.count - k)
            yield Panels(self.start_jd + k * self.days, self.days, count)


def states(ephemeris: Ephemeris, panels: Panels, x: Array) -> dict[str, State]:
    """All bodies of an ephemeris at the places `x` (-1 to 1) of every panel.

    Returns
    -------
    dict of str to State
        Arrays (3, panels, len(x)).
    """
    found = {name: _sampled(records, panels, x) for name, records in ephemeris.barycentric.items()}
    both = found.pop("earth_moon_barycentre")
    moon = _sampled(ephemeris.moon_from_earth, panels, x)
    offset = ephemeris.earth_from_barycentre
    if isinstance(offset, Records):
        from_both = _sampled(offset, panels, x)
    else:
        from_both = State(offset * moon.position, offset * moon.velocity)
    earth = _sum(both, from_both)
    return found | {"earth": earth, "moon": _sum(earth, moon)}


def _sum(a: State, b: State) -> State:
    return State(a.position + b.position, a.velocity + b.velocity)


def _sampled(records: Records, panels: Panels, x: Array) -> State:
    of_record = records.span_days / panels.days
    ahead = (panels.start_jd - records.start_jd) / panels.days
    if of_record % 1.0 or ahead % 1.0:
        return _one_by_one(records, panels, x)
    each, skipped = int(of_record), int(ahead)
    first, last = skipped // each, -(-(skipped + panels.count) // each)
    terms = records.coefficients.shape[2]
    inside = ((2.0 * np.arange(each)[:, None] + 1.0 + x) / each - 1.0).ravel()
    slopes = chebyshev.chebder(np.eye(terms)) * (2.0 / (records.span_days * DAY))
    value = chebyshev.chebvander(inside, terms - 1)
    rate = chebyshev.chebvander(inside, max(terms - 2, 0)) @ slopes
    rows = np.ascontiguousarray(np.moveaxis(records.coefficients[first:last], 1, 0))
    some = slice(skipped - first * each, skipped - first * each + panels.count)

    def at(basis: NDArray[Any]) -> Array:
        samples: Array = (rows @ basis.T).reshape(3, -1, x.size)[:, some] * records.scale
        return samples

    return State(at(value), at(rate))


def _one_by_one(records: Records, panels: Panels, x: Array) -> State:
    """Where the seams of records and panels do not go together."""
    middle = panels.start_jd + (np.arange(panels.count)[:, None] + 0.5) * panels.days
    place = records.locate(middle, 0.5 * panels.days * x)
    return State(records.value(place), records.rate(place))
