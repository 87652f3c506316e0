"""Every derivative of the fast model against central differences of the extended-precision twin.

Fifty random round trips: invented stations, all arrays and tags, every kind of loading at one of
the stations, weather always, 1970 to 2026. The twin is written apart from the fast code and has
no derivatives; what it offers no input for is moved by putting a changed table in its hands.

A derivative passes where it agrees to 1e-8 of itself, or, where it happens to be small (a ray
that is perpendicular to the displacement), to 1e-8 of the parameter's root mean square over the
cases: that is the floor, printed as such. `clock_rate` is the range, and `bias_s` one, by
definition.

Steps are chosen for what the twin sums in float64 (TDB - TT: 1e-18 s).

Then what derivatives cost: all parameters for 10,000 epochs of a year against the ranges alone,
best of five; less than three times is asked for. Exits with 1 on a miss.

    python validation/partials_against_twin.py [cases]
"""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterator
from contextlib import AbstractContextManager, contextmanager, nullcontext
from dataclasses import dataclass, replace
from time import process_time
from typing import Any
from unittest import mock

import mpmath
import numpy as np
from cases import STATIONS, Case, draw

import lighttime as lt
from lighttime.earth import tides
from lighttime.exact import leg, moon, round_trip, station
from lighttime.exact.bodies import State, Tables, de421
from lighttime.exact.numbers import Vector

DIGITS = 30
CLOSE = 1e-8
CASES = 50
MOST_COST = 3.0


@dataclass(frozen=True)
class Change:
    """One parameter: how far it is moved, and how that is told to the twin."""

    step: float
    inputs: Callable[[dict[str, Any], float], dict[str, Any]] = lambda inputs, h: inputs
    table: Callable[[Any, float], AbstractContextManager[Any]] = lambda tagged, h: nullcontext()


def shifted(vector: tuple[float, ...], axis: int, h: float) -> tuple[float, ...]:
    """Three numbers, one of them changed."""
    return tuple(value + h * (k == axis) for k, value in enumerate(vector))


def of_thing(key: str, field: str, axis: int) -> Callable[[dict[str, Any], float], dict[str, Any]]:
    """A component of a field of the station or the reflector."""

    def change(inputs: dict[str, Any], h: float) -> dict[str, Any]:
        thing = inputs[key]
        moved = replace(thing, **{field: shifted(getattr(thing, field), axis, h)})
        return inputs | {key: moved}

    return change


def of_series(field: str) -> Callable[[dict[str, Any], float], dict[str, Any]]:
    """All nodes of one column of the Earth orientation."""

    def change(inputs: dict[str, Any], h: float) -> dict[str, Any]:
        series = inputs["earth_orientation"]
        return inputs | {
            "earth_orientation": replace(series, **{field: getattr(series, field) + h})
        }

    return change


def of_weather(field: str) -> Callable[[dict[str, Any], float], dict[str, Any]]:
    """One number of the weather."""

    def change(inputs: dict[str, Any], h: float) -> dict[str, Any]:
        air = inputs["weather"]
        return inputs | {"weather": replace(air, **{field: getattr(air, field) + h})}

    return change


def later(inputs: dict[str, Any], h: float) -> dict[str, Any]:
    """The tagged epoch."""
    return inputs | {"when": inputs["when"].shift(h)}


def more_ocean(inputs: dict[str, Any], h: float) -> dict[str, Any]:
    """All of the ocean loading."""
    site = inputs["station"]
    ocean = replace(site.ocean_loading, amplitudes_m=(1.0 + h) * site.ocean_loading.amplitudes_m)
    return inputs | {"station": replace(site, ocean_loading=ocean)}


# -- tables of the twin --------------------------------------------------------------------------


def moved_moon(axis: int) -> Callable[[Any, float], AbstractContextManager[Any]]:
    """The Moon elsewhere, the Earth held."""
    plain = Tables.earth_and_moon

    def change(tagged: Any, h: float) -> AbstractContextManager[Any]:
        def earth_and_moon(self: Tables, tdb: Any) -> tuple[State, State]:
            earth, there = plain(self, tdb)
            return earth, State(there.position + _along(self, axis, h), there.velocity)

        return mock.patch.object(Tables, "earth_and_moon", earth_and_moon)

    return change


def faster_earth(axis: int) -> Callable[[Any, float], AbstractContextManager[Any]]:
    """Earth and Moon with another velocity, at the tagged epoch where they were."""
    plain = Tables.earth_and_moon

    def change(tagged: Any, h: float) -> AbstractContextManager[Any]:
        def earth_and_moon(self: Tables, tdb: Any) -> tuple[State, State]:
            v = _along(self, axis, h)
            gone = v * ((tdb - tagged) * 86400)
            earth, there = (State(b.position + gone, b.velocity + v) for b in plain(self, tdb))
            return earth, there

        return mock.patch.object(Tables, "earth_and_moon", earth_and_moon)

    return change


def turned_moon(axis: int) -> Callable[[Any, float], AbstractContextManager[Any]]:
    """A libration angle."""
    plain = Tables.librations

    def change(tagged: Any, h: float) -> AbstractContextManager[Any]:
        def librations(self: Tables, tdb: Any) -> Vector:
            return plain(self, tdb) + _along(self, axis, h)

        return mock.patch.object(Tables, "librations", librations)

    return change


def _along(tables: Tables, axis: int, h: float) -> Vector:
    return Vector.of(tables.ctx, shifted((0.0, 0.0, 0.0), axis, h))


def heavier(body: str) -> Callable[[Any, float], AbstractContextManager[Any]]:
    """GM of one body, as a fraction."""

    def change(tagged: Any, h: float) -> AbstractContextManager[Any]:
        gm = de421(DIGITS).gm
        return mock.patch.dict(gm, {body: gm[body] * (1 + h)})

    return change


def softer_earth(name: str) -> Callable[[Any, float], AbstractContextManager[Any]]:
    """Love or Shida number of the Earth."""
    plain, value = station.solid_earth_tide, getattr(tides, name.upper())

    def change(tagged: Any, h: float) -> AbstractContextManager[Any]:
        def tide(*arguments: Any) -> Any:
            return plain(*arguments, **{name: value + h})

        return mock.patch.object(station, "solid_earth_tide", tide)

    return change


def softer_moon(name: str) -> Callable[[Any, float], AbstractContextManager[Any]]:
    """Love or Shida number of the Moon, also in the permanent tide that coordinates contain."""
    value, permanent = float(getattr(moon, name)), moon.permanent_lunar_tide

    def change(tagged: Any, h: float) -> AbstractContextManager[Any]:
        def tide(*arguments: Any) -> Any:
            return permanent(*arguments, **{name.lower(): value + h})

        return mock.patch.multiple(moon, permanent_lunar_tide=tide, **{name: value + h})

    return change


def more_air(tagged: Any, h: float) -> AbstractContextManager[Any]:
    """Zenith delay."""
    plain = leg.zenith_delay
    return mock.patch.object(leg, "zenith_delay", lambda *a: plain(*a) + h)


AXES = tuple(enumerate("xyz"))
CHANGES: dict[str, Change] = {
    **{f"station_{x}_m": Change(10.0, of_thing("station", "xyz_m", k)) for k, x in AXES},
    **{
        f"station_v{x}_m_per_yr": Change(0.5, of_thing("station", "velocity_m_per_yr", k))
        for k, x in AXES
    },
    "ut1_s": Change(0.01, of_series("ut1_tai_s")),
    "xp_arcsec": Change(0.1, of_series("xp_arcsec")),
    "yp_arcsec": Change(0.1, of_series("yp_arcsec")),
    "dx_mas": Change(100.0, of_series("dx_mas")),
    "dy_mas": Change(100.0, of_series("dy_mas")),
    "h2_earth": Change(1.0, table=softer_earth("h2")),
    "l2_earth": Change(1.0, table=softer_earth("l2")),
    "ocean_loading_scale": Change(1.0, more_ocean),
    "zenith_delay_m": Change(1.0, table=more_air),
    "pressure_hpa": Change(5.0, of_weather("pressure_hpa")),
    "temperature_k": Change(1e-3, of_weather("temperature_k")),
    "relative_humidity": Change(0.04, of_weather("relative_humidity")),
    **{f"reflector_{x}_m": Change(10.0, of_thing("reflector", "xyz_m", k)) for k, x in AXES},
    **{
        f"libration_{angle}_rad": Change(1e-5, table=turned_moon(k))
        for k, angle in enumerate(("phi", "theta", "psi"))
    },
    **{f"moon_{x}_m": Change(100.0, table=moved_moon(k)) for k, x in AXES},
    "h2_moon": Change(1.0, table=softer_moon("H2")),
    "l2_moon": Change(1.0, table=softer_moon("L2")),
    **{f"earth_v{x}_m_per_s": Change(3e3, table=faster_earth(k)) for k, x in AXES},
    "epoch_s": Change(0.1, later),
    "gamma": Change(1.0, lambda inputs, h: inputs | {"gamma": inputs.get("gamma", 1.0) + h}),
    "gm_sun_relative": Change(0.1, table=heavier("sun")),
    "gm_earth_relative": Change(0.5, table=heavier("earth")),
}


# -- cases ---------------------------------------------------------------------------------------


def asked(count: int) -> Iterator[dict[str, Any]]:
    """Inputs of random cases that the bundled series covers, with weather."""
    rng = np.random.default_rng(6)
    found = 0
    for case in draw(6 * count, seed=20061):
        if case.kind == "any" and case.late is None and found < count:
            found += 1
            yield _inputs(case, rng)


def _inputs(case: Case, rng: np.random.Generator) -> dict[str, Any]:
    weather = lt.Weather(
        round(rng.uniform(650.0, 1020.0), 2),
        round(rng.uniform(255.0, 305.0), 2),
        round(rng.uniform(0.1, 0.9), 2),
    )
    bundled = lt.EarthOrientation.bundled()
    return case.inputs | {"when": case.when, "weather": weather, "earth_orientation": bundled}


def numerical(inputs: dict[str, Any], change: Change, tagged: Any) -> float:
    """Central difference of the twin."""
    ends = []
    for h in (change.step, -change.step):
        with change.table(tagged, h):
            ends.append(round_trip(**change.inputs(inputs, h), digits=DIGITS).seconds)
    return float((ends[0] - ends[1]) / (2 * mpmath.mpf(change.step)))


def analytic(inputs: dict[str, Any]) -> lt.Partials:
    """The fast model's."""
    model = lt.Model(earth_orientation=inputs["earth_orientation"])
    given = {k: v for k, v in inputs.items() if k != "earth_orientation"}
    return model.round_trip(**given).partials()


def tagged_tdb(inputs: dict[str, Any]) -> Any:
    """Julian date, TDB, of the tagged event in the twin."""
    sheet = round_trip(**inputs, digits=DIGITS).worksheet()
    event = {"transmit": "t1", "bounce": "t2", "receive": "t3"}[inputs["tag"]]
    return sheet[f"{event}_tdb_jd"]


@contextmanager
def counted(total: int) -> Iterator[Callable[[], None]]:
    """Says where a long run is, on a terminal."""
    done = 0

    def step() -> None:
        nonlocal done
        done += 1
        if sys.stderr.isatty():
            print(f"\r{done}/{total}", end="", file=sys.stderr)

    yield step
    if sys.stderr.isatty():
        print("\r", end="", file=sys.stderr)


def cost(epochs: int = 10_000, tries: int = 5) -> float:
    """Processor time of all derivatives over that of the ranges, the tables of both being there."""
    when = lt.Epoch(2460676.5, np.linspace(0.0, 365.0, epochs), "utc")
    model, site, array = lt.Model(), STATIONS[0], lt.reflector("Apollo 15")
    ranges, slopes = [], []
    for _ in range(tries):
        start = process_time()
        answer = model.round_trip(when, site, array)
        middle = process_time()
        answer.partials()
        ranges.append(middle - start)
        slopes.append(process_time() - middle)
    least = min(ranges), min(slopes)
    print(f"\n{epochs} epochs: ranges {least[0]:.3f} s, all derivatives {least[1]:.3f} s: "
          f"{least[1] / least[0]:.2f} times as long")  # fmt: skip
    return least[1] / least[0]


def main() -> int:
    count = int(sys.argv[1]) if len(sys.argv) > 1 else CASES
    found: dict[str, list[tuple[float, float]]] = {name: [] for name in CHANGES}
    with counted(count) as step:
        for inputs in asked(count):
            slopes, tagged = analytic(inputs), tagged_tdb(inputs)
            for name, change in CHANGES.items():
                if name in slopes:
                    found[name].append((slopes[name], numerical(inputs, change, tagged)))
            step()
    print(f"d(round trip)/d(parameter), fast against the twin's differences: {count} cases\n")
    print("parameter               step  cases   rms slope   floor      max off   max off  within")
    print("                                                             /rms      /slope   1e-8  ")
    missed = []
    for name, pairs in found.items():
        if not pairs:
            missed.append(name)
            continue
        fast, twin = np.array(pairs).T
        rms = float(np.sqrt(np.mean(twin**2)))
        off = np.abs(fast - twin)
        close = off <= CLOSE * np.abs(twin)
        passed = bool(np.all(close | (off <= CLOSE * rms)))
        if not passed:
            missed.append(name)
        print(
            f"{name:22}{CHANGES[name].step:8g}{len(pairs):6}{rms:13.4e}{CLOSE * rms:10.1e}"
            f"{off.max() / rms:11.1e}{np.max(off / np.abs(twin)):10.1e}"
            f"{int(close.sum()):5}{'' if passed else '  MISSED'}"
        )
    print("\nclock_rate is the range and bias_s is one, by definition.")
    print(
        f"{len(found) - len(missed)} of {len(found)} parameters pass"
        + ("." if not missed else f": not {', '.join(missed)}.")
    )
    return 1 if missed or cost() >= MOST_COST else 0


if __name__ == "__main__":
    sys.exit(main())
