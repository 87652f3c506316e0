"""Reading ephemerides: the package `de421`, and SPK/PCK files through `jplephem`."""

from __future__ import annotations

import struct
from collections.abc import Mapping
from contextlib import closing
from importlib.resources import files
from io import BufferedReader
from os import PathLike, fspath
from types import MappingProxyType
from typing import Any

import numpy as np
from numpy.typing import NDArray

from lighttime.constants import DAY, J2000
from lighttime.ephemeris.bodies import PLANETS, Ephemeris, au3_per_day2
from lighttime.ephemeris.chebyshev import Records
from lighttime.errors import FileError
from lighttime.textfile import opened

Array = NDArray[np.float64]

KILOMETRE = 1000.0

_PLANET_NUMBER = {"mercury": 1, "venus": 2, "mars": 4, "jupiter": 5, "saturn": 6, "uranus": 7}
_PLANET_NUMBER |= {"neptune": 8, "pluto": 9}
_SUN, _EMB, _EARTH, _MOON = 10, 3, 399, 301

_FARTHEST_S = 1e12
"""Some 30,000 years: no ephemeris reaches further from J2000."""

TWO_PI = (2.0 * np.pi, 2.4492935982947064e-16)
"""2 pi as the sum of two float64."""


def de421() -> Ephemeris:
    """DE421 and its constants, from the package that carries it."""
    folder = files("de421")

    def rows(file: str) -> Array:
        # as a plain array: numpy's own class for mapped files is slow to index
        return np.asarray(np.load(str(folder.joinpath(f"{file}.npy")), mmap_mode="r"))

    raw = {k.decode(): float(v) for k, v in np.load(str(folder.joinpath("constants.npy")))}
    start, end, au = raw["jalpha"], raw["jomega"], raw["AU"] * KILOMETRE

    def records(file: str, scale: float = KILOMETRE) -> Records:
        coefficients = rows(f"jpl-{file}")
        span = (end - start) / len(coefficients)
        return Records(start, span, coefficients, scale, f"DE421 {file}")

    emrat = raw["EMRAT"]
    gm_both = au3_per_day2(raw["GMB"], au)
    constants = {f"gm_{p}": au3_per_day2(raw[f"GM{n}"], au) for p, n in _PLANET_NUMBER.items()}
    constants |= {
        "gm_sun": au3_per_day2(raw["GMS"], au),
        "gm_earth": gm_both * emrat / (1.0 + emrat),
        "gm_moon": gm_both / (1.0 + emrat),
        "au_m": au,
        "emrat": emrat,
        "j2_earth": raw["J2E"],
        "radius_earth_m": raw["AE"] * KILOMETRE,
    }
    constants |= {f"file:{key}": value for key, value in raw.items()}
    return Ephemeris(
        name="DE421",
        barycentric=MappingProxyType(
            {"earth_moon_barycentre": records("earthmoon"), "sun": records("sun")}
            | {planet: records(planet) for planet in (*PLANETS, "pluto")}
        ),
        moon_from_earth=records("moon"),
        earth_from_barycentre=-1.0 / (1.0 + emrat),
        angles=_reduced(records("librations", 1.0)),
        constants=MappingProxyType(constants),
        origin=("default",),
        constants_from="DE421",
        orientation_name="lunar orientation of DE421",
    )


def open_files(
    bsp: str | PathLike[str],
    orientation: str | PathLike[str] | None,
    constants: Mapping[str, float] | None,
) -> Ephemeris:
    """See `Ephemeris.open`."""
    from jplephem.spk import SPK

    bsp = fspath(bsp)
    kernel = _opened(SPK, bsp)
    segments = {(s.center, s.target): s for s in kernel.segments}

    def records(center: int, target: int) -> Records:
        try:
            segment = segments[center, target]
        except KeyError:
            raise FileError(
                bsp, None, f"no segment from body {center} to body {target}, which is needed here"
            ) from None
        return _records(segment, KILOMETRE, f"{bsp} {center}->{target}", bsp)

    with closing(kernel.daf.file):  # what was found stays mapped
        earth, moon = records(_EMB, _EARTH), records(_EMB, _MOON)
        barycentric = {"earth_moon_barycentre": records(0, _EMB), "sun": records(0, _SUN)}
        barycentric |= {p: records(0, n) for p, n in _PLANET_NUMBER.items() if (0, n) in segments}
    known = dict(Ephemeris.default().constants)
    stated = {} if constants is None else dict(constants)
    orientation = None if orientation is None else fspath(orientation)
    name = bsp.replace("\\", "/").rsplit("/", 1)[-1].rsplit(".", 1)[0]
    return Ephemeris(
        name=name,
        barycentric=MappingProxyType(barycentric),
        moon_from_earth=_minus(moon, earth, bsp),
        earth_from_barycentre=earth,
        angles=None if orientation is None else _orientation(orientation),
        constants=MappingProxyType(known | stated),
        origin=("files", bsp, orientation, stated),
        constants_from="DE421" if not stated else "the caller, else DE421",
        orientation_name="" if orientation is None else orientation,
    )


def _opened(kind: Any, path: str) -> Any:
    from jplephem.daf import DAF

    file = opened(path)  # the reader owns it
    try:
        _check_head(file)
        return kind(DAF(file))
    except Exception as error:  # whatever a broken file makes the reader do
        file.close()
        raise FileError(path, None, f"not an ephemeris file: {error}") from None


def _check_head(file: BufferedReader) -> None:
    """What jplephem takes on trust: how long a summary is, and that their chain has an end.

    Source: the published description of the DAF format: ND, NI and the first record of summaries
    are integers at bytes 8, 12 and 76; a record begins with the number of the next, 0 after the
    last.
    """
    head = file.read(80)
    for order in "<>":
        doubles, integers, record = struct.unpack(f"{order}8xII60xI", head.ljust(80, b"\0"))
        if doubles == 2 and integers in (5, 6):  # of SPK 6, of PCK 5
            break
    else:
        raise ValueError("its head is not that of an SPK or PCK file")
    seen: set[int] = set()
    while record:
        if record in seen or record < 0:
            raise ValueError("its summaries have no end")
        seen.add(record)
        file.seek(1024 * (record - 1))
        record = int(*struct.unpack(f"{order}d", file.read(8)))
    file.seek(0)


def _records(segment: Any, scale: float, name: str, path: str) -> Records:
    """The Chebyshev records of a segment, still on disk.

    Each record is its middle, half its length, and the coefficients of each component; behind
    the last are the beginning, the length of a record, its size and their number.
    """
    if segment.data_type not in (2, 3):
        raise FileError(path, None, f"segment {name} is not made of Chebyshev records (2 or 3)")
    components = 3 if segment.data_type == 2 else 6  # type 3 carries velocities as well
    daf = segment.daf
    try:
        first_s, span_s, size, count = daf.read_array(segment.end_i - 3, segment.end_i)
        rows = daf.map_array(segment.start_i, segment.end_i - 4).reshape(int(count), int(size))
        coefficients = rows[:, 2:].reshape(int(count), components, -1)[:, :3]
        if not (abs(first_s) < _FARTHEST_S and 0.0 < span_s < _FARTHEST_S and coefficients.size):
            raise ValueError(f"{count} records of {span_s} s from {first_s} s on")
    except Exception as error:  # whatever a broken file makes the reader do
        raise FileError(path, None, f"segment {name} is broken: {error}") from None
    return Records(J2000 + first_s / DAY, span_s / DAY, coefficients, scale, name)


def _minus(a: Records, b: Records, path: str) -> Records:
    if (a.start_jd, a.span_days) != (b.start_jd, b.span_days):
        raise FileError(path, None, "Earth and Moon are on different records")
    terms = max(a.coefficients.shape[2], b.coefficients.shape[2])
    both = (
        np.pad(r.coefficients, [(0, 0), (0, 0), (0, terms - r.coefficients.shape[2])])
        for r in (a, b)
    )
    moon, earth = both
    return Records(a.start_jd, a.span_days, moon - earth, a.scale, f"{path} Earth to Moon")


def _orientation(path: str) -> Records:
    from jplephem.pck import PCK

    kernel = _opened(PCK, path)
    with closing(kernel.daf.file):
        if not kernel.segments:
            raise FileError(path, None, "no orientation segment in it")
        return _reduced(_records(kernel.segments[0], 1.0, f"{path} lunar orientation", path))


def _reduced(angles: Records) -> Records:
    """Take whole turns out of the constant terms, before they cost digits.

    psi grows to thousands of radians, whose grid is 5e-13 rad, or a micrometre on the Moon.
    The turns are subtracted in two parts, with the product of the first part exact.
    """
    coefficients = np.array(angles.coefficients)
    first = coefficients[:, :, 0]
    turns = np.round(first / TWO_PI[0])
    high = TWO_PI[0] * turns
    split = 134217729.0 * TWO_PI[0]  # Veltkamp: 26 + 27 digits; `turns` has few, so is exact
    upper = split - (split - TWO_PI[0])
    error = (upper * turns - high) + (TWO_PI[0] - upper) * turns
    coefficients[:, :, 0] = ((first - high) - error) - TWO_PI[1] * turns
    coefficients.flags.writeable = False
    return Records(angles.start_jd, angles.span_days, coefficients, angles.scale, angles.name)
