"""Reader of BLQ files: ocean loading coefficients of stations.

A file holds any number of stations. Each is a line with its name, then six lines of eleven
numbers: amplitudes in metres (up, west, south) and phase lags in degrees (the same order).
Lines that begin with ``$$`` are comments and may stand anywhere. A file is read as a whole or
not at all.

Source: the format of the ocean loading services, as described in IERS Conventions (2010), TN36,
7.1.2.
"""

from __future__ import annotations

import re
from array import array
from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path
from typing import Final

import numpy as np

from lighttime.earth.admittance import CONSTITUENTS
from lighttime.earth.loading import OceanLoading
from lighttime.errors import FileError, InputError, UnknownNameError
from lighttime.textfile import numbered_lines

__all__ = ["list_blq", "read_blq"]

LARGEST_FILE: Final = 64 * 2**20
"""Bytes: some 70,000 stations. A larger file is not one of loading coefficients."""

LONGEST_LINE: Final = 512
"""Bytes."""

ROWS: Final = (
    "amplitudes up",
    "amplitudes west",
    "amplitudes south",
    "phases up",
    "phases west",
    "phases south",
)

_NUMBER = re.compile(r"[+-]?\d*\.\d+")
_CENTRE_OF_MASS = re.compile(r"CMC:\s*(YES|NO)\b", re.IGNORECASE)
_CELL_WIDTH, _CELLS_START = 7, 1  # the columns of the format, where blanks do not part cells


@dataclass(slots=True)
class _Remarks:
    """What is taken from the remarks before the numbers of a station, or of the whole file."""

    first: str = ""
    centre_of_mass: bool | None = None

    def take(self, remark: str) -> None:
        self.first = self.first or remark
        if self.centre_of_mass is None and (said := _CENTRE_OF_MASS.match(remark)):
            self.centre_of_mass = said[1].upper() == "YES"


@dataclass(slots=True)
class _Block:
    """One station of a file while it is read."""

    name: str
    line: int
    remarks: _Remarks
    numbers: array[float] = field(default_factory=lambda: array("d"))

    @property
    def rows(self) -> int:
        """How many of its rows were read."""
        return len(self.numbers) // len(CONSTITUENTS)


def read_blq(path: str | Path, site: str) -> OceanLoading:
    """Ocean loading coefficients of one station from a BLQ file.

    Parameters
    ----------
    path : str or Path
        The file.
    site : str
        The station's name in it; case does not matter.

    Returns
    -------
    OceanLoading
        With the remark that the file makes about the ocean model as its source, and what the
        file says about the centre of mass.

    Raises
    ------
    FileError
        If any station of the file is broken (a missing or short line, a cell that is not a
        number, a size that no ocean makes), the site occurs twice, the columns are in another
        order, or the file is too large or cannot be opened.
    UnknownNameError
        If the site is not in the file; near names are given.
    """
    path = Path(path)
    wanted = _canonical(site)
    blocks, header = _read(path)
    found = [block for block in blocks if _canonical(block.name) == wanted]
    if not found:
        raise UnknownNameError("site", site, [block.name for block in blocks])
    if len(found) > 1:
        reason = f"{found[1].name} occurs a second time (first at line {found[0].line})"
        raise FileError(path, found[1].line, reason)
    return _coefficients(path, found[0], header)


def list_blq(path: str | Path) -> tuple[str, ...]:
    """Names of the stations in a BLQ file, in its order.

    Parameters
    ----------
    path : str or Path
        The file.

    Returns
    -------
    tuple of str

    Raises
    ------
    FileError
        If any station of the file is broken, or the file is too large or cannot be opened.
    """
    blocks, _ = _read(Path(path))
    return tuple(block.name for block in blocks)


def _canonical(name: str) -> str:
    return " ".join(name.split()).casefold()


def _read(path: Path) -> tuple[list[_Block], _Remarks]:
    """All stations of a file, complete, and the remarks before the first."""
    blocks: list[_Block] = []
    header = _Remarks()
    for number, text in _lines(path):
        block = blocks[-1] if blocks else None
        complete = block is None or block.rows == len(ROWS)
        if text.startswith("$$"):
            remark = text[2:].strip()
            _check_order(path, number, remark)
            if block is None:
                header.take(remark)
            elif not block.rows:
                block.remarks.take(remark)
        elif not text.strip():
            continue
        elif complete or block is None:
            if _cells(text):
                raise FileError(path, number, "a row of numbers where a station's name belongs")
            if not text.strip().isprintable():
                raise FileError(path, number, "a station's name with unprintable characters")
            blocks.append(_Block(" ".join(text.split()), number, _Remarks()))
        else:
            block.numbers.extend(_row(path, number, text, block))
    if not blocks:
        raise FileError(path, None, "no station in it")
    if blocks[-1].rows < len(ROWS):
        missing = ROWS[blocks[-1].rows]
        raise FileError(path, None, f"ends where the {missing} of {blocks[-1].name} belong")
    for block in blocks:
        _coefficients(path, block, header)
    return blocks, header


def _lines(path: Path) -> Iterator[tuple[int, str]]:
    """Numbered lines of a text file of bounded size."""
    for number, raw in numbered_lines(path, LARGEST_FILE, LONGEST_LINE):
        yield number, raw.decode("latin-1").rstrip("\r\n")


def _cells(text: str) -> list[str]:
    """The eleven numbers of a row as text; empty if it is not such a row."""
    starts = range(_CELLS_START, _CELLS_START + _CELL_WIDTH * len(CONSTITUENTS), _CELL_WIDTH)
    columns = [text[:_CELLS_START], *(text[k : k + _CELL_WIDTH] for k in starts)]
    readings = [text.split()]
    if len("".join(columns)) == len(text.rstrip()) and not columns[0].strip():
        readings.append([cell.strip() for cell in columns[1:]])
    for cells in readings:
        if len(cells) == len(CONSTITUENTS) and all(map(_NUMBER.fullmatch, cells)):
            return cells
    return []


def _row(path: Path, number: int, text: str, block: _Block) -> list[float]:
    cells = _cells(text)
    if cells:
        return [float(cell) for cell in cells]
    what = f"the {ROWS[block.rows]} of {block.name}"
    words = text.split()
    wrong = [word for word in words if not _NUMBER.fullmatch(word)]
    if wrong:
        raise FileError(path, number, f"{wrong[0][:20]!r} is no number; {what} belong here")
    raise FileError(path, number, f"{len(words)} numbers instead of {len(CONSTITUENTS)} in {what}")


def _check_order(path: Path, number: int, remark: str) -> None:
    """Refuse a file whose remarks put the columns in another order."""
    label, _, order = remark.partition(":")
    if label.strip().upper() == "COLUMN ORDER" and order.upper().split() != list(CONSTITUENTS):
        raise FileError(path, number, f"columns {order.strip()}, not {' '.join(CONSTITUENTS)}")


def _coefficients(path: Path, block: _Block, header: _Remarks) -> OceanLoading:
    numbers = np.array(block.numbers).reshape(len(ROWS), len(CONSTITUENTS))
    source = f"{block.remarks.first} ({path.name}, {block.name})".lstrip()
    centre_of_mass = block.remarks.centre_of_mass  # before what is said for the whole file
    if centre_of_mass is None:
        centre_of_mass = header.centre_of_mass
    try:
        return OceanLoading(numbers[:3], numbers[3:], source, centre_of_mass)
    except InputError as error:
        raise FileError(path, block.line, f"{block.name}: {error}") from error
