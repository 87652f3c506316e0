"""Files as large, and as unpleasant, as the readers take: seconds and memory of each.

    python validation/fuzz/large_files.py

Every file is read in a process of its own. Exits non-zero if one takes more than 500 MB, or longer
than `SLOWEST_S`, or ends in anything but an answer or a `LighttimeError`.
"""

from __future__ import annotations

import gzip
import multiprocessing
import resource
import sys
import time
from collections.abc import Callable, Iterator
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any, NamedTuple

from lighttime.commands.epoch_file import EpochFile
from lighttime.crosscheck.ranges import read_ranges
from lighttime.earth.blq import read_blq
from lighttime.earth.residual_motion import ResidualMotion
from lighttime.earth.series import EarthOrientation
from lighttime.earth.sinex import read_sinex
from lighttime.earth.site_file import read_station
from lighttime.errors import LighttimeError

SLOWEST_S = 120.0
MOST_MB = 500.0

MEGA = 2**20
ROW = b" .00352" * 11 + b"\n"
SINEX = b"%=SNX 2.02 INV 20:001:00000 INV 94:002:00000 10:365:86370 C 00012 2 S V\n"


class Case(NamedTuple):
    """A file in pieces, and what reads it."""

    name: str
    read: Callable[[Path], object]
    pieces: Callable[[], Iterator[bytes]]
    packed: bool = False


def repeated(piece: bytes, size: int, before: bytes = b"") -> Callable[[], Iterator[bytes]]:
    """A file of the same piece again and again, up to a size in bytes."""

    def pieces() -> Iterator[bytes]:
        yield before
        block = piece * max(1, MEGA // len(piece))
        for _ in range(size // len(block)):
            yield block

    return pieces


def counted(form: bytes, count: int, before: bytes = b"") -> Callable[[], Iterator[bytes]]:
    """A file of numbered pieces."""

    def pieces() -> Iterator[bytes]:
        yield before
        for k in range(count):
            yield form % k

    return pieces


def blq(path: Path) -> object:
    """A station that is not there, for which near names are looked for."""
    return read_blq(path, "ababababababababababababababababababab")


def epochs(path: Path) -> object:
    """Every row."""
    return EpochFile(path, "utc", "utc", {}).survey()


def sites() -> Iterator[bytes]:
    """A block of sites, with more of them than there are."""
    yield SINEX + b"+SITE/ID\n"
    for k in range(400_000):
        of = b" %04x %02x 10002M001 L" % divmod(k, 64)
        yield of + b" " * 22 + b"  7  6  0.4 46 12  0.0  2310.0\n"


def blocks_without_end() -> Iterator[bytes]:
    """Blocks without lines, each with another title."""
    yield SINEX
    for k in range(1_000_000):
        yield b"+A%d\n-A%d\n" % (k, k)


def instants(rest: bytes, count: int, before: bytes) -> Callable[[], Iterator[bytes]]:
    """Rows that begin with an instant, each later than the one before."""

    def pieces() -> Iterator[bytes]:
        yield before
        for k in range(count):
            minutes, second = divmod(k // 100 % 86400, 60)
            hour, minute = divmod(minutes, 60)
            day = 1 + k // 8640000
            clock = b"2020-01-%02dT%02d:%02d:%02d.%02d" % (day, hour, minute, second, k % 100)
            yield clock + rest

    return pieces


CASES = (
    Case("BLQ: many short stations", blq, counted(b"ab%d\n" + 6 * (b" .0" * 11 + b"\n"), 200_000)),
    Case("BLQ: remarks", blq, repeated(b"$$ab\n", 63 * MEGA)),
    Case("BLQ: names alike", blq, counted(b"abababababababababababababab%d\n" + 6 * ROW, 100_000)),
    Case("station: dotted keys", read_station, counted(b"a%d." + b"a." * 480 + b"a=1\n", 98)),
    Case("station: open brackets", read_station, counted(b"[" + b" " * 990 + b"%d\n", 99)),
    Case("station: many keys", read_station, counted(b"k%d=1\n", 9_000)),
    Case("station: no end", read_station, repeated(b"\n", 100 * MEGA)),
    Case("SINEX: packed empty lines", read_sinex, repeated(b"\n", 200 * MEGA, SINEX), True),
    Case("SINEX: sites", read_sinex, sites, True),
    Case("SINEX: blocks", read_sinex, blocks_without_end),
    Case(
        "residual motion: a century of hours",
        ResidualMotion.read,
        instants(b",0.31,-0.42,-3.10\n", 876_600, b"utc,east_mm,north_mm,up_mm\n"),
    ),
    Case("residual motion: remarks", ResidualMotion.read, repeated(b"#a\n", 60 * MEGA)),
    Case("residual motion: commas", ResidualMotion.read, repeated(b",", 60 * MEGA)),
    Case("Earth orientation: empty lines", EarthOrientation.read, repeated(b"\n", 31 * MEGA)),
    Case("Earth orientation: no lines", EarthOrientation.read, repeated(b"a", 31 * MEGA)),
    Case("epochs: two million", epochs, instants(b"\n", 2_000_000, b"utc\n")),
    Case("epochs: quotes without end", epochs, repeated(b'"\n",', 60 * MEGA, b"utc\n")),
    Case("epochs: a line without end", epochs, repeated(b"a", 200 * MEGA)),
    Case("ranges: a line without end", read_ranges, repeated(b"a", 200 * MEGA)),
    Case("ranges: ECSV header", read_ranges, repeated(b"# - a\n", 60 * MEGA, b"# %ECSV 1.0\n")),
    Case("ranges: many columns", read_ranges, repeated(b"," * 9_000 + b"\n", 60 * MEGA)),
    Case(
        "ranges: half a million",
        read_ranges,
        instants(b",2.594379123456789\n", 500_000, b"epoch_utc,round_trip_s\n"),
    ),
    Case(
        "ranges: tiny numbers",
        read_ranges,
        instants(b",1e-999999999\n", 1000, b"epoch_utc,uplink_m\n"),
    ),
)


def measured(case: Case, path: Path, tell: multiprocessing.SimpleQueue[Any]) -> None:
    """Read a file, in a process of its own: what came of it, seconds, MB at the most."""
    start = time.perf_counter()
    try:
        said = f"read: {case.read(path)!r:.40}"
    except LighttimeError as error:
        said = f"{type(error).__name__}: {str(error).replace(str(path), '')[:70]}"
    except BaseException as error:
        said = f"FAULT {type(error).__name__}: {error}"[:70]
    seconds = time.perf_counter() - start
    tell.put((said, seconds, resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024.0))


def main() -> int:
    """Print the table."""
    wanted = sys.argv[1] if len(sys.argv) > 1 else ""
    worst = 0
    print(f"{'file':38}{'MB':>7}{'s':>8}{'memory, MB':>12}  outcome")
    for case in CASES:
        if wanted not in case.name:
            continue
        with TemporaryDirectory() as folder:
            path = Path(folder) / "input"
            with gzip.open(path, "wb", 1) if case.packed else path.open("wb") as file:
                for piece in case.pieces():
                    file.write(piece)
            tell: multiprocessing.SimpleQueue[Any] = multiprocessing.SimpleQueue()
            child = multiprocessing.get_context("fork").Process(
                target=measured, args=(case, path, tell)
            )
            child.start()
            child.join(4 * SLOWEST_S)
            hangs = child.is_alive()
            child.kill()
            said, seconds, memory = ("HANGS", 4 * SLOWEST_S, 0.0) if hangs else tell.get()
            size = path.stat().st_size / MEGA
        bad = hangs or seconds > SLOWEST_S or memory > MOST_MB or said.startswith("FAULT")
        worst |= bad
        print(f"{case.name:38}{size:7.1f}{seconds:8.1f}{memory:12.0f}  {'!' * bad}{said}")
    return worst


if __name__ == "__main__":
    sys.exit(main())
