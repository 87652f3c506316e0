"""Tables of ranges from wherever they come: their columns, by name, and the line of each row."""

from __future__ import annotations

import csv
import io
from array import array
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from functools import partial
from os import PathLike, fspath
from typing import Any, TextIO

import numpy as np

from lighttime.errors import FileError, InputError
from lighttime.textfile import opened

ALLOWED = (
    "a path to a CSV or ECSV file, an open text file, an astropy Table, a pandas or polars "
    "DataFrame, or a mapping of arrays"
)

DELIMITERS = (",", ";", "\t", "|")

MOST_ROWS = 2_000_000
"""What is taken at once: it keeps the memory below 1.5 GB."""

MOST_CELLS = 10 * MOST_ROWS
LONGEST_LINE = 20_000
"""Characters of a line of a file."""

LONGEST_HEADER = 50_000
"""Characters of an ECSV header: five seconds of its YAML reader at worst."""


@dataclass(frozen=True, eq=False)
class RawTable:
    """Columns as they were given.

    Attributes
    ----------
    source : str
        Where they come from, for people.
    columns : mapping of str to array or list
        All of one length.
    lines : ndarray of int, shape (n,)
        What a row is called when something is wrong with it.
    row_word : str
        ``"line"`` for files, ``"row"`` (counted from 0) for objects.
    units : mapping of str to str
        Those that the table states.
    wrong : mapping of int to str
        Rows that could not be taken apart, and why.
    """

    source: str
    columns: Mapping[str, Any]
    lines: Any
    row_word: str = "row"
    units: Mapping[str, str] = field(default_factory=dict)
    wrong: Mapping[int, str] = field(default_factory=dict)


def open_table(source: Any) -> RawTable:
    """Take a table apart into its columns.

    Parameters
    ----------
    source : path, text file, astropy Table, DataFrame, or mapping
        Comments in files begin with ``#``; the first other line names the columns; cells are
        separated by comma, semicolon, tab, bar or blanks. Decimal text keeps its digits.

    Raises
    ------
    FileError
        If a file cannot be opened or names no columns.
    InputError
        If an object is no table.
    """
    if isinstance(source, (str, PathLike)):
        path = fspath(source)
        try:
            with io.TextIOWrapper(opened(path), encoding="utf-8-sig", newline="") as file:
                return _read(file, str(path))
        except UnicodeDecodeError:
            raise FileError(path, None, "not a text file (UTF-8)") from None
    if isinstance(source, io.TextIOBase) or hasattr(source, "readline"):
        return _read(source, str(getattr(source, "name", "table")))
    if isinstance(source, Mapping):
        return _columns("a table in memory", {str(k): source[k] for k in source})
    names = getattr(source, "colnames", None)
    if names is None:
        names = getattr(source, "columns", None)
    if names is None or isinstance(source, np.ndarray):
        given = source if np.size(source) < 10 else f"an object of type {type(source).__name__}"
        raise InputError("ranges", given, ALLOWED)
    columns, units = {}, {}
    for name in names:
        column = source[name]
        if getattr(column, "unit", None) is not None and not hasattr(column, "scale"):
            units[str(name)] = str(column.unit)
        columns[str(name)] = getattr(column, "value", column) if hasattr(column, "to") and hasattr(
            column, "unit"
        ) else column  # fmt: skip
    return _columns(f"a {type(source).__name__}", columns, units)


def _columns(
    kind: str, columns: Mapping[str, Any], units: Mapping[str, str] | None = None
) -> RawTable:
    arrays: dict[str, Any] = {}
    for name, values in columns.items():
        arrays[name] = values if _is_time(values) else _array(name, values)
    sizes = {name: len(values) for name, values in arrays.items()}
    if len(set(sizes.values())) > 1:
        raise InputError("lengths of the columns", sizes, "one length for all")
    count = next(iter(sizes.values()), 0)
    if count > MOST_ROWS:
        raise InputError("ranges", f"a table of {count} rows", too_many())
    return RawTable(kind, arrays, np.arange(count), "row", units or {})


def too_many() -> str:
    """What to do with a longer table."""
    return (
        f"up to {MOST_ROWS} rows at a time (every n-th row of a longer table says as much about "
        "the choices behind it)"
    )


def _is_time(values: Any) -> bool:
    """An Epoch or an astropy Time: instants that know their scale."""
    return hasattr(values, "jd1") and hasattr(values, "scale")


def _array(name: str, values: Any) -> Any:
    if hasattr(values, "to_list") and not hasattr(values, "to_numpy"):
        values = values.to_list()
    array = np.asarray(values)
    if isinstance(values, np.ma.MaskedArray) and np.any(values.mask):
        array = array.astype(object)
        array[np.ma.getmaskarray(values)] = None
    if array.ndim == 0:
        raise InputError(f"column {name}", values, "an array")
    if array.ndim != 1:
        raise InputError(f"column {name}", f"an array of shape {array.shape}", "one dimension")
    return array


# -- text ------------------------------------------------------------------------------------------


def _read(file: TextIO, name: str) -> RawTable:
    comments: list[str] = []
    numbered = _lines(file, name, comments)
    first, text = next(numbered, (0, ""))
    if not text:
        raise FileError(name, None, "empty: no line names the columns")
    header = _ecsv_header(comments, name)
    delimiter = header.get("delimiter") or _delimiter(text)
    head = [cell.strip() for cell in _cells(text, delimiter)]
    if not any(head):
        raise FileError(name, first, f"{text[:80]!r} names no columns")
    repeated = sorted({c for c in head if head.count(c) > 1})
    if repeated:
        raise FileError(name, first, f"more than one column is called {repeated[0]!r}")
    if _is_number(head[0]) or head[0][:4].isdigit():
        raise FileError(name, first, f"{head[0]!r} stands where columns are to be named")
    columns: dict[str, list[str]] = {column: [] for column in head}
    lines, wrong = array("q"), {}
    for number, text in numbered:
        cells = _cells(text, delimiter)
        if len(cells) != len(head):
            wrong[len(lines)] = f"{len(cells)} cells where {len(head)} columns are named"
            cells = [""] * len(head)
        for column, cell in zip(columns.values(), cells, strict=True):
            column.append(cell)
        lines.append(number)
        if len(lines) > MOST_ROWS:
            raise FileError(name, number, f"more rows than {too_many()}")
        if len(lines) * len(head) > MOST_CELLS:
            raise FileError(name, number, f"more than {MOST_CELLS} cells, in {len(head)} columns")
    return RawTable(name, columns, np.array(lines, dtype=int), "line", header["units"], wrong)


def _lines(file: TextIO, name: str, comments: list[str]) -> Iterator[tuple[int, str]]:
    """Numbered lines that are neither blank nor comments; those of an ECSV header are collected."""
    size = 0
    for number, line in enumerate(iter(partial(file.readline, LONGEST_LINE + 1), ""), start=1):
        if len(line) > LONGEST_LINE:
            raise FileError(name, number, f"a line of more than {LONGEST_LINE} characters")
        text = line.rstrip("\r\n")
        if text.lstrip().startswith("#"):
            if not comments or comments[0].startswith("%ECSV"):
                comments.append(text.lstrip().removeprefix("#").removeprefix(" "))
                size += len(text)
            if size > LONGEST_HEADER:
                reason = f"an ECSV header of more than {LONGEST_HEADER} characters"
                raise FileError(name, number, reason)
        elif text.strip():
            yield number, text


def _cells(text: str, delimiter: str) -> list[str]:
    """The cells of a line; none if it cannot be taken apart."""
    if delimiter == " ":
        text = " ".join(text.split())
    try:
        return next(csv.reader([text], delimiter=delimiter, skipinitialspace=True), [])
    except csv.Error:
        return []


def _delimiter(head: str) -> str:
    counts = {d: head.count(d) for d in DELIMITERS}
    best = max(DELIMITERS, key=lambda d: counts[d])
    if counts[best]:
        return best
    return " " if " " in head.strip() else ","


def _is_number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True


def _ecsv_header(comments: list[str], name: str) -> dict[str, Any]:
    """Units and delimiter of an ECSV header; nothing for plain CSV."""
    if not comments or not comments[0].startswith("%ECSV"):
        return {"units": {}}
    from astropy.table.meta import get_header_from_yaml

    try:
        header = get_header_from_yaml([line for line in comments[1:] if not line.startswith("%")])
        described = header.get("datatype", [])
        units = {d["name"]: str(d["unit"]) for d in described if "unit" in d and "name" in d}
        delimiter = header.get("delimiter", " ")
        if delimiter not in (" ", *DELIMITERS):
            raise ValueError(f"a delimiter of {delimiter!r}")
    except Exception as error:  # whatever its YAML reader raises, and what is no such header
        raise FileError(name, None, f"its ECSV header cannot be read: {error}") from None
    return {"units": units, "delimiter": delimiter}
