"""Fuzzer of the reader of Earth orientation files: IERS C04 and finals2000A."""

from __future__ import annotations

from pathlib import Path

from astropy_iers_data import IERS_A_FILE, IERS_B_FILE
from harness import fuzz

from lighttime.earth.series import EarthOrientation


def some_lines(path: str, begin: int, count: int) -> bytes:
    """Lines of a file, those of its head with them."""
    lines = Path(path).read_bytes().splitlines(keepends=True)
    head = [line for line in lines if line.startswith(b"#")]
    return b"".join([*head, *lines[begin : begin + count]])


SEEDS = (
    some_lines(IERS_B_FILE, 5000, 5),
    some_lines(IERS_A_FILE, 5000, 5),
    some_lines(IERS_A_FILE, -5, 5),  # without any value
)


def read(path: Path) -> None:
    """The series, told, and interpolated in its middle."""
    series = EarthOrientation.read(path)
    str(series)
    first, last = series.coverage
    series.at(2400000.5 + 0.5 * (first + last), 0.0)


if __name__ == "__main__":
    fuzz(read, SEEDS[:2])
