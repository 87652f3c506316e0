"""A reflector: where it is fixed to the Moon, and in which convention that is said."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal, get_args

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.constants import L_B, L_C, MOON_MEAN_RADIUS, SPEED_OF_LIGHT
from lighttime.data import table
from lighttime.errors import InputError, UnknownNameError
from lighttime.inputs import triple

__all__ = ["Reflector", "Scale", "reflector", "reflectors"]

Array = NDArray[np.float64]
Triple = tuple[float, float, float]

Scale = Literal["tdb", "tt", "local"]

FARTHEST_M: Final = 20_000.0
"""A reflector lies within this of the mean sphere of the Moon."""

_SOURCE = "Williams, Boggs & Folkner 2013, IOM 335-JW,DB,WF-20130722-016 (from memory)"


@dataclass(frozen=True)
class Reflector:
    """A reflector on the Moon.

    Parameters
    ----------
    name : str
        For people.
    xyz_m : 3 floats
        Position in the principal axes of the Moon, metres.
    axes : str
        The ephemeris whose principal axes they are ("DE430"). Those of different ephemerides
        differ, and mean-Earth axes are no principal axes.
    scale : {"tdb", "tt", "local"}
        The time scale that the unit of length goes with: ``"tdb"`` for coordinates of an
        ephemeris; ``"tt"`` for those scaled as terrestrial ones; ``"local"`` for unscaled
        coordinates of the Moon's own reference system (that of TCL).
    contains_permanent_tide : bool
        Whether the position contains the permanent part of the lunar tide, which is then not
        added again.
    sigma_m : 3 floats, optional
        One-sigma along x, y and z, metres, for error budgets.
    source : str
        Where the coordinates come from.

    Raises
    ------
    InputError
        If a number is not finite, the position is not within 20 km of the mean sphere of the
        Moon (radius 1737.4 km), or the scale or the axes are none.

    Examples
    --------
    >>> Reflector("Mare", (1737.4, 0.0, 0.0))
    Traceback (most recent call last):
        ...
    lighttime.errors.InputError: xyz_m is (1737.4, 0.0, 0.0); allowed: 1717400 to \
1757400 m from the centre of the Moon; this is 1737.4 m (in kilometres?)
    """

    name: str
    xyz_m: Triple
    axes: str = "DE430"
    scale: Scale = "tdb"
    contains_permanent_tide: bool = False
    sigma_m: Triple | None = None
    source: str = ""

    def __post_init__(self) -> None:
        object.__setattr__(self, "xyz_m", triple("xyz_m", self.xyz_m))
        radius = float(np.linalg.norm(self.xyz_m))
        if abs(radius - MOON_MEAN_RADIUS) > FARTHEST_M:
            low, high = MOON_MEAN_RADIUS - FARTHEST_M, MOON_MEAN_RADIUS + FARTHEST_M
            kilometres = " (in kilometres?)" if low <= 1e3 * radius <= high else ""
            raise InputError(
                "xyz_m",
                self.xyz_m,
                f"{low:.0f} to {high:.0f} m from the centre of the Moon; this is {radius:g} m"
                + kilometres,
            )
        if self.sigma_m is not None:
            sigma = triple("sigma_m", self.sigma_m)
            if min(sigma) < 0.0:
                raise InputError("sigma_m", sigma, "three lengths in metres, none negative")
            object.__setattr__(self, "sigma_m", sigma)
        if self.scale not in get_args(Scale):
            raise UnknownNameError("scale", self.scale, get_args(Scale))
        if not _plain(self.axes) or _plain(self.axes) in _MEAN_EARTH:
            raise InputError(
                "axes", self.axes, 'the ephemeris whose principal axes are meant, as "DE430"'
            )

    def scale_change(self, potential_m2_s2: ArrayLike) -> Array:
        """What the coordinates are multiplied by to become TDB-compatible, minus one.

        Parameters
        ----------
        potential_m2_s2 : array_like, shape (...)
            Potential of the Sun, the Earth and the planets at the centre of the Moon (positive).

        Returns
        -------
        ndarray, shape (...)
            0 for ``"tdb"``; -U/c^2 - L_C for ``"tt"``; -U/c^2 - L_B for ``"local"``: from the
            Moon's own system to TCB-compatible by -U/c^2, from there by -L_B.

        Notes
        -----
        Source: IAU 2000 B1.3 and 2006 B3; for the Moon, IAU 2024 resolution II.
        """
        potential = np.asarray(potential_m2_s2, dtype=float)
        if self.scale == "tdb":
            return np.zeros_like(potential)
        return -potential / SPEED_OF_LIGHT**2 - (L_C if self.scale == "tt" else L_B)

    def axes_note(self, ephemeris_name: str) -> str | None:
        """What to say when the coordinates are used with the libration of an ephemeris.

        Parameters
        ----------
        ephemeris_name : str
            The ephemeris in use ("DE421").

        Returns
        -------
        str or None
            None if the axes are those of this ephemeris.

        Examples
        --------
        >>> reflector("Apollo 15").axes_note("DE430") is None
        True
        >>> print(reflector("Apollo 15").axes_note("DE421"))
        Apollo 15 is given in the principal axes of DE430, the libration is that of DE421: \
an inconsistency of up to about a metre
        """
        pair = {_plain(self.axes), _plain(ephemeris_name)}
        if len(pair) == 1:
            return None
        size = "up to about a metre" if pair == {"de430", "de421"} else "a size not known here"
        return (
            f"{self.name} is given in the principal axes of {self.axes}, the libration is that "
            f"of {ephemeris_name}: an inconsistency of {size}"
        )


def reflectors() -> tuple[Reflector, ...]:
    """The five retroreflector arrays that stand on the Moon since 1969 to 1973.

    Returns
    -------
    tuple of Reflector
        In the principal axes of DE430.

    Examples
    --------
    >>> [each.name for each in reflectors()]
    ['Apollo 11', 'Apollo 14', 'Apollo 15', 'Lunokhod 1', 'Lunokhod 2']
    """
    rows = table("reflectors")
    return tuple(
        Reflector(str(name), (x, y, z), str(axes), str(scale), source=_SOURCE)  # type: ignore[arg-type]
        for name, axes, scale, x, y, z in zip(
            *(rows[key] for key in ("name", "axes", "scale", "x_m", "y_m", "z_m")), strict=True
        )
    )


def reflector(name: str) -> Reflector:
    """One of `reflectors`, by its name.

    Parameters
    ----------
    name : str
        In any case, with or without the space ("Apollo 15", "apollo15").

    Returns
    -------
    Reflector

    Raises
    ------
    UnknownNameError
        If there is none of that name; near names are suggested.

    Examples
    --------
    >>> reflector("apollo 15").xyz_m
    (1554678.104, 98094.498, 765005.863)
    """
    known = {_plain(each.name): each for each in reflectors()}
    if _plain(name) not in known:
        raise UnknownNameError("reflector", name, [each.name for each in known.values()])
    return known[_plain(name)]


def _plain(name: str) -> str:
    """A name without case, spaces and hyphens."""
    return "".join(character for character in str(name).lower() if character.isalnum())


_MEAN_EARTH = {"me", "meanearth", "meanearthpolaraxis", "moonme", "pa", "principalaxes"}
"""Names of axes that do not say of which ephemeris, or are no principal axes."""
