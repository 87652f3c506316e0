"""Fuzzer of the reader of SINEX files that are packed by gzip."""

from __future__ import annotations

import gzip

from harness import fuzz
from sinex_file import SINEX, read

if __name__ == "__main__":  # apart from plain files: few changes to a packed one can be unpacked
    fuzz(read, (gzip.compress(SINEX, mtime=0), gzip.compress(SINEX, 0, mtime=0)))
