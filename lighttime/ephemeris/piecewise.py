"""Slowly varying functions of time, kept as Chebyshev series for the spans that are asked often.

A function that costs a hundred microseconds an instant costs a tenth of one when it is read from
a series. A span of time gets its series when enough instants lie in it to repay the samples;
instants elsewhere are evaluated as they are. How much each series left out is measured when it
is built. Spans that were not used for long are dropped when there are too many.
"""

from __future__ import annotations

from collections import OrderedDict
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from threading import Lock
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from lighttime.ephemeris import fit
from lighttime.ephemeris.chebyshev import polynomials

Array = NDArray[np.float64]
Index = NDArray[np.int64]

SAMPLED_TOGETHER = 2048
"""So many samples at most are asked of the function in one call."""


class Spans(Protocol):
    """A way to cut time into spans."""

    def locate(self, tt1: Array, tt2: Array) -> tuple[Index, Array]:
        """The number of the span of each instant, and where in it: x from -1 to 1."""

    def instants(self, number: Index, x: Array) -> tuple[Array, Array]:
        """The inverse: instants (len(number), len(x)) in two parts."""


@dataclass(frozen=True)
class EqualSpans:
    """Spans of equal length, counted from a Julian date.

    Parameters
    ----------
    start_jd, days : float
        Whole or half numbers.
    """

    start_jd: float
    days: float

    def locate(self, tt1: Array, tt2: Array) -> tuple[Index, Array]:
        """See `Spans`."""
        whole = np.floor(tt1 - self.start_jd)
        rest = ((tt1 - self.start_jd) - whole) + tt2
        number = np.floor((whole + np.floor(rest)) / self.days)
        inside = (whole - (number + 0.5) * self.days) + rest
        return number.astype(np.int64), inside * (2.0 / self.days)

    def instants(self, number: Index, x: Array) -> tuple[Array, Array]:
        """See `Spans`."""
        middle = self.start_jd + (number[:, None] + 0.5) * self.days
        offset = 0.5 * self.days * x
        return middle + np.zeros_like(offset), np.zeros_like(middle) + offset


class PiecewiseSeries:
    """A vector-valued function of time, as it is or from series.

    Parameters
    ----------
    function : callable
        From instants (n,) in two parts to values (components, n).
    spans : Spans
    terms : int
        Of each series.
    most : int
        Spans that are kept at most.
    """

    def __init__(
        self, function: Callable[[Array, Array], Array], spans: Spans, terms: int, most: int
    ) -> None:
        self.function = function
        self.spans = spans
        self.terms = terms
        self.most = most
        self.built = 0
        self.truncation: Array | None = None
        self._series: OrderedDict[int, Array] = OrderedDict()
        self._lock = Lock()

    def worth(self, tt1: Array, tt2: Array, evaluations: int = 1) -> frozenset[int]:
        """The spans in which a series repays its samples.

        Parameters
        ----------
        tt1, tt2 : ndarray, shape (n,)
            All instants that are going to be asked.
        evaluations : int
            How often each is asked.
        """
        numbers, counts = np.unique(self.spans.locate(tt1, tt2)[0], return_counts=True)
        with self._lock:
            known = np.array([number in self._series for number in numbers.tolist()], dtype=bool)
        return frozenset(numbers[known | (evaluations * counts >= self.terms)].tolist())

    def at(self, tt1: Array, tt2: Array, worth: frozenset[int]) -> Array:
        """Values at instants (n,), from series in the spans of `worth`; (components, n)."""
        numbers, x = self.spans.locate(tt1, tt2)
        groups = list(_runs(numbers))
        wanted = list(dict.fromkeys(n for n, _ in groups if n in worth))
        if not wanted:
            return self.function(tt1, tt2)
        series = self._collected(wanted)
        out = np.empty((next(iter(series.values())).shape[0], x.size))
        bare = np.ones(x.size, dtype=bool)
        basis = polynomials(x, self.terms)
        for number, part in groups:
            if number in series:
                np.matmul(series[number], basis[:, part], out=out[:, part])
                bare[part] = False
        if bare.any():
            out[:, bare] = self.function(tt1[bare], tt2[bare])
        return out

    def _collected(self, wanted: list[int]) -> dict[int, Array]:
        """The series of the spans that are wanted; those that are missing are built."""
        with self._lock:
            found = {n: self._series[n] for n in wanted if n in self._series}
            for number in found:
                self._series.move_to_end(number)
        missing = [n for n in wanted if n not in found]
        step = max(1, SAMPLED_TOGETHER // self.terms)
        for first in range(0, len(missing), step):
            some = missing[first : first + step]
            built = self._build(np.array(some, dtype=np.int64))
            found |= dict(zip(some, built, strict=True))
        with self._lock:
            for number in missing:
                self._series[number] = found[number]
            while len(self._series) > self.most:
                self._series.popitem(last=False)
        return found

    def _build(self, numbers: Index) -> Array:
        """Series of some spans, shape (spans, components, terms)."""
        tt1, tt2 = self.spans.instants(numbers, fit.nodes(self.terms))
        values = self.function(tt1.ravel(), tt2.ravel())
        samples = np.moveaxis(values.reshape(-1, *tt1.shape), 1, 0)
        series = fit.series(samples)
        left_out = np.max(fit.truncation(series), axis=0)
        with self._lock:
            self.built += len(numbers)
            before = self.truncation
            self.truncation = left_out if before is None else np.maximum(before, left_out)
        return series


def _runs(numbers: Index) -> Iterator[tuple[int, slice]]:
    """Neighbouring instants that lie in one span."""
    if numbers.size == 0:
        return
    cuts = np.flatnonzero(np.diff(numbers)) + 1
    edges = [0, *cuts.tolist(), numbers.size]
    for k in range(len(edges) - 1):
        yield int(numbers[edges[k]]), slice(edges[k], edges[k + 1])
