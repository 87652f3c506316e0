"""A writer of SINEX files with invented sites, for tests.

The columns are those of the SINEX format, version 2.02 (from memory), written here by Fortran-like
formats and not by the code that reads them.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from lighttime.earth.local import geodetic

FIRST = ("94:002:00000", "01:050:00000")
SECOND = ("01:050:00300", "10:365:86370")
BOTH = (FIRST, SECOND)


@dataclass
class Site:
    """One site: a marker, and a solution for each interval."""

    code: str
    xyz_m: tuple[float, float, float]
    velocity_m_per_yr: tuple[float, float, float] | None = (-0.0141, 0.0188, 0.0103)
    intervals: tuple[tuple[str, str], ...] = BOTH
    point: str = "A"
    name: str = "Hilltop, invented"
    domes: str = "10002M001"
    reference: str = "10:001:00000"
    eccentricities: list[str] = field(default_factory=list)

    def position(self, solution: int) -> np.ndarray:
        """Of a solution, counted from 1: each moves the marker by a decimetre."""
        return np.add(self.xyz_m, 0.1 * (solution - 1))


HILL = Site("HILL", (4389978.0, 546801.0, 4582330.0))
MESA = Site(
    "MESA", (-1463998.0, -5166632.0, 3435013.0), None, ((FIRST[0], SECOND[1]),), name="Mesa"
)


def exponent(value: float, digits: int, width: int) -> str:
    """A number as Fortran writes it by Ew.d: a fraction from 0.1 on, and E+xx."""
    if value == 0.0:
        return f"{'.' + '0' * digits + 'E+00':>{width}}"
    power = int(np.floor(np.log10(abs(value)))) + 1
    mantissa = f"{abs(value) / 10.0**power:.{digits}f}".lstrip("0")
    if mantissa.startswith("1"):
        power, mantissa = power + 1, "." + "1".ljust(digits, "0")
    return f"{('-' if value < 0 else '') + mantissa + f'E{power:+03d}':>{width}}"


def une(solution: int, interval: tuple[str, str], up: float, north: float, east: float) -> str:
    """The rest of an eccentricity line after code and point."""
    vector = f"{up:8.4f} {north:8.4f} {east:8.4f}"
    return f"{solution:>4d} L {interval[0]} {interval[1]} UNE {vector}"


def sexagesimal(degrees: float) -> str:
    tenths = round(abs(degrees) * 36000.0)
    d, m, s = tenths // 36000, tenths // 600 % 60, tenths % 600 / 10.0
    sign = "-" if degrees < 0 else ""
    return f"{f'{sign}{d}':>3s} {m:2d} {s:4.1f}"


def blocks(sites: list[Site]) -> dict[str, list[str]]:
    """The data lines of every block."""
    made: dict[str, list[str]] = {
        "FILE/REFERENCE": [" DESCRIPTION        invented", " SOFTWARE           none"],
        "SITE/ID": [],
        "SITE/ECCENTRICITY": [],
        "SOLUTION/EPOCHS": [],
        "SOLUTION/ESTIMATE": [],
    }
    for site in sites:
        latitude, longitude, height = geodetic(site.xyz_m)
        place = f"{sexagesimal(np.degrees(longitude))} {sexagesimal(np.degrees(latitude))}"
        of = f" {site.code:4s} {site.point:>2s}"
        made["SITE/ID"].append(f"{of} {site.domes} L {site.name:22s} {place} {height:7.1f}")
        made["SITE/ECCENTRICITY"] += [f"{of} {line}" for line in site.eccentricities]
        for number, interval in enumerate(site.intervals, start=1):
            times = " ".join((*interval, interval[0]))
            made["SOLUTION/EPOCHS"].append(f"{of} {number:>4d} L {times}")
            rows = [("STA", "m", site.position(number), 0.0012)]
            if site.velocity_m_per_yr is not None:
                rows.append(("VEL", "m/y", np.array(site.velocity_m_per_yr), 0.00021))
            for kind, unit, values, sigma in rows:
                for k, value in enumerate(values):
                    index = len(made["SOLUTION/ESTIMATE"]) + 1
                    made["SOLUTION/ESTIMATE"].append(
                        f" {index:5d} {kind + 'XYZ'[k]:6s} {site.code:4s} {site.point:>2s} "
                        f"{number:>4d} {site.reference} {unit:4s} 2 "
                        f"{exponent(value, 15, 21)} {exponent(sigma * (k + 1), 5, 11)}"
                    )
    if not made["SITE/ECCENTRICITY"]:
        del made["SITE/ECCENTRICITY"]
    return made


def written(made: dict[str, list[str]], estimates: int | None = None) -> str:
    """The whole file."""
    count = len(made["SOLUTION/ESTIMATE"]) if estimates is None else estimates
    lines = [
        f"%=SNX 2.02 INV 20:001:00000 INV 94:002:00000 10:365:86370 C {count:05d} 2 S V",
        "*" + "-" * 79,
    ]
    for title, rows in made.items():
        lines += [f"+{title}", "* a remark", *rows, f"-{title}"]
    return "\n".join([*lines, "%ENDSNX", ""])
