"""Other models that are really computed, with wrong choices really made, and what is found.

Run as

    python validation/crosscheck_recomputed.py [CASES]

The trials of `crosscheck_trials.py` add signatures. Here the other model is a `Model` that lacks
terms, asked at other instants, with other coordinates, weather, Earth orientation, laser; noise is
1 ps. Then the plain float64 assembly of `plain_assembly.py` is the other model: its rounding is to
be diagnosed as such, of its true size, and nothing else. Last, the time and memory of long tables.
Ends with a non-zero status on a miss.
"""

from __future__ import annotations

import resource
import sys
import time
from collections.abc import Callable
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
from plain_assembly import PlainModel

import lighttime as lt

NOISE_S = 1e-12
STATION = lt.Station.from_geodetic(
    "Hilltop", 46.2, 7.1, 2310.0, velocity_m_per_yr=(-0.0141, 0.0188, 0.0103)
)
ARRAYS = ("Apollo 15", "Lunokhod 2")
COUNT = 200
RIGHT = 0.95


@dataclass(frozen=True)
class Other:
    """How the other program computes."""

    omit: tuple[str, ...] = ()
    model: dict[str, Any] = field(default_factory=dict)
    shift_s: float = 0.0
    tag: str = "transmit"
    station: lt.Station = STATION
    moved_m: dict[str, tuple[float, float, float]] = field(default_factory=dict)
    weather: Callable[[lt.Weather], lt.Weather] = lambda weather: weather
    wavelength_nm: float = 532.0


def left_out(term: str) -> tuple[str, Callable[[Other], Other]]:
    return term, lambda other: replace(other, omit=(*other.omit, term))


def shifted(seconds: float) -> Callable[[Other], Other]:
    return lambda other: replace(other, shift_s=other.shift_s + seconds)


def station_moved(enu_m: tuple[float, float, float]) -> Callable[[Other], Other]:
    from lighttime.earth.local import enu_to_itrf

    def move(other: Other) -> Other:
        xyz = np.add(other.station.xyz_m, enu_to_itrf(np.array(enu_m), other.station.xyz_m))
        return replace(other, station=replace(other.station, xyz_m=tuple(xyz.tolist())))

    return move


def array_moved(name: str, xyz_m: tuple[float, float, float]) -> Callable[[Other], Other]:
    return lambda other: replace(other, moved_m={**other.moved_m, name: xyz_m})


def dry(weather: lt.Weather) -> lt.Weather:
    return lt.Weather(weather.pressure_hpa, weather.temperature_k, 0.0)


def standard(weather: lt.Weather) -> lt.Weather:
    kelvin = 288.15 - 0.0065 * STATION.height_m
    return lt.Weather(1013.25 * (kelvin / 288.15) ** 5.25588, kelvin, 0.5)


MISTAKES: tuple[tuple[str, Callable[[Other], Other]], ...] = (
    *map(
        left_out,
        (
            "sun_gravity", "earth_gravity", "moon_gravity", "planet_gravity", "solid_earth_tide",
            "pole_tide", "subdaily_rotation", "lunar_tide", "station_contraction",
            "reflector_contraction", "clock",
        ),
    ),
    ("epoch_as_tai", shifted(-37.0)),
    ("epoch_as_gps", shifted(-18.0)),
    ("epoch_as_tt", shifted(-69.184)),
    ("epoch_second_early", shifted(-1.0)),
    ("epoch_offset", shifted(23e-6)),
    ("epoch_at_bounce", lambda o: replace(o, tag="bounce")),
    ("epoch_at_receive", lambda o: replace(o, tag="receive")),
    ("hilltop_east", station_moved((0.034, 0.0, 0.0))),
    ("hilltop_up", station_moved((0.0, 0.0, -0.021))),
    ("lunokhod_2_y", array_moved("Lunokhod 2", (0.0, 0.4, 0.0))),
    ("apollo_15_x", array_moved("Apollo 15", (-0.3, 0.0, 0.0))),
    ("station_velocity", lambda o: replace(
        o, station=replace(o.station, velocity_m_per_yr=(0.0, 0.0, 0.0)))),
    ("moon_h2", lambda o: replace(o, model={**o.model, "moon_h2": 0.0423})),
    ("gamma", lambda o: replace(o, model={**o.model, "gamma": 1.0 + 4e-4})),
    ("humidity", lambda o: replace(o, weather=dry)),
    ("weather_standard", lambda o: replace(o, weather=standard)),
    ("wavelength_doubled", lambda o: replace(o, wavelength_nm=1064.0)),
    ("lunar_permanent_tide", lambda o: replace(o, moved_m={**o.moved_m, "": (0.0, 0.0, 0.0)})),
)  # fmt: skip


def circumstances(seed: int) -> list[tuple[lt.Epoch, str, lt.Weather]]:
    """Epochs of a year to each array, and the weather."""
    rng = np.random.default_rng(seed)
    found = []
    for name in ARRAYS:
        days, part = rng.integers(0, 365, 8 * COUNT), rng.uniform(0.0, 1.0, 8 * COUNT)
        when = lt.Epoch(2459800.5 + days, part, "utc")
        high = lt.Model().round_trip(when, STATION, lt.reflector(name)).uplink.elevation_deg > 20.0
        n = COUNT // 2
        weather = lt.Weather(
            rng.normal(770.0, 5.0, n), rng.normal(272.0, 7.0, n), rng.uniform(0.1, 0.9, n)
        )
        found.append((when[np.flatnonzero(high)[:n]], name, weather))
    return found


def asked(other: Other, when: lt.Epoch, name: str, weather: lt.Weather) -> Any:
    array = lt.reflector(name)
    if "" in other.moved_m:
        array = replace(array, contains_permanent_tide=True)
    if name in other.moved_m:
        xyz = np.add(array.xyz_m, other.moved_m[name])
        array = replace(array, xyz_m=tuple(xyz.tolist()))
    model = lt.Model(omit=other.omit, **other.model)
    return model.round_trip(
        when.shift(other.shift_s), other.station, array, tag=other.tag,
        weather=other.weather(weather), wavelength_nm=other.wavelength_nm,
    ).seconds  # fmt: skip


def table(other: Other, rng: Any, rows: list[tuple[lt.Epoch, str, lt.Weather]]) -> dict[str, Any]:
    parts: dict[str, list[Any]] = {}
    for when, name, weather in rows:
        seconds = asked(other, when, name, weather) + rng.normal(0.0, NOISE_S, len(when))
        for key, values in (
            ("mjd_utc", when.jd1 - 2400000.5 + when.jd2),
            ("round_trip_s", seconds),
            ("array", np.full(len(when), name)),
            ("pressure_hpa", weather.pressure_hpa),
            ("temperature_k", weather.temperature_k),
            ("relative_humidity", weather.relative_humidity),
        ):
            parts.setdefault(key, []).append(values)
    return {key: np.concatenate(values) for key, values in parts.items()}


def explained(report: Any, true: set[str]) -> bool:
    """Whether the truth was found, or declared inseparable from what was found."""
    found = {f.name for f in report.findings}
    groups = [set(g.names) for g in report.inseparable]
    extra, missing = found - true, true - found
    covered = all(any(name in g for g in groups) for name in missing)
    excused = all(any(name in g for g in groups) for name in extra)
    return covered and excused and len(found) <= len(true) + len(extra) and bool(found)


def recomputed(cases: int) -> bool:
    """Every mistake alone, then pairs and triples."""
    rng = np.random.default_rng(2)
    rows = circumstances(1)
    drawn: list[list[int]] = [[k] for k in range(len(MISTAKES))]
    while len(drawn) < cases:
        some = sorted(rng.choice(len(MISTAKES), int(rng.integers(2, 4)), replace=False).tolist())
        names = {MISTAKES[k][0].split("_")[0] for k in some}
        if len(names) == len(some) or "epoch" not in names:  # one reading of the epochs at a time
            drawn.append(some)
    good = {1: [0, 0], 2: [0, 0], 3: [0, 0]}
    for some in drawn[:cases]:
        other, true = Other(), set()
        for k in some:
            name, make = MISTAKES[k]
            other, true = make(other), true | {name}
        report = lt.crosscheck(table(other, rng, rows), STATION, None)
        right = explained(report, true)
        good[len(some)][0] += right
        good[len(some)][1] += 1
        if not right:
            told = [(f.name, f.exact or round(f.fitted, 4)) for f in report.findings]
            print(f"  made {sorted(true)}\n  found {told}, remains {report.rest.rms_ps:.2f} ps")
    for number, (right, count) in good.items():
        if count:
            print(f"{number} really made: right {right} of {count}")
    total = sum(r for r, _ in good.values())
    return total >= RIGHT * cases


def plain() -> bool:
    """The plain assembly as the other model."""
    rng = np.random.default_rng(4)
    array = lt.reflector("Apollo 15")
    weather = lt.Weather(770.0, 270.0, 0.4)
    jd1, jd2 = 2459000.5 + rng.integers(0, 365, 2000), rng.uniform(0.0, 1.0, 2000)
    high = lt.Model().round_trip(lt.Epoch(jd1, jd2, "utc"), STATION, array).uplink.elevation_deg
    kept = np.flatnonzero(high > 20.0)[:500]
    jd1, jd2 = jd1[kept].astype(float), jd2[kept]
    theirs = PlainModel().round_trip(jd1, jd2, STATION, array, weather)
    report = lt.crosscheck(
        {"epoch": lt.Epoch(jd1, jd2, "utc"), "round_trip_s": theirs}, STATION, array,
        weather=weather,
    )  # fmt: skip
    ours = lt.Model().round_trip(lt.Epoch(jd1, jd2, "utc"), STATION, array, weather=weather)
    true = 1e12 * float(np.sqrt(np.mean((theirs - ours.seconds) ** 2)))
    causes = "; ".join(r.what for r in report.rounding)
    print(f"plain assembly: {report.rest.rms_ps:.1f} ps rms (directly {true:.1f}), "
          f"findings {[f.name for f in report.findings]}, said to be {causes}")  # fmt: skip
    return not report.findings and "records of the ephemeris" in causes


def long_tables() -> bool:
    """Time and memory of 1 000 and 100 000 rows."""
    good = True
    array = lt.reflector("Apollo 15")
    for count, limit_s in ((1_000, 5.0), (100_000, 90.0)):
        rng = np.random.default_rng(4)
        mjd = np.sort(rng.uniform(59000.0, 59365.0, 4 * count))
        when = lt.Epoch(2400000.5 + np.floor(mjd), np.mod(mjd, 1.0), "utc")
        high = lt.Model().round_trip(when, STATION, array).uplink.elevation_deg > 20.0
        kept = np.flatnonzero(high)[:count]
        air = rng.normal(770.0, 5.0, count), rng.normal(270.0, 7.0, count), np.full(count, 0.4)
        model = lt.Model(omit=("pole_tide",))
        theirs = model.round_trip(when[kept], STATION, array, weather=lt.Weather(*air)).seconds
        given = {"mjd_utc": mjd[kept], "round_trip_s": theirs + rng.normal(0.0, 1e-12, count)}
        given |= dict(zip(("pressure_hpa", "temperature_k", "relative_humidity"), air, strict=True))
        start, cpu = time.perf_counter(), time.process_time()
        report = lt.crosscheck(given, STATION, array)
        took, cpu = time.perf_counter() - start, time.process_time() - cpu
        memory = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024.0
        found = [(f.name, f.exact) for f in report.findings]
        print(f"{count} rows: {took:.1f} s ({cpu:.1f} s of CPU), at most {memory:.0f} MB, {found}")
        # judged by the time of the processor, so that other work on the machine does not count
        good &= cpu < limit_s and memory < 1500.0 and found == [("pole_tide", 1.0)]
    return good


def main() -> int:
    cases = int(sys.argv[1]) if len(sys.argv) > 1 else 60
    results = [recomputed(cases), plain(), long_tables()]
    return 0 if all(results) else 1


if __name__ == "__main__":
    sys.exit(main())
