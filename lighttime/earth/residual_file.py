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

from os import PathLike
from pathlib import Path
from typing import Final

import numpy as np

from lighttime.constants import MJD_ZERO
from lighttime.earth.residual_motion import LARGEST_M, ResidualMotion
from lighttime.errors import FileError, InputError, LighttimeError
from lighttime.timescales import Epoch

__all__ = ["read_residual_motion"]

LARGEST_FILE: Final = 64 * 2**20
"""Bytes: a century of hourly values."""

_AXES = ("east", "north", "up")


def read_residual_motion(path: str | PathLike[str]) -> ResidualMotion:
    """See `ResidualMotion.read`."""
    path = Path(path)
    try:
        with path.open("rb") as file:
            content = file.read(LARGEST_FILE + 1)
    except OSError as error:
        raise FileError(path, None, error.strerror or str(error)) from error
    if len(content) > LARGEST_FILE:
        raise FileError(path, None, f"longer than {LARGEST_FILE} bytes")
    try:
        lines = content.decode("utf-8-sig").splitlines()
    except UnicodeDecodeError as error:
        raise FileError(path, None, "not a text file (UTF-8)") from error
    table = [
        (number, [cell.strip() for cell in line.split(",")])
        for number, line in enumerate(lines, start=1)
        if line.strip() and not line.lstrip().startswith("#")
    ]
    remarks = [line.lstrip("# \t").strip() for line in lines if line.lstrip().startswith("#")]
    remarks = [remark.removeprefix("Source:").strip() for remark in remarks if remark]
    if len(table) < 3:
        raise FileError(path, None, "needs a line of column names and two rows or more")
    (head_line, head), *rows = table
    when, *axes = _columns(path, head_line, head)
    for number, row in rows:
        if len(row) != len(head):
            raise FileError(path, number, f"{len(row)} cells under {len(head)} names of columns")
    epochs = _epochs(path, head[when], [(number, row[when]) for number, row in rows])
    enu_m = [[_metres(path, number, head[k], row[k]) for k in axes] for number, row in rows]
    source = " ".join([*remarks, f"({path.name})"])
    try:
        return ResidualMotion(epochs, np.array(enu_m), source)
    except InputError as error:  # of instants out of order: every number was looked at
        index = int(error.name.partition("[")[2].partition("]")[0])
        raise FileError(path, rows[index][0], str(error)) from error


def _columns(path: Path, line: int, head: list[str]) -> list[int]:
    """Indices of the columns for the instant, east, north and up."""
    found = []
    for names in (("utc", "mjd"), *((f"{axis}_mm", f"{axis}_m") for axis in _AXES)):
        here = [k for k, name in enumerate(head) if name.lower() in names]
        if len(here) != 1:
            reason = f"{len(here)} columns {' or '.join(names)}; one is needed, in {head}"
            raise FileError(path, line, reason)
        found += here
    return found


def _epochs(path: Path, name: str, cells: list[tuple[int, str]]) -> Epoch:
    if name.lower() == "mjd":
        days = np.array([_number(path, number, name, cell) for number, cell in cells])
        wrong = ~((days > 36934.0) & (days < 88069.0))  # the UTC of 1960 to 2099
        if wrong.any():
            k = int(np.flatnonzero(wrong)[0])
            raise FileError(path, cells[k][0], f"{name} is {cells[k][1]}; allowed: 36935 to 88068")
        return Epoch(MJD_ZERO, days, "utc")
    try:
        return Epoch.parse(np.array([cell for _, cell in cells]))
    except LighttimeError:
        for number, cell in cells:
            _epoch(path, number, cell)
        raise


def _epoch(path: Path, number: int, cell: str) -> Epoch:
    try:
        return Epoch.parse(cell)
    except LighttimeError as error:
        raise FileError(path, number, str(error)) from error


def _metres(path: Path, number: int, name: str, cell: str) -> float:
    metres = _number(path, number, name, cell) * (1e-3 if name.lower().endswith("_mm") else 1.0)
    if not abs(metres) <= LARGEST_M:
        raise FileError(path, number, f"{name} is {cell}; allowed: up to {LARGEST_M:g} m in size")
    return metres


def _number(path: Path, number: int, name: str, cell: str) -> float:
    try:
        value = float(cell) if "_" not in cell else np.nan
    except ValueError:
        value = np.nan
    if not np.isfinite(value):
        raise FileError(path, number, f"{name} is {cell!r}; allowed: finite numbers")
    return value
