"""Sums of harmonics of the Doodson arguments, the common form of all tide series."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from lighttime.constants import TURN
from lighttime.data import Table

__all__ = ["doodson_multipliers", "harmonic_sum"]

_BLOCK = 512  # instants at a time: the phases of 342 terms then stay in the cache


def doodson_multipliers(table: Table) -> NDArray[np.float64]:
    """The multipliers of tau, s, h, p, N', p_s of a table, shape (terms, 6)."""
    return np.stack([table[name] for name in ("tau", "s", "h", "p", "n_prime", "p_s")], axis=-1)


def harmonic_sum(
    coefficients: NDArray[np.complex128],
    multipliers: NDArray[np.float64],
    arguments: NDArray[np.float64],
) -> NDArray[np.complex128]:
    """Sum over terms of coefficient x exp(i x multipliers . arguments).

    Parameters
    ----------
    coefficients : ndarray of complex, shape (sums, terms)
        Several sums over the same terms at once.
    multipliers : ndarray, shape (terms, n)
        Whole numbers.
    arguments : ndarray, shape (n, ...)
        Radians.

    Returns
    -------
    ndarray of complex, shape (sums, ...)
    """
    shape = arguments.shape[1:]
    columns = np.remainder(arguments.reshape(len(arguments), -1), TURN)
    sums = np.empty((len(coefficients), columns.shape[1]), dtype=complex)
    in_phase, quadrature = coefficients.real.copy(), coefficients.imag.copy()
    for start in range(0, columns.shape[1], _BLOCK):
        here = slice(start, start + _BLOCK)
        phase = multipliers @ columns[:, here]
        cosine, sine = np.cos(phase), np.sin(phase)
        sums.real[:, here] = in_phase @ cosine - quadrature @ sine
        sums.imag[:, here] = in_phase @ sine + quadrature @ cosine
    return sums.reshape(len(coefficients), *shape)
