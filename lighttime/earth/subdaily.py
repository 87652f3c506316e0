"""Variations of the pole and of UT1 with periods of a day and of half a day.

Two causes: ocean tides, and the direct pull of Sun and Moon on the Earth's triaxial figure
(libration). They are no part of the published series and are added to what is interpolated.

Source: IERS Conventions (2010), TN36, 8.2 (ocean tides), 5.5.1 and 5.5.3 (libration).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cache
from typing import Any, Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.constants import MICROARCSECOND, MJD_ZERO, TURN
from lighttime.data import table
from lighttime.earth.arguments import centuries, fundamental_arguments, mean_sidereal_angle

Floats = NDArray[np.float64]

BLOCK: Final = 1024
"""Instants evaluated together: keeps the work in the processor's cache."""

OCEAN_EPOCH: Final = (MJD_ZERO, 37076.5)
"""Julian date of UT1 to which the phases of the ocean tides are referred."""

ORTHOTIDE: Final = (
    (0.0298, 0.1408, 0.0805, 0.6002, 0.3025, 0.1517),
    (0.0200, 0.0905, 0.0638, 0.3476, 0.1645, 0.0923),
)
"""Coefficients of the orthotide functions of order 1 and 2, for a lag of two days.

Source: Groves & Reynolds 1975, J. Geophys. Res. 80, 4131, as in TN36, chapter 8."""

LAG_DAYS: Final = 2.0


def subdaily(
    ut1_1: ArrayLike, ut1_2: ArrayLike, tt1: ArrayLike, tt2: ArrayLike
) -> tuple[Any, Any, Any]:
    """Ocean tides and libration together: what is to be added to pole and UT1.

    Parameters
    ----------
    ut1_1, ut1_2 : array_like, shape (...)
        Two-part Julian date, UT1 (that of the series will do): how the Earth is turned. Taking
        UTC for it is wrong by 1 micrometre at most, taking TT by 0.1 mm.
    tt1, tt2 : array_like, shape (...)
        The same instants, TT: where Sun and Moon are.

    Returns
    -------
    dx_rad, dy_rad, dut1_s : shape (...)
        To be added to x_p (rad), y_p (rad) and UT1 (s).

    Examples
    --------
    >>> dx, dy, dut1 = subdaily(2455000.5, 0.25, 2455000.5, 0.2507664)
    >>> f"{dx:.2e} {dy:.2e} {dut1:.2e}"
    '1.98e-09 -3.19e-10 2.01e-05'
    """
    ocean = ocean_tides(ut1_1, ut1_2)
    pole = pole_libration(ut1_1, ut1_2, tt1, tt2)
    dut1, _ = ut1_libration(ut1_1, ut1_2, tt1, tt2)
    return ocean[0] + pole[0], ocean[1] + pole[1], ocean[2] + dut1


def ocean_tides(ut1_1: ArrayLike, ut1_2: ArrayLike) -> tuple[Any, Any, Any]:
    """Diurnal and semidiurnal variations due to ocean tides.

    Parameters
    ----------
    ut1_1, ut1_2 : array_like, shape (...)
        Two-part Julian date, UT1.

    Returns
    -------
    dx_rad, dy_rad, dut1_s : shape (...)

    Notes
    -----
    71 lines of the tidal potential, each answered by an admittance that is smooth in frequency
    within each of the two bands.

    Source: IERS Conventions (2010), TN36, 8.2; Ray et al. 1994, Science 264, 830.
    """
    epoch1, epoch2 = OCEAN_EPOCH
    lines = table("ocean_tide_rotation_lines")
    frequency, phase = lines["frequency_rad_per_day"], lines["phase_rad"]
    cosines, sines = _ocean_amplitudes()

    def sums(days: Floats) -> Floats:
        angle = phase[:, None] + frequency[:, None] * days
        return cosines @ np.cos(angle) + sines @ np.sin(angle)

    days = (np.asarray(ut1_1, dtype=float) - epoch1) + (np.asarray(ut1_2, dtype=float) - epoch2)
    dx, dy, dut1 = _in_blocks(sums, 3, days)
    return dx * MICROARCSECOND, dy * MICROARCSECOND, dut1 * 1e-6


def pole_libration(
    ut1_1: ArrayLike, ut1_2: ArrayLike, tt1: ArrayLike, tt2: ArrayLike
) -> tuple[Any, Any]:
    """Diurnal libration in the pole.

    Parameters
    ----------
    ut1_1, ut1_2, tt1, tt2 : array_like, shape (...)
        As for `subdaily`.

    Returns
    -------
    dx_rad, dy_rad : shape (...)

    Notes
    -----
    The ten diurnal lines; those of long period are part of the published pole.

    Source: IERS Conventions (2010), TN36, 5.5.1 and table 5.1a.
    """
    dx, dy = _libration("libration_pole", ("xp", "yp"), ut1_1, ut1_2, tt1, tt2)
    return dx * MICROARCSECOND, dy * MICROARCSECOND


def ut1_libration(
    ut1_1: ArrayLike, ut1_2: ArrayLike, tt1: ArrayLike, tt2: ArrayLike
) -> tuple[Any, Any]:
    """Semidiurnal libration in UT1 and in the length of day.

    Parameters
    ----------
    ut1_1, ut1_2, tt1, tt2 : array_like, shape (...)
        As for `subdaily`.

    Returns
    -------
    dut1_s, dlod_s : shape (...)
        The length of day in s (per day).

    Notes
    -----
    Source: IERS Conventions (2010), TN36, 5.5.3 and table 5.1b.
    """
    dut1, dlod = _libration("libration_ut1", ("ut1", "lod"), ut1_1, ut1_2, tt1, tt2)
    return dut1 * 1e-6, dlod * 1e-6


@dataclass(frozen=True, eq=False)
class Lines:
    """A table of libration: multipliers (lines, 6), amplitudes (quantities, lines)."""

    multipliers: Floats
    sines: Floats
    cosines: Floats


def libration_sums(lines: Lines, arguments: Floats) -> Floats:
    """Sums of sines and cosines over the lines of a table.

    Parameters
    ----------
    lines : Lines
    arguments : ndarray, shape (6, n)
        GMST + pi, l, l', F, D, Omega, rad.

    Returns
    -------
    ndarray, shape (quantities, n)
        In the unit of the table.
    """
    angle = lines.multipliers @ arguments
    total: Floats = lines.sines @ np.sin(angle) + lines.cosines @ np.cos(angle)
    return total


@cache
def libration_lines(name: str, quantities: tuple[str, ...]) -> Lines:
    """The lines of a table, with amplitudes ``<quantity>_sin`` and ``<quantity>_cos``."""
    columns = table(name)
    return Lines(
        np.stack([columns[k] for k in ("theta", "l", "l_sun", "F", "D", "Omega")], axis=1),
        np.stack([columns[f"{quantity}_sin"] for quantity in quantities]),
        np.stack([columns[f"{quantity}_cos"] for quantity in quantities]),
    )


def _libration(
    name: str,
    quantities: tuple[str, ...],
    ut1_1: ArrayLike,
    ut1_2: ArrayLike,
    tt1: ArrayLike,
    tt2: ArrayLike,
) -> Floats:
    lines = libration_lines(name, quantities)

    def sums(t: Floats, sidereal: Floats) -> Floats:
        arguments = np.vstack([sidereal + 0.5 * TURN, fundamental_arguments(t)])
        return libration_sums(lines, arguments)

    sidereal = mean_sidereal_angle(ut1_1, ut1_2)
    return _in_blocks(sums, len(quantities), centuries(tt1, tt2), sidereal)


@cache
def _ocean_amplitudes() -> tuple[Floats, Floats]:
    """Of cos and sin of each line's angle, in x_p (uas), y_p (uas), UT1 (us); shape (3, 71).

    A line of height h and angle a, less a quarter of a turn in the diurnal band, contributes
    h r_l (u_l cos - v_l sin) for each orthotide function l of its band. Combined from values of
    the potential two days before, at, and two days after the instant, the functions multiply
    a line of frequency f by

        r_0 = p_1,  r_1 = p_2 - 2 p_3 cos 2f,  r_2 = p_4 - 2 p_5 cos 2f + 2 p_6 sin 2f.
    """
    lines, weights = table("ocean_tide_rotation_lines"), table("ocean_tide_rotation_orthoweights")
    count = lines["order"].size
    in_phase, quadrature = np.zeros((3, count)), np.zeros((3, count))
    for order, (p1, p2, p3, p4, p5, p6) in enumerate(ORTHOTIDE, start=1):
        band = lines["order"] == order
        lag = LAG_DAYS * lines["frequency_rad_per_day"][band]
        response = np.stack(
            [
                np.full_like(lag, p1),
                p2 - 2.0 * p3 * np.cos(lag),
                p4 - 2.0 * p5 * np.cos(lag) + 2.0 * p6 * np.sin(lag),
            ]
        )
        rows = weights["order"] == order
        for k, name in enumerate(("xp_{}_uas", "yp_{}_uas", "ut1_{}_us")):
            u, v = (weights[name.format(part)][rows] for part in ("u", "v"))
            in_phase[k, band] = lines["height_mm"][band] * (u @ response)
            quadrature[k, band] = lines["height_mm"][band] * (v @ response)
    diurnal = lines["order"] == 1
    # cos(a - 90 deg) = sin a and sin(a - 90 deg) = -cos a
    cosines = np.where(diurnal, quadrature, in_phase)
    sines = np.where(diurnal, in_phase, -quadrature)
    return cosines, sines


def _in_blocks(sums: Callable[..., Floats], rows: int, *arguments: Any) -> Floats:
    """Evaluate `sums` for flat pieces of the arguments; shape (rows, ...)."""
    arguments = np.broadcast_arrays(*arguments)
    shape = arguments[0].shape
    flat = [argument.reshape(-1) for argument in arguments]
    total = np.empty((rows, flat[0].size))
    for start in range(0, flat[0].size, BLOCK):
        block = slice(start, start + BLOCK)
        total[:, block] = sums(*(argument[block] for argument in flat))
    return total.reshape(rows, *shape)
