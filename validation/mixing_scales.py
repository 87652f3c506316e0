"""What it costs to take one time scale for another: the table of docs/timescales.md.

    python validation/mixing_scales.py

A year of ranges from a station at 46 degrees to Apollo 15, above 10 degrees; the largest change
of the one-way range. Rows that are easily foreseen are held against their size by hand (2.69 s
times the rate; 322 m/s of the station and some of the Moon); exits non-zero when one is further
off than a tenth.
"""

from __future__ import annotations

import sys
from typing import Any

import numpy as np

import lighttime as lt
from lighttime.constants import (
    DAY,
    EARTH_ROTATION_RATE,
    L_B,
    L_C,
    L_G,
    SPEED_OF_LIGHT,
    TT_MINUS_TAI,
)
from lighttime.ephemeris.time_integral import TimeEphemeris

c = SPEED_OF_LIGHT
STATION = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
REFLECTOR = lt.reflector("Apollo 15")


class Ranges:
    """Ranges over a year, and what shifts of time do to them."""

    def __init__(self) -> None:
        jd = 2459215.5 + np.arange(0.0, 365.0, 0.0731)
        self.model = lt.Model()
        self.when = lt.Epoch(jd, 0.0, "utc")
        answer = self._answer(self.when)
        self.high = answer.uplink.elevation_deg > 10.0
        self.when = self.when[self.high]
        self.answer = self._answer(self.when)
        self.seconds = self.answer.seconds

    def _answer(self, when: lt.Epoch) -> Any:
        return self.model.round_trip(when, STATION, REFLECTOR)

    def one_way_mm(self, seconds: Any) -> float:
        """Two-way seconds as the greatest one-way millimetres."""
        return float(np.abs(seconds).max()) * c / 2.0 * 1e3

    def shifted(self, seconds: float) -> Any:
        """Change of the range, s, when the clock is wrong by so much."""
        return self._answer(self.when.shift(seconds)).seconds - self.seconds

    def moon_moves(self, seconds: Any) -> Any:
        """Change of the range, two-way s, when only Sun, Earth and Moon are read that late."""
        tdb = self.when.to("tdb")
        moon, velocity = self.model.ephemeris.moon_geocentric(tdb.jd1, tdb.jd2)
        ray = self._ray(moon)
        return 2.0 * np.sum(ray * velocity, axis=0) * seconds / c

    def earth_turns(self, seconds: Any) -> Any:
        """Change of the range, two-way s, when only the Earth's rotation is that far ahead."""
        tdb = self.when.to("tdb")
        moon, _ = self.model.ephemeris.moon_geocentric(tdb.jd1, tdb.jd2)
        x, y, _ = self._station()
        spin = EARTH_ROTATION_RATE * np.stack([-y, x, np.zeros_like(x)])
        return -2.0 * np.sum(self._ray(moon) * spin, axis=0) * seconds / c

    def _station(self) -> Any:
        """Place of the station along the axes of date, to a thousandth: rotation alone."""
        ut1 = self.when.to("ut1")
        from erfa import era00

        angle = era00(ut1.jd1, ut1.jd2) + STATION.longitude_rad
        x, y, z = STATION.xyz_m
        rho = np.hypot(x, y)
        return np.stack([rho * np.cos(angle), rho * np.sin(angle), np.full_like(angle, z)])

    def _ray(self, moon: Any) -> Any:
        away = moon - self._station()
        return away / np.linalg.norm(away, axis=0)


def rows() -> list[tuple[str, float, float | None]]:
    """What is mixed, one-way mm, and the same by hand where that is a line."""
    ranges = Ranges()
    relation = TimeEphemeris.integrate(first="2020-12-01", last="2022-02-01")
    tdb, site = ranges.when.to("tdb"), ranges.when.to("tdb", STATION)
    tdb_tt = ranges.when.to("tdb").seconds_since(lt.Epoch(*_tt(ranges.when), "tdb"))
    daily = ((site.jd1 - tdb.jd1) + (site.jd2 - tdb.jd2)) * DAY
    sun = relation.tdb_minus_tt(tdb.jd1, tdb.jd2) - tdb_tt
    ut1, utc = ranges.when.to("ut1"), ranges.when
    ut1_utc = ((ut1.jd1 - utc.jd1) + (ut1.jd2 - utc.jd2)) * DAY
    mm = ranges.one_way_mm
    clock = ranges.answer.terms["clock"]
    return [
        ("the answer counted in TDB, not in TT", mm(clock), None),
        ("the answer counted in TCG, not in TT", mm(L_G * ranges.seconds), 281.0),
        (
            "the answer counted in TCB, not in TDB",
            mm(L_B * ranges.seconds),
            6250.0,
        ),
        ("ephemeris read at TT, not at TDB", mm(ranges.moon_moves(tdb_tt)), None),
        ("TDB of the geocentre, not of the station", mm(ranges.moon_moves(daily)), None),
        ("ephemeris read at integrated TDB, not at the series'", mm(ranges.moon_moves(sun)), None),
        ("UTC for UT1", mm(ranges.earth_turns(ut1_utc)), None),
        ("a clock wrong by 1 microsecond", mm(ranges.shifted(1e-6)), 0.37),
        ("UTC wrong by a leap second", mm(ranges.shifted(1.0)), None),
        ("GPS time for UTC (18 s)", mm(ranges.shifted(18.0)), None),
        ("TAI for TT (32.184 s)", mm(ranges.shifted(TT_MINUS_TAI)), None),
        ("ephemeris read at TCB, not at TDB (21 s)", mm(ranges.moon_moves(_tcb_tdb(tdb))), None),
        ("station in TT metres taken as TDB metres", L_C * 6378.1e6, 94.4),
        ("reflector in the Moon's own metres taken as TDB metres", L_B * 1737.4e6, 26.9),
    ]


def _tt(when: lt.Epoch) -> tuple[Any, Any]:
    tt = when.to("tt")
    return tt.jd1, tt.jd2


def _tcb_tdb(tdb: lt.Epoch) -> Any:
    tcb = tdb.to("tcb")
    return ((tcb.jd1 - tdb.jd1) + (tcb.jd2 - tdb.jd2)) * DAY


def main() -> int:
    """The table, in Markdown."""
    missed = 0
    print("| taken for another | one-way range, mm |\n| --- | ---: |")
    for what, millimetres, by_hand in rows():
        print(f"| {what} | {millimetres:,.3g} |" if millimetres < 1e3 else
              f"| {what} | {millimetres:,.0f} |")  # fmt: skip
        missed += by_hand is not None and not abs(millimetres / by_hand - 1.0) < 0.1
    return min(missed, 1)


if __name__ == "__main__":
    sys.exit(main())
