"""Two published measured ranges against the model, and what each large effect is worth there.

Prints observed minus computed of each, its terms, and how far it moves when an effect is taken
away: the Sun's gravity, the troposphere, the lunar tide, polar motion, and TDB (TT in its place).
Exits non-zero if an observed minus computed is above 1.0 m one-way, or an effect that should
show does not.

Sources: measured ranges: T. W. Murphy, UC San Diego, example of a normal-point record and the
archive of the same project; station coordinates from memory; weather of the second range assumed.
"""

from __future__ import annotations

import sys
from dataclasses import replace
from typing import Any

import numpy as np

import lighttime as lt

MM = 299792458.0 / 2.0 * 1e3

STATION = lt.Station(
    "station of the published ranges",
    xyz_m=(-1463998.9085, -5166632.7635, 3435012.8835),
    velocity_m_per_yr=(-0.0141, 0.0008, -0.0015),
    epoch=2000.0,
)
RANGES = (
    ("2008-03-30T12:39:50.000", 2.6170710379889, lt.Weather(724.39, 268.05, 0.34)),
    ("2006-04-07T06:26:30.000", 2.6494326499837, lt.Weather(725.0, 278.15, 0.30)),
)
BAR_MM = 1000.0
LEAST_MM = {
    "without the Sun's gravity": 7000.0,
    "without the troposphere": 2000.0,
    "without the lunar tide": 300.0,
    "without polar motion": 100.0,
    "TT in place of TDB": 10.0,
}


def still_pole(series: lt.EarthOrientation) -> lt.EarthOrientation:
    """The same series with the pole at the origin of the ITRF."""
    zero = np.zeros_like(series.xp_arcsec)
    return replace(series, xp_arcsec=zero, yp_arcsec=zero, name="pole at zero")


def read_with_tt(model: lt.Model, when: str) -> lt.Ephemeris:
    """The ephemeris as someone sees it who reads it with TT: its dates are late by TDB - TT.

    (A date in one float64 is a grid of 40 microseconds: the effect is right to 3 %.)
    """
    tt = lt.Epoch.parse(when).to("tt")
    tdb = tt.to("tdb", place=STATION)
    late = (tdb.jd1 - tt.jd1) + (tdb.jd2 - tt.jd2)

    def shifted(records: Any) -> Any:
        return replace(records, start_jd=records.start_jd + late)

    ephemeris = model.ephemeris
    return replace(
        ephemeris,
        barycentric={k: shifted(r) for k, r in ephemeris.barycentric.items()},
        moon_from_earth=shifted(ephemeris.moon_from_earth),
        angles=shifted(ephemeris.angles),
    )


def residual_mm(model: lt.Model, when: str, measured: float, weather: lt.Weather) -> float:
    """Observed minus computed, mm one-way."""
    answer = model.round_trip(when, STATION, lt.reflector("Apollo 15"), weather=weather)
    return (measured - answer.seconds) * MM


def main() -> int:
    model = lt.Model()
    array = lt.reflector("Apollo 15")
    missed = False
    for when, measured, weather in RANGES:
        answer = model.round_trip(when, STATION, array, weather=weather)
        residual = (measured - answer.seconds) * MM
        print(answer)
        print(
            f"\n  measured {measured:.13f} s: observed minus computed {residual:+.1f} mm one-way\n"
        )
        missed |= abs(residual) > BAR_MM

        pole_at_zero = still_pole(model.earth_orientation)
        others = {
            "without the Sun's gravity": lt.Model(omit="sun_gravity"),
            "without the troposphere": lt.Model(omit="troposphere"),
            "without the lunar tide": lt.Model(omit="lunar_tide"),
            "without polar motion": lt.Model(earth_orientation=pole_at_zero),
            "TT in place of TDB": lt.Model(ephemeris=read_with_tt(model, when)),
        }
        for name, other in others.items():
            value = residual_mm(other, when, measured, weather)
            moved = value - residual
            small = abs(moved) < LEAST_MM[name]
            missed |= small
            verdict = "  TOO LITTLE" if small else ""
            print(f"  {name:28}{value:+12.1f} mm, moved by {moved:+10.1f}{verdict}")
        print()
    print("missed" if missed else "all within 1.0 m, and every effect shows")
    return int(missed)


if __name__ == "__main__":
    sys.exit(main())
