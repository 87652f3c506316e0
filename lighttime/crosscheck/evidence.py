"""Signatures and differences of any number of ranges, compressed without loss.

Whatever least squares can ask of n rows of m signatures and one column of differences is in the
triangle of their QR factorisation, which is m+1 by m+1 whatever n. Blocks of rows are folded
into it one after another; unlike normal equations it keeps all digits of signatures that are
nearly the same.

Source: Golub & Van Loan, Matrix Computations, 5.2; Demmel et al. 2012, SIAM J. Sci. Comput. 34,
A206 (the factorisation by blocks).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from lighttime.vectors import Array


@dataclass(frozen=True, eq=False)
class Evidence:
    """What some ranges say about some suspects.

    Attributes
    ----------
    rows : int
        Number of ranges.
    signatures : ndarray, shape (p, m)
        Compressed; p is at most m + 1.
    differences : ndarray, shape (p,)
        The same of the other's range minus ours. All in units of the noise of each range.
    """

    rows: int
    signatures: Array
    differences: Array

    @property
    def size(self) -> int:
        """Number of signatures."""
        return int(self.signatures.shape[1])

    def of(self, columns: Sequence[int]) -> Evidence:
        """For some of the signatures only."""
        return replace(self, signatures=self.signatures[:, list(columns)])

    def less(self, amplitudes: Array) -> Evidence:
        """After some amplitudes of the signatures have been taken away from the differences."""
        return replace(self, differences=self.differences - self.signatures @ amplitudes)


def triangle(matrix: Array) -> Array:
    """The triangle of the QR factorisation, of one matrix or of a stack of them."""
    found: Any = np.linalg.qr(matrix, mode="r")
    return np.asarray(found)


class Folding:
    """Folds blocks of rows into an `Evidence`."""

    def __init__(self, size: int) -> None:
        self.rows = 0
        self._triangle: Array = np.empty((0, size + 1))

    def add(self, signatures: Array, differences: Array, sigma: Array) -> None:
        """Take in a block.

        Parameters
        ----------
        signatures : ndarray, shape (n, m)
        differences : ndarray, shape (n,)
        sigma : ndarray, shape (n,)
            One-sigma of each row, in the same unit.
        """
        block = np.column_stack([signatures, differences]) / sigma[:, None]
        self.rows += len(block)
        stacked = np.concatenate([self._triangle, block])
        self._triangle = triangle(stacked) if len(stacked) > stacked.shape[1] else stacked

    def evidence(self) -> Evidence:
        """Of all blocks so far."""
        return Evidence(self.rows, self._triangle[:, :-1].copy(), self._triangle[:, -1].copy())
