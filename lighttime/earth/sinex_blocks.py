"""What the blocks of a SINEX file say, line by line.

Source: SINEX format, version 2.02 (from memory).
"""

from __future__ import annotations

import re
from pathlib import Path
from typing import Final, NamedTuple

import numpy as np

from lighttime.earth.sinex_site import Eccentricity
from lighttime.earth.sinex_text import HEADER, Columns, Layout, records
from lighttime.errors import FileError

ESTIMATE, EPOCHS, DISCONTINUITY = (
    f"SOLUTION/{name}" for name in ("ESTIMATE", "EPOCHS", "DISCONTINUITY")
)
IDENTITY, ECCENTRICITY = "SITE/ID", "SITE/ECCENTRICITY"

POSITION: Final = ("STAX", "STAY", "STAZ")
VELOCITY: Final = ("VELX", "VELY", "VELZ")

_UNITS: Final = {"STA": ("m",), "VEL": ("m/y", "m/yr")}
_POST_SEISMIC = ("AEXP", "TEXP", "ALOG", "TLOG")

MOST_LINES: Final = 300_000
"""Lines of data in the blocks that are read; what they say is kept, some 1 kB each."""

_HIGHEST_M = 100_000.0

_TIMES = (0, 5, 8, 13, 15, 28)
_LAYOUTS: Final = {
    ESTIMATE: Layout((0, 6, 13, 18, 21, 26, 39, 44, 68), 80, 80),
    IDENTITY: Layout((0, 5, 8, 18, 20), 44, 80),
    ECCENTRICITY: Layout((*_TIMES, 41, 45, 54, 63), 72, 72),
    EPOCHS: Layout((*_TIMES, 41), 54, 54),
    DISCONTINUITY: Layout((*_TIMES, 41), 43, 80),
}
"""Columns (from 0) that part the fields and are blank, and the length of the line."""

Place = tuple[str, str]  # code, point
Key = tuple[str, str, str]  # code, point, solution
Interval = tuple[float, float]


class Estimate(NamedTuple):
    """One line of SOLUTION/ESTIMATE."""

    value: float
    sigma: float
    reference_mjd: float | None
    line: int


class Identity(NamedTuple):
    """One line of SITE/ID; rounded coordinates, or None where the file has zeros."""

    domes: str
    name: str
    geodetic: tuple[float, float, float] | None
    """Latitude and longitude (degrees), height (m)."""


class Blocks:
    """The lines of a file, understood one by one."""

    def __init__(self, path: Path) -> None:
        self.path = path
        self.stated: int | None = None
        self.counted = 0
        self.last_line = 0
        self.titles: set[str] = set()
        self.estimates: dict[Key, dict[str, Estimate]] = {}
        self.identities: dict[Place, Identity] = {}
        self.epochs: dict[Key, Interval] = {}
        self.discontinuities: dict[Key, Interval] = {}
        self.eccentricities: dict[Place, list[Eccentricity]] = {}
        self.post_seismic: set[str] = set()

    @classmethod
    def of_file(cls, path: Path, titles: tuple[str, ...] = tuple(_LAYOUTS)) -> Blocks:
        """Read the blocks with these titles."""
        blocks = cls(path)
        count = 0
        for title, line, text in records(path, titles):
            blocks.titles.add(title)
            if text.strip():
                count += 1
                if count > MOST_LINES:
                    raise FileError(path, line, f"more than {MOST_LINES} lines of data")
                blocks._take(title, line, text)
        return blocks

    def _take(self, title: str, line: int, text: str) -> None:
        if title == HEADER:
            self._take_header(text)
        elif title == ESTIMATE:
            self._take_estimate(line, text)
        else:
            columns = Columns(self.path, line, text, _LAYOUTS[title])
            if title == IDENTITY:
                self._take_identity(columns)
            elif title == ECCENTRICITY:
                self._take_eccentricity(columns)
            elif title == EPOCHS:
                self._put(self.epochs, columns, title)
            elif columns.word(42, 43) == "P":  # of positions; V are those of velocities
                self._put(self.discontinuities, columns, title)

    def _take_header(self, text: str) -> None:
        words = text.split()
        stated = words[8] if len(words) > 8 else ""
        if not re.fullmatch(r"[0-9]{1,9}|\*+", stated):
            raise FileError(self.path, 1, "the header does not say the number of estimates")
        self.stated = None if stated.startswith("*") else int(stated)

    def check_count(self) -> None:
        """The number of estimates is that of the header (which may be out of its columns)."""
        if not self.estimates:
            raise FileError(self.path, None, f"no position of a station in {ESTIMATE}")
        if self.stated is not None and self.stated != self.counted:
            reason = f"{self.counted} estimates up to here, and {self.stated} in the header"
            raise FileError(self.path, self.last_line, reason)

    def _take_estimate(self, line: int, text: str) -> None:
        self.counted += 1
        self.last_line = line
        index = text[1:6].strip()
        if index != str(self.counted):
            reason = f"estimate {self.counted} should be here, not {index!r}"
            raise FileError(self.path, line, reason)
        kind = text[7:13].strip()
        if kind.partition("_")[0] in _POST_SEISMIC:
            self.post_seismic.add(text[14:18].strip())
        if kind not in POSITION and kind not in VELOCITY:
            return
        columns = Columns(self.path, line, text, _LAYOUTS[ESTIMATE])
        unit, allowed = columns.word(40, 44), _UNITS[kind[:3]]
        if unit not in allowed:
            raise columns.error(f"{kind} in {unit!r}; allowed: {' or '.join(allowed)}")
        found = Estimate(columns.number(46, 68), columns.number(69, 80), columns.time(27), line)
        if found.sigma < 0.0:
            raise columns.error(f"a sigma of {found.sigma}")
        group = self.estimates.setdefault(_key(columns), {})
        if kind in group:
            reason = f"{kind} of {columns.word(14, 18)} a second time"
            raise columns.error(f"{reason} (first at line {group[kind].line})")
        group[kind] = found

    def _take_identity(self, columns: Columns) -> None:
        key = columns.word(1, 5), columns.word(6, 8)
        if key in self.identities:
            raise columns.error(f"{key[0]} a second time in {IDENTITY}")
        numbers = columns.text[43:].split()[-7:]
        try:
            longitude, latitude = (_degrees(numbers[k : k + 3]) for k in (0, 3))
            height = float(numbers[6])
        except (ValueError, IndexError):
            longitude = latitude = height = np.nan
        if not (abs(longitude) <= 360.0 and abs(latitude) <= 90.0 and abs(height) <= _HIGHEST_M):
            reason = f"no longitude, latitude and height at the end of {columns.text.strip()!r}"
            raise columns.error(reason)
        known = longitude != 0.0 or latitude != 0.0  # some write zeros for what they do not know
        place = (latitude, longitude, height) if known else None
        name = "".join(letter if letter.isprintable() else "?" for letter in columns.word(21, 43))
        self.identities[key] = Identity(columns.word(9, 18), name, place)

    def _take_eccentricity(self, columns: Columns) -> None:
        kind = columns.word(42, 45)
        if kind not in ("UNE", "XYZ"):
            raise columns.error(f"an eccentricity along {kind!r}; allowed: UNE, XYZ")
        first, last = _interval(columns)
        vector = (columns.number(46, 54), columns.number(55, 63), columns.number(64, 72))
        of = columns.word(1, 5), columns.word(6, 8)
        found = Eccentricity(columns.word(9, 13), first, last, kind, vector)
        self.eccentricities.setdefault(of, []).append(found)

    def _put(self, into: dict[Key, Interval], columns: Columns, title: str) -> None:
        key = columns.word(1, 5), columns.word(6, 8), columns.word(9, 13)
        if key in into:
            raise columns.error(f"solution {key[2]} of {key[0]} a second time in {title}")
        into[key] = _interval(columns)


def _key(columns: Columns) -> Key:
    return columns.word(14, 18), columns.word(19, 21), columns.word(22, 26)


def _interval(columns: Columns) -> Interval:
    """First and last MJD of a line; what is not stated is open."""
    first, last = columns.time(16), columns.time(29)
    interval = -np.inf if first is None else first, np.inf if last is None else last
    if not interval[0] <= interval[1]:
        raise columns.error("an interval that ends before it begins")
    return interval


def _degrees(words: list[str]) -> float:
    degrees, minutes, seconds = map(float, words)
    size = abs(degrees) + minutes / 60.0 + seconds / 3600.0
    return -size if words[0].startswith("-") else size
