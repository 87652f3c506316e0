"""Reading the published Earth orientation series: IERS C04 and finals2000A.

Both are fixed-column text. Every number in them is a decimal of known length, so a column is
read as whole integers and divided once by a power of ten: exactly the float64 nearest to the
printed decimal, and fast enough to load half a century of days in some tens of milliseconds.
"""

from __future__ import annotations

import re
from bisect import bisect_right
from dataclasses import dataclass
from os import PathLike
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from lighttime.constants import MJD_ZERO
from lighttime.errors import FileError
from lighttime.textfile import content
from lighttime.timescales.scales import tai_minus_utc

Floats = NDArray[np.float64]

FINAL: Final = 0
RAPID: Final = 1
PREDICTED: Final = 2
"""How a day's values came about: in the C04, in rapid service, or as a prediction."""


LARGEST_FILE: Final = 32 * 2**20
"""Bytes: some four centuries of days."""

MOST_LINES: Final = 200_000


@dataclass(frozen=True)
class Column:
    """Where a number stands in a line: ``line[start:stop]``, with `decimals` after the point.

    The number is multiplied by ten to the power `shift` (3 turns arcseconds into mas).
    """

    start: int
    stop: int
    decimals: int
    shift: int = 0


@dataclass(frozen=True)
class Layout:
    """One published file format."""

    name: str
    first_line: re.Pattern[bytes]
    columns: dict[str, Column]
    flags: tuple[int, ...]
    """Positions of the letters I (measured) and P (predicted); none in a series of finals."""


C04: Final = Layout(
    name="IERS 20 C04",
    first_line=re.compile(rb"^\d{4} {1,3}\d{1,2} {1,3}\d{1,2} {1,3}\d{1,2} +\d{5}\.\d\d "),
    columns={
        "mjd": Column(16, 26, 2),
        "xp_arcsec": Column(26, 38, 6),
        "yp_arcsec": Column(38, 50, 6),
        "ut1_utc_s": Column(50, 62, 7),
        "dx_mas": Column(62, 74, 6, shift=3),
        "dy_mas": Column(74, 86, 6, shift=3),
        "sigma_xp_arcsec": Column(122, 134, 6),
        "sigma_yp_arcsec": Column(134, 146, 6),
        "sigma_ut1_s": Column(146, 158, 7),
        "sigma_dx_mas": Column(158, 170, 6, shift=3),
        "sigma_dy_mas": Column(170, 182, 6, shift=3),
    },
    flags=(),
)
"""Source: the format line in the header of the file eopc04.1962-now, Paris Observatory."""

FINALS2000A: Final = Layout(
    name="finals2000A",
    first_line=re.compile(rb"^[ \d]\d[ \d]\d[ \d]\d \d{5}\.\d\d "),
    columns={
        "mjd": Column(7, 15, 2),
        "xp_arcsec": Column(18, 27, 6),
        "sigma_xp_arcsec": Column(27, 36, 6),
        "yp_arcsec": Column(37, 46, 6),
        "sigma_yp_arcsec": Column(46, 55, 6),
        "ut1_utc_s": Column(58, 68, 7),
        "sigma_ut1_s": Column(68, 78, 7),
        "dx_mas": Column(97, 106, 3),
        "sigma_dx_mas": Column(106, 115, 3),
        "dy_mas": Column(116, 125, 3),
        "sigma_dy_mas": Column(125, 134, 3),
    },
    flags=(16, 57),
)
"""Source: the description of finals2000A, IERS Rapid Service (Bulletin A columns)."""

UNKNOWN_DXDY_SIGMA_MAS: Final = 0.3
"""One sigma of dX and dY taken as zero where no value is published, mas.

The amplitude that the free core nutation, their unpredictable part, typically has (from
memory)."""

LARGEST: Final = {
    "ut1_utc_s": 2.0,
    "xp_arcsec": 2.0,
    "yp_arcsec": 2.0,
    "dx_mas": 100.0,
    "dy_mas": 100.0,
}
"""A number beyond this is no Earth orientation: a shifted column or another unit."""


@dataclass(frozen=True, eq=False)
class Days:
    """The content of one file: arrays of shape (days,), one value at each 0h UTC.

    `values` holds every column of the layout; dX, dY and their sigmas are NaN in the days for
    which the file leaves them blank (always the last ones).
    """

    layout: Layout
    values: dict[str, Floats]
    kind: NDArray[np.int8]


def read_days(path: str | PathLike[str], after_mjd: float | None = None) -> Days:
    """Read a C04 or finals2000A file, told apart by their content.

    Parameters
    ----------
    path : path
        The file.
    after_mjd : float, optional
        Leave out the days up to and including this one.

    Returns
    -------
    Days

    Raises
    ------
    FileError
        With the line: a field that is no number, a missing value, a day out of order.
    """
    text = content(path, LARGEST_FILE)
    if text.count(b"\n") + text.count(b"\r") > 2 * MOST_LINES:
        raise FileError(path, None, f"more than {MOST_LINES} lines")
    lines = text.splitlines()
    head = 0
    while head < len(lines) and (not lines[head].strip() or lines[head].startswith(b"#")):
        head += 1
    layout = _recognise(path, lines, head)
    if after_mjd is not None:
        head = bisect_right(lines, after_mjd, lo=head, key=lambda line: float(line[7:15]))
    while len(lines) > head and not lines[-1].strip():
        lines.pop()
    return _Reader(path, layout, lines[head:], head + 1).days()


def _recognise(path: str | PathLike[str], lines: list[bytes], head: int) -> Layout:
    for layout in (C04, FINALS2000A):
        if head < len(lines) and layout.first_line.match(lines[head]):
            return layout
    raise FileError(
        path,
        head + 1 if head < len(lines) else None,
        "neither a line of IERS C04 nor of finals2000A",
    )


class _Reader:
    """The lines of one file as a character matrix, and what can be wrong with them."""

    def __init__(
        self, path: str | PathLike[str], layout: Layout, lines: list[bytes], first: int
    ) -> None:
        width = max(column.stop for column in layout.columns.values())
        self.path, self.layout, self.first = path, layout, first
        text = np.array(lines, dtype=f"S{width}")
        by_line = text.view(np.uint8).reshape(len(lines), width)
        self.characters = np.ascontiguousarray(by_line.T)  # columns of text lie together
        self.characters[self.characters == 0] = ord(" ")

    def days(self) -> Days:
        values = {name: self._numbers(name) for name in self.layout.columns}
        count = self._given(values)
        values = {name: column[:count] for name, column in values.items()}
        midnight = values["mjd"] % 1.0 == 0.0
        if not midnight.all():
            self._fail(np.flatnonzero(~midnight)[0], "the values are not of 0h UTC")
        steps = np.flatnonzero(np.diff(values["mjd"]) != 1.0)
        if steps.size:
            self._fail(steps[0] + 1, "the day does not follow that of the line before")
        kind = np.full(count, FINAL if not self.layout.flags else RAPID, dtype=np.int8)
        for position in self.layout.flags:
            letters = self.characters[position, :count]
            unknown = np.flatnonzero((letters != ord("I")) & (letters != ord("P")))
            if unknown.size:
                self._fail(unknown[0], f"expected I or P in column {position + 1}")
            kind[letters == ord("P")] = PREDICTED
        return Days(self.layout, values, kind)

    def _given(self, values: dict[str, Floats]) -> int:
        """The number of days with values; check that only the last days lack any."""
        blank = np.isnan(values["mjd"])
        if blank.any():
            self._fail(np.flatnonzero(blank)[0], "no modified Julian date")
        pair = ("dx_mas", "dy_mas", "sigma_dx_mas", "sigma_dy_mas")
        rest = [name for name in values if name not in pair and name != "mjd"]
        count = 0
        for names in (pair, rest):
            given = ~np.isnan([values[name] for name in names])
            some = np.flatnonzero(given.any(axis=0))
            count = int(some[-1]) + 1 if some.size else 0
            incomplete = np.flatnonzero(~given[:, :count].all(axis=0))
            if incomplete.size:
                missing = next(n for n in names if np.isnan(values[n][incomplete[0]]))
                self._fail(incomplete[0], f"no value of {missing}")
        return count

    def _numbers(self, name: str) -> Floats:
        """One column; NaN where it is blank."""
        column = self.layout.columns[name]
        field = self.characters[column.start : column.stop]
        point = len(field) - column.decimals - 1
        digit = field - np.uint8(ord("0"))  # anything but a digit wraps round to above 9
        is_digit = digit <= 9
        blank, minus = field == ord(" "), field == ord("-")

        # In front of the point stand blanks, then at most one sign, then digits.
        sign = minus | (field == ord("+"))
        rank = (sign + 2 * is_digit)[:point]
        good = (blank | sign | is_digit)[:point].all(axis=0) & (rank[1:] >= rank[:-1]).all(axis=0)
        good &= sign[:point].sum(axis=0) <= 1
        good &= field[point] == ord(".")
        good &= is_digit[point + 1 :].all(axis=0)
        absent = blank.all(axis=0)
        wrong = np.flatnonzero(~good & ~absent)
        if wrong.size:
            text = bytes(field[:, wrong[0]]).decode("latin1")
            self._fail(wrong[0], f"{name} is no decimal: {text!r}")

        integer = np.zeros(field.shape[1], dtype=np.int64)
        digit *= is_digit
        for row in (*digit[:point], *digit[point + 1 :]):
            integer *= 10
            integer += row
        integer[minus.any(axis=0)] *= -1
        numbers: Floats = integer / 10.0 ** (column.decimals - column.shift)
        limit = LARGEST.get(name, np.inf)
        wild = np.flatnonzero(np.abs(numbers) > limit)
        if wild.size:
            self._fail(wild[0], f"{name} is {numbers[wild[0]]}; allowed: -{limit} to {limit}")
        numbers[absent] = np.nan
        return numbers

    def _fail(self, row: int, reason: str) -> None:
        raise FileError(self.path, self.first + int(row), reason)


def joined(parts: list[Days], path: str | PathLike[str]) -> dict[str, Any]:
    """One series of the days of several files, the last of which is at `path`.

    Returns
    -------
    dict
        The attributes of an `EarthOrientation` by name.
    """
    parts = [part for part in parts if part.kind.size]
    if not parts:
        raise FileError(path, None, "no day with values")
    values: dict[str, Any] = {
        key: np.concatenate([part.values[key] for part in parts]) for key in parts[0].values
    }
    mjd = values.pop("mjd")
    if mjd.size < 4:
        raise FileError(path, None, f"{mjd.size} days; at least 4 are needed to interpolate")
    if np.any(np.diff(mjd) != 1.0):
        gap = mjd[np.flatnonzero(np.diff(mjd) != 1.0)[0]]
        raise FileError(path, None, f"the series does not go on after MJD {gap:.0f}")
    unknown = np.isnan(values["dx_mas"])
    for key in ("dx_mas", "dy_mas"):
        values[key][unknown] = 0.0
        values[f"sigma_{key}"][unknown] = UNKNOWN_DXDY_SIGMA_MAS
    given = mjd[~unknown]
    values["ut1_tai_s"] = values.pop("ut1_utc_s") - tai_minus_utc(
        mjd + MJD_ZERO, np.zeros_like(mjd)
    )
    values["mjd"] = mjd
    values["kind"] = np.concatenate([part.kind for part in parts])
    values["last_dxdy_mjd"] = float(given[-1]) if given.size else -np.inf
    return values
