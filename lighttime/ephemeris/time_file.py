"""A `TimeEphemeris` on disk: numpy's .npz, arrays only."""

from __future__ import annotations

import zipfile
from os import PathLike, fspath
from typing import Any

import numpy as np

from lighttime.ephemeris.bodies import Ephemeris
from lighttime.ephemeris.chebyshev import Records
from lighttime.ephemeris.panels import Panels, states
from lighttime.ephemeris.time_integral import TimeEphemeris
from lighttime.ephemeris.time_rate import slowing, tdb_minus_tt_rate
from lighttime.errors import FileError
from lighttime.textfile import opened

FORMAT = "lighttime time ephemeris 1"

LARGEST = 64 * 2**20
"""Bytes, unpacked: 300 years are some 6 MB."""

SAME_RATE = 1e-16
"""Rates of one ephemeris agree to that (its asteroids are 4e-18); those of another do not."""


def save(time: TimeEphemeris, path: str | PathLike[str]) -> None:
    """Write both functions, where they begin, and what they are from."""
    with open(path, "wb") as file:  # a name without .npz stays as it is
        np.savez(
            file,
            format=FORMAT,
            ephemeris=time.ephemeris.name,
            origin=time.origin,
            error_s=time.error_s,
            start_jd=time.earth.start_jd,
            span_days=time.earth.span_days,
            earth=time.earth.coefficients,
            moon=time.moon.coefficients,
        )


def read(path: str | PathLike[str], ephemeris: Ephemeris) -> TimeEphemeris:
    """See `TimeEphemeris.read`."""
    try:
        held = _arrays(path)
        if str(held["format"]) != FORMAT:
            raise ValueError(f"format {held['format']}")
        start, days, error = (float(held[k]) for k in ("start_jd", "span_days", "error_s"))
        series = [_series(held[name]) for name in ("earth", "moon")]
        name, origin = str(held["ephemeris"]), str(held["origin"])
        if not (np.isfinite(start) and days > 0.0 and len(series[0]) == len(series[1])):
            raise ValueError("spans that are none")
    except FileError:
        raise
    except Exception as error_:  # whatever a broken file makes its readers do
        raise FileError(fspath(path), None, f"not a time ephemeris: {error_}") from None
    earth, moon = (
        Records(start, days, coefficients, name=what)
        for coefficients, what in zip(series, ("TDB-TT", "TCB-TCL"), strict=True)
    )
    time = TimeEphemeris(ephemeris, earth, moon, error, origin)
    begin, end = ephemeris.coverage
    if name != ephemeris.name or earth.start_jd < begin or earth.end_jd > end or _differs(time):
        raise FileError(fspath(path), None, f"integrated from {name}, not from {ephemeris!r}")
    return time


def _arrays(path: str | PathLike[str]) -> dict[str, Any]:
    with opened(path) as raw:
        with zipfile.ZipFile(raw) as packed:
            size = sum(entry.file_size for entry in packed.infolist())
        if size > LARGEST:
            raise ValueError(f"{size} bytes unpacked; allowed: {LARGEST}")
        raw.seek(0)
        with np.load(raw, allow_pickle=False) as file:
            return {name: file[name] for name in file.files}


def _series(coefficients: Any) -> Any:
    if coefficients.ndim != 3 or coefficients.shape[1] != 1 or coefficients.dtype != np.float64:
        raise ValueError(f"coefficients of shape {coefficients.shape}")
    if not coefficients.size or not np.all(np.isfinite(coefficients)):
        raise ValueError("coefficients that are no numbers")
    coefficients.flags.writeable = False
    return coefficients


def _differs(time: TimeEphemeris) -> bool:
    """Whether rates at both ends are not those of the orbits."""
    earth, ephemeris = time.earth, time.ephemeris
    gm = {n: ephemeris.gm(n) for n in (*ephemeris.barycentric, "earth", "moon") if n != _BOTH}
    for jd in (earth.start_jd, earth.end_jd - earth.span_days):
        bodies = states(ephemeris, Panels(jd, earth.span_days, 1), np.zeros(1))
        expected = tdb_minus_tt_rate(slowing("earth", bodies, gm))
        stored = earth.rate(earth.locate(jd, 0.5 * earth.span_days))
        if abs(float(stored[0]) - float(expected[0, 0])) > SAME_RATE:
            return True
    return False


_BOTH = "earth_moon_barycentre"
