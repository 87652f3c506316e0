"""What a cross-check found, for people and for programs."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from os import PathLike
from typing import TYPE_CHECKING, Any

from lighttime.crosscheck.bench import Circumstances
from lighttime.crosscheck.findings import Finding
from lighttime.crosscheck.noise import Rest, Rounding
from lighttime.crosscheck.ranges import Ranges
from lighttime.crosscheck.rungs import Rung
from lighttime.crosscheck.separation import Inseparable
from lighttime.vectors import Array

if TYPE_CHECKING:
    from matplotlib.figure import Figure


@dataclass(frozen=True, eq=False)
class Report:
    """Why two models disagree.

    Arrays are (n,): a row for each range that could be used, in the order of the table. Picoseconds
    are of the whole round trip (or of the leg that was compared).

    Attributes
    ----------
    ranges : Ranges
        What the other program said; ``ranges.unreadable`` lists the rows that were left out.
    station, array, model : str
        Between what, and by which model.
    difference_ps : ndarray
        The other's minus ours, before.
    residual_ps : ndarray
        What remains after the findings are taken away.
    sigma_ps : ndarray
        The noise of each range: as stated, or as estimated from what remains.
    sigma_stated : bool
    findings : tuple of Finding
        The strongest first. Empty: nothing significant.
    inseparable : tuple of Inseparable
        Explanations that these ranges cannot tell apart.
    rest : Rest
        What remains: size, and whether it has structure.
    rounding : tuple of Rounding
        Losses of digits that are of the size of what remains.
    apart : ndarray of bool
        Rows that stand apart and were set aside in the search.
    rungs : tuple of Rung
        Intermediate values, where the other program gives them.
    suspects : mapping of str to str
        All that were tried: name and words.
    untested : mapping of str to str
        Those that these ranges say nothing about, and why.
    invisible : tuple of str
        Those that are below the noise of these ranges.
    signatures : mapping of str to ndarray
        Of the findings, ps at amplitude 1.
    circumstances : Circumstances
    searched : int
        Rows that the search used.
    repeated : int
        Rows that repeat an epoch of another.
    tolerance_ps : float or None
    notes : tuple of str
    """

    ranges: Ranges
    station: str
    array: str
    model: str
    difference_ps: Array
    residual_ps: Array
    sigma_ps: Array
    sigma_stated: bool
    findings: tuple[Finding, ...]
    inseparable: tuple[Inseparable, ...]
    rest: Rest
    rounding: tuple[Rounding, ...]
    apart: Any
    rungs: tuple[Rung, ...]
    suspects: Mapping[str, str]
    untested: Mapping[str, str]
    invisible: tuple[str, ...]
    signatures: Mapping[str, Array]
    circumstances: Circumstances
    searched: int
    repeated: int
    tolerance_ps: float | None = None
    notes: tuple[str, ...] = field(default=())

    def __len__(self) -> int:
        return len(self.difference_ps)

    @property
    def largest_ps(self) -> float:
        """The largest difference, before."""
        return float(max(abs(self.difference_ps.min()), abs(self.difference_ps.max())))

    @property
    def agrees(self) -> bool:
        """Whether the two models agree.

        Within the tolerance that was given, at every range; without one, whether nothing
        significant was found and what remains is noise.
        """
        if self.tolerance_ps is not None:
            return self.largest_ps <= self.tolerance_ps
        return not self.findings and not self.rest.has_structure and not self.apart.any()

    def summary(self) -> str:
        """What was found, in a few sentences."""
        from lighttime.crosscheck.text import summary

        return summary(self)

    def __str__(self) -> str:
        from lighttime.crosscheck.text import report_text

        return report_text(self)

    def plot(self) -> Figure:
        """Differences before and after against four quantities, and the findings' signatures.

        Returns
        -------
        matplotlib.figure.Figure
            Needs matplotlib (the extra ``plot``).
        """
        from lighttime.crosscheck.plots import plot

        return plot(self)

    def write(self, path: str | PathLike[str]) -> None:
        """Write the report: ``.html`` (one page, complete in itself), ``.json`` or ``.ecsv``.

        Parameters
        ----------
        path : path
            Its ending says the form. A file that is there is replaced.

        Raises
        ------
        InputError
            For another ending.
        """
        from lighttime.crosscheck.files import write

        write(self, path)
