"""Does the cross-check name the right choice? Synthetic trials, and a confusion table.

Run as

    python validation/crosscheck_trials.py [--trials 500,300,200,500] [--confusion]

Ranges of an invented station over a year, to two arrays, with noise; the "other model" is ours with
choices from the list of suspects. A trial is right when what was found is what was put in, or
when the report declares the right choice inseparable from what it found. Ends with a non-zero
status when a rate is missed.

Choices are put in by adding their signatures, each of which the tests hold against the model
solved again; what is tested here is the statistics. `crosscheck_recomputed.py` computes the other
model with the choices really made.
"""

from __future__ import annotations

import argparse
import sys
import time
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

import lighttime as lt
from lighttime.crosscheck.bench import Bench
from lighttime.crosscheck.findings import Inquiry, inquire
from lighttime.crosscheck.ranges import read_ranges
from lighttime.crosscheck.suspects import Suspect, all_suspects

SCHEDULES = 10
SEEN_SIGMA = 7.0
"""Mistakes are drawn from those whose signature, at the amplitude drawn, is so many sigmas long:
about what a find needs. What is weaker is listed."""

PROMISED = {1: 0.98, 2: 0.95, 3: 0.85}
FALSE_ALARMS = 0.02


@dataclass(frozen=True, eq=False)
class Schedule:
    """Ranges that were taken, and what every suspect does to them."""

    suspects: tuple[Suspect, ...]
    signatures: Any


def schedule(seed: int, count: int, choices_only: bool = False) -> Schedule:
    """Epochs over a year at an invented station, half to each of two arrays, with weather."""
    rng = np.random.default_rng(seed)
    model = lt.Model()
    station = lt.Station.from_geodetic(
        "Hilltop", float(rng.uniform(-45.0, 55.0)), float(rng.uniform(-180.0, 180.0)),
        float(rng.uniform(0.0, 3000.0)), velocity_m_per_yr=tuple(rng.normal(0.0, 0.02, 3)),
    )  # fmt: skip
    arrays = [lt.reflectors()[k] for k in rng.choice(5, 2, replace=False)]
    first = 2455000.5 + float(rng.integers(0, 5000))
    table: dict[str, list[Any]] = {"mjd_utc": [], "array": []}
    for array in arrays:
        days, hours = rng.integers(0, 365, 8 * count), rng.uniform(0.0, 1.0, 8 * count)
        when = lt.Epoch(first + days, hours, "utc")
        high = model.round_trip(when, station, array).uplink.elevation_deg > 20.0
        taken = np.flatnonzero(high)[: count // 2]
        table["mjd_utc"] += (first - 2400000.5 + days[taken] + hours[taken]).tolist()
        table["array"] += [array.name] * len(taken)
    n = len(table["array"])
    weather = lt.Weather(
        rng.normal(1013.0 - 0.11 * station.height_m, 5.0, n),
        rng.normal(285.0 - 0.0065 * station.height_m, 7.0, n),
        rng.uniform(0.1, 0.9, n),
    )
    from lighttime.crosscheck.ranges import Defaults

    ranges = read_ranges(table | {"round_trip_s": np.full(n, 2.6)}, defaults=Defaults(weather))
    bench = Bench(ranges, model, {"hilltop": station}, {})
    middle = 2000.0 + (first - 2451545.0) / 365.25 + 0.5
    suspects = all_suspects(model, [station], arrays, middle)
    signatures, _, _ = bench.signatures(np.arange(n), suspects)
    return Schedule(suspects, signatures)


def lengths(table: Schedule, noise_ps: float) -> Any:
    """Lengths of the signatures at amplitude 1, in sigmas."""
    return np.linalg.norm(table.signatures, axis=0) / noise_ps


def amplitude(rng: Any, suspect: Suspect, length: float) -> float | None:
    """An amplitude that can be seen: an exact one, or an offset of any sign and size."""
    if suspect.is_offset:
        size = suspect.plausible * 10.0 ** rng.uniform(-1.0, 0.3)
        return float(rng.choice([-1.0, 1.0]) * max(size, 1.5 * SEEN_SIGMA / length))
    visible = [a for a in suspect.readings if abs(a) * length > SEEN_SIGMA]
    return float(rng.choice(visible)) if visible else None


def truth(rng: Any, table: Schedule, number: int, noise_ps: float) -> dict[str, float]:
    """So many different mistakes, with their amplitudes."""
    own = lengths(table, noise_ps)
    drawn: dict[str, float] = {}
    while len(drawn) < number:
        k = int(rng.integers(len(table.suspects)))
        if own[k] > 0.0:
            size = amplitude(rng, table.suspects[k], own[k])
            if size is not None:
                drawn[table.suspects[k].name] = size
    return drawn


def right(inquiry: Inquiry, true: set[str]) -> bool:
    """Whether the truth is what was found, or declared inseparable from it."""
    found = {s.name for s in inquiry.members}
    if found == true:
        return True
    groups: dict[str, set[str]] = {}
    for rival in inquiry.rivals:
        names = {s.name for s in inquiry.named(rival)}
        if names == true:
            return True
        if len(found - names) == 1 and len(names - found) == 1:
            groups.setdefault(*(found - names), set()).update(names - found)
    return len(found) == len(true) and _matched(sorted(found - true), true - found, groups)


def _matched(found: Sequence[str], true: set[str], groups: dict[str, set[str]]) -> bool:
    """Whether each finding can stand for a different one of the truth, of its group."""
    if not found:
        return not true
    return any(
        _matched(found[1:], true - {name}, groups) for name in groups.get(found[0], set()) & true
    )


def group_size(inquiry: Inquiry) -> float:
    """Names in the report for each finding: itself, and those it cannot be told from."""
    found = {s.name for s in inquiry.members}
    names = set(found)
    for rival in inquiry.rivals:
        names |= {s.name for s in inquiry.named(rival)}
    return len(names) / max(len(found), 1)


def trials(
    tables: list[Schedule], number: int, count: int, noise_ps: float, verbose: bool = False
) -> tuple[float, float, Counter[str]]:
    """Share of right trials, mean size of groups, and what was missed."""
    rng = np.random.default_rng(1000 * number + int(noise_ps))
    good, sizes, missed = 0, [], Counter[str]()
    for trial in range(count):
        table = tables[trial % len(tables)]
        names = [s.name for s in table.suspects]
        true = truth(rng, table, number, noise_ps)
        n = len(table.signatures)
        theirs = rng.normal(0.0, noise_ps, n)
        for name, size in true.items():
            theirs = theirs + size * table.signatures[:, names.index(name)]
        stated = bool(trial % 2)  # every other time the noise has to be estimated
        sigma = np.full(n, noise_ps if stated else 1e-3)
        inquiry = inquire(table.signatures, theirs, sigma, stated, table.suspects)
        correct = right(inquiry, set(true))
        good += correct
        if inquiry.members:
            sizes.append(group_size(inquiry))
        if not correct:
            missed.update(list(true))
            if verbose:
                told = {s.name: float(a) for s, a in zip(
                    inquiry.members, inquiry.best.amplitudes, strict=True)}  # fmt: skip
                print(f"    put in {true}\n    found  {told}")
    return good / count, float(np.mean(sizes)) if sizes else 0.0, missed


def confusion(table: Schedule, noise_ps: float) -> None:
    """Every suspect alone, at its first exact amplitude or a plausible size: what is found."""
    rng = np.random.default_rng(5)
    print(f"\n{'put in':34}{'amplitude':>12}{'sigmas':>9}  found (inseparable in brackets)")
    own = lengths(table, noise_ps)
    n = len(table.signatures)
    for k, suspect in enumerate(table.suspects):
        size = suspect.plausible if suspect.is_offset else next(iter(suspect.readings))
        length = abs(size) * own[k]
        head = f"{suspect.name:34}{size:>12g}{length:>9.3g}  "
        if own[k] == 0.0:
            print(f"{head}nothing in these ranges depends on it")
            continue
        theirs = rng.normal(0.0, noise_ps, n) + size * table.signatures[:, k]
        inquiry = inquire(table.signatures, theirs, np.full(n, noise_ps), True, table.suspects)
        found = [s.name for s in inquiry.members]
        others = {s.name for r in inquiry.rivals for s in inquiry.named(r)} - set(found)
        words = ", ".join(found) if found else "nothing significant"
        words += f" [{', '.join(sorted(others))}]" if others else ""
        print(head + ("itself" if found == [suspect.name] and not others else words))


def main() -> int:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--trials", default="500,300,200,500", help="with 1, 2, 3 and 0 mistakes")
    parser.add_argument("--confusion", action="store_true", help="print the confusion table")
    parser.add_argument("--verbose", action="store_true", help="print every miss")
    arguments = parser.parse_args()
    counts = dict(zip((1, 2, 3, 0), map(int, arguments.trials.split(",")), strict=True))
    failed = False
    for rows, noise in ((200, 1.0), (60, 30.0)):
        tables = [schedule(seed, rows) for seed in range(SCHEDULES)]
        suspects = tables[0].suspects
        print(f"{rows} ranges of a year, two arrays, noise {noise:g} ps; {len(suspects)} suspects")
        own = np.median([lengths(t, noise) for t in tables], axis=0)
        weak = [
            s.name
            for s, length in zip(suspects, own, strict=True)
            if s.readings and length * max(map(abs, s.readings)) <= SEEN_SIGMA
        ]
        print(f"  too weak to be seen, not put in: {', '.join(weak)}")
        for number, count in counts.items():
            start = time.process_time()
            rate, size, missed = trials(tables, number, count, noise, arguments.verbose)
            spent = (time.process_time() - start) / max(count, 1)
            if number == 0:
                alarms = 1.0 - rate
                bad = alarms > FALSE_ALARMS
                print(f"  none: false alarms {100 * alarms:.1f} % of {count}", end="")
            else:
                bad = noise == 1.0 and rate < PROMISED[number]
                print(f"  {number}: right {100 * rate:.1f} % of {count}, {size:.2f} names for a "
                      f"finding", end="")  # fmt: skip
            print(f" ({spent:.2f} s each){'  MISSED' if bad else ''}")
            if missed:
                told = ", ".join(f"{n} {k}" for n, k in missed.most_common(8))
                print(f"     most often missed: {told}")
            failed |= bad
        if arguments.confusion and noise == 1.0:
            confusion(tables[0], noise)
    return int(failed)


if __name__ == "__main__":
    sys.exit(main())
