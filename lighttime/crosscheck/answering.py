"""From differences to an explanation: search, apply what is large, set aside what stands apart."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from itertools import pairwise
from typing import Any

import numpy as np

from lighttime.crosscheck.bench import Bench
from lighttime.crosscheck.findings import Inquiry, inquire, rms
from lighttime.crosscheck.noise import standing_apart
from lighttime.crosscheck.suspects import Suspect
from lighttime.vectors import Array

MOST_SEARCHED = 20_000
"""Rows that the search uses: evenly over stations, arrays and time. All rows are compared."""

MOST_APPLIED = 3
"""Large choices that are applied one after another."""

AS_CHOSEN = 0.02
"""An amplitude so close to 1 is a large choice made outright."""

RATE = "epoch_offset"
"""The suspect whose signature is the rate of the range."""


@dataclass(frozen=True, eq=False)
class Question:
    """What is asked: ranges, suspects, noise, and when a find is none."""

    bench: Bench
    suspects: tuple[Suspect, ...]
    sigma_ps: Array
    stated: bool
    most: int
    chance: float


@dataclass(frozen=True, eq=False)
class Applied:
    """A choice that was applied before the search went on, and how it was found."""

    suspect: Suspect
    fitted: float
    sigma: float
    chance: float


@dataclass(frozen=True, eq=False)
class Answered:
    """What the search found, and what it leaves of all rows.

    Attributes
    ----------
    inquiry : Inquiry
    applied : tuple of Applied
    signatures : ndarray, shape (n, k)
        Of the members of the inquiry's best explanation.
    applied_effects : ndarray, shape (n, a)
        Of the applied choices.
    residual_ps : ndarray, shape (n,)
    apart : ndarray of bool, shape (n,)
    searched : int
    untested : mapping of str to str
    ps_per_us : float
        What a microsecond of the epoch changes, rms.
    """

    inquiry: Inquiry
    applied: tuple[Applied, ...]
    signatures: Array
    applied_effects: Array
    residual_ps: Array
    apart: Any
    searched: int
    untested: Mapping[str, str]
    ps_per_us: float


def expected(count: int) -> int:
    """About how much there is to do for so many rows, in ranges."""
    return 2 * count + 12 * min(count, MOST_SEARCHED)


def answered(question: Question) -> Answered:
    """Search; set aside what stands apart; search again."""
    apart = np.zeros(len(question.bench.ranges), dtype=bool)
    found = _answered(question, apart)
    for _ in range(2):
        outside = standing_apart(found.residual_ps, question.sigma_ps) | apart
        if np.array_equal(outside, apart) or outside.mean() > 0.05:
            break
        apart = outside
        found = _answered(question, apart)
    return found


def _answered(question: Question, apart: Any) -> Answered:
    bench = question.bench
    rows = _evenly(bench, ~apart)
    applied: tuple[Applied, ...] = ()
    while True:
        made = [a.suspect for a in applied]
        names = {s.name for s in made}
        tried = tuple(s for s in question.suspects if s.name not in names)
        table, difference, untested = bench.signatures(rows, tried, made)
        inquiry = inquire(
            table, difference, question.sigma_ps[rows], question.stated, tried, question.most,
            question.chance,
        )  # fmt: skip
        large = _large(inquiry, table)
        if large is None or len(applied) == MOST_APPLIED:
            break
        applied = (*applied, large)
    everything = np.arange(len(bench.ranges))
    members = inquiry.members
    signatures, difference, _ = bench.signatures(everything, members, made)
    steps = [bench.base(made[:k]).difference_ps for k in range(len(made))] + [difference]
    effects = [before - after for before, after in pairwise(steps)]
    return Answered(
        inquiry=inquiry,
        applied=applied,
        signatures=signatures,
        applied_effects=np.stack(effects, axis=1) if effects else np.empty((len(everything), 0)),
        residual_ps=difference - signatures @ inquiry.best.amplitudes,
        apart=apart,
        searched=len(rows),
        untested=untested,
        ps_per_us=max(
            (rms(table[:, k]) for k, s in enumerate(tried) if s.name == RATE), default=0.0
        ),
    )


def _large(inquiry: Inquiry, signatures: Array) -> Applied | None:
    """The largest choice among the members that is to be applied rather than added."""
    best = inquiry.best
    found = [
        (rms(signatures[:, inquiry.columns[column]]), k)
        for k, column in enumerate(best.support)
        if inquiry.members[k].choice is not None and abs(best.amplitudes[k] - 1.0) < AS_CHOSEN
    ]
    if not found:
        return None
    _, k = max(found)
    return Applied(inquiry.members[k], inquiry.fitted[k], inquiry.sigmas[k], inquiry.chances[k])


def _evenly(bench: Bench, wanted: Any) -> Any:
    """Rows for the search: all, or evenly over each group in time."""
    groups = [g.rows[wanted[g.rows]] for g in bench.groups()]
    total = sum(len(g) for g in groups)
    if total <= MOST_SEARCHED:
        return np.sort(np.concatenate(groups))
    chosen = []
    for rows in groups:
        count = max(1, round(MOST_SEARCHED * len(rows) / total))
        chosen.append(rows[np.linspace(0, len(rows) - 1, min(count, len(rows))).astype(int)])
    return np.unique(np.concatenate(chosen))
