"""Which few suspects, with which amplitudes, explain the differences.

A hypothesis names some suspects; each is there with one of its exact amplitudes, or with a free
one. Its score is minus twice the logarithm of its probability, up to a constant:

    misfit + 2 sum ln(suspects tried x readings) + ln det(1 + T F T) + sum (a/tau)^2

- misfit: the sum of squares in units of the noise. The noise is what was stated, or more if the
  ranges say so: with r the sum of squares of n rows it is r up to n, and n (1 + ln r/n) beyond
  (the likelihood maximised over a noise that is not below the stated one).
- every suspect costs its prior probability, so that trying many does not pay;
- a free amplitude costs what the ranges know of it (F, the information) against what was
  plausible before (T, the plausible sizes): the evidence of a linear model with a normal prior.
  With one row's information for T it is the Bayesian information criterion; this is stricter for
  strong signatures, a thousandth of which is not a likely mistake.

Source: Schwarz 1978, Ann. Statist. 6, 461; MacKay 1992, Neural Comput. 4, 415; Chen & Chen 2008,
Biometrika 95, 759 (the cost of trying many).
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import cached_property
from math import inf, log
from typing import Any

import numpy as np

from lighttime.crosscheck.evidence import Evidence, triangle
from lighttime.vectors import Array

PRIOR_EXACT = 0.8
"""Probability that a choice was made outright, against something like it."""

EXACT_WITHIN_SIGMA = 4.0
"""An amplitude within so many sigmas of an exact one is weighed as exact, too."""

HOPELESS = 20.0
"""Score above that of the best at which a hypothesis is not looked at any closer."""

SAME = 1e-12
"""Signatures that differ by less of their length are the same for a computer."""

OF_A_BLOCK = 3.0
"""What a further offset of a block is picked from."""

Support = tuple[int, ...]
Exact = tuple[float | None, ...]


@dataclass(frozen=True, eq=False)
class Fit:
    """A least-squares fit: amplitudes, their sigmas at unit noise, what is left, and the triangle.

    The information of the amplitudes is ``triangle.T @ triangle``.
    """

    amplitudes: Array
    sigmas: Array
    squares: float
    triangle: Array


@dataclass(frozen=True, eq=False)
class Hypothesis:
    """Some suspects with the amplitudes that fit best.

    Attributes
    ----------
    support : tuple of int
        Columns of the evidence.
    amplitudes, sigmas : ndarray, shape (k,)
        The sigmas are those of a free fit of all k, also for exact amplitudes.
    free_amplitudes : ndarray, shape (k,)
        The free fit of all k.
    exact : tuple of (float or None)
        The reading that was taken as exact.
    squares : float
        Sum of squares that remains, in units of the stated noise.
    noise : float
        The noise in units of the stated one, at least 1.
    score : float
        The lower the better; half a difference of two is the logarithm of their odds.
    """

    support: Support
    amplitudes: Array
    sigmas: Array
    free_amplitudes: Array
    exact: Exact
    squares: float
    noise: float
    score: float


@dataclass(frozen=True, eq=False)
class Trial:
    """Evidence, and what is known of the suspects before.

    Parameters
    ----------
    evidence : Evidence
        Of signatures that are not zero.
    readings : sequence of sequences of float
        Exact amplitudes of each suspect; empty for a free offset.
    plausible : ndarray, shape (m,)
        Plausible size of each amplitude.
    tried : int
        Number of suspects, those that were set aside included.
    blocks : sequence of str
        Offsets that go together; "" for a suspect on its own.
    """

    evidence: Evidence
    readings: Sequence[Sequence[float]]
    plausible: Array
    tried: int
    blocks: Sequence[str]

    @cached_property
    def _known(self) -> dict[Support, Hypothesis]:
        return {}

    @cached_property
    def lengths(self) -> Array:
        """Lengths of the signatures in units of the stated noise."""
        lengths: Array = np.sqrt(np.sum(self.evidence.signatures**2, axis=0))
        return lengths

    @cached_property
    def unit(self) -> Array:
        """Signatures of unit length."""
        unit: Array = self.evidence.signatures / self.lengths
        return unit

    def units(self, support: Support) -> list[Support]:
        """The members of a hypothesis, those of a block together."""
        found: dict[Any, list[int]] = {}
        for column in support:
            found.setdefault(self.blocks[column] or column, []).append(column)
        return [tuple(columns) for columns in found.values()]

    # -- weighing ----------------------------------------------------------------------------

    @property
    def hypotheses(self) -> Iterable[Hypothesis]:
        """All that have been weighed so far."""
        return self._known.values()

    def weigh(self, support: Iterable[int]) -> Hypothesis:
        """The best amplitudes for some suspects, and their score."""
        return self.weigh_all([tuple(sorted(support))])[0]

    def weigh_all(self, supports: Sequence[Support]) -> list[Hypothesis]:
        """The same for many sets of suspects, each in ascending order."""
        new = [s for s in dict.fromkeys(supports) if s not in self._known]
        for size in sorted({len(s) for s in new}):
            group = [s for s in new if len(s) == size]
            best = min((h.score for h in self.hypotheses), default=inf)
            for support, free in zip(group, self._free_fits(group), strict=True):
                found = self._known[support] = self._weighed(support, free, best)
                best = min(best, found.score)
        return [self._known[s] for s in supports]

    def misfit(self, squares: float) -> float:
        """Minus twice the logarithm of the likelihood."""
        n = self.evidence.rows
        return squares if squares <= n else n * (1.0 + log(squares / n))

    def _noise2(self, squares: float, free: int) -> float:
        """Variance in units of the stated one, with so many free amplitudes."""
        return max(1.0, squares / max(self.evidence.rows - free, 1))

    def _weighed(self, support: Support, fit: Fit | None, best_score: float) -> Hypothesis:
        k = len(support)
        if fit is None:
            none = np.full(k, np.nan)
            return Hypothesis(support, none, none, none, (None,) * k, inf, inf, inf)
        noise2 = self._noise2(fit.squares, k)
        sigmas = fit.sigmas * noise2**0.5
        bound = self.misfit(fit.squares) + 2.0 * len(self.units(support)) * log(self.tried)
        free = fit.amplitudes
        if bound > best_score + HOPELESS:
            exact = (None,) * k
            return Hypothesis(support, free, sigmas, free, exact, fit.squares, noise2**0.5, bound)
        best = self._outcome(support, free, sigmas, (None,) * k)
        for position, value in self._nearest(support, free, sigmas):
            taken = (*best.exact[:position], value, *best.exact[position + 1 :])
            outcome = self._outcome(support, free, sigmas, taken)
            if outcome.score < best.score:
                best = outcome
        return best

    def _nearest(self, support: Support, free: Array, sigmas: Array) -> list[tuple[int, float]]:
        """Readings close to the free amplitudes, the best determined first."""
        close = [
            (sigmas[position] / max(abs(value), 1e-3), position, value)
            for position, column in enumerate(support)
            for value in self.readings[column]
            if abs(free[position] - value) < EXACT_WITHIN_SIGMA * sigmas[position]
        ]
        return [(position, value) for _, position, value in sorted(close)]

    def _outcome(self, support: Support, free: Array, sigmas: Array, exact: Exact) -> Hypothesis:
        """The hypothesis with some amplitudes held at exact values and the others fitted."""
        held = [p for p, value in enumerate(exact) if value is not None]
        loose = [p for p, value in enumerate(exact) if value is None]
        amplitudes = free.copy()
        amplitudes[held] = [exact[p] for p in held]
        columns = [support[p] for p in loose]
        rest = self.evidence.differences
        if held:
            rest = rest - self.evidence.signatures[:, [support[p] for p in held]] @ amplitudes[held]
        fit = self._fitted(columns, rest)
        if fit is None:  # on the edge of singular: by rounding, fitted together but not apart
            return Hypothesis(support, amplitudes, sigmas, free, exact, inf, inf, inf)
        amplitudes[loose] = fit.amplitudes
        noise2 = self._noise2(fit.squares, len(loose))
        score = self.misfit(fit.squares) + self._cost_of_free(columns, fit, noise2)
        for p in held:
            score += 2.0 * log(self.tried * len(self.readings[support[p]]) / PRIOR_EXACT)
        return Hypothesis(support, amplitudes, sigmas, free, exact, fit.squares, noise2**0.5, score)

    def _cost_of_free(self, columns: list[int], fit: Fit, noise2: float) -> float:
        """What free amplitudes cost: see the head of this file."""
        if not columns:
            return 0.0
        tau = self.plausible[columns]
        # det(1 + S^T S) from the triangle of S over 1, which keeps its digits
        stacked = np.concatenate([fit.triangle * (tau / noise2**0.5), np.eye(len(columns))])
        diagonal = triangle(stacked).diagonal()
        cost = 2.0 * float(np.sum(np.log(np.abs(diagonal))))
        seen: set[str] = set()
        for column, size in zip(columns, (fit.amplitudes / tau) ** 2, strict=True):
            block = self.blocks[column]
            cost += 2.0 * log(OF_A_BLOCK if block and block in seen else self.tried)
            seen.add(block)
            if self.readings[column]:  # a choice is not made fifty times
                cost += float(size) - 2.0 * log(1.0 - PRIOR_EXACT)
            else:  # an offset may be of any size
                cost += 2.0 * log(1.0 + float(size))
        return cost

    # -- least squares -----------------------------------------------------------------------

    def _free_fits(self, supports: list[Support]) -> list[Fit | None]:
        """Fits with sets of suspects of one size, all at once."""
        columns = np.array(supports, dtype=int)
        count, k = columns.shape
        rows = np.empty((count, len(self.evidence.differences), k + 1))
        rows[..., :k] = np.moveaxis(self.unit[:, columns], 1, 0)
        rows[..., k] = self.evidence.differences
        return [self._fit(t, s) for t, s in zip(triangle(rows), supports, strict=True)]

    def _fitted(self, columns: list[int], y: Array) -> Fit | None:
        """A fit to other differences."""
        rows = np.column_stack([self.unit[:, columns], y])
        return self._fit(triangle(rows), columns)

    def _fit(self, r_and_y: Array, columns: Sequence[int]) -> Fit | None:
        """From the triangle of unit signatures and differences; None if it is singular."""
        k = len(columns)
        r, along = r_and_y[:k, :k], r_and_y[:k, k]
        if len(r) < k or (k and np.abs(r.diagonal()).min() < SAME):
            return None
        squares = float(r_and_y[k, k] ** 2) if len(r_and_y) > k else 0.0
        scales = self.lengths[list(columns)]
        inverse = np.linalg.inv(r) / scales[:, None]
        return Fit(inverse @ along, np.sqrt(np.sum(inverse**2, axis=1)), squares, r * scales)
