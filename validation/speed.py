"""Round trips per second, beside the plain assembly from general-purpose libraries.

Prints a table for one night, a month, a year and 50 years of epochs, at 1 to 10^6 epochs, tables
included; the time of each stage; peak memory; import and first answer of a fresh process; the
same epochs by `plain_assembly`, and the ratio. Exits non-zero if a bar is missed:

- 10^5 epochs over a year: 100,000 per second, and 50 times the plain assembly
- time per epoch at 10^6 at most 1.2 times that at 10^5, peak memory below 1 GB
- 20,000 epochs over 50 years in under 2 s

Usage: ``python validation/speed.py [--quick]``. Quick leaves out 10^6 epochs. The best of three
runs is quoted, each with a new model; set OPENBLAS_NUM_THREADS=1 for one core.
"""

from __future__ import annotations

import os

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
os.environ.setdefault("OMP_NUM_THREADS", "1")

import cProfile
import pstats
import resource
import subprocess
import sys
import time

import numpy as np
from plain_assembly import PlainModel

import lighttime as lt

STATION = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
ARRAY = lt.reflector("Apollo 15")
START = 2455197.5

SPANS_DAYS = {"a night": 0.4, "a month": 30.0, "a year": 365.0, "50 years": 18262.0}

STAGES = {
    "epochs to TT": ("timescales/epoch.py", "to"),
    "ephemeris (the floor)": ("ephemeris/frame.py", "_jet"),
    "Sun and planets": ("ephemeris/frame.py", "_distant"),
    "station": ("earth/motion.py", "at"),
    "reflector": ("moon/motion.py", "at"),
    "gravity": ("path/delays.py", "gravity_delays"),
    "answer and terms": ("answer.py", "of"),
    "building tables": ("ephemeris/piecewise.py", "_build"),
}


def epochs(count: int, days: float, seed: int = 1) -> lt.Epoch:
    """Random instants in order, from 2010 (50 years: from 1972)."""
    start = START if days < 1000.0 else 2441317.5
    rng = np.random.default_rng(seed)
    return lt.Epoch(np.full(count, start), np.sort(rng.uniform(0.0, days, count)), "utc")


def seconds(count: int, days: float, runs: int = 3) -> float:
    """Best of some runs with a new model each, tables and all."""
    when = epochs(count, days)
    taken = []
    for _ in range(runs):
        model = lt.Model()
        start = time.perf_counter()
        model.round_trip(when, STATION, ARRAY)
        taken.append(time.perf_counter() - start)
    return min(taken)


def plain_seconds(count: int, days: float) -> float:
    """The plain assembly on some of the same epochs, scaled to all of them."""
    when = epochs(count, days)[:: max(1, count // 2000)]
    model = PlainModel()
    start = time.perf_counter()
    model.round_trip(np.asarray(when.jd1), np.asarray(when.jd2), STATION, ARRAY)
    return (time.perf_counter() - start) * count / len(when)


def stages(count: int, days: float) -> None:
    """Where the time goes (under a profiler, which takes some itself)."""
    when = epochs(count, days)
    model = lt.Model()
    profile = cProfile.Profile()
    profile.enable()
    model.round_trip(when, STATION, ARRAY)
    profile.disable()
    table = pstats.Stats(profile).stats  # type: ignore[attr-defined]
    print(f"\nstages, {count} epochs over {days:g} days (cumulative, microseconds per epoch)")
    for stage, (file, function) in STAGES.items():
        spent = sum(
            row[3]
            for (path, _, name), row in table.items()
            if path.endswith(file) and name == function
        )
        print(f"  {stage:24}{spent / count * 1e6:8.2f}")
    print("\n" + model.tables())


def fresh_process() -> None:
    """Import and first answer, each in a process of its own."""
    code = (
        "import time; t=time.perf_counter(); import lighttime as lt; a=time.perf_counter();"
        "lt.round_trip('2020-03-01T19:00:00', lt.Station.from_geodetic('H', 46.2, 7.1, 2310.0),"
        "lt.reflector('Apollo 15')); b=time.perf_counter(); print(a-t, b-a)"
    )
    rows = []
    for _ in range(5):
        done = subprocess.run(
            [sys.executable, "-c", code], capture_output=True, check=True, text=True
        )
        rows.append([float(v) for v in done.stdout.split()])
    imported, answered = np.min(rows, axis=0)
    print(f"\nfresh process: import {imported:.3f} s, first answer {answered:.3f} s (best of 5)")


def main() -> int:
    quick = "--quick" in sys.argv
    counts = [1, 100, 10_000, 100_000] + ([] if quick else [1_000_000])
    missed: list[str] = []
    heads = ("epochs", "s", "us/epoch", "per second", "plain", "ratio")
    print(f"{'span':12}" + "".join(f"{h:>12}" for h in heads))
    per_epoch: dict[tuple[str, int], float] = {}
    for name, days in SPANS_DAYS.items():
        sizes = [20_000] if name == "50 years" else counts
        for count in sizes:
            ours = seconds(count, days, 1 if count >= 1_000_000 else 3)
            plain = plain_seconds(count, days)
            per_epoch[name, count] = ours / count
            figures = (
                f"{ours:.3f}", f"{ours / count * 1e6:.2f}", f"{count / ours:.0f}",
                f"{count / plain:.0f}", f"{plain / ours:.1f}",
            )  # fmt: skip
            print(f"{name:12}{count:>12}" + "".join(f"{f:>12}" for f in figures))
            if (name, count) == ("a year", 100_000):
                if count / ours < 100_000:
                    missed.append("100,000 round trips per second")
                if plain / ours < 50.0:
                    missed.append("50 times the plain assembly")
            if name == "50 years" and ours > 2.0:
                missed.append("20,000 epochs over 50 years in 2 s")
    if not quick:
        growth = per_epoch["a year", 1_000_000] / per_epoch["a year", 100_000]
        peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024.0
        print(
            f"\ntime per epoch at 10^6 over that at 10^5: {growth:.2f}; peak memory {peak:.0f} MB"
        )
        if growth > 1.2:
            missed.append("time per epoch does not grow")
        if peak > 1000.0:
            missed.append("peak memory below 1 GB")
    stages(100_000, 365.0)
    fresh_process()
    print("\nmissed: " + "; ".join(missed) if missed else "\nevery bar is met")
    return int(bool(missed))


if __name__ == "__main__":
    sys.exit(main())
