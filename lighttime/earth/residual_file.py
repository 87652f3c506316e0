"""Reader of a station's residual motion: a CSV file.

.. code-block:: text

    # Source: atmospheric pressure loading, centre of mass, service of our choice
    utc,east_mm,north_mm,up_mm
    2020-01-01T00:00:00,0.31,-0.42,-3.10
    2020-01-01T06:00:00,0.28,-0.40,-2.85

The first column that is read says when: ``utc`` (ISO 8601) or ``mjd`` (UTC). Displacements are in
millimetres (``_mm``) or metres (``_m``). Other columns are passed over.
"""

from __future__ import annotations

from array import array
from dataclasses import dataclass, field
from os import PathLike
from pathlib import Path
from typing import Final

import numpy as np

from lighttime.constants import MJD_ZERO
from lighttime.earth.residual_motion import LARGEST_M, ResidualMotion
from lighttime.errors import FileError, InputError
from lighttime.textfile import numbered_lines
from lighttime.timescales import Epoch
from lighttime.timescales.text import parse_iso

__all__ = ["read_residual_motion"]

LARGEST_FILE: Final = 64 * 2**20
"""Bytes: a century of hourly values."""

LONGEST_LINE: Final = 2000
"""Bytes."""

MOST_REMARKS: Final = 1000
"""Lines."""

_AXES = ("east", "north", "up")


def read_residual_motion(path: str | PathLike[str]) -> ResidualMotion:
    """See `ResidualMotion.read`."""
    path = Path(path)
    remarks: list[str] = []
    rows: _Rows | None = None
    for number, raw in numbered_lines(path, LARGEST_FILE, LONGEST_LINE):
        line = _decoded(path, number, raw).strip()
        if line.startswith("#"):
            remarks.append(line.lstrip("# \t").strip().removeprefix("Source:").strip())
            if len(remarks) > MOST_REMARKS:
                raise FileError(path, number, f"more than {MOST_REMARKS} lines of remarks")
        elif line:
            cells = [cell.strip() for cell in line.split(",")]
            if rows is None:
                rows = _Rows.of_head(path, number, cells)
            else:
                rows.take(number, cells)
    if rows is None or len(rows.lines) < 2:
        raise FileError(path, None, "needs a line of column names and two rows or more")
    epochs = Epoch(np.array(rows.utc1), np.array(rows.utc2), "utc")
    source = " ".join([*filter(None, remarks), f"({path.name})"])
    try:
        return ResidualMotion(epochs, np.array(rows.enu_m).reshape(-1, 3), source)
    except InputError as error:  # of instants out of order: every number was looked at
        index = int(error.name.partition("[")[2].partition("]")[0])
        raise FileError(path, rows.lines[index], str(error)) from error


@dataclass(slots=True)
class _Rows:
    """The rows of a file, each looked at when it is read."""

    path: Path
    head: list[str]
    when: int
    axes: list[int]
    lines: array[int] = field(default_factory=lambda: array("q"))
    utc1: array[float] = field(default_factory=lambda: array("d"))
    utc2: array[float] = field(default_factory=lambda: array("d"))
    enu_m: array[float] = field(default_factory=lambda: array("d"))

    @classmethod
    def of_head(cls, path: Path, line: int, head: list[str]) -> _Rows:
        """None yet; FileError if a column is missing, or there twice."""
        found = []
        for names in (("utc", "mjd"), *((f"{axis}_mm", f"{axis}_m") for axis in _AXES)):
            here = [k for k, name in enumerate(head) if name.lower() in names]
            if len(here) != 1:
                reason = f"{len(here)} columns {' or '.join(names)}; one is needed, in {head}"
                raise FileError(path, line, reason)
            found += here
        return cls(path, head, found[0], found[1:])

    def take(self, line: int, cells: list[str]) -> None:
        """One row more."""
        if len(cells) != len(self.head):
            reason = f"{len(cells)} cells under {len(self.head)} names of columns"
            raise FileError(self.path, line, reason)
        utc1, utc2 = self._instant(line, cells[self.when])
        self.lines.append(line)
        self.utc1.append(utc1)
        self.utc2.append(utc2)
        self.enu_m.extend(self._metres(line, self.head[k], cells[k]) for k in self.axes)

    def _instant(self, line: int, cell: str) -> tuple[float, float]:
        name = self.head[self.when]
        if name.lower() == "mjd":
            day = self._number(line, name, cell)
            if not 36934.0 < day < 88069.0:  # the UTC of 1960 to 2099
                raise FileError(self.path, line, f"{name} is {cell}; allowed: 36935 to 88068")
            return MJD_ZERO, day
        try:
            return parse_iso(cell, "utc")
        except InputError as error:
            raise FileError(self.path, line, str(error)) from error

    def _metres(self, line: int, name: str, cell: str) -> float:
        unit = 1e-3 if name.lower().endswith("_mm") else 1.0
        metres = self._number(line, name, cell) * unit
        if not abs(metres) <= LARGEST_M:
            reason = f"{name} is {cell}; allowed: up to {LARGEST_M:g} m in size"
            raise FileError(self.path, line, reason)
        return metres

    def _number(self, line: int, name: str, cell: str) -> float:
        try:
            value = float(cell) if cell.isascii() and "_" not in cell else np.nan
        except ValueError:
            value = np.nan
        if not np.isfinite(value):
            raise FileError(self.path, line, f"{name} is {cell!r}; allowed: finite numbers")
        return value


def _decoded(path: Path, number: int, raw: bytes) -> str:
    try:
        return raw.decode("utf-8-sig" if number == 1 else "utf-8")
    except UnicodeDecodeError as error:
        raise FileError(path, number, "not a text file (UTF-8)") from error
