"""Chebyshev polynomials on equal spans of time: value, rate and exact difference.

An ephemeris is a row of records, each a set of Chebyshev series valid for one span of days.
Three things cost digits when this is done in plain float64, and are avoided here:

- ``julian_date - start`` in one number loses 0.3 microseconds of time. The instant comes as
  two parts, whole days are subtracted first (exactly), and what is left is counted from the
  *middle* of the record, where its grid is finest.
- A position at one event minus a position at another loses the digits they share. `difference`
  forms the difference of the polynomials instead: relative to its own size it is as good as
  float64 allows.
- An event is told as seconds after a common instant, so that two events 2.6 s apart are known
  to each other far better than either is known to the calendar.

Source: Chebyshev recurrences, Abramowitz & Stegun 22.7; the difference recurrence follows from
them by subtraction.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from itertools import pairwise
from math import fsum

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.constants import DAY
from lighttime.errors import CoverageError

Array = NDArray[np.float64]
Index = NDArray[np.intp]

_FEW_RECORDS = 64
"""Up to so many epochs per record on average a gather is quicker than a loop over records."""


@dataclass(frozen=True, eq=False)
class Records:
    """A row of Chebyshev series on equal spans of time.

    Parameters
    ----------
    start_jd : float
        Julian date at which the first record begins; a whole or half number.
    span_days : float
        Length of a record.
    coefficients : ndarray, shape (records, components, degree + 1)
        Any unit; results are in it (times `scale`).
    scale : float
        Factor from the unit of the coefficients to the unit of the results.
    name : str
        What the records describe, for error messages.
    """

    start_jd: float
    span_days: float
    coefficients: Array
    scale: float = 1.0
    name: str = "records"

    @property
    def end_jd(self) -> float:
        """Julian date at which the last record ends."""
        return self.start_jd + self.span_days * len(self.coefficients)

    def __repr__(self) -> str:
        records, components, terms = self.coefficients.shape
        return (
            f"<Records {self.name}: {records} of {self.span_days:g} d from JD {self.start_jd}, "
            f"{components} x degree {terms - 1}>"
        )

    # -- where an instant lies ---------------------------------------------------------------

    def locate(self, jd1: ArrayLike, jd2: ArrayLike, seconds: ArrayLike = 0.0) -> Place:
        """Find the record of each instant ``jd1 + jd2 + seconds``.

        Parameters
        ----------
        jd1, jd2 : float or array, shape (...)
            Julian date in two parts, TDB; neither sum nor difference is rounded here.
        seconds : float or array
            Added to the instant, TDB seconds.

        Raises
        ------
        CoverageError
            If an instant lies outside the records.
        """
        jd1, jd2, seconds = (np.asarray(a, dtype=float) for a in (jd1, jd2, seconds))
        whole = np.floor(jd1 - self.start_jd)
        with np.errstate(invalid="ignore"):  # what is not finite is refused below
            rest = ((jd1 - self.start_jd) - whole) + jd2 + seconds / DAY
        carry = np.floor(rest)  # whole days apart from the fraction, to the end
        whole, rest = whole + carry, rest - carry
        count = len(self.coefficients)
        index = np.floor(whole / self.span_days)
        inside = (index >= 0) & ((index < count) | (whole + rest == count * self.span_days))
        if not np.all(inside):
            value = float(np.broadcast_to(jd1 + jd2, inside.shape)[~inside].flat[0])
            allowed = f"JD {self.start_jd} to {self.end_jd} TDB ({self.name})"
            raise CoverageError("epoch (Julian date)", value, allowed)
        index = np.minimum(index, count - 1).astype(np.intp)
        middle = (index + 0.5) * self.span_days
        return Place(index, (whole - middle) + rest)

    # -- evaluation --------------------------------------------------------------------------

    def value(self, place: Place) -> Array:
        """The polynomials at the instants of `place`, shape (components, ...)."""
        x = place.days * (2.0 / self.span_days)
        return self._sum(place.index, polynomials(x, self._terms))

    def rate(self, place: Place) -> Array:
        """The derivatives by time at the instants of `place`, per second."""
        x = place.days * (2.0 / self.span_days)
        return self._sum(place.index, _slopes(x, self._terms)) * (2.0 / (self.span_days * DAY))

    def jet(self, place: Place, order: int) -> Array:
        """Value and derivatives by time at the instants of `place`.

        Parameters
        ----------
        place : Place
            Shape (n,).
        order : int
            The highest derivative.

        Returns
        -------
        ndarray, shape (order + 1, components, n)
            Derivatives per second, per second^2 and so on.

        Notes
        -----
        The highest degrees come first, so that the smallest terms are summed first: the Moon is
        then off by 0.03 micrometres (rms), and not by 0.07.
        """
        x = place.days * (2.0 / self.span_days)
        basis = polynomials(x, self._terms, descending=True)
        components = self.coefficients.shape[1]
        out = np.empty(((order + 1) * components, x.size))
        for records, columns in _groups(place.index):
            if isinstance(records, np.ndarray):
                rows, back = np.unique(records, return_inverse=True)
                series = _derivatives(self.coefficients[rows], order)[back]
                out[:, columns] = np.einsum("nkt,tn->kn", series, basis[:, columns])
            else:
                series = _derivatives(self.coefficients[records], order)
                out[:, columns] = series @ basis[:, columns]
        jet = out.reshape(order + 1, components, x.size)
        per_second = 2.0 / (self.span_days * DAY)
        for k in range(order + 1):
            jet[k] *= self.scale * per_second**k
        return jet

    def difference(
        self, jd1: ArrayLike, jd2: ArrayLike, start_s: ArrayLike, end_s: ArrayLike
    ) -> Array:
        """The polynomials at ``end_s`` minus those at ``start_s``, without their common digits.

        Parameters
        ----------
        jd1, jd2 : float or array, shape (...)
            The common instant in two parts, TDB.
        start_s, end_s : float or array
            The two events, in seconds after that instant; less than a record apart.

        Returns
        -------
        ndarray, shape (components, ...)

        Notes
        -----
        Where the events lie in two neighbouring records, the way goes over the seam: to the
        end of the one, over the jump there (records meet to millimetres, not exactly), and on
        from the beginning of the other.
        """
        a = self.locate(jd1, jd2, start_s)
        b = self.locate(jd1, jd2, end_s)
        step = (np.asarray(end_s, dtype=float) - np.asarray(start_s, dtype=float)) / DAY
        a, b, step = a.broadcast(step.shape), b.broadcast(step.shape), step + np.zeros(a.shape)
        same = a.index == b.index
        if np.all(same):
            return self._within(a.index, a.days, step)
        out = np.empty((self.coefficients.shape[1], *step.shape))
        out[:, same] = self._within(a.index[same], a.days[same], step[same])
        out[:, ~same] = self._over_seam(a[~same], b[~same], step[~same])
        return out

    def _within(self, index: Index, days: Array, step: Array) -> Array:
        x, dx = days * (2.0 / self.span_days), step * (2.0 / self.span_days)
        return self._sum(index, _differences(x, dx, self._terms))

    def _over_seam(self, a: Place, b: Place, step: Array) -> Array:
        forward = np.sign(b.index - a.index).astype(float)
        half = 0.5 * self.span_days
        to_seam = forward * half - a.days
        edge = forward  # the seam in the record of a, as x; in the record of b it is -forward
        before = self._within(a.index, a.days, to_seam)
        after = self._within(b.index, -forward * half, step - to_seam)
        signs = np.power.outer(edge, np.arange(self._terms))  # T_n(+-1) = (+-1)^n
        there = self.coefficients[b.index] * np.power.outer(-edge, np.arange(self._terms))[:, None]
        here = self.coefficients[a.index] * signs[:, None]
        jump = _exact_sum(np.concatenate([there, -here], axis=-1)).T * self.scale
        return before + jump + after

    @property
    def _terms(self) -> int:
        return int(self.coefficients.shape[-1])

    def _sum(self, index: Index, basis: Array) -> Array:
        """Sum coefficients times basis functions, the smallest terms first."""
        flat = np.ravel(index)
        basis = basis.reshape(self._terms, -1)
        out = np.empty((self.coefficients.shape[1], flat.size))
        for records, columns in _groups(flat):
            c = self.coefficients[records]  # (components, terms) or (n, components, terms)
            part = basis[:, columns]
            for k in range(c.shape[-2]):
                total = c[..., k, -1] * part[-1]
                for n in range(self._terms - 2, -1, -1):
                    total += c[..., k, n] * part[n]
                out[k, columns] = total
        out *= self.scale
        return out.reshape(out.shape[0], *np.shape(index))


@dataclass(frozen=True, eq=False)
class Place:
    """Instants found in `Records`: the record of each and the days from that record's middle."""

    index: Index
    days: Array

    @property
    def shape(self) -> tuple[int, ...]:
        """Shape of the instants."""
        return np.shape(self.days)

    def broadcast(self, shape: tuple[int, ...]) -> Place:
        """The same instants, repeated to fill at least `shape`."""
        shape = np.broadcast_shapes(self.shape, shape)
        return Place(np.broadcast_to(self.index, shape), np.broadcast_to(self.days, shape))

    def __getitem__(self, key: NDArray[np.bool_]) -> Place:
        return Place(self.index[key], self.days[key])


def _groups(index: Index) -> Iterator[tuple[Index | int, Index | slice]]:
    """Split epochs by record where many share one, so that coefficients need no gathering."""
    if index.size == 0:
        return
    if index[0] == index[-1] and np.all(index == index[0]):
        yield int(index[0]), slice(None)
        return
    cuts = np.flatnonzero(np.diff(index)) + 1
    if index.size < _FEW_RECORDS * (len(cuts) + 1):
        yield index, slice(None)
        return
    edges = [0, *cuts.tolist(), index.size]
    for first, last in pairwise(edges):
        yield int(index[first]), slice(first, last)


def polynomials(x: Array, terms: int, descending: bool = False) -> Array:
    """T_n(x) for n below `terms`, shape (terms, ...); if `descending`, the highest n first."""
    basis = np.empty((terms, *np.shape(x)))
    t = basis[::-1] if descending else basis
    t[0] = 1.0
    if terms > 1:
        t[1] = x
    two_x = 2.0 * np.asarray(x)
    for n in range(2, terms):
        t[n] = two_x * t[n - 1] - t[n - 2]
    return basis


def _derivatives(coefficients: Array, order: int) -> Array:
    """Series of the derivatives by x, behind the series itself; the highest degree first.

    Parameters
    ----------
    coefficients : ndarray, shape (..., components, terms)

    Returns
    -------
    ndarray, shape (..., (order + 1) * components, terms)

    Notes
    -----
    b_(n-1) = b_(n+1) + 2 n a_n, and half of that for b_0 (Abramowitz & Stegun 22.7 integrated).
    """
    series = [np.asarray(coefficients)[..., ::-1]]
    slope = _slope_matrix(coefficients.shape[-1])[::-1, ::-1]
    for _ in range(order):
        series.append(series[-1] @ slope)
    stacked: Array = np.concatenate(series, axis=-2)
    return stacked


@cache
def _slope_matrix(terms: int) -> Array:
    """From the coefficients of a series to those of its derivative by x, from the right."""
    matrix = np.zeros((terms, terms + 1))
    for n in range(terms - 1, 0, -1):
        matrix[n, n - 1] = 2.0 * n
    for n in range(terms - 3, -1, -1):
        matrix[:, n] += matrix[:, n + 2]
    matrix[:, 0] *= 0.5
    matrix.flags.writeable = False
    return matrix[:, :terms]


def _slopes(x: Array, terms: int) -> Array:
    """dT_n/dx = n U_(n-1)(x) for n below `terms`, shape (terms, ...)."""
    u = np.empty((terms, *np.shape(x)))  # u[n] holds U_(n-1)
    u[0] = 0.0
    if terms > 1:
        u[1] = 1.0
    two_x = 2.0 * np.asarray(x)
    for n in range(2, terms):
        u[n] = two_x * u[n - 1] - u[n - 2]
    degree = np.arange(terms, dtype=float).reshape(-1, *([1] * np.ndim(x)))
    slopes: Array = u * degree
    return slopes


def _differences(x: Array, dx: Array, terms: int) -> Array:
    """T_n(x + dx) - T_n(x) for n below `terms`, each good to float64 relative to itself.

    Subtract the recurrence T_(n+1) = 2 x T_n - T_(n-1) at two arguments:
    D_(n+1) = 2 (x + dx) D_n + 2 dx T_n(x) - D_(n-1).
    """
    t = polynomials(x, terms)
    d = np.empty((terms, *np.broadcast_shapes(np.shape(x), np.shape(dx))))
    d[0] = 0.0
    if terms > 1:
        d[1] = dx
    two_x, two_dx = 2.0 * (np.asarray(x) + dx), 2.0 * np.asarray(dx)
    for n in range(2, terms):
        d[n] = two_x * d[n - 1] + two_dx * t[n - 1] - d[n - 2]
    return d


def _exact_sum(a: Array) -> Array:
    """Sum over the last axis with one rounding (for the few epochs on a seam)."""
    flat = a.reshape(-1, a.shape[-1])
    sums: Array = np.array([fsum(row) for row in flat]).reshape(a.shape[:-1])
    return sums
