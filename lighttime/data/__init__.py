"""Published coefficient tables, as CSV with a source line, and the one way to read them."""

from __future__ import annotations

import csv
from functools import cache
from importlib.resources import files
from types import MappingProxyType
from typing import Any

import numpy as np
from numpy.typing import NDArray

Table = MappingProxyType[str, NDArray[Any]]


@cache
def table(name: str) -> Table:
    """Read ``lighttime/data/<name>.csv``.

    Lines that begin with ``#`` are comments (the first says the source); the first other line
    names the columns. A column whose cells are all numbers becomes float64, any other text.

    Parameters
    ----------
    name : str
        The table, without ``.csv``.

    Returns
    -------
    mapping of str to ndarray
        Read-only: the columns, in file order.
    """
    text = files(__name__).joinpath(f"{name}.csv").read_text(encoding="utf-8")
    rows = csv.reader(line for line in text.splitlines() if line and not line.startswith("#"))
    head = next(rows)
    columns = zip(*rows, strict=True)
    return MappingProxyType(
        {key.strip(): _column(cells) for key, cells in zip(head, columns, strict=True)}
    )


def _column(cells: tuple[str, ...]) -> NDArray[Any]:
    try:
        values: NDArray[Any] = np.array([float(cell) for cell in cells])
    except ValueError:
        values = np.array([cell.strip() for cell in cells])
    values.flags.writeable = False
    return values
