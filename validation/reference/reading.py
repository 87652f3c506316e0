"""Reads the reference tables: as text, and as round trips that can be asked."""

from __future__ import annotations

import csv
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np

import lighttime as lt

HERE = Path(__file__).parent
Rows = list[dict[str, str]]


def read(name: str) -> Rows:
    """The rows of an ECSV table of this folder, every cell as it is written."""
    with (HERE / name).open(encoding="utf-8", newline="") as file:
        lines = (line for line in file if not line.startswith("#"))
        return list(csv.DictReader(lines, delimiter=" "))


@dataclass(frozen=True)
class Asked:
    """One case: the number, the tagged instant, and what else a range depends on."""

    number: int
    kind: str
    when: lt.Epoch
    tag: str
    station: lt.Station
    array: lt.Reflector
    wavelength_nm: float
    weather: lt.Weather | None


def cases() -> list[Asked]:
    """All of cases.ecsv."""
    loaded = {"Harbour": lt.Station.from_file(HERE / "harbour.toml")}
    return [_asked(row, loaded) for row in read("cases.ecsv")]


def _asked(row: Mapping[str, str], loaded: Mapping[str, lt.Station]) -> Asked:
    def three(*names: str) -> tuple[float, float, float]:
        x, y, z = (float(row[name]) for name in names)
        return x, y, z

    station = loaded.get(row["station"]) or lt.Station(
        row["station"],
        three("station_x", "station_y", "station_z"),
        three("station_vx", "station_vy", "station_vz"),
        float(row["station_epoch"]),
    )
    weather = None
    if row["pressure"]:
        weather = lt.Weather(*three("pressure", "temperature", "humidity"))
    return Asked(
        number=int(row["case"]),
        kind=row["kind"],
        when=lt.Epoch(float(row["epoch_jd1"]), float(row["epoch_jd2"]), row["epoch_scale"]),
        tag=row["tag"],
        station=station,
        array=lt.Reflector(row["array"], three("array_x", "array_y", "array_z")),
        wavelength_nm=float(row["wavelength"]),
        weather=weather,
    )


@cache
def earth_orientation() -> lt.EarthOrientation:
    """The daily values of earth_orientation.ecsv as one series; zeros where none are needed."""
    rows = read("earth_orientation.ecsv")
    days = np.array([int(row["mjd"]) for row in rows])
    mjd = np.arange(days[0], days[-1] + 1, dtype=float)

    def column(name: str) -> Any:
        values = np.zeros(mjd.size)
        values[days - days[0]] = [float(row[name]) for row in rows]
        return values

    zeros = {f"sigma_{name}": np.zeros(mjd.size) for name in _SIGMAS}
    return lt.EarthOrientation(
        name="reference",
        mjd=mjd,
        ut1_tai_s=column("ut1_minus_tai"),
        xp_arcsec=column("xp"),
        yp_arcsec=column("yp"),
        dx_mas=column("dx"),
        dy_mas=column("dy"),
        kind=np.zeros(mjd.size, dtype=np.int8),
        last_dxdy_mjd=mjd[-1],
        **zeros,
    )


_SIGMAS = ("ut1_s", "xp_arcsec", "yp_arcsec", "dx_mas", "dy_mas")
