"""Fuzzer of the reader of residual motions."""

from __future__ import annotations

from pathlib import Path

from harness import fuzz

from lighttime.earth.residual_motion import ResidualMotion

SEEDS = (
    b"""\
# Source: atmospheric pressure loading, centre of mass
utc,east_mm,north_mm,up_mm
2020-01-01T00:00:00,0.31,-0.42,-3.10
2020-01-01T06:00:00,0.28,-0.40,-2.85
2020-01-01T12:00:00,0.28,-0.40,-2.85
""",
    b"""\
mjd, east_m, north_m, up_m, note
58849, 0.0003, -0.0004, 0.0, first
58850.25, 0.0002, -0.0004, 0.001, second
""",
)


def read(path: Path) -> None:
    """The motion, and where it is at its own instants."""
    motion = ResidualMotion.read(path)
    hash(motion)
    tt = motion.when.to("tt")
    motion.at(tt.jd1, tt.jd2)


if __name__ == "__main__":
    fuzz(read, SEEDS)
