"""Parts of the error budget: gravity, time, arithmetic, and what the user brings."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from lighttime.uncertainty.case import Case, Contribution


def other(case: Case) -> Iterator[Contribution]:
    """All of them."""
    sizes = case.sigmas
    rows = case.rows(("gamma",), (sizes.gamma,))
    yield Contribution("gamma", "sun_gravity", rows, sizes.source("gamma"))
    seconds = np.ravel(case.answer.seconds)[None, :]
    if case.has("clock"):
        rows = sizes.tdb_rate * seconds
        yield Contribution("tdb_rate", "clock", rows, sizes.source("tdb_rate"))
    for name in ("epoch_s", "clock_rate"):
        sigma = getattr(sizes, name)
        if sigma > 0.0:
            rows = case.rows((name,), (sigma,))
            yield Contribution(name.removesuffix("_s"), "geometry", rows, "supplied")
    rows = np.full_like(seconds, sizes.arithmetic_s)
    yield Contribution("arithmetic", "geometry", rows, sizes.source("arithmetic_s"))
    yield from _own_terms(case)
    yield from _covariance(case)


def _own_terms(case: Case) -> Iterator[Contribution]:
    """Delay terms whose parameters have sigmas."""
    for term in case.answer.model.delays:
        if term.sigmas and case.has(term.name):
            given = dict(term.sigmas)
            names = [f"{term.name}.{key}" for key in given]
            rows = case.rows(names, tuple(given.values()))
            yield Contribution(term.name, term.name, rows, "supplied")


def _covariance(case: Case) -> Iterator[Contribution]:
    """Correlated parameters: the independent changes that make up their covariance."""
    covariance = case.sigmas.covariance
    if covariance is not None:
        rows = covariance.root.T @ np.stack([case.slope(name) for name in covariance.names])
        source = f"supplied: {', '.join(covariance.names)}"
        yield Contribution("covariance", "geometry", rows, source)
