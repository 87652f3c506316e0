"""From the few constituents of a loading computation to the many of the tide.

The response of the ocean is smooth in frequency within a species (long-period, diurnal,
semidiurnal). What each of the given constituents says about it, as a complex admittance, is
interpolated to all large lines of the tidal potential. The lines beside a constituent make its
nodal modulation, so that no factors for that are needed.
"""

from __future__ import annotations

from functools import cache
from typing import Final

import numpy as np
from numpy.typing import NDArray

from lighttime.constants import DEGREE, JULIAN_CENTURY, TURN
from lighttime.data import table
from lighttime.earth.arguments import (
    ARCSECONDS_IN_TURN,
    FUNDAMENTAL,
)
from lighttime.earth.harmonics import doodson_multipliers

__all__ = ["CONSTITUENTS", "potential", "spread"]

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

CONSTITUENTS: Final = {
    "M2": (2, 0, 0, 0, 0, 0),
    "S2": (2, 2, -2, 0, 0, 0),
    "N2": (2, -1, 0, 1, 0, 0),
    "K2": (2, 2, 0, 0, 0, 0),
    "K1": (1, 1, 0, 0, 0, 0),
    "O1": (1, -1, 0, 0, 0, 0),
    "P1": (1, 1, -2, 0, 0, 0),
    "Q1": (1, -2, 0, 1, 0, 0),
    "MF": (0, 2, 0, 0, 0, 0),
    "MM": (0, 1, 0, -1, 0, 0),
    "SSA": (0, 0, 2, 0, 0, 0),
}
"""The constituents of loading coefficients in their usual order, with the multipliers of tau,
s, h, p, N', p_s. Source: IERS Conventions (2010), TN36, 7.1.2."""

_SPECIES_PHASE = np.array([0.5, 0.25, 0.0]) * TURN
# What a phase lag is counted from, over the argument of a line of positive amplitude: a half
# turn for long periods, a quarter for diurnal, nothing for semidiurnal lines.


@cache
def potential() -> tuple[Array, Array, Array]:
    """The 342 largest lines of the tidal potential.

    Returns
    -------
    multipliers : ndarray, shape (342, 6)
    amplitude_m : ndarray, shape (342,)
        Signed, in metres of the equilibrium tide.
    cycles_per_day : ndarray, shape (342,)
        At J2000.
    """
    lines = table("tidal_potential")
    multipliers = doodson_multipliers(lines)
    frequencies = multipliers @ _doodson_rates()
    multipliers.flags.writeable = frequencies.flags.writeable = False
    return multipliers, lines["amplitude_m"], frequencies


def _doodson_rates() -> Array:
    """Rates of tau, s, h, p, N', p_s in cycles per day at J2000."""
    cycles_per_century = np.array([series[1] for series in FUNDAMENTAL]) / ARCSECONDS_IN_TURN
    l, l_sun, f, d, omega = cycles_per_century / JULIAN_CENTURY  # noqa: E741
    s = f + omega
    return np.array([1.0 - d, s, s - d, s - l, -omega, s - d - l_sun])


def spread(amplitudes: Array, phases_deg: Array) -> ComplexArray:
    """Complex amplitudes of all lines of the potential from those of the 11 constituents.

    Parameters
    ----------
    amplitudes, phases_deg : ndarray, shape (k, 11)
        Amplitudes and Greenwich phase lags of k components, in the order of `CONSTITUENTS`.

    Returns
    -------
    ndarray of complex, shape (k, 342)
        To be multiplied by exp(i multipliers . arguments); the real part is the displacement.

    Notes
    -----
    The admittance of a constituent is its complex amplitude over that of the potential. Within
    a species it is interpolated in frequency: a cubic spline whose end slopes are those of the
    parabola through the last three points (four constituents), straight lines (three); beyond
    the first and last constituent it stays what it is there.

    Source: IERS Conventions (2010), TN36, 7.1.2, the approach of Agnew.
    """
    multipliers, amplitude, frequency = potential()
    rows = [
        int(np.flatnonzero((multipliers == np.array(key)).all(axis=1))[0])
        for key in CONSTITUENTS.values()
    ]
    admittance = amplitudes * np.exp(-1j * DEGREE * phases_deg) / np.abs(amplitude[rows])
    species = multipliers[:, 0].astype(int)
    response = np.empty((len(amplitudes), len(multipliers)), dtype=complex)
    for kind in (0, 1, 2):
        given = [k for k, row in enumerate(rows) if species[row] == kind]
        given.sort(key=lambda k: frequency[rows[k]])
        known = frequency[[rows[k] for k in given]]
        lines = species == kind
        response[:, lines] = _interpolate(known, admittance[:, given], frequency[lines])
    turned: ComplexArray = response * amplitude * np.exp(1j * _SPECIES_PHASE[species])
    return turned


def _interpolate(x: Array, y: ComplexArray, at: Array) -> ComplexArray:
    """Values of y(x), shape (k, n), at many points; constant beyond the ends."""
    at = np.clip(at, x[0], x[-1])
    steps = np.diff(x)
    chords = np.diff(y, axis=-1) / steps
    cell = np.clip(np.searchsorted(x, at, side="right") - 1, 0, len(x) - 2)
    step, chord = steps[cell], chords[:, cell]
    u = (at - x[cell]) / step
    line = y[:, cell] + chord * (at - x[cell])
    if len(x) < 4:
        return np.asarray(line)
    slopes = _spline_slopes(steps, chords)
    start, end = slopes[:, cell] - chord, slopes[:, cell + 1] - chord
    return np.asarray(line + u * (1.0 - u) * step * ((1.0 - u) * start - u * end))


def _spline_slopes(steps: Array, chords: ComplexArray) -> ComplexArray:
    """Slopes at the points of a cubic spline, shape (k, n).

    The end slopes are those of the parabola through the three points there; between, the
    second derivative is continuous.
    """
    n = len(steps) + 1
    matrix, right = np.eye(n, dtype=complex), np.empty((n, len(chords)), dtype=complex)
    first = (chords[:, 1] - chords[:, 0]) / (steps[0] + steps[1])
    last = (chords[:, -1] - chords[:, -2]) / (steps[-1] + steps[-2])
    right[0] = chords[:, 0] - first * steps[0]
    right[-1] = chords[:, -1] + last * steps[-1]
    for k in range(1, n - 1):
        before, after = 1.0 / steps[k - 1], 1.0 / steps[k]
        matrix[k, k - 1 : k + 2] = before, 2.0 * (before + after), after
        right[k] = 3.0 * (before * chords[:, k - 1] + after * chords[:, k])
    return np.asarray(np.linalg.solve(matrix, right).T, dtype=np.complex128)
