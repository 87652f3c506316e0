"""Fuzzer of the reader of integrated time ephemerides (numpy's .npz)."""

from __future__ import annotations

from pathlib import Path
from tempfile import TemporaryDirectory

import numpy as np
from harness import fuzz

from lighttime.ephemeris import Ephemeris
from lighttime.ephemeris.time_file import FORMAT
from lighttime.ephemeris.time_integral import TimeEphemeris
from lighttime.errors import FileError


def seed() -> bytes:
    """A file of the right form, which no ephemeris agrees with."""
    with TemporaryDirectory() as folder:
        path = Path(folder) / "made.npz"
        np.savez(
            path, format=FORMAT, ephemeris="DE421", origin="made", error_s=1e-12,
            start_jd=2451536.5, span_days=4.0, earth=np.zeros((2, 1, 5)), moon=np.zeros((2, 1, 5)),
        )  # fmt: skip
        return path.read_bytes()


def read(path: Path) -> None:
    """The functions; FileError where they are not those of DE421."""
    try:
        TimeEphemeris.read(path, Ephemeris.default())
    except FileError as error:
        str(error)


if __name__ == "__main__":
    fuzz(read, (seed(),))
