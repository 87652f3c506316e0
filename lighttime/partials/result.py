"""The derivatives of a round trip, by name, and as tables."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np

from lighttime.errors import UnknownNameError
from lighttime.query import Query
from lighttime.vectors import Array

if TYPE_CHECKING:
    from astropy.table import QTable

UNITS = {
    "_m_per_yr": "s yr / m",
    "_m_per_s": "s2 / m",
    "_arcsec": "s / arcsec",
    "_mas": "s / mas",
    "_rad": "s / rad",
    "_hpa": "s / hPa",
    "_relative": "s",
    "_k": "s / K",
    "_m": "s / m",
    "_s": "",
}
"""Unit of the derivative by the ending of the parameter's name; seconds if there is none."""


def unit_of(name: str) -> str:
    """The unit of the derivative by a parameter, as astropy reads it ("" without one).

    Examples
    --------
    >>> unit_of("station_x_m"), unit_of("ut1_s"), unit_of("gamma")
    ('s / m', '', 's')
    """
    return next((unit for ending, unit in UNITS.items() if name.endswith(ending)), "s")


@dataclass(frozen=True, eq=False)
class Partials(Mapping[str, Any]):
    """Derivatives of a round trip, in seconds per unit of each parameter.

    A mapping from the name of a parameter to a float or an array in the shape of the epochs;
    ``dict(partials)`` is a plain dict.

    Attributes
    ----------
    query : Query
        What they are of.
    notes : mapping of str to str
        How those were found that are not differentiated by hand.
    """

    query: Query
    slopes: Mapping[str, Any] = field(repr=False)
    notes: Mapping[str, str]

    def __getitem__(self, name: str) -> Any:
        try:
            return self.slopes[name]
        except KeyError:
            raise UnknownNameError("parameter", name, tuple(self.slopes)) from None

    def __contains__(self, name: object) -> bool:
        return name in self.slopes

    def __iter__(self) -> Iterator[str]:
        return iter(self.slopes)

    def __len__(self) -> int:
        return len(self.slopes)

    def matrix(self, names: Iterable[str] | None = None) -> Array:
        """A column for each parameter: what least squares ask for.

        Parameters
        ----------
        names : iterable of str, optional
            All of them, in their order, when not given.

        Returns
        -------
        ndarray, shape (n, number of names)
            A row per epoch, flat.
        """
        wanted = tuple(self) if names is None else tuple(names)
        return np.stack([np.ravel(self[name]) for name in wanted], axis=-1)

    def table(self) -> QTable:
        """An astropy `QTable` with a row per epoch and a column, with its unit, per parameter."""
        from astropy import units
        from astropy.table import QTable

        when = self.query.when
        out = QTable()
        out[f"epoch_{when.scale}"] = np.ravel(when.isoformat(12))
        for name, values in self.items():
            out[name] = np.ravel(values) * units.Unit(unit_of(name))
        out.meta["quantity"] = "d(round trip)/d(parameter)"
        out.meta["notes"] = dict(self.notes)
        return out

    def __str__(self) -> str:
        rows = [f"Derivatives of the round trip, {self.query.size} epochs"]
        rows.append(f"  {'parameter':28}{'least':>16}{'most':>16}  unit")
        for name, values in self.items():
            low, high = float(np.min(values)), float(np.max(values))
            rows.append(f"  {name:28}{low:>16.6e}{high:>16.6e}  {unit_of(name) or '1'}")
        return "\n".join(rows + [f"  {name}: {note}" for name, note in self.notes.items()])
