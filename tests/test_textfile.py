"""Files of bounded size."""

from __future__ import annotations

from pathlib import Path

import pytest

from lighttime.errors import FileError
from lighttime.textfile import content, numbered_lines, opened


@pytest.fixture
def path(tmp_path: Path) -> Path:
    path = tmp_path / "some.txt"
    path.write_bytes(b"one\ntwo\r\n\nfour")
    return path


def test_lines_with_their_numbers(path: Path) -> None:
    expected = [(1, b"one\n"), (2, b"two\r\n"), (3, b"\n"), (4, b"four")]
    assert list(numbered_lines(path, 100, 5)) == expected
    assert content(str(path), 14) == b"one\ntwo\r\n\nfour"


@pytest.mark.parametrize(
    ("most", "longest", "message"),
    [
        (100, 4, "some.txt, line 2: a line of more than 4 bytes"),
        (9, 5, "some.txt, line 3: a file of more than 9 bytes"),
        (13, 5, "some.txt, line 4: a file of more than 13 bytes"),
    ],
)
def test_bounds(path: Path, most: int, longest: int, message: str) -> None:
    with pytest.raises(FileError, match=message):
        list(numbered_lines(path, most, longest))


def test_bound_of_a_whole_file(path: Path) -> None:
    with pytest.raises(FileError, match="a file of more than 13 bytes"):
        content(path, 13)


@pytest.mark.parametrize(
    ("name", "message"),
    [("absent", "No such file"), ("", "Is a directory"), ("a\0b", "embedded null")],
)
def test_names_that_are_no_file(tmp_path: Path, name: str, message: str) -> None:
    with pytest.raises(FileError, match=f"cannot be read: {message}"):
        opened(f"{tmp_path}/{name}")
    with pytest.raises(FileError, match=f"cannot be read: {message}"):
        content(f"{tmp_path}/{name}", 10)
    with pytest.raises(FileError, match=f"cannot be read: {message}"):
        next(numbered_lines(f"{tmp_path}/{name}", 10, 10))


def test_a_device_without_end(path: Path) -> None:
    """Its first bytes are read, and no more than that."""
    endless = Path("/dev/zero")
    if not endless.exists():
        pytest.skip("no such device here")
    with pytest.raises(FileError, match="a file of more than 1000 bytes"):
        content(endless, 1000)
    with pytest.raises(FileError, match="line 1: a line of more than 80 bytes"):
        next(numbered_lines(endless, 1000, 80))
