"""Text files as bytes: opened or a `FileError`, and never more of them than was bargained for."""

from __future__ import annotations

from collections.abc import Iterator
from io import BufferedReader
from os import PathLike

from lighttime.errors import FileError

__all__ = ["content", "numbered_lines", "opened"]


def opened(path: str | PathLike[str]) -> BufferedReader:
    """A file, open for reading.

    Raises
    ------
    FileError
        If it cannot be opened, or has a name that no file can have.
    """
    try:
        return open(path, "rb")
    except (OSError, ValueError) as error:  # ValueError: a zero byte in the name
        raise FileError(path, None, f"cannot be read: {_reason(error)}") from error


def content(path: str | PathLike[str], most_bytes: int) -> bytes:
    """All of a file; FileError if that is more than `most_bytes`."""
    with opened(path) as file:
        try:
            found = file.read(most_bytes + 1)
        except OSError as error:
            raise FileError(path, None, f"cannot be read: {_reason(error)}") from error
    if len(found) > most_bytes:
        raise FileError(path, None, f"a file of more than {most_bytes} bytes")
    return found


def numbered_lines(
    path: str | PathLike[str], most_bytes: int, longest_line: int
) -> Iterator[tuple[int, bytes]]:
    """The lines of a file with their numbers, one at a time.

    Parameters
    ----------
    path : path
    most_bytes, longest_line : int
        FileError at the line by which the file, or which itself, has more bytes than that.
    """
    number = size = 0
    with opened(path) as file:
        while line := _line(path, file, longest_line):
            number, size = number + 1, size + len(line)
            if len(line) > longest_line:
                raise FileError(path, number, f"a line of more than {longest_line} bytes")
            if size > most_bytes:
                raise FileError(path, number, f"a file of more than {most_bytes} bytes")
            yield number, line


def _line(path: str | PathLike[str], file: BufferedReader, longest: int) -> bytes:
    try:
        return file.readline(longest + 1)
    except OSError as error:
        raise FileError(path, None, f"cannot be read: {_reason(error)}") from error


def _reason(error: Exception) -> str:
    return getattr(error, "strerror", None) or str(error)
