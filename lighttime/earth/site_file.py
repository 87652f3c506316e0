"""Station files: a station and its loading coefficients, as a small TOML file.

.. code-block:: toml

    name = "Hilltop"
    latitude_deg = 46.2           # geodetic, GRS80; or xyz_m = [x, y, z] (ITRF) for the three
    longitude_deg = 7.1           # positive east
    height_m = 2310.0             # above the ellipsoid
    velocity_m_per_yr = [-0.0141, 0.0188, 0.0103]
    epoch = 2015.0                # of the position; needed when there is a velocity
    sigma_m = [0.005, 0.005, 0.005]
    source = "local survey of 2019"

    [ocean_loading]
    blq = "hilltop.blq"           # relative to this file
    site = "HILLTOP"              # its name in there; the name above if not given
    centre_of_mass = true         # whether the motion of the geocentre is in it

    [ocean_pole_tide]             # without unit: real and imaginary part
    up = [-0.0306, 0.0112]
    north = [0.0041, -0.0022]
    east = [-0.0013, 0.0008]
    source = "grid of the IERS Conventions"

    [atmosphere_loading]          # cosine and sine of UT1
    s1_up_mm = [0.41, -0.22]
    s1_north_mm = [0.03, 0.05]
    s1_east_mm = [-0.06, 0.02]
    s2_up_mm = [-0.53, 0.36]
    s2_north_mm = [0.04, -0.01]
    s2_east_mm = [0.07, 0.09]
    source = "loading service"

    [residual_motion]             # anything else, as a series of east, north and up
    csv = "hilltop.csv"           # see `lighttime.earth.residual_file`

A name and a position are needed, the rest is optional: a loading that is not given is not
modelled. Unknown keys are errors, so that a slip of the pen does not go unseen.

Position, velocity, epoch and sigma can come from a SINEX file instead:

.. code-block:: toml

    name = "Hilltop"

    [sinex]
    file = "stations.snx.gz"      # relative to this file
    site = "HILL"                 # code, or DOMES number
    solution = 2                  # or when = "2015-06-01"; not needed if there is only one
    point = "A"                   # if there are several
    eccentricity = true           # whether to add it; true if not given
    discontinuities = "soln.snx"  # another file, if they are not in the first
"""

from __future__ import annotations

import re
import tomllib
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass, replace
from os import PathLike
from pathlib import Path
from typing import Any, Final

import numpy as np

from lighttime.earth.blq import read_blq
from lighttime.earth.loading import AtmosphereLoading, OceanLoading, OceanPoleTide
from lighttime.earth.residual_motion import ResidualMotion
from lighttime.earth.station import Station
from lighttime.errors import FileError, InputError, UnknownNameError, shown
from lighttime.textfile import numbered_lines

__all__ = ["read_station"]

LARGEST_FILE: Final = 100_000
"""Bytes. A station file is a page of text; what is longer is something else."""

LONGEST_LINE: Final = 1000
"""Bytes. The time to read a key grows with the square of the number of its parts."""

_MOST_MM = 50.0  # no tide of the atmosphere moves the ground by more

_GEODETIC = ("latitude_deg", "longitude_deg", "height_m")
_TABLES = ("ocean_loading", "ocean_pole_tide", "atmosphere_loading", "residual_motion", "sinex")
_OF_SINEX = ("file", "site", "solution", "when", "point", "eccentricity", "discontinuities")
_STATION_KEYS = (
    "name", "xyz_m", *_GEODETIC, "velocity_m_per_yr", "epoch", "sigma_m", "source", *_TABLES,
)  # fmt: skip


def read_station(path: str | PathLike[str]) -> Station:
    """Read a station file.

    Parameters
    ----------
    path : str or path
        A TOML file as this module describes it. A BLQ file that it names is read with it.

    Returns
    -------
    Station

    Raises
    ------
    FileError
        If the file cannot be read, is not TOML, has an unknown key, lacks one, or holds a value
        that cannot be; with the line, where it can be told.
    """
    top = _Table.of_file(Path(path))
    top.accept(_STATION_KEYS)
    optional: dict[str, Any] = {}
    for key in ("velocity_m_per_yr", "sigma_m"):
        if key in top.values:
            optional[key] = top.numbers(key, 3)
    if "epoch" in top.values:
        optional["epoch"] = top.number("epoch")
    elif any(optional.get("velocity_m_per_yr", ())):
        raise top.error("velocity_m_per_yr", "a velocity needs the epoch of the position: epoch")
    if "source" in top.values:
        optional["source"] = top.text("source")
    name = top.text("name")
    for key, read in (
        ("ocean_loading", lambda table: _ocean_loading(table, name)),
        ("ocean_pole_tide", _ocean_pole_tide),
        ("atmosphere_loading", _atmosphere_loading),
        ("residual_motion", _residual_motion),
    ):
        if key in top.values:
            optional[key] = read(top.table(key))
    return _placed(top, name, optional)


def _placed(top: _Table, name: str, optional: Mapping[str, Any]) -> Station:
    """The station, from ITRF or from geodetic coordinates, or a SINEX file: one of them."""
    given = [key for key in _GEODETIC if key in top.values]
    if "sinex" in top.values:
        for key in (*given, "xyz_m", "velocity_m_per_yr", "epoch", "sigma_m"):
            if key in top.values:
                raise top.error(key, f"{key} and [sinex]: a position is given once")
        return _from_sinex(top.table("sinex"), name, optional)
    with top.errors():
        if "xyz_m" in top.values:
            if given:
                raise top.error(given[0], f"{given[0]} and xyz_m: a position is given once")
            return Station(name, top.numbers("xyz_m", 3), **optional)
        if not given:
            known = f"xyz_m, or {', '.join(_GEODETIC)}, or [sinex]"
            raise FileError(top.path, None, f"no position: {known}")
        latitude, longitude, height = (top.number(key) for key in _GEODETIC)
        return Station.from_geodetic(name, latitude, longitude, height, **optional)


def _ocean_loading(table: _Table, station: str) -> OceanLoading:
    table.accept(("blq", "site", "centre_of_mass"))
    site = table.text("site") if "site" in table.values else station
    with table.errors():
        coefficients = read_blq(table.path.parent / table.text("blq"), site)
    if "centre_of_mass" in table.values:
        coefficients = replace(coefficients, centre_of_mass=table.truth("centre_of_mass"))
    return coefficients


def _ocean_pole_tide(table: _Table) -> OceanPoleTide:
    axes = ("up", "north", "east")
    table.accept((*axes, "source"))
    up, north, east = (complex(*table.numbers(axis, 2)) for axis in axes)
    with table.errors():
        return OceanPoleTide(up, north, east, table.source)


def _atmosphere_loading(table: _Table) -> AtmosphereLoading:
    keys = [[f"{wave}_{axis}_mm" for wave in ("s1", "s2")] for axis in ("up", "north", "east")]
    table.accept((*(key for row in keys for key in row), "source"))
    metres = 1.0e-3 * np.array([[table.numbers(key, 2, _MOST_MM) for key in row] for row in keys])
    return AtmosphereLoading(metres[..., 0], metres[..., 1], table.source)


def _residual_motion(table: _Table) -> ResidualMotion:
    table.accept(("csv",))
    return ResidualMotion.read(table.path.parent / table.text("csv"))


def _from_sinex(table: _Table, name: str, optional: Mapping[str, Any]) -> Station:
    table.accept(_OF_SINEX)
    given: dict[str, Any] = {k: table.text(k) for k in ("when", "point") if k in table.values}
    if "solution" in table.values:
        number = table.values["solution"]
        given["solution"] = number if type(number) is int else table.text("solution")
    if "eccentricity" in table.values:
        given["eccentricity"] = table.truth("eccentricity")
    if "discontinuities" in table.values:
        given["discontinuities"] = table.path.parent / table.text("discontinuities")
    path = table.path.parent / table.text("file")
    with table.errors():
        return Station.from_sinex(path, table.text("site"), name=name, **given, **optional)


# -- a table of a TOML file whose values are checked one by one --------------------------------


@dataclass(frozen=True)
class _Table:
    path: Path
    lines: tuple[str, ...]
    values: Mapping[str, Any]
    name: str = ""

    @classmethod
    def of_file(cls, path: Path) -> _Table:
        lines = [line for _, line in numbered_lines(path, LARGEST_FILE, LONGEST_LINE)]
        try:
            text = b"".join(lines).decode("utf-8")
            values = tomllib.loads(text)
        except UnicodeDecodeError as error:
            raise FileError(path, None, "not a text file (UTF-8)") from error
        except (ValueError, RecursionError) as error:
            found = re.search(r"at line (\d+)", str(error))
            line = int(found[1]) if found else None
            raise FileError(path, line, f"not TOML: {error}") from error
        return cls(path, tuple(text.splitlines()), values)

    def table(self, key: str) -> _Table:
        value = self.values[key]
        if not isinstance(value, dict):
            raise self.error(key, f"{key} is {shown(value)}; allowed: a table, [{key}]")
        return _Table(self.path, self.lines, value, key)

    def accept(self, known: tuple[str, ...]) -> None:
        for key in self.values:
            if key not in known:
                raise self.error(key, str(UnknownNameError("key", key, known)))

    def number(self, key: str) -> float:
        return self._float(key, self._value(key))

    def numbers(self, key: str, count: int, most: float | None = None) -> Any:
        value = self._value(key)
        if not isinstance(value, list) or len(value) != count:
            raise self.error(key, f"{key} is {shown(value)}; allowed: a list of {count} numbers")
        found = tuple(self._float(key, each) for each in value)
        if most is not None and not all(abs(each) <= most for each in found):
            raise self.error(key, f"{key} is {value!r}; allowed: {-most:g} to {most:g}")
        return found

    def text(self, key: str) -> str:
        value = self._value(key)
        if not isinstance(value, str) or not value.strip():
            raise self.error(key, f'{key} is {shown(value)}; allowed: text in quotes, "..."')
        if not " ".join(value.split()).isprintable():
            raise self.error(key, f"{key} is {shown(value)}; allowed: text that can be printed")
        return value

    def truth(self, key: str) -> bool:
        value = self._value(key)
        if not isinstance(value, bool):
            raise self.error(key, f"{key} is {shown(value)}; allowed: true or false")
        return value

    @property
    def source(self) -> str:
        return self.text("source") if "source" in self.values else ""

    @contextmanager
    def errors(self) -> Iterator[None]:
        """Tells what a value handed on was refused for, with file and line."""
        try:
            yield
        except InputError as error:
            raise self.error(error.name.partition("[")[0], str(error)) from error

    def error(self, key: str, reason: str) -> FileError:
        place = f"[{self.name}] " if self.name else ""
        return FileError(self.path, self._line(key), f"{place}{reason}")

    def _value(self, key: str) -> Any:
        if key not in self.values:
            raise self.error(key, f"{key} is missing")
        return self.values[key]

    def _float(self, key: str, value: Any) -> float:
        if isinstance(value, bool) or not isinstance(value, (int, float)):
            raise self.error(key, f"{key} holds {shown(value)}; allowed: numbers")
        try:
            return float(value)
        except OverflowError:
            raise self.error(key, f"{key} holds a number too large") from None

    def _line(self, key: str) -> int | None:
        """Where a key of this table stands, else where the table begins, else None."""
        table, begin = "", None
        for number, line in enumerate(self.lines, start=1):
            header = re.match(r"\s*+\[++([^\]]*+)\]", line)
            if header:
                table = header[1].strip()
                begin = number if table == self.name else begin
                if table == key and not self.name:
                    return number
            elif table == self.name and re.match(rf"\s*[\"']?{re.escape(key)}[\"']?\s*=", line):
                return number
        return begin
