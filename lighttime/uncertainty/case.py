"""What all parts of an error budget are made from."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from lighttime.answer import RoundTrip
from lighttime.errors import InputError
from lighttime.partials import Partials
from lighttime.sigmas import Uncertainties
from lighttime.vectors import Array

__all__ = ["Case", "Contribution"]


@dataclass(frozen=True, eq=False)
class Contribution:
    """One part of a budget.

    Attributes
    ----------
    name, term, source : str
        See `BudgetPart`.
    rows : ndarray, shape (k, n)
        What k independent changes of one sigma do to n round trips, s.
    """

    name: str
    term: str
    rows: Array
    source: str


@dataclass(frozen=True, eq=False)
class Case:
    """An answer with its derivatives and the sigmas of its inputs.

    Parameters
    ----------
    answer : RoundTrip
    slopes : Partials
    sigmas : Uncertainties
    """

    answer: RoundTrip
    slopes: Partials
    sigmas: Uncertainties

    @property
    def covered(self) -> frozenset[str]:
        """Parameters that the user's covariance tells of: no other part does, then."""
        covariance = self.sigmas.covariance
        return frozenset() if covariance is None else frozenset(covariance.names)

    def slope(self, name: str) -> Array:
        """A derivative, flat."""
        return np.ravel(self.slopes[name])

    def three(self, names: str) -> Array:
        """Derivatives by x, y and z, shape (3, n)."""
        return np.stack([self.slope(names.format(axis)) for axis in "xyz"])

    def rows(self, names: Sequence[str], sigmas: Any) -> Array:
        """Independent parameters that no covariance covers, shape (k, n).

        `sigmas` has a number (or an array over the epochs) for each name.
        """
        each = [
            self.slope(name) * sigma
            for name, sigma in zip(names, sigmas, strict=True)
            if name not in self.covered
        ]
        return np.stack(each) if each else np.zeros((0, self.answer.query.size))

    def whole(self, names: Sequence[str], part: str) -> bool:
        """Whether a part that mixes some parameters is to be made: none of them is covered.

        Raises
        ------
        InputError
            If the covariance covers some but not all.
        """
        left = [name for name in names if name not in self.covered]
        if left and len(left) < len(names):
            raise InputError("covariance", tuple(self.covered), f"one of {left} too ({part})")
        return bool(left)

    def has(self, term: str) -> bool:
        """Whether a term is part of the range."""
        return term in self.answer.terms

    def term(self, name: str) -> Array:
        """A term of the range, flat, s."""
        return np.ravel(self.answer.terms[name])
