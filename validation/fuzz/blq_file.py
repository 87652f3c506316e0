"""Fuzzer of the reader of ocean loading coefficients."""

from __future__ import annotations

from pathlib import Path

from harness import fuzz

from lighttime.earth.blq import list_blq, read_blq

ROWS = b"""\
  .00352 .00123 .00080 .00032 .00187 .00112 .00063 .00003 .00082 .00044 .00037
  .00144 .00035 .00035 .00008 .00053 .00049 .00018 .00009 .00012 .00005 .00006
  .00086 .00023 .00023 .00006 .00029 .00028 .00010 .00007 .00004 .00002 .00001
   -64.7  -52.0  -96.2  -55.2  -58.8 -151.4  -65.6 -138.1    8.4    5.2    2.1
    85.5  114.5   56.5  113.6   99.4   19.1   94.1  -10.4 -167.4 -170.0 -177.7
   109.5  147.0   92.7  148.8   50.5  -55.1   36.4 -170.4  -15.0    2.3    5.2
"""
HEADER = b"""\
$$ COLUMN ORDER:  M2  S2  N2  K2  K1  O1  P1  Q1  MF  MM SSA
$$ CMC:  NO  (corr.tide centre of mass)
"""
SEEDS = (
    HEADER + b"  HILL TOP\n$$ Model A\n" + ROWS + b"$$ END TABLE\n",
    b"  HILL TOP\n$$ CMC: YES\n" + ROWS + b"\n  Seaside\n$$ Model B\n" + ROWS,
)


def read(path: Path) -> None:
    """The names, and the coefficients of the first and of one that is seldom there."""
    names = list_blq(path)
    hash(read_blq(path, names[0]))
    read_blq(path, "HILL TOP")


if __name__ == "__main__":
    fuzz(read, SEEDS)
