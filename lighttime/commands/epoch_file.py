"""Many epochs from a column of a CSV file, read in chunks."""

from __future__ import annotations

import csv
import io
from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import suppress
from dataclasses import dataclass
from functools import partial
from itertools import islice
from pathlib import Path
from typing import Any, Final, NamedTuple, TextIO

import numpy as np

from lighttime.errors import FileError, InputError, LighttimeError, UnknownNameError
from lighttime.path.troposphere import Weather
from lighttime.textfile import opened
from lighttime.timescales import Epoch
from lighttime.timescales.text import parse_iso

CHUNK: Final = 4096
"""Rows that are held at a time."""

LONGEST_LINE: Final = 20_000
"""Characters."""

MOST_LINES: Final = 100
"""Of one row, whose cells may hold line ends."""

Ask = Callable[[Epoch, Weather | None], Any]
"""What is asked of epochs and the weather at them."""


class Row(NamedTuple):
    """One epoch: its line in the file, its two-part Julian date, and its weather if any."""

    line: int
    jd1: float
    jd2: float
    weather: tuple[float, ...]


@dataclass(frozen=True)
class EpochFile:
    """A CSV file whose first line names its columns; lines that begin with ``#`` are comments.

    Parameters
    ----------
    path : Path
        A regular file: it is read twice.
    column : str or None
        The column of epochs; may be left out when there is only one.
    scale : str
        Time scale of the epochs.
    weather : mapping of str to (float or str)
        Pressure, temperature and humidity, each a number or the name of a column; or empty.
    """

    path: Path
    column: str | None
    scale: str
    weather: Mapping[str, float | str]

    def survey(self) -> tuple[int, Row]:
        """Read every row once: how many there are, and the latest. Bad rows are found here."""
        count, latest = 0, None
        for row in self.rows():
            count += 1
            if latest is None or (row.jd1, row.jd2) > (latest.jd1, latest.jd2):
                latest = row
        if latest is None:
            raise FileError(self.path, None, "no rows below the names of the columns")
        return count, latest

    def answers(self, ask: Ask) -> Iterator[Any]:
        """What `ask` gives for each chunk of rows, in their order."""
        rows = self.rows()
        while chunk := list(islice(rows, CHUNK)):
            yield self.answer(ask, chunk)

    def answer(self, ask: Ask, rows: Sequence[Row]) -> Any:
        """What `ask` gives for some rows; FileError with the line of the first it refuses."""
        try:
            return ask(*self._question(rows))
        except LighttimeError as error:
            raise self._refusal(ask, rows, error) from error

    def rows(self) -> Iterator[Row]:
        """Every row below the names of the columns."""
        try:
            with io.TextIOWrapper(opened(self.path), encoding="utf-8-sig", newline="") as file:
                yield from self._rows(file)
        except OSError as error:
            raise FileError(self.path, None, f"cannot be read: {error.strerror}") from None
        except UnicodeDecodeError:
            raise FileError(self.path, None, "not a text file (UTF-8)") from None

    def _rows(self, file: TextIO) -> Iterator[Row]:
        lines = _Lines(self.path, file)
        cells = csv.reader(lines, strict=True, skipinitialspace=True)
        try:
            head = [name.strip() for name in next(cells, [])]
            epoch, weather = self._columns(head)
            lines.of_row = 0
            for row in cells:
                lines.of_row = 0
                if len(row) != len(head):
                    reason = f"{len(row)} cells, but {len(head)} columns have names"
                    raise FileError(self.path, lines.number, reason)
                yield self._row(lines.number, row[epoch], [value(row) for value in weather])
        except csv.Error as error:
            raise FileError(self.path, lines.number, f"not CSV: {error}") from None

    def _columns(self, head: list[str]) -> tuple[int, list[Callable[[list[str]], float | str]]]:
        """Where the epochs are, and how to get each weather value from the cells of a row."""
        if not head:
            raise FileError(self.path, None, "empty")
        with suppress(InputError):
            parse_iso(head[0], self.scale)
            reason = f"{head[0]!r} is an epoch, where the columns should be named"
            raise FileError(self.path, None, reason)
        if self.column is None and len(head) > 1:
            raise LighttimeError(f"--column is missing: one of {', '.join(head)}")
        name = head[0] if self.column is None else self.column

        def index(option: str, name: str) -> int:
            if head.count(name) > 1:
                raise FileError(self.path, None, f"{head.count(name)} columns have the name {name}")
            if name not in head:
                raise UnknownNameError(option, name, head)
            return head.index(name)

        def value(option: str, given: float | str) -> Callable[[list[str]], float | str]:
            if isinstance(given, float):
                return lambda row: given
            column = index(f"column of {option}", given)
            return lambda row: row[column]

        return index("--column", name), [value(*item) for item in self.weather.items()]

    def _row(self, line: int, epoch: str, weather: Sequence[float | str]) -> Row:
        try:
            date = parse_iso(epoch, self.scale, "epoch")
            return Row(line, *date, tuple(map(_number, self.weather, weather)))
        except InputError as error:
            raise FileError(self.path, line, str(error)) from None

    # -- questions to a model --------------------------------------------------------------------

    def _question(self, rows: Sequence[Row]) -> tuple[Epoch, Weather | None]:
        """Epochs and weather: arrays, or scalars for a single row."""
        _, jd1, jd2, weather = (
            np.squeeze(values) for values in map(np.array, zip(*rows, strict=True))
        )
        epochs = Epoch(jd1, jd2, self.scale)
        return epochs, Weather(*weather.T) if self.weather else None

    def _refusal(self, ask: Ask, rows: Sequence[Row], error: LighttimeError) -> LighttimeError:
        """The error of the first row that is refused, found by halving."""
        if len(rows) == 1:
            return FileError(self.path, rows[0].line, str(error))
        half = len(rows) // 2
        for part in (rows[:half], rows[half:]):
            try:
                ask(*self._question(part))
            except LighttimeError as found:
                return self._refusal(ask, part, found)
        return error


class _Lines:
    """The lines of a file that are neither blank nor comments; `number` is that of the last."""

    def __init__(self, path: Path, file: TextIO) -> None:
        self.number = self.of_row = 0
        self._path = path
        self._lines = enumerate(iter(partial(file.readline, LONGEST_LINE + 1), ""), start=1)

    def __iter__(self) -> _Lines:
        return self

    def __next__(self) -> str:
        for number, line in self._lines:
            self.number = number
            if len(line) > LONGEST_LINE:
                reason = f"a line of more than {LONGEST_LINE} characters"
                raise FileError(self._path, number, reason)
            if line.strip() and not line.lstrip().startswith("#"):
                self.of_row += 1
                if self.of_row > MOST_LINES:
                    raise FileError(self._path, number, f"a row of more than {MOST_LINES} lines")
                return line
        raise StopIteration


def _number(name: str, value: float | str) -> float:
    with suppress(ValueError):
        if isinstance(value, float) or (value.isascii() and "_" not in value):
            return float(value)
    raise InputError(name, value, "a number")
