"""Writes the reference set anew.

The inputs, `cases.ecsv` and `earth_orientation.ecsv`, are data: without an option they are read,
the twin answers every case at 40 digits, and `rungs.ecsv` is written, 25 digits of every number.
The tables of columns in README.md are brought up to date.

    python validation/reference/regenerate.py            rungs.ecsv from the inputs
    python validation/reference/regenerate.py --check 20 compares 20 cases, writes nothing
    python validation/reference/regenerate.py --new      draws new inputs first
"""

from __future__ import annotations

import argparse
import io
import sys
from collections.abc import Iterable, Sequence
from multiprocessing import Pool
from pathlib import Path
from typing import Any

import mpmath
import numpy as np
from columns import INPUTS, NODES, RUNGS, Column
from reading import HERE, Asked, cases, earth_orientation, read

import lighttime as lt

COUNT, DRAWN, SEED = 200, 1600, 20080330
DIGITS, SHOWN = 40, 25
AGREE_S = 1e-17
"""In rungs, relative to a second, a metre or a radian: sums of series in float64 differ by less
between computers."""
ARRAYS = ("Apollo 11", "Apollo 14", "Apollo 15", "Lunokhod 1", "Lunokhod 2")
WAVELENGTHS = (532.0, 1064.0, 532.0, 355.0, 532.0, 1064.0, 532.0, 694.3)
AIRLESS = ("Ridge", "Temple")
SUFFIX = {"s": "_s", "rad": "_rad", "m": "_m", "m/s": "_m_per_s", "deg": "_deg"}


# -- tables ----------------------------------------------------------------------------------------


def write(name: str, columns: Sequence[Column], rows: Iterable[Sequence[Any]], told: str) -> None:
    """A table in the Enhanced Character Separated Values format of astropy, version 1.0."""
    out = io.StringIO()
    print("# %ECSV 1.0\n# ---\n# delimiter: ' '\n# datatype:", file=out)
    for column in columns:
        unit = f", unit: {column.unit}" if column.unit else ""
        text = column.description.replace("'", "''")
        line = f"name: {column.name}{unit}, datatype: {column.datatype}, description: '{text}'"
        print(f"# - {{{line}}}", file=out)
    print(f"# meta: {{description: '{told}'}}\n# schema: astropy-2.0", file=out)
    for row in ([column.name for column in columns], *rows):
        print(" ".join(_quoted(str(cell)) for cell in row), file=out)
    (HERE / name).write_text(out.getvalue(), encoding="utf-8")


def _quoted(cell: str) -> str:
    return f'"{cell}"' if not cell or " " in cell else cell


def document() -> None:
    """The columns in README.md, from `columns`."""
    path = HERE / "README.md"
    head = path.read_text(encoding="utf-8").split("<!-- columns -->")[0]
    parts = [head + "<!-- columns -->"]
    tables = (("cases", INPUTS), ("earth_orientation", NODES), ("rungs", RUNGS))
    for name, columns in tables:
        parts.append(f"\n### {name}.ecsv\n\n| column | unit | what it is |\n| --- | --- | --- |")
        parts += [f"| `{c.name}` | {c.unit} | {c.description} |" for c in columns]
    path.write_text("\n".join(parts) + "\n", encoding="utf-8")


# -- inputs ----------------------------------------------------------------------------------------


def draw_inputs() -> None:
    """New cases, and the daily values of Earth orientation around them."""
    sys.path.insert(0, str(Path(__file__).parents[1]))
    from cases import SHARES, STATIONS, draw

    # Each station has one array, one wavelength, and weather or none, so that many cases can be
    # asked in one call.
    place = {station.name: k for k, station in enumerate(STATIONS)}
    wanted = {kind: round(share * COUNT) for kind, share in SHARES.items()}
    rng = np.random.default_rng(SEED)
    rows: list[list[Any]] = []
    days: set[int] = set()
    for case in draw(DRAWN, SEED):
        k = place[case.station.name]
        if case.array != lt.reflector(ARRAYS[k % len(ARRAYS)]) or wanted[case.kind] == 0:
            continue
        wanted[case.kind] -= 1
        weather = None if case.station.name in AIRLESS else case.weather or _weather(rng)
        air: list[Any] = [""] * 4
        if weather is not None:
            air = [weather.pressure_hpa, weather.temperature_k, weather.relative_humidity]
            air.append(float(weather.vapour_pressure_hpa))
        when, station = case.when, case.station
        row = [len(rows) + 1, case.kind, case.tag, when.scale, when.jd1, when.jd2]
        row += [when.isoformat(18), station.name, *station.xyz_m, *station.velocity_m_per_yr]
        row += [station.epoch, case.array.name, *case.array.xyz_m, WAVELENGTHS[k], *air]
        rows.append(row)
        day = int(np.floor(when.jd1 - 2400000.5))
        days.update(range(day - 3, day + 5))
    write("cases.ecsv", INPUTS, rows, "Round trips that are asked")
    write("earth_orientation.ecsv", NODES, _daily(sorted(days)), _ORIENTATION)


_ORIENTATION = (
    "Daily values for interpolation: IERS 20 C04 and finals2000A of astropy-iers-data as it was "
    "when the cases were drawn; invented after its end"
)


def _weather(rng: np.random.Generator) -> lt.Weather:
    pressure, temperature, humidity = rng.uniform((650.0, 255.0, 0.05), (1020.0, 305.0, 0.95))
    return lt.Weather(round(pressure, 2), round(temperature, 2), round(humidity, 2))


def _daily(days: list[int]) -> Iterable[list[Any]]:
    series = lt.EarthOrientation.bundled()
    values = (series.ut1_tai_s, series.xp_arcsec, series.yp_arcsec, series.dx_mas, series.dy_mas)
    end = int(series.mjd[-1])
    for mjd in days:
        if mjd <= end:
            yield [mjd, *(float(value[mjd - int(series.mjd[0])]) for value in values)]
        else:
            yield [mjd, *(round(value, 7) for value in _invented(mjd - end))]


def _invented(days: int) -> tuple[float, ...]:
    """UT1 - TAI, pole, dX, dY some days after the end of the series."""
    annual, wobble = 2.0 * np.pi * days / 365.25, 2.0 * np.pi * days / 433.0
    return (
        -36.9 - 4e-4 * days + 0.02 * np.sin(annual),
        0.15 + 0.1 * np.cos(wobble) + 0.05 * np.cos(annual),
        0.40 + 0.1 * np.sin(wobble) + 0.05 * np.sin(annual),
        0.3 * np.cos(wobble),
        0.3 * np.sin(annual),
    )


# -- rungs -----------------------------------------------------------------------------------------


def answer(asked: Asked) -> list[str]:
    """One row of rungs.ecsv."""
    twin = lt.exact.round_trip(
        asked.when,
        asked.station,
        asked.array,
        asked.tag,
        asked.weather,
        asked.wavelength_nm,
        earth_orientation=earth_orientation(),
        digits=DIGITS,
    )
    rungs = twin.worksheet()
    with mpmath.workdps(DIGITS + 15):
        return [str(asked.number), *(_cell(rungs, column) for column in RUNGS[1:])]


def _cell(rungs: Any, column: Column) -> str:
    """A number to 25 digits; nothing for a displacement that is not modelled."""
    for part in ("day", "s"):
        instant = column.name.removesuffix(f"_{part}") + "_jd"
        if instant != f"{column.name}_jd" and instant in rungs:
            day = mpmath.floor(rungs[instant] - 0.5) + mpmath.mpf(0.5)
            number = day if part == "day" else (rungs[instant] - day) * 86400
            return str(mpmath.nstr(number, SHOWN))
    number = rungs.get(column.name + SUFFIX[column.unit])
    return "" if number is None else str(mpmath.nstr(number, SHOWN))


def same(before: Sequence[str], now: Sequence[str]) -> bool:
    """Whether two rows agree as well as they can."""
    return all(
        a == b
        or (
            a != ""
            and b != ""
            and abs(mpmath.mpf(a) - mpmath.mpf(b)) < AGREE_S * (1 + abs(mpmath.mpf(a)))
        )
        for a, b in zip(before, now, strict=True)
    )


def main() -> int:
    """Write the tables, or compare; 0 when that went well."""
    asked = argparse.ArgumentParser(description="Writes the reference set anew.")
    asked.add_argument("--new", action="store_true", help="draw new inputs first")
    asked.add_argument("--check", type=int, metavar="N", help="compare N cases, write nothing")
    given = asked.parse_args()
    if given.new:
        draw_inputs()
    every = cases()
    if given.check:
        known = {row["case"]: list(row.values()) for row in read("rungs.ecsv")}
        some = every[:: max(1, len(every) // given.check)]
        with mpmath.workdps(DIGITS):
            wrong = [one.number for one in some if not same(known[str(one.number)], answer(one))]
        print(f"{len(some)} cases compared, {len(wrong)} differ: {wrong}")
        return int(bool(wrong))
    with Pool(2) as pool:
        rows = pool.map(answer, every, chunksize=10)
    write("rungs.ecsv", RUNGS, rows, "Every rung of the round trips of cases.ecsv, 25 digits")
    document()
    _read_back(rows)
    return 0


def _read_back(rows: list[list[str]]) -> None:
    """The tables as astropy reads them."""
    from astropy.table import Table
    from astropy.units import Unit

    for name, columns in (("cases", INPUTS), ("earth_orientation", NODES), ("rungs", RUNGS)):
        table = Table.read(HERE / f"{name}.ecsv", format="ascii.ecsv")
        assert table.colnames == [column.name for column in columns]
        assert all(table[c.name].unit == (Unit(c.unit) if c.unit else None) for c in columns)
        print(f"{name}.ecsv: {len(table)} rows, {len(columns)} columns")
    assert [str(cell) for cell in table["answer"]] == [row[-1] for row in rows]


if __name__ == "__main__":
    sys.exit(main())
