"""A million round trips spread over local workers: processes, and dask.distributed.

A `Model` pickles as its choices; each worker builds its own tables. Epochs are dealt out in
pieces that are neighbours in time, so that a day's table is built by one worker.

Prints the time with one worker and with two, for `concurrent.futures` and (if it is installed)
for `dask.distributed`. Exits non-zero if two workers give less than 1.7 times one, or if the
answers differ. Usage: ``python validation/workers.py [epochs]``; needs two idle cores.
"""

from __future__ import annotations

import os

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

import sys
import time
from collections.abc import Callable
from concurrent.futures import ProcessPoolExecutor
from typing import Any

import numpy as np

import lighttime as lt

PIECES = 16
BAR = 1.7


def seconds(job: tuple[lt.Model, lt.Epoch, lt.Station, lt.Reflector]) -> Any:
    """One piece of the work, in a worker."""
    model, when, station, array = job
    return model.round_trip(when, station, array).seconds


def jobs(count: int) -> list[Any]:
    station = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
    offsets = np.linspace(0.0, 365.0, count)
    model, array = lt.Model(), lt.reflector("Apollo 15")
    return [
        (model, lt.Epoch(np.full(part.size, 2455197.5), part, "utc"), station, array)
        for part in np.array_split(offsets, PIECES)
    ]


def timed(work: Callable[[], list[Any]]) -> tuple[float, Any]:
    start = time.perf_counter()
    pieces = work()
    return time.perf_counter() - start, np.concatenate(pieces)


def by_processes(workers: int, todo: list[Any]) -> tuple[float, Any]:
    with ProcessPoolExecutor(workers) as pool:
        list(pool.map(seconds, [(m, w[:2], s, a) for m, w, s, a in todo[:workers]]))  # start up
        return timed(lambda: list(pool.map(seconds, todo)))


def by_dask(workers: int, todo: list[Any]) -> tuple[float, Any]:
    from dask.distributed import Client, LocalCluster

    with (
        LocalCluster(
            n_workers=workers, threads_per_worker=1, dashboard_address=None, processes=True
        ) as cluster,
        Client(cluster) as client,
    ):
        client.gather(client.map(seconds, [(m, w[:2], s, a) for m, w, s, a in todo[:workers]]))
        return timed(lambda: list(client.gather(client.map(seconds, todo, pure=False))))


def main() -> int:
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 1_000_000
    todo = jobs(count)
    ways = {"concurrent.futures": by_processes}
    try:
        import dask.distributed  # noqa: F401
    except ImportError:
        print("dask.distributed is not installed: left out")
    else:
        ways["dask.distributed"] = by_dask
    missed = False
    for name, way in ways.items():
        one, first = way(1, todo)
        two, second = way(2, todo)
        same = bool(np.array_equal(first, second))
        missed |= not same or one / two < BAR
        print(
            f"{name:20} {count} epochs: one worker {one:.2f} s, two {two:.2f} s, "
            f"ratio {one / two:.2f}{'' if same else '; ANSWERS DIFFER'}"
        )
    print("missed" if missed else "every bar is met")
    return int(missed)


if __name__ == "__main__":
    sys.exit(main())
