"""SINEX as text: lines in their blocks, columns of a line, times.

A file is read line by line, plain or gzip, so that one of any size needs little memory. Its frame
is checked all the way: first line, blocks that open and close, ``%ENDSNX``.

Source: SINEX format, version 2.02 (from memory).
"""

from __future__ import annotations

import gzip
import math
import re
import zlib
from collections.abc import Collection, Iterator
from contextlib import ExitStack
from datetime import date
from functools import lru_cache, partial
from io import BufferedReader
from operator import itemgetter
from pathlib import Path
from typing import Final

from lighttime.errors import FileError
from lighttime.textfile import opened

LONGEST_LINE: Final = 1024
"""Bytes; the format allows 80."""

MOST_LINES: Final = 50_000_000
"""Of a file, as unpacked: some 4 GB, one minute."""

MOST_BLOCKS: Final = 1000

HEADER: Final = "%=SNX"
FOOTER: Final = "%ENDSNX"

_MJD_OF_ORDINAL = 678576  # MJD 0 is the day 678576 of Python's calendar
_GZIP, _COMPRESS = b"\x1f\x8b", b"\x1f\x9d"
_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([EeDd][+-]?\d+)?")
_TIME = re.compile(r"(\d\d):(\d\d\d):(\d\d\d\d\d)")


def records(path: Path, wanted: Collection[str]) -> Iterator[tuple[str, int, str]]:
    """The header line and the data lines of some blocks, in the order of the file.

    Parameters
    ----------
    path : Path
    wanted : collection of str
        Titles of blocks, as ``"SOLUTION/ESTIMATE"``.

    Yields
    ------
    title, number, text
        Title of the block (`HEADER` for the first line), number of the line, the line; and
        empty text where a block begins, for it may have no lines.

    Raises
    ------
    FileError
        If the file cannot be opened or unpacked, has no header or no end, or if a block is not
        closed, opens inside another or comes a second time. What was yielded before is then to
        be thrown away.
    """
    title, opened, number, ended = "", 0, 0, False
    seen: set[str] = set()
    keep = False
    for number, raw in _lines(path):
        first = raw[:1]
        if number == 1:
            yield HEADER, 1, _header(path, raw)
        elif ended:
            if raw.strip():
                raise FileError(path, number, f"text after {FOOTER}")
        elif first == b" ":
            if not title and raw.strip():
                raise FileError(path, number, "a line of data outside of any block")
            if keep:
                yield title, number, raw.decode("latin-1").rstrip()
        elif first == b"+":
            name = raw[1:].decode("latin-1").strip()
            if title:
                raise FileError(path, number, f"+{name} where -{title} of line {opened} is missing")
            if name in seen:
                raise FileError(path, number, f"a second block {name}")
            title, opened, keep = name, number, name in wanted
            seen.add(name)
            if len(seen) > MOST_BLOCKS:
                raise FileError(path, number, f"more than {MOST_BLOCKS} blocks")
            if keep:
                yield title, number, ""
        elif first == b"-":
            name = raw[1:].decode("latin-1").strip()
            if name != title or not title:
                expected = f"-{title} of line {opened}" if title else "no block that is open"
                raise FileError(path, number, f"-{name} where there is {expected}")
            title, keep = "", False
        elif first == b"%":
            if raw.strip() != FOOTER.encode():
                raise FileError(path, number, f"{_shown(raw)} where {FOOTER} is the only % line")
            if title:
                missing = f"-{title} of line {opened}"
                raise FileError(path, number, f"{FOOTER} where {missing} is missing")
            ended = True
        elif first != b"*" and raw.strip():
            raise FileError(path, number, f"{_shown(raw)}: a line begins with one of blank * + - %")
    if not ended:
        missing = f"-{title} of line {opened} and {FOOTER}" if title else FOOTER
        raise FileError(path, number or None, f"ends where {missing} is missing")


def _header(path: Path, raw: bytes) -> str:
    text = raw.decode("latin-1").rstrip()
    if not re.match(rf"{HEADER} [12]\.\d\d ", text):
        raise FileError(path, 1, f"{_shown(raw)} is no header of SINEX, version 1 or 2")
    return text


def _shown(raw: bytes) -> str:
    return repr(raw[:40].decode("latin-1").rstrip())


def _lines(path: Path) -> Iterator[tuple[int, bytes]]:
    """Numbered lines of a file, unpacked if it is gzip; of bounded length."""
    number = 0
    try:
        with ExitStack() as stack:
            plain = stack.enter_context(opened(path))
            stream: BufferedReader = plain
            magic = plain.peek(2)[:2]
            if magic == _COMPRESS:
                raise FileError(path, None, "packed by compress (.Z): unpack it, or use gzip")
            if magic == _GZIP:
                unpacked = stack.enter_context(gzip.GzipFile(fileobj=plain))
                stream = BufferedReader(unpacked, 1 << 16)
            read = partial(stream.readline, LONGEST_LINE + 1)
            for number, raw in enumerate(iter(read, b""), start=1):
                if len(raw) > LONGEST_LINE:
                    raise FileError(path, number, f"a line of more than {LONGEST_LINE} bytes")
                if number > MOST_LINES:
                    raise FileError(path, number, f"more than {MOST_LINES} lines")
                yield number, raw
    except (OSError, EOFError, zlib.error) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise FileError(path, number or None, reason) from error


class Layout:
    """How the lines of a block look.

    Parameters
    ----------
    blanks : tuple of int
        Columns (from 0) that part the fields and are blank.
    least, most : int
        Length of the line: a cut or a shift changes it.
    """

    def __init__(self, blanks: tuple[int, ...], least: int, most: int) -> None:
        self.least, self.most = least, most
        self._parting, self._blank = itemgetter(*blanks), (" ",) * len(blanks)

    def fits(self, text: str) -> bool:
        """Whether a line looks so."""
        return self.least <= len(text) <= self.most and self._parting(text) == self._blank


class Columns:
    """One line of data, of which columns are asked for as the format counts them.

    Parameters
    ----------
    path, line, text
        Where it stands, and what it says.
    layout : Layout
        FileError if the line does not have it.
    """

    __slots__ = ("line", "path", "text")

    def __init__(self, path: Path, line: int, text: str, layout: Layout) -> None:
        self.path, self.line, self.text = path, line, text
        if not layout.fits(text):
            raise self.error(f"{text.strip()!r} does not have the columns of its block")

    def error(self, reason: str) -> FileError:
        """An error at this line."""
        return FileError(self.path, self.line, reason)

    def word(self, first: int, last: int) -> str:
        """Text of the columns ``first`` to ``last`` (from 0, the last one excluded)."""
        return self.text[first:last].strip()

    def number(self, first: int, last: int) -> float:
        """A number that ends at the last of its columns."""
        text = self.text[first:last]
        found = text.lstrip()
        value = math.nan
        if _NUMBER.fullmatch(found):
            value = float(found.replace("D", "E").replace("d", "E"))
        if not math.isfinite(value):
            raise self.error(f"{text.strip()!r} is no number in columns {first + 1} to {last}")
        return value

    def time(self, first: int) -> float | None:
        """A time as MJD (UTC); None for 00:000:00000, which stands for none."""
        text = self.text[first : first + 12]
        try:
            return _mjd(text)
        except ValueError:
            raise self.error(f"{text!r} is no time yy:ddd:sssss") from None


@lru_cache(maxsize=4096)
def _mjd(text: str) -> float | None:
    """MJD of yy:ddd:sssss; ValueError if it is none.

    Examples
    --------
    >>> _mjd("10:001:43200"), _mjd("00:000:00000")
    (55197.5, None)
    """
    found = _TIME.fullmatch(text)
    if not found:
        raise ValueError(text)
    yy, day, second = map(int, found.groups())
    if not (yy or day or second):
        return None
    year = yy + (2000 if yy <= 50 else 1900)
    length = date(year, 12, 31).timetuple().tm_yday
    if not (1 <= day <= length and second <= 86400):
        raise ValueError(text)
    return date(year, 1, 1).toordinal() - _MJD_OF_ORDINAL + day - 1 + second / 86400.0
