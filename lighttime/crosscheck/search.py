"""The search through hypotheses: from the strongest suspect on, with exchanges."""

from __future__ import annotations

from collections.abc import Sequence
from math import inf

import numpy as np

from lighttime.crosscheck import MOST
from lighttime.crosscheck.selection import HOPELESS, SAME, Exact, Hypothesis, Support, Trial
from lighttime.vectors import Array

BEAM = 8
"""Hypotheses of each size that are followed, by score and by what they leave."""

BRANCHES = 6
"""Suspects tried next on each, by either measure: free gain and exact gain."""

EXCHANGES = 12
"""Suspects tried in the place of each that was found."""

PAIRS = 12
"""Pairs looked at from the start."""

BLOCKS = 3
"""Blocks of offsets tried next on each."""

CLOSE = 0.01
"""Part of an exact amplitude within which a free one is worth a look as an exact one."""


def search(trial: Trial, most: int = MOST) -> Hypothesis:
    """The most probable hypothesis that can be found.

    Hypotheses grow by the suspects that promise most; the best of each size are followed, and
    pairs of suspects are looked at together from the start, since the strongest single one is
    often none of the two that are there. The best is then improved by exchanging, dropping and
    adding suspects until nothing helps.

    Parameters
    ----------
    trial : Trial
        Keeps all hypotheses that were weighed.
    most : int
        Suspects in a hypothesis.
    """
    best = trial.weigh(())
    followed = [best]
    for size in range(1, most + 1):
        supports = grown(trial, followed, BRANCHES, most)
        if size == 2:
            supports |= set(promising_pairs(trial, PAIRS))
        if not supports:
            break
        weighed = sorted(trial.weigh_all(sorted(supports)), key=lambda h: h.score)
        # the best by score, and the best by what they leave: the first steps of a longer way
        by_squares = sorted(weighed, key=lambda h: h.squares)
        followed = list({h.support: h for h in (*weighed[:BEAM], *by_squares[:BEAM])}.values())
        if weighed[0].score < best.score:
            best = weighed[0]
        elif weighed[0].score > best.score + HOPELESS and size > 2:
            break
    return improved(trial, best, most)


def rivals(trial: Trial, best: Hypothesis, within: float) -> list[Hypothesis]:
    """Every other hypothesis whose score is within so much of the best, the best first.

    All exchanges of one finding (or block of findings) for another suspect are weighed that could
    be among them, so the list is complete as to single exchanges. If one is better than the
    best, it is the first.
    """
    for unit in trial.units(best.support):
        smaller = trial.weigh(without(best.support, unit))
        columns = promising(trial, smaller, trial.evidence.size, best.noise**2 * within * 2.0)
        trial.weigh_all([tuple(sorted((*smaller.support, column))) for column in columns])
    scored = sorted(trial.hypotheses, key=lambda h: h.score)
    limit = scored[0].score + within
    return [h for h in scored if h.score <= limit]


def improved(trial: Trial, best: Hypothesis, most: int = MOST) -> Hypothesis:
    """Exchange, drop and add suspects until nothing makes the hypothesis more probable."""
    while True:
        parts = {*trial.units(best.support), *((column,) for column in best.support)}
        smaller = sorted({without(best.support, part) for part in parts})
        starts = [*trial.weigh_all(smaller), best]
        supports = set(smaller) | grown(trial, starts, EXCHANGES, most)
        found = min(trial.weigh_all(sorted(supports)), key=lambda h: h.score, default=best)
        if found.score >= best.score:
            return best
        best = found


def without(support: Support, part: Support) -> Support:
    """The others."""
    return tuple(column for column in support if column not in part)


def grown(trial: Trial, hypotheses: Sequence[Hypothesis], branches: int, most: int) -> set[Support]:
    """Hypotheses with one more of the most promising suspects, or with a block of offsets."""
    found = set()
    for h in hypotheses:
        more: list[Support] = [(column,) for column in promising(trial, h, branches)]
        more += promising_blocks(trial, h, BLOCKS)
        found |= {tuple(sorted((*h.support, *columns))) for columns in more}
    return {support for support in found if len(trial.units(support)) <= most}


def promising_blocks(trial: Trial, hypothesis: Hypothesis, count: int) -> list[Support]:
    """Blocks of offsets that would explain most of what a hypothesis leaves."""
    rest, left = _left_by(trial, hypothesis.support, hypothesis.amplitudes, hypothesis.exact)
    blocks: dict[str, list[int]] = {}
    for column, block in enumerate(trial.blocks):
        if block and column not in hypothesis.support:
            blocks.setdefault(block, []).append(column)
    gains = []
    for columns in blocks.values():
        if len(columns) > 1:
            q, r = np.linalg.qr(left[:, columns])
            if len(r) == len(columns) and np.abs(np.diag(r)).min() > SAME:
                gains.append((float(np.sum((q.T @ rest) ** 2)), tuple(columns)))
    return [columns for _, columns in sorted(gains, reverse=True)[:count]]


def promising(trial: Trial, hypothesis: Hypothesis, count: int, within: float = inf) -> list[int]:
    """Suspects that would explain most of what a hypothesis leaves, free or exact.

    At most `count` by either measure, whose free gain is within so much of the best.

    Where a free amplitude is close to an exact one, it is asked twice: a strong signature a
    little off its exact amplitude hides a weak one that looks the same.
    """
    support, amplitudes = hypothesis.support, hypothesis.amplitudes
    found = _promising(trial, support, amplitudes, hypothesis.exact, count, within)
    rounded = tuple(
        _rounded(trial.readings[column], amplitude) if value is None else value
        for column, amplitude, value in zip(support, amplitudes, hypothesis.exact, strict=True)
    )
    if rounded != hypothesis.exact:
        there = [a if e is None else e for a, e in zip(amplitudes, rounded, strict=True)]
        found += _promising(trial, support, np.array(there), rounded, count, within)
    return list(dict.fromkeys(found))


def _rounded(readings: Sequence[float], amplitude: float) -> float | None:
    """The reading that an amplitude is close to."""
    for value in readings:
        if abs(amplitude - value) < CLOSE * abs(value):
            return value
    return None


def _promising(
    trial: Trial, support: Support, amplitudes: Array, exact: Exact, count: int, within: float
) -> list[int]:
    rest, left = _left_by(trial, support, amplitudes, exact)
    along = left.T @ rest
    own = np.maximum(np.sum(left**2, axis=0), 1e-20)
    free = along**2 / own
    steps = _steps(trial)
    as_exact = np.max(2.0 * steps * along[:, None] - steps**2 * own[:, None], axis=1)
    members = list(support)
    free[members] = as_exact[members] = -inf
    order = [*np.argsort(-free)[:count], *np.argsort(-as_exact)[:count]]
    enough = max(0.0, float(np.max(free, initial=0.0)) - within)
    return [int(j) for j in dict.fromkeys(order) if free[j] > enough]


def _left_by(
    trial: Trial, support: Support, amplitudes: Array, exact: Exact
) -> tuple[Array, Array]:
    """What a hypothesis leaves of the differences, and of the unit signatures of all suspects."""
    members = list(support)
    loose = [c for c, e in zip(support, exact, strict=True) if e is None]
    rest = trial.evidence.differences - trial.evidence.signatures[:, members] @ amplitudes
    left = trial.unit
    if loose:
        q, _ = np.linalg.qr(left[:, loose])
        left = left - q @ (q.T @ left)
        rest = rest - q @ (q.T @ rest)
    return rest, left


def _steps(trial: Trial) -> Array:
    """Exact amplitudes in lengths of the signatures, shape (m, readings); zero for none."""
    most = max((len(values) for values in trial.readings), default=0)
    steps = np.zeros((trial.evidence.size, max(most, 1)))
    for row, values in zip(steps, trial.readings, strict=True):
        row[: len(values)] = values
    return steps * trial.lengths[:, None]


def promising_pairs(trial: Trial, count: int) -> list[Support]:
    """Pairs of suspects that explain most together, both free."""
    cosine, along = trial.unit.T @ trial.unit, trial.unit.T @ trial.evidence.differences
    apart = np.maximum(1.0 - cosine**2, 1e-7)
    gain = along[:, None] ** 2 + along[None, :] ** 2
    gain = (gain - 2.0 * cosine * np.outer(along, along)) / apart
    first, second = np.triu_indices(len(along), 1)
    best = np.argsort(-gain[first, second])[:count]
    return [(int(first[b]), int(second[b])) for b in best]
