"""What else moves a station: a series of displacements that the user supplies.

The weight of air and water that is not tidal, what the ground does after an earthquake, the
settling of a pier: no model of this library gives them, and whoever has them as a series of
east, north and up can hand them in.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from os import PathLike
from typing import Final

import numpy as np
from numpy.typing import ArrayLike

from lighttime.earth.loading import _Coefficients
from lighttime.errors import CoverageError, InputError
from lighttime.timescales import Epoch
from lighttime.vectors import Array

__all__ = ["ResidualMotion"]

LARGEST_M: Final = 20.0
"""No earthquake moved a station further; what is larger is in another unit."""


@dataclass(frozen=True, eq=False)
class ResidualMotion(_Coefficients):
    """A station's displacement in east, north and up at some instants, linear in between.

    Parameters
    ----------
    when : Epoch, or what `Epoch.parse` takes; shape (n,)
        Two instants at least, each later than the one before.
    enu_m : array_like, shape (n, 3)
        East, north and up of the GRS80 ellipsoid, metres.
    source : str
        What it is, and whose.

    Raises
    ------
    InputError
        If the instants are not in order or fewer than two, or a displacement is not finite or
        larger than 20 m.

    Notes
    -----
    Ranges are reckoned from the centre of mass of the whole Earth, oceans and air included: that
    is the origin of an ephemeris. A loading series belongs to it when it is given in that frame
    ("CM"); one that refers to the centre of figure ("CF") lacks the motion of the geocentre.

    Examples
    --------
    >>> days, enu_m = ["2020-01-01", "2020-01-03"], [[0.0, 0.0, 0.002], [0.0, 0.0, 0.004]]
    >>> motion = ResidualMotion(days, enu_m, "a pier that rises")
    >>> tt = Epoch.parse("2020-01-02").to("tt")
    >>> motion.at(tt.jd1, tt.jd2).round(9).tolist()
    [0.0, 0.0, 0.003]
    """

    when: Epoch
    enu_m: Array
    source: str = ""

    def __post_init__(self) -> None:
        when = Epoch.parse(self.when)
        object.__setattr__(self, "when", when)
        if len(when.shape) != 1 or when.shape[0] < 2:
            raise InputError("when", f"epochs of shape {when.shape}", "two or more in one row")
        self._set("enu_m", (when.shape[0], 3), -LARGEST_M, LARGEST_M)
        late = np.flatnonzero(np.diff(self._days) <= 0.0)
        if late.size:
            k = int(late[0]) + 1
            raise InputError(f"when[{k}]", str(when[k]), f"later than {when[k - 1]}")

    @staticmethod
    def read(path: str | PathLike[str]) -> ResidualMotion:
        """Read a CSV file as `lighttime.earth.residual_file` describes it.

        Parameters
        ----------
        path : path
            Lines that begin with ``#`` are comments; they become the source.

        Raises
        ------
        FileError
            With the line: a column that is missing, a cell that is not a number or an instant, a
            row of another length, instants out of order, a size that cannot be.
        """
        from lighttime.earth.residual_file import read_residual_motion

        return read_residual_motion(path)

    @cached_property
    def _tt(self) -> Epoch:
        return self.when.to("tt")

    @cached_property
    def _days(self) -> Array:
        """Days of TT since the first instant."""
        days: Array = (self._tt.jd1 - self._tt.jd1[0]) + (self._tt.jd2 - self._tt.jd2[0])
        return days

    @property
    def coverage(self) -> tuple[Epoch, Epoch]:
        """First and last instant."""
        return self.when[0], self.when[-1]

    def at(self, tt1: ArrayLike, tt2: ArrayLike) -> Array:
        """The displacement at some instants.

        Parameters
        ----------
        tt1, tt2 : array_like, shape (...)
            TT Julian date in two parts.

        Returns
        -------
        ndarray, shape (3, ...)
            East, north, up, metres.

        Raises
        ------
        CoverageError
            Before the first or after the last instant.
        """
        first1, first2 = self._tt.jd1[0], self._tt.jd2[0]
        days = (np.asarray(tt1, float) - first1) + (np.asarray(tt2, float) - first2)
        outside = ~((days >= 0.0) & (days <= self._days[-1]))
        if outside.any():
            self._refuse(float(days[outside].flat[0]))
        return np.stack([np.interp(days, self._days, column) for column in self.enu_m.T])

    def _refuse(self, days: float) -> None:
        if not np.isfinite(days):
            raise InputError("tt1 + tt2", days, "a finite Julian date")
        when = Epoch(self._tt.jd1[0], self._tt.jd2[0] + days, "tt").to(self.when.scale)
        first, last = self.coverage
        of = f": {self.source}" if self.source else ""
        span = f"{first.isoformat(3)} to {last.isoformat(3)} {self.when.scale.upper()}"
        given = f"{when.isoformat(6)} {when.scale.upper()}"
        raise CoverageError("when", given, f"{span}, the residual motion of the station{of}")
