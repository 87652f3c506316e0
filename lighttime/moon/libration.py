"""The orientation of the Moon: from its principal axes to the axes of the ICRS."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from lighttime.vectors import Array

Matrix = NDArray[np.float64]


def principal_axes(angles: Array) -> Matrix:
    """The matrix that takes principal-axis coordinates to the ICRS.

    ``r_ICRS = [Rz(psi) Rx(theta) Rz(phi)]^T r_PA`` with frame rotations Rz, Rx.

    Parameters
    ----------
    angles : array, shape (3, ...)
        Libration angles phi, theta, psi in radians.

    Returns
    -------
    ndarray, shape (3, 3, ...)
        Its columns are the principal axes, seen in the ICRS.

    Notes
    -----
    Source: Newhall & Williams 1997, Celest. Mech. Dyn. Astron. 66, 21.
    """
    phi, theta, psi = angles
    cf, sf = np.cos(phi), np.sin(phi)
    ct, st = np.cos(theta), np.sin(theta)
    cp, sp = np.cos(psi), np.sin(psi)
    return np.array(
        [
            [cf * cp - sf * ct * sp, -cf * sp - sf * ct * cp, sf * st],
            [sf * cp + cf * ct * sp, -sf * sp + cf * ct * cp, -cf * st],
            [st * sp, st * cp, ct],
        ]
    )


def angular_velocity(angles: Array, rates: Array) -> Array:
    """Angular velocity of the Moon in the ICRS, rad/s.

    phi turns about the ICRS pole, theta about the node, psi about the Moon's polar axis.

    Parameters
    ----------
    angles, rates : array, shape (3, ...)
        Libration angles (rad) and their rates (rad/s).
    """
    phi, theta, _ = angles
    dphi, dtheta, dpsi = rates
    cf, sf = np.cos(phi), np.sin(phi)
    ct, st = np.cos(theta), np.sin(theta)
    return np.array([dtheta * cf + dpsi * sf * st, dtheta * sf - dpsi * cf * st, dphi + dpsi * ct])
