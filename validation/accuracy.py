"""How good is the arithmetic? The fast path against its extended-precision twin, case by case.

Random round trips (`cases`) are answered three ways: by the twin (`lighttime.exact`, 30 digits);
by the fast path alone, one epoch a call, everything evaluated as it is; and by the fast path in
an array of epochs around the same instant, dense enough for the model to build its tables. Fast
minus exact is printed as a histogram, with the largest and the root mean square. So are

- every rung on the way: positions relative to the Earth, TDB - TT between events, gravity;
- the plain float64 assembly from general-purpose libraries (`plain_assembly`) on the same cases
  (those tagged at transmission, of stations without loading), and what each of four usual
  roundings costs, alone (`losses`).

Exits with 1 when a bar is missed. Usage::

    python validation/accuracy.py [--cases 2000] [--seed 19690721] [--processes 2] [--save FILE]
"""

from __future__ import annotations

import os

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
os.environ.setdefault("OMP_NUM_THREADS", "1")

import argparse
import json
import sys
from collections import Counter
from collections.abc import Iterable
from dataclasses import dataclass
from functools import cache
from multiprocessing import Pool
from pathlib import Path
from time import perf_counter
from typing import Any

import mpmath
import numpy as np
from cases import LATE_SERIES, TAGS, Case, draw
from losses import LOOK_UP, NAMES, losses
from plain_assembly import PlainModel
from rungs import BARS, UNBARRED, differences

import lighttime as lt

DIGITS = 30
FEMTOSECOND = 1e-15
LARGEST_FS, RMS_FS = 2.0, 0.7
"""The bar."""
BESIDE = 24
"""Epochs around that of a case in the same array, one every 4 seconds: enough to repay the tables
of the day, on either side of midnight."""
ALONG, ALONG_DAYS = 68, 128.0
"""Epochs around that of a case, and the days they are spread over: enough to repay the tables of
precession-nutation, where there are none yet."""
MODES = ("alone", "tables")
MM_PER_FS = 0.5 * 299792458.0 * 1e3 * FEMTOSECOND


@dataclass(frozen=True)
class Result:
    """What was seen of one case; femtoseconds, and metres, seconds or radians of the rungs."""

    kind: str
    alone: float
    tables: float
    alone_pair: float
    rungs_alone: dict[str, float]
    rungs_tables: dict[str, float]
    plain: float | None
    losses: dict[str, float]


# -- one case --------------------------------------------------------------------------------------


@cache
def model(late: int | None, mode: str) -> lt.Model:
    """A model for each series of Earth orientation and mode: they share no tables."""
    return lt.Model(earth_orientation=None if late is None else LATE_SERIES[late])


@cache
def plain_model(late: int | None) -> PlainModel:
    """The plain assembly with a series of Earth orientation."""
    plain = PlainModel()
    if late is not None:
        plain.series = LATE_SERIES[late]
    return plain


def examine(case: Case) -> Result:
    """Answer one case in every way."""
    twin = lt.exact.round_trip(
        case.when, **case.inputs, earth_orientation=case.series, digits=DIGITS
    )
    tagged = f"t{TAGS.index(case.tag) + 1}"
    alone = model(case.late, "alone").round_trip(case.when, **case.inputs)
    _tabulate(case)
    dense = model(case.late, "tables").round_trip(_dense(case.when), **case.inputs)
    plain = _plain(case)
    with mpmath.workdps(50):
        exact = twin.seconds

        def off(seconds: float, rest: float = 0.0) -> float:
            return float((mpmath.mpf(float(seconds)) + float(rest) - exact) / FEMTOSECOND)

        return Result(
            kind=case.kind,
            alone=off(alone.seconds),
            tables=off(dense.seconds[0]),
            alone_pair=off(alone.seconds, alone.seconds_low),
            rungs_alone=differences(alone.worksheet(), twin.worksheet(), tagged),
            rungs_tables=differences(dense.worksheet(), twin.worksheet(), tagged),
            plain=None if plain is None else off(plain),
            losses={name: s / FEMTOSECOND for name, s in losses(twin).items()},
        )


def _tabulate(case: Case) -> None:
    """Ask for epochs all around, once for each station and stretch of `ALONG_DAYS`."""
    stretch = int((case.when.jd1 - 2400000.5) // ALONG_DAYS)
    if (case.late, stretch) not in _TABULATED:
        _TABULATED.add((case.late, stretch))
        tabulating = model(case.late, "tables")
        last = min(tabulating.earth_orientation.coverage[1] - 1.0, (stretch + 1) * ALONG_DAYS)
        days = np.linspace(stretch * ALONG_DAYS + 0.5, last - 0.5, ALONG)
        along = lt.Epoch(2400000.5, days, "tt")
        tabulating.round_trip(along, case.station, case.array)


_TABULATED: set[tuple[int | None, int]] = set()
"""What was asked for in this process."""


def _dense(when: lt.Epoch) -> lt.Epoch:
    """The same instant, the first of many."""
    beside = 4.0 / 86400.0 * (np.arange(BESIDE) - (BESIDE - 1) / 2.0)
    jd1 = np.concatenate([[when.jd1], np.full(BESIDE, when.jd1)])
    jd2 = np.concatenate([[when.jd2], when.jd2 + beside])
    return lt.Epoch(jd1, jd2, when.scale)


def _plain(case: Case) -> float | None:
    """By the plain assembly, where it has the same model."""
    usual = case.station.ocean_loading is None and case.array.scale == "tdb"
    if case.tag != "transmit" or not usual:
        return None
    plain = plain_model(case.late)
    utc = case.when.to("utc", place=case.station, earth_orientation=case.series)
    seconds = plain.round_trip(
        np.array([utc.jd1]),
        np.array([utc.jd2]),
        case.station,
        case.array,
        case.weather,
        case.wavelength_nm,
    )
    return float(seconds[0])


def _numbered(job: tuple[int, Case]) -> tuple[int, Result, str]:
    """A case in a process of its own, with what that process tabulated so far."""
    return job[0], examine(job[1]), model(None, "tables").tables()


def examine_all(cases: list[Case], processes: int) -> tuple[list[Result], str]:
    """All cases; progress goes to stderr."""
    results: dict[int, Result] = {}
    tables = ""
    # neighbours in time share tables
    order = sorted(range(len(cases)), key=lambda k: cases[k].when.jd1)
    jobs = [(k, cases[k]) for k in order]
    with Pool(processes) as pool:
        for number, result, told in pool.imap_unordered(_numbered, jobs, chunksize=25):
            results[number], tables = result, told
            if len(results) % 100 == 0:
                print(f"{len(results)} of {len(cases)}", end="\r", file=sys.stderr, flush=True)
    return [results[k] for k in range(len(cases))], tables


# -- what is printed -------------------------------------------------------------------------------


def size(values: Any) -> tuple[float, float]:
    """Root mean square and the largest."""
    array = np.asarray(values, dtype=float)
    return float(np.sqrt(np.mean(array**2))), float(np.max(np.abs(array)))


def histogram(values: list[float], limit: float = 2.0, bins: int = 20) -> str:
    """Counts as bars, one line a bin."""
    counts, edges = np.histogram(values, bins=bins, range=(-limit, limit))
    widest = max(1, int(counts.max()))
    lines = [
        f"  {low:+6.2f} to {high:+6.2f} {count:>6} {'#' * round(56 * count / widest)}".rstrip()
        for low, high, count in zip(edges[:-1], edges[1:], counts, strict=True)
    ]
    beyond = len(values) - int(counts.sum())
    return "\n".join([*lines, f"  beyond           {beyond:>6}"])


def print_range(results: list[Result]) -> bool:
    """Fast minus exact."""
    good = True
    for mode, told in zip(MODES, ("one epoch a call", "in arrays, from tables"), strict=True):
        values = [getattr(result, mode) for result in results]
        rms, largest = size(values)
        print(f"\nFast minus exact, {told}, {len(values)} round trips, femtoseconds\n")
        print(histogram(values))
        met = largest <= LARGEST_FS and rms < RMS_FS
        good = good and met
        print(
            f"  largest {largest:.2f} (bar {LARGEST_FS:g}), rms {rms:.3f} (bar {RMS_FS:g}):", end=""
        )
        print(f" {'ok' if met else 'MISS'}")
    rms, largest = size([result.alone_pair for result in results])
    print(f"\nAs a sum of two float64, one epoch a call: largest {largest:.2f}, rms {rms:.3f}")
    print(f"\n  {'':<17}{'alone':>16}{'from tables':>20}")
    print(f"  {'kind':<10}{'cases':>7}{'largest':>10}{'rms':>8}{'largest':>10}{'rms':>8}")
    for kind, count in Counter(result.kind for result in results).most_common():
        some = [result for result in results if result.kind == kind]
        (rms, largest), (rms2, largest2) = (size([getattr(r, m) for r in some]) for m in MODES)
        print(f"  {kind:<10}{count:>7}{largest:>10.2f}{rms:>8.3f}{largest2:>10.2f}{rms2:>8.3f}")
    return good


def worst_rungs(results: list[Result]) -> dict[str, dict[str, float]]:
    """The largest difference of each rung, by mode."""
    worst: dict[str, dict[str, float]] = {mode: {} for mode in MODES}
    for mode in MODES:
        for result in results:
            for name, value in getattr(result, f"rungs_{mode}").items():
                worst[mode][name] = max(worst[mode].get(name, 0.0), value)
    return worst


def print_rungs(results: list[Result]) -> bool:
    """Rung by rung."""
    worst = worst_rungs(results)
    print("\nRung by rung, the largest difference\n")
    print(f"  {'rung':<40}{'unit':<5}{'alone':>10}{'tables':>10}{'bar':>10}")
    good = True
    for name in (*BARS, *UNBARRED):
        bar = BARS.get(name)
        unit = UNBARRED.get(name) or ("m" if bar == 0.3e-6 else "s")
        row = [worst[mode].get(name, 0.0) for mode in MODES]
        verdict = "" if bar is None else f"{bar:>10.1e}  {'ok' if max(row) < bar else 'MISS'}"
        good = good and (bar is None or max(row) < bar)
        print(f"  {name:<40}{unit:<5}{row[0]:>10.1e}{row[1]:>10.1e}{verdict}")
    return good


def print_plain(results: list[Result]) -> None:
    """The plain assembly beside the fast path, and the usual roundings one by one."""
    some = [result for result in results if result.plain is not None]
    rows = {
        "this library": [result.alone for result in some],
        "plain assembly (jplephem, erfa, astropy)": [result.plain for result in some],
        "the same less what its record look-up costs": [
            result.plain - result.losses[LOOK_UP] for result in some
        ],
        **{f"  {name}": [result.losses[name] for result in some] for name in NAMES},
    }
    print(f"\nOn the same {len(some)} round trips: off by, in femtoseconds, and one-way\n")
    print(f"  {'':<44}{'rms/fs':>12}{'largest/fs':>12}{'largest/mm':>14}")
    for name, values in rows.items():
        rms, largest = size(values)
        print(f"  {name:<44}{rms:>12.4g}{largest:>12.4g}{largest * MM_PER_FS:>14.3g}")
    print("\n  (indented: one rounding alone, all else exact)")


def summary(results: list[Result], seed: int) -> dict[str, Any]:
    """What the accuracy page is made from: femtoseconds case by case, and the largest of rungs."""

    def rounded(values: Iterable[float]) -> list[float]:
        return [round(value, 3) for value in values]

    some = [result for result in results if result.plain is not None]
    return {
        "seed": seed,
        "kinds": [result.kind for result in results],
        **{mode: rounded(getattr(result, mode) for result in results) for mode in MODES},
        "alone_pair": rounded(result.alone_pair for result in results),
        "compared": [k for k, result in enumerate(results) if result.plain is not None],
        "plain": rounded(result.plain or 0.0 for result in some),
        "losses": {name: rounded(result.losses[name] for result in some) for name in NAMES},
        "rungs": worst_rungs(results),
    }


def main() -> int:
    """Print all; 0 when every bar is met."""
    asked = argparse.ArgumentParser(description="Fast path against extended-precision twin.")
    asked.add_argument("--cases", type=int, default=2000)
    asked.add_argument("--seed", type=int, default=19690721)
    asked.add_argument("--processes", type=int, default=2, choices=(1, 2))
    asked.add_argument("--save", type=Path, help="write the numbers to this file (JSON)")
    given = asked.parse_args()
    start = perf_counter()
    cases = draw(given.cases, given.seed)
    results, tables = examine_all(cases, given.processes)
    leap = sum(case.when.isoformat(9)[17:19] == "60" for case in cases)
    print(f"{len(cases)} random round trips, 1969 to 2050, {leap} of them inside a leap second")
    good = [print_range(results), print_rungs(results)]
    print_plain(results)
    print(f"\nTables of one of the processes:\n{tables}")
    if given.save is not None:
        given.save.write_text(json.dumps(summary(results, given.seed)) + "\n", encoding="utf-8")
    print(f"\n{perf_counter() - start:.0f} s", file=sys.stderr)
    print("\nok" if all(good) else "\nMISS")
    return 0 if all(good) else 1


if __name__ == "__main__":
    sys.exit(main())
