"""Checks of what is handed in: numbers, ranges, shapes."""

from __future__ import annotations

from typing import Any, Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.errors import InputError

__all__ = [
    "broadcast_shape",
    "first_outside",
    "number",
    "numbers",
    "triple",
    "within",
    "without_unit",
]

Array = NDArray[np.float64]

UNITS: Final = {
    "_m_per_yr": "m / yr",
    "_hpa": "hPa",
    "_deg": "deg",
    "_rad": "rad",
    "_nm": "nm",
    "_k": "K",
    "_m": "m",
    "_s": "s",
    "seconds": "s",
}
"""What the ending of an input's name says about its unit; of any other ending: no unit."""


def without_unit(name: str, value: Any) -> Any:
    """A value that carries its unit, as an astropy Quantity does, in the unit that `name` says.

    Any other value is returned as it is; of a list or a tuple, each element.

    Raises
    ------
    InputError
        If the unit is one of something else.

    Examples
    --------
    >>> from astropy import units
    >>> float(without_unit("height_m", 2.31 * units.km))
    2310.0
    >>> without_unit("pressure_hpa", 770.0)
    770.0
    """
    if isinstance(value, (list, tuple)):
        carried = any(hasattr(each, "to_value") for each in value)
        return [without_unit(name, each) for each in value] if carried else value
    if not (hasattr(value, "to_value") and hasattr(value, "unit")):
        return value
    from astropy.units import UnitConversionError, temperature

    unit = next((unit for ending, unit in UNITS.items() if name.endswith(ending)), "")
    try:
        return value.to_value(unit, temperature() if unit == "K" else [])
    except UnitConversionError:
        allowed = f"a unit that can be converted to {unit}" if unit else "a number without a unit"
        raise InputError(name, str(value), allowed) from None


def numbers(name: str, value: ArrayLike) -> Array:
    """An input as a float64 array; InputError if it holds anything else than numbers."""
    try:
        return np.asarray(without_unit(name, value), dtype=float)
    except (TypeError, ValueError) as error:
        if isinstance(error, InputError):
            raise
        raise InputError(name, value, "a number or an array of numbers") from None


def number(name: str, value: Any) -> float:
    """One number; InputError if it is anything else."""
    array = numbers(name, value)
    if array.ndim:
        raise InputError(name, value, "one number")
    return float(array)


def triple(name: str, value: ArrayLike) -> tuple[float, float, float]:
    """Three finite numbers; InputError if it is anything else."""
    array = numbers(name, value)
    if array.shape != (3,) or not np.all(np.isfinite(array)):
        raise InputError(name, value, "three finite numbers")
    x, y, z = array.tolist()
    return x, y, z


def first_outside(value: Array, low: float, high: float) -> tuple[str, float] | None:
    """The first element that is not within [low, high], NaN among them.

    Returns
    -------
    (str, float) or None
        Where it is, as ``"[2]"`` (empty for a scalar), and what it is; None if all are within.
    """
    bad = ~((value >= low) & (value <= high))
    if not bad.any():
        return None
    index = tuple(int(i) for i in np.argwhere(bad)[0])
    where = f"[{', '.join(map(str, index))}]" if index else ""
    return where, float(value[index])


def within(name: str, value: ArrayLike, low: float, high: float, unit: str = "") -> Array:
    """An input as a float64 array; InputError naming its first element outside [low, high].

    Examples
    --------
    >>> within("height_m", [12.0, 2.0e6], -1000.0, 10000.0, " m")
    Traceback (most recent call last):
        ...
    lighttime.errors.InputError: height_m[1] is 2000000.0; allowed: -1000 to 10000 m
    """
    array = numbers(name, value)
    bad = first_outside(array, low, high)
    if bad is not None:
        where, found = bad
        raise InputError(f"{name}{where}", found, f"{low:g} to {high:g}{unit}")
    return array


def broadcast_shape(**inputs: ArrayLike) -> tuple[int, ...]:
    """The common shape of named inputs; InputError if they have none.

    Examples
    --------
    >>> import numpy as np
    >>> broadcast_shape(elevation_rad=np.ones(3), height_m=np.ones(2))
    Traceback (most recent call last):
        ...
    lighttime.errors.InputError: shape of (elevation_rad, height_m) is ((3,), (2,)); \
allowed: shapes that broadcast
    """
    shapes = {name: np.shape(value) for name, value in inputs.items() if np.ndim(value)}
    try:
        return np.broadcast_shapes(*shapes.values())
    except ValueError:
        names = ", ".join(shapes)
        raise InputError(
            f"shape of ({names})", tuple(shapes.values()), "shapes that broadcast"
        ) from None
