"""The error budget of a round trip, by its parts and as tables."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import TYPE_CHECKING, Any

import numpy as np

from lighttime.constants import SPEED_OF_LIGHT
from lighttime.errors import UnknownNameError
from lighttime.query import Query

if TYPE_CHECKING:
    from pathlib import Path

    from astropy.table import QTable

__all__ = ["Budget", "BudgetPart"]

MM_PER_S = 0.5 * SPEED_OF_LIGHT * 1.0e3
"""From a round trip in seconds to one way in millimetres."""


@dataclass(frozen=True, eq=False)
class BudgetPart:
    """What one input contributes.

    Attributes
    ----------
    name : str
    term : str
        The term of the range that it belongs to (``"geometry"``, ``"troposphere"``, ...).
    sigma_s : float or array
        One sigma of the round trip, s.
    source : str
        Where the sigma of the input comes from.
    """

    name: str
    term: str
    sigma_s: Any
    source: str


@dataclass(frozen=True, eq=False)
class Budget:
    """The error budget of a round trip.

    A mapping-like object: ``budget["ut1"]`` is a part, iteration goes over names.

    Attributes
    ----------
    query : Query
    parts : mapping of str to BudgetPart
    total_s : float or array
        One sigma of the round trip, s.
    missing : tuple of str
        Terms that nothing was given for: they are neither in the range nor in its sigma.
    """

    query: Query = field(repr=False)
    parts: Mapping[str, BudgetPart]
    total_s: Any
    missing: tuple[str, ...]

    def __getitem__(self, name: str) -> BudgetPart:
        try:
            return self.parts[name]
        except KeyError:
            raise UnknownNameError("part", name, tuple(self.parts)) from None

    def __iter__(self) -> Iterator[str]:
        return iter(self.parts)

    @property
    def terms(self) -> Mapping[str, Any]:
        """One sigma of each term of the range, s: the squares of its parts added."""
        squares: dict[str, Any] = {}
        for part in self.parts.values():
            squares[part.term] = squares.get(part.term, 0.0) + part.sigma_s**2
        return MappingProxyType({term: value**0.5 for term, value in squares.items()})

    @property
    def largest_first(self) -> tuple[BudgetPart, ...]:
        """The parts, by their root mean square over the epochs."""

        def size(part: BudgetPart) -> float:
            return -float(np.sqrt(np.mean(np.square(part.sigma_s))))

        return tuple(sorted(self.parts.values(), key=size))

    def table(self) -> QTable:
        """An astropy `QTable`: a row per part, largest first, and the total last.

        ``sigma`` is of the round trip; over many epochs, its root mean square, with the least
        and the most beside it.
        """
        from astropy import units
        from astropy.table import QTable

        rows = [(p.name, p.term, p.sigma_s, p.source) for p in self.largest_first]
        rows.append(("total", "", self.total_s, ""))
        names, terms, sigmas, sources = zip(*rows, strict=True)
        out = QTable()
        out["part"], out["term"] = list(names), list(terms)
        out["sigma"] = [float(np.sqrt(np.mean(np.square(s)))) for s in sigmas] * units.s
        if self.query.shape:
            out["sigma_least"] = [float(np.min(s)) for s in sigmas] * units.s
            out["sigma_most"] = [float(np.max(s)) for s in sigmas] * units.s
        out["one_way"] = (out["sigma"].value * MM_PER_S) * units.mm
        out["source"] = list(sources)
        out.meta["missing"] = list(self.missing)
        return out

    def plot(self, path: str | Path | None = None) -> Any:
        """A stacked picture of the budget over time: see `lighttime.uncertainty.plot.plot`."""
        from lighttime.uncertainty.plot import plot

        return plot(self, path)

    def __str__(self) -> str:
        when = self.query.when
        at = f"rms of {self.query.size} epochs" if self.query.shape else str(when)
        head = f"  {'part':20}{'term':20}{'ps two-way':>12}{'mm one-way':>12}  source of the sigma"
        rule = "  " + "-" * 98
        lines = [f"Error budget, one sigma, {at}", head, rule]
        lines += [
            f"  {part.name:20}{part.term:20}{_both(part.sigma_s)}  {part.source}"
            for part in self.largest_first
        ]
        lines += [rule, f"  {'total':40}{_both(self.total_s)}"]
        if self.missing:
            lines.append(f"  not modelled, so in neither: {', '.join(self.missing)}")
        return "\n".join(lines)


def _both(sigma: Any) -> str:
    """A sigma, or its root mean square over the epochs, in ps two-way and mm one-way."""
    rms = float(np.sqrt(np.mean(np.square(sigma))))
    return f"{rms * 1.0e12:>12,.3f}{rms * MM_PER_S:>12,.3f}".replace(",", " ")
