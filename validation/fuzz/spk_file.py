"""Fuzzer of the reader of ephemeris files (SPK, with jplephem), and of positions from them."""

from __future__ import annotations

import sys
from pathlib import Path
from tempfile import TemporaryDirectory

import numpy as np
from harness import fuzz

from lighttime.ephemeris import Ephemeris

sys.path.append(str(Path(__file__).parents[2] / "tests"))
from daf_case import write_daf

START_S, SPAN_S = 3.15e8, 16 * 86400.0
BODIES = ((0, 3), (0, 10), (3, 399), (3, 301))


def seed() -> bytes:
    """Two records of three coefficients for each of the bodies that are needed."""
    rows = np.arange(1.0, 19.0).reshape(2, 3, 3)
    times = [START_S, START_S + 2 * SPAN_S]
    segments = [(times, [b, a, 1, 2], k * rows, START_S, SPAN_S) for k, (a, b) in enumerate(BODIES)]
    with TemporaryDirectory() as folder:
        path = Path(folder) / "made.bsp"
        write_daf(path, b"DAF/SPK", 2, 6, segments)
        return path.read_bytes()


def read(path: Path) -> None:
    """The ephemeris, told, and bodies at its beginning."""
    ephemeris = Ephemeris.open(path)
    repr(ephemeris)
    first, last = ephemeris.coverage
    with np.errstate(all="ignore"):  # numbers of any size can be in the records
        ephemeris.earth(first, 0.5 * (last - first), 1.0)
        ephemeris.moon_geocentric(first, 0.0)


if __name__ == "__main__":
    fuzz(read, (seed(),))
