"""Ranges as JSON, CSV and ECSV, chunk by chunk; and files that are never overwritten unasked."""

from __future__ import annotations

import csv
import json
import os
from collections.abc import Iterable, Iterator, Mapping
from contextlib import contextmanager, suppress
from pathlib import Path
from typing import Any, Final, TextIO

import numpy as np

from lighttime.answer import RoundTrip
from lighttime.errors import FileError, InputError
from lighttime.version import __version__

RANGE_KEYS: Final = """\
  lighttime            version of the library
  station              name, xyz_m (ITRF), latitude_deg, longitude_deg, height_m,
                       velocity_m_per_yr, epoch_yr, source
  array                name, xyz_m (principal axes), axes, scale, source
  model                ephemeris, earth_orientation, omit, gamma
  tag                  the instant that the epochs are: transmit, bounce or receive
  wavelength_nm        null without a troposphere
  not_modelled         terms that are absent, because nothing was given for them
  notes                data in use, how far they reach, what does not go together
  ranges               a list with, for each epoch in the order given:
    epoch_utc            (or _tai, ...) the epoch, to the picosecond
    light_time_s         from transmission to reception, by the clock of the station
    uplink_tdb_s, downlink_tdb_s
                         each leg, TDB seconds
    elevation_uplink_deg, elevation_downlink_deg
                         of the ray at the station, without refraction
    pressure_hpa, temperature_k, relative_humidity
                         if they were given
    terms_s              each term by its name, two-way; their sum is light_time_s
    sigma_s, budget_s    with --budget: one sigma of light_time_s, and what each part of the
                         error budget contributes; their squares add"""


# -- the content ---------------------------------------------------------------------------------


def columns(answer: RoundTrip) -> dict[str, list[Any]]:
    """The columns of a table of ranges but the terms, as lists of Python values."""
    query = answer.query
    table: dict[str, Any] = {
        f"epoch_{query.when.scale}": query.when.isoformat(12),
        "light_time_s": answer.seconds,
        "uplink_tdb_s": answer.uplink.seconds,
        "downlink_tdb_s": answer.downlink.seconds,
        "elevation_uplink_deg": answer.uplink.elevation_deg,
        "elevation_downlink_deg": answer.downlink.elevation_deg,
    }
    if query.weather is not None:
        for name in ("pressure_hpa", "temperature_k", "relative_humidity"):
            table[name] = np.broadcast_to(getattr(query.weather, name), query.shape)
    return {name: np.ravel(values).tolist() for name, values in table.items()}


def terms(answer: RoundTrip) -> dict[str, list[float]]:
    """The terms as lists, seconds."""
    return {name: np.ravel(values).tolist() for name, values in answer.terms.items()}


def budget(answer: RoundTrip) -> dict[str, list[float]]:
    """The parts of the error budget as lists, one sigma in seconds."""
    parts = answer.budget.parts.items()
    return {name: np.ravel(part.sigma_s).tolist() for name, part in parts}


def flat_columns(answer: RoundTrip, with_budget: bool = False) -> dict[str, list[Any]]:
    """All columns; terms and parts of the budget with a word before and the unit after."""
    flat = columns(answer) | {f"term_{name}_s": v for name, v in terms(answer).items()}
    if with_budget:
        flat["sigma_s"] = np.ravel(answer.sigma_s).tolist()
        flat |= {f"budget_{name}_s": v for name, v in budget(answer).items()}
    return flat


def circumstances(answer: RoundTrip) -> dict[str, Any]:
    """What is said once for all ranges of a run."""
    station, array, model = answer.query.station, answer.query.reflector, answer.model
    return {
        "lighttime": __version__,
        "station": station_json(station),
        "array": {
            "name": array.name,
            "xyz_m": list(array.xyz_m),
            "axes": array.axes,
            "scale": array.scale,
            "source": array.source,
        },
        "model": {
            "ephemeris": model.ephemeris.name,
            "earth_orientation": model.earth_orientation.name,
            "omit": sorted(model.omit),
            "gamma": model.gamma,
        },
        "tag": answer.query.tag,
        "wavelength_nm": answer.query.wavelength_nm if "troposphere" in answer.terms else None,
        "not_modelled": list(answer.not_modelled),
        "notes": list(answer.notes),
    }


def station_json(station: Any) -> dict[str, Any]:
    """A station for JSON."""
    return {
        "name": station.name,
        "xyz_m": list(station.xyz_m),
        "latitude_deg": station.latitude_deg,
        "longitude_deg": station.longitude_deg,
        "height_m": station.height_m,
        "velocity_m_per_yr": list(station.velocity_m_per_yr),
        "epoch_yr": station.epoch,
        "source": station.source,
    }


def print_json(value: Any, file: TextIO) -> None:
    """JSON for a program, in lines that a person can read."""
    file.write(json.dumps(value, indent=2, allow_nan=False) + "\n")


# -- formats -------------------------------------------------------------------------------------


def write_json(
    file: TextIO, outline: RoundTrip, answers: Iterable[RoundTrip], with_budget: bool = False
) -> None:
    """One JSON object with the keys of `RANGE_KEYS`, a line for each range."""
    head = json.dumps(circumstances(outline), indent=2, allow_nan=False)
    file.write(head.removesuffix("\n}") + ',\n  "ranges": [')
    before = "\n    "
    for answer in answers:
        rows = [
            row | {"terms_s": parts}
            for row, parts in zip(_rows(columns(answer)), _rows(terms(answer)), strict=True)
        ]
        if with_budget:
            sigmas = np.ravel(answer.sigma_s).tolist()
            for row, sigma, parts in zip(rows, sigmas, _rows(budget(answer)), strict=True):
                row |= {"sigma_s": sigma, "budget_s": parts}
        for row in rows:
            file.write(before + json.dumps(row, allow_nan=False))
            before = ",\n    "
    file.write("\n  ]\n}\n")


def write_csv(
    file: TextIO, outline: RoundTrip, answers: Iterable[RoundTrip], with_budget: bool = False
) -> None:
    """The names of the columns and a line for each range."""
    write = csv.writer(file, lineterminator="\n")
    write.writerow(flat_columns(outline, with_budget))
    for answer in answers:
        write.writerows(zip(*flat_columns(answer, with_budget).values(), strict=True))


def write_ecsv(
    file: TextIO, outline: RoundTrip, answers: Iterable[RoundTrip], with_budget: bool = False
) -> None:
    """ECSV 1.0: CSV with units and circumstances in a header, as astropy and others read it.

    Columns are named as in `RoundTrip.table`, without the units.
    """
    names = {name: _unit(name) for name in flat_columns(outline, with_budget)}
    meta = json.dumps(circumstances(outline), allow_nan=False)  # JSON is YAML
    file.write("# %ECSV 1.0\n# ---\n# delimiter: ','\n# datatype:\n")
    for name, unit in names.items():
        kind = "string" if name.startswith("epoch_") else "float64"
        said = f"unit: {unit}, " if unit else ""
        file.write(f"# - {{name: {_bare(name, unit)}, {said}datatype: {kind}}}\n")
    file.write(f"# meta: {meta}\n# schema: astropy-2.0\n")
    write = csv.writer(file, lineterminator="\n")
    write.writerow([_bare(name, unit) for name, unit in names.items()])
    for answer in answers:
        write.writerows(zip(*flat_columns(answer, with_budget).values(), strict=True))


FORMATS: Final = {".csv": write_csv, ".ecsv": write_ecsv, ".json": write_json}
_UNITS: Final = {"_s": "s", "_deg": "deg", "_hpa": "hPa", "_k": "K"}


def _unit(name: str) -> str:
    return next((unit for ending, unit in _UNITS.items() if name.endswith(ending)), "")


def _bare(name: str, unit: str) -> str:
    return name.removesuffix(f"_{unit.lower()}") if unit else name


def _rows(table: Mapping[str, list[Any]]) -> Iterator[dict[str, Any]]:
    return (dict(zip(table, row, strict=True)) for row in zip(*table.values(), strict=True))


# -- files ---------------------------------------------------------------------------------------


def check_output(path: Path, overwrite: bool, inputs: Iterable[Path]) -> None:
    """Refuse a file that cannot be meant, before any work is done."""
    if path.suffix.lower() not in FORMATS:
        raise InputError("--output", str(path), f"a name that ends in {', '.join(FORMATS)}")
    if path.exists():
        if not overwrite:
            raise FileError(path, None, "exists, and is left alone without --overwrite")
        if any(path.samefile(each) for each in inputs):
            raise InputError("--output", str(path), "another file than those that are read")


@contextmanager
def new_file(path: Path, overwrite: bool) -> Iterator[TextIO]:
    """A file to write, which is there in full or not at all.

    Nothing is written but the file itself, and it is removed if writing it fails. One that is
    to replace another is written beside it, with ``.part`` after its name, and takes its place
    at the end.
    """
    own = path.with_name(f"{path.name}.part") if overwrite and path.exists() else path
    try:
        file = own.open("x", encoding="utf-8", newline="")
    except FileExistsError:
        raise FileError(own, None, "exists, and is left alone") from None
    except OSError as error:
        raise FileError(own, None, f"cannot be written: {error.strerror}") from None
    try:
        with file:
            yield file
        if own != path:
            os.replace(own, path)
    except BaseException:
        with suppress(OSError):
            own.unlink()
        raise
