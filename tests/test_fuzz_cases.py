"""Hostile files that a reader once answered with something else than a `LighttimeError`.

Found by the fuzzers of validation/fuzz, or by looking for more of what they had found. Every one
is refused in a moment, whatever its size; warnings are errors here.
"""

from __future__ import annotations

import gc
import io
import re
import struct
import time
import tracemalloc
import zipfile
from collections.abc import Callable, Iterator
from pathlib import Path

import numpy as np
import pytest
from daf_case import write_daf, write_de421
from sinex_case import HILL, blocks, written

from lighttime.commands.epoch_file import EpochFile
from lighttime.crosscheck.ranges import read_ranges
from lighttime.earth import sinex_blocks
from lighttime.earth.blq import read_blq
from lighttime.earth.residual_motion import ResidualMotion
from lighttime.earth.series import EarthOrientation
from lighttime.earth.sinex import read_sinex
from lighttime.earth.sinex_text import MOST_BLOCKS
from lighttime.earth.site_file import read_station
from lighttime.ephemeris import Ephemeris
from lighttime.ephemeris.time_integral import TimeEphemeris
from lighttime.errors import FileError, InputError, LighttimeError

Read = Callable[[Path], object]

PLACE = b'name = "Hilltop"\nlatitude_deg = 46.2\nlongitude_deg = 7.1\nheight_m = 2310\n'
SINEX = written(blocks([HILL])).encode()
BLQ_ROW = b"  .00352" * 11 + b"\n"


@pytest.fixture
def path(tmp_path: Path) -> Path:
    return tmp_path / "hostile"


@pytest.fixture(autouse=True)
def small_and_quick() -> Iterator[None]:
    """Nothing here may take ten seconds or a hundred megabytes."""
    tracemalloc.start()
    begin = time.process_time()
    yield
    memory = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert time.process_time() - begin < 10.0
    assert memory < 100e6


def epochs(path: Path) -> object:
    return EpochFile(path, "utc", "utc", {}).survey()


CASES: dict[str, tuple[Read, bytes, str]] = {
    # -- station files
    "a zero byte in the name of a file": (
        read_station,
        PLACE + b'[ocean_loading]\nblq = "a\\u0000"\n',
        r"line 6: \[ocean_loading\] blq is 'a\\x00'; allowed: text that can be printed",
    ),
    "a name that clears the screen": (
        read_station,
        PLACE.replace(b"Hilltop", b"\\u001b[2J"),
        "line 1: name is .*; allowed: text that can be printed",
    ),
    "an integer that Python does not print": (
        read_station,
        PLACE.replace(b'"Hilltop"', b"0x" + b"f" * 9000),
        "line 1: a line of more than 1000 bytes",
    ),
    "a position that overflows": (
        read_station,
        b'name = "Hilltop"\nxyz_m = [1e200, 1e200, 1e200]\n',
        "line 2: xyz_m is .*a place within 100 km",
    ),
    "keys of five hundred parts": (
        read_station,
        b"\n".join(b"k%d." % k + b"a." * 490 + b"a=1" for k in range(40)),
        "key is 'k0'",
    ),
    "blanks behind a bracket": (
        read_station,
        b"\n".join(b"# [" + b" " * 990 for _ in range(90)) + b"\n1",
        "not TOML",
    ),
    # -- ocean loading
    "the name of a station without end": (
        lambda path: read_blq(path, "ab" * 20),
        b"".join(b"ab" * 14 + b"%d\n" % k + 6 * BLQ_ROW for k in range(2000)),
        "site is 'abab.*did you mean",
    ),
    # -- SINEX
    "a superscript for the number of estimates": (
        read_sinex,
        SINEX.replace(b" 00012 ", b" \xb2     ", 1),
        "line 1: the header does not say the number of estimates",
    ),
    "coordinates that overflow": (
        read_sinex,
        SINEX.replace(b".438997800000000E+07", b".43899780000000E+200", 1),
        "xyz_m is .*a place within 100 km",
    ),
    "a height that overflows": (
        read_sinex,
        re.sub(rb" 23\d\d\.\d\n", b" 9e307 \n", SINEX, count=1),
        "no longitude, latitude and height",
    ),
    "more blocks than there are": (
        read_sinex,
        SINEX[: SINEX.index(b"+FILE")] + b"".join(b"+%d\n-%d\n" % (k, k) for k in range(1001)),
        f"more than {MOST_BLOCKS} blocks",
    ),
    # -- residual motion
    "remarks alone": (
        ResidualMotion.read,
        b"#\n" * 2000,
        "line 1001: more than 1000 lines of remarks",
    ),
    "a row without end": (
        ResidualMotion.read,
        b"utc,east_m,north_m,up_m\n" + b"," * 10**7,
        "line 2: a line of more than 2000 bytes",
    ),
    "digits of another script": (
        ResidualMotion.read,
        "mjd,east_m,north_m,up_m\n58849,٣,0,0\n58850,0,0,0\n".encode(),
        "line 2: east_m is '٣'; allowed: finite numbers",
    ),
    # -- Earth orientation
    "a day without values": (
        EarthOrientation.read,
        b"86 914 46687.00 I  \n",
        "no day with values",
    ),
    "millions of empty lines": (
        EarthOrientation.read,
        b"\n" * 10**6,
        "more than 200000 lines",
    ),
    # -- epochs
    "a row of a thousand lines": (
        epochs,
        b'utc,note\n2020-01-01,"' + b"more\n" * 1000 + b'"\n',
        "line 102: a row of more than 100 lines",
    ),
    "a line without end": (epochs, b"u" * 10**7, "line 1: a line of more than 20000 characters"),
    # -- ranges of others
    "an ECSV header that is a list": (
        read_ranges,
        b"# %ECSV 1.0\n# - {name: tag}\nepoch_utc,round_trip_s\n2020-01-01,2.6\n",
        "its ECSV header cannot be read",
    ),
    "an ECSV header of numbers": (
        read_ranges,
        b"# %ECSV 1.0\n# datatype: [1, 2]\nepoch_utc,round_trip_s\n2020-01-01,2.6\n",
        "its ECSV header cannot be read",
    ),
    "a delimiter that is none": (
        read_ranges,
        b"# %ECSV 1.0\n# delimiter: ab\n# datatype:\n# - {name: a, datatype: string}\na\n1\n",
        "its ECSV header cannot be read: a delimiter of 'ab'",
    ),
    "an ECSV header without end": (
        read_ranges,
        b"# %ECSV 1.0\n" + b"# - a\n" * 20_000,
        "an ECSV header of more than 50000 characters",
    ),
    "a number of a milliard digits": (
        read_ranges,
        b"epoch_utc,uplink_m\n2020-01-01,1e-999999999\n",
        "uplink_m 1E-999999999 is too small",
    ),
    "another line without end": (
        read_ranges,
        b"u" * 10**7,
        "line 1: a line of more than 20000 characters",
    ),
}


@pytest.mark.parametrize("name", CASES)
def test_refused(path: Path, name: str) -> None:
    read, content, message = CASES[name]
    path.write_bytes(content)
    with pytest.raises(LighttimeError, match=message):
        read(path)


def test_a_name_of_a_site_is_printable(path: Path) -> None:
    path.write_bytes(SINEX.replace(b"Hilltop, invented", b"Hill\x1b[2J, invented", 1))
    assert read_sinex(path).site("HILL").name == "Hill?[2J, invented"


def test_more_lines_than_a_file_of_sites_has(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sinex_blocks, "MOST_LINES", 10)
    path.write_bytes(SINEX)
    with pytest.raises(FileError, match="more than 10 lines of data"):
        read_sinex(path)


# -- ephemerides ---------------------------------------------------------------------------------


def test_a_head_that_lies(path: Path) -> None:
    """Two thousand million numbers to a summary: jplephem would make room for them."""
    write_daf(path, b"DAF/SPK", 2, 6, [])
    data = path.read_bytes()
    for where, number in ((8, 2**31 - 1), (12, 2**31 - 1), (12, 0)):
        path.write_bytes(data[:where] + struct.pack("<I", number) + data[where + 4 :])
        with pytest.raises(FileError, match="its head is not that of an SPK or PCK file"):
            Ephemeris.open(path)


def test_summaries_in_a_circle(path: Path) -> None:
    write_daf(path, b"DAF/SPK", 2, 6, [])
    data = path.read_bytes()
    path.write_bytes(data[:1024] + struct.pack("<d", 2.0) + data[1032:])
    with pytest.raises(FileError, match="its summaries have no end"):
        Ephemeris.open(path)


def segment(target: int, center: int, rows: np.ndarray, span_s: float = 86400.0) -> object:
    """A segment of an SPK file from J2000 on."""
    return [0.0, span_s * len(rows)], [target, center, 1, 2], rows, 0.0, span_s


@pytest.mark.parametrize(
    ("span_s", "message"),
    [
        (-1.0, r"segment .*3->399 is broken: 2\.0 records of -1\.0 s"),
        (float("nan"), r"segment .*3->399 is broken: 2\.0 records of nan s"),
    ],
)
def test_records_of_no_length(path: Path, span_s: float, message: str) -> None:
    rows = np.ones((2, 3, 4))
    write_daf(path, b"DAF/SPK", 2, 6, [segment(399, 3, rows, span_s)])
    with pytest.raises(FileError, match=message):
        Ephemeris.open(path)


def test_what_an_ephemeris_lacks(tmp_path: Path, path: Path) -> None:
    rows = np.ones((2, 3, 4))
    write_daf(path, b"DAF/SPK", 2, 6, [segment(399, 3, rows)])
    with pytest.raises(FileError, match="no segment from body 3 to body 301"):
        Ephemeris.open(path)
    bodies = ((3, 0), (10, 0), (399, 3))
    others = [segment(a, b, rows) for a, b in bodies]
    write_daf(path, b"DAF/SPK", 2, 6, [*others, segment(301, 3, rows[:, :, :3], 43200.0)])
    with pytest.raises(FileError, match="Earth and Moon are on different records"):
        Ephemeris.open(path)
    made, _ = write_de421(tmp_path)
    write_daf(path, b"DAF/PCK", 2, 5, [])
    with pytest.raises(FileError, match="no orientation segment in it"):
        Ephemeris.open(made, orientation=path)


def test_kinds_of_records_that_are_not_known(path: Path) -> None:
    times, _, rows, start, span = segment(399, 3, np.ones((2, 3, 4)))  # type: ignore[misc]
    write_daf(path, b"DAF/SPK", 2, 6, [(times, [399, 3, 1, 9], rows, start, span)])
    with pytest.raises(FileError, match=r"3->399 is not made of Chebyshev records \(2 or 3\)"):
        Ephemeris.open(path)


def test_a_refused_file_is_closed(path: Path) -> None:
    """An open file that is forgotten is a ResourceWarning, and here an error."""
    write_daf(path, b"DAF/SPK", 2, 6, [segment(399, 3, np.ones((2, 3, 4)))])
    for _ in range(3):
        with pytest.raises(FileError):
            Ephemeris.open(path)
    gc.collect()


# -- integrated time -----------------------------------------------------------------------------


def archive(compression: int = zipfile.ZIP_STORED, size: int = 100) -> bytes:
    packed = io.BytesIO()
    with zipfile.ZipFile(packed, "w", compression) as file:
        file.writestr("earth.npy", bytes(size))
    return packed.getvalue()


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"", "not a time ephemeris: File is not a zip file"),
        (b"\x93NUMPY\x01\x00", "not a time ephemeris: File is not a zip file"),
        (archive(), "not a time ephemeris"),
        (archive(zipfile.ZIP_DEFLATED, 10**8), "not a time ephemeris: 100000000 bytes unpacked"),
        (archive(zipfile.ZIP_DEFLATED).replace(b"\x08\x00", b"\x63\x00"), "not a time ephemeris"),
        (archive()[:60] + b"!" + archive()[61:], "not a time ephemeris: Bad CRC-32"),
    ],
    ids=["empty", "array", "zeros", "bomb", "unknown compression", "damaged"],
)
def test_archives(path: Path, content: bytes, message: str) -> None:
    path.write_bytes(content)
    with pytest.raises(FileError, match=message):
        TimeEphemeris.read(path)


# -- instants ------------------------------------------------------------------------------------


def test_an_integer_of_thousands_of_digits_is_no_epoch() -> None:
    from lighttime.timescales import Epoch

    with pytest.raises(InputError, match="epoch is of type int and cannot be shown"):
        Epoch.parse(10**5000)
