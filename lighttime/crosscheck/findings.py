"""From a hypothesis to findings: amplitude, sigma, meaning, probability of a chance find."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import inf, sqrt

import numpy as np

from lighttime.crosscheck import CHANCE, MOST
from lighttime.crosscheck.chance import of_any, tail
from lighttime.crosscheck.evidence import Folding
from lighttime.crosscheck.search import improved, rivals, search
from lighttime.crosscheck.selection import Hypothesis, Trial
from lighttime.crosscheck.suspects import Suspect
from lighttime.vectors import Array

ODDS = 100.0
"""Explanations that are less than so many times less probable than the best are told with it."""

ROWS_PER_FINDING = 4

VISIBLE = 4.0
"""Length of a signature, in sigmas, below which no amplitude that makes sense can be seen."""


@dataclass(frozen=True)
class Finding:
    """A choice of the other program, found in the differences.

    Attributes
    ----------
    name, family, says, look_for : str
        Of the suspect.
    amplitude : float
        1 where the choice was made as described; for a free offset in `unit`.
    sigma : float
        Of the amplitude when it is fitted, the other findings being as they are.
    fitted : float
        The amplitude when it is fitted.
    exact : float or None
        The exact value that the amplitude agrees with.
    reading : str
        What the amplitude means.
    unit : str
    effect_ps : float
        Root mean square of what it does to the ranges.
    without_ps : float
        Root mean square of what would remain without it.
    chance : float
        Probability that noise makes any of the suspects tried look as good.
    """

    name: str
    family: str
    says: str
    look_for: str
    amplitude: float
    sigma: float
    fitted: float
    exact: float | None
    reading: str
    unit: str
    effect_ps: float
    without_ps: float
    chance: float


@dataclass(frozen=True, eq=False)
class Inquiry:
    """A search and what came out, in terms of the columns of the signatures.

    Attributes
    ----------
    suspects : tuple of Suspect
    columns : tuple of int
        Suspects that could be seen, as indices into `suspects`.
    trial : Trial
        Its columns are those.
    best : Hypothesis
    chances : tuple of float
        Of each member of the best.
    fitted, sigmas : tuple of float
        Amplitude of each member when it is fitted, the others being as they are, and its sigma.
    rivals : tuple of Hypothesis
        Other explanations within `ODDS` of the best.
    """

    suspects: tuple[Suspect, ...]
    columns: tuple[int, ...]
    trial: Trial
    best: Hypothesis
    chances: tuple[float, ...]
    fitted: tuple[float, ...]
    sigmas: tuple[float, ...]
    rivals: tuple[Hypothesis, ...]

    @property
    def members(self) -> tuple[Suspect, ...]:
        """The suspects of the best explanation."""
        return self.named(self.best)

    def named(self, hypothesis: Hypothesis) -> tuple[Suspect, ...]:
        """The suspects of any of them."""
        return tuple(self.suspects[self.columns[c]] for c in hypothesis.support)


def inquire(
    signatures: Array,
    difference_ps: Array,
    sigma_ps: Array,
    sigma_is_known: bool,
    suspects: Sequence[Suspect],
    most: int = MOST,
    chance: float = CHANCE,
) -> Inquiry:
    """Search for the choices behind some differences.

    Parameters
    ----------
    signatures : ndarray, shape (n, m)
        ps at amplitude 1.
    difference_ps, sigma_ps : ndarray, shape (n,)
    sigma_is_known : bool
        Whether sigma is that of the ranges; or only a floor below which no noise can be.
    suspects : sequence of Suspect, length m
    most : int
        Findings.
    chance : float
        Probability of a chance find above which nothing is found.
    """
    folding = Folding(len(suspects))
    folding.add(signatures, difference_ps, sigma_ps)
    evidence = folding.evidence()
    lengths = np.sqrt(np.sum(evidence.signatures**2, axis=0))
    reach = np.array([reach_of(s) for s in suspects])
    columns = tuple(np.flatnonzero(lengths * reach > VISIBLE).tolist())
    trial = Trial(
        evidence.of(columns),
        [tuple(suspects[i].readings) for i in columns],
        np.array([suspects[i].plausible for i in columns]),
        max(len(suspects), 1),
        [suspects[i].block for i in columns],
    )
    most = min(most, (evidence.rows - 2) // ROWS_PER_FINDING, len(columns))
    best = trial.weigh(())
    if most > 0:
        best = search(trial, most)
    while True:
        near = rivals(trial, best, 2.0 * np.log(ODDS))
        best = near[0]
        judged = [_judged(trial, best, k, sigma_is_known) for k in range(len(best.support))]
        doubtful = [k for k, (_, _, p) in enumerate(judged) if p > chance]
        if not doubtful:
            break
        worst = max(doubtful, key=lambda k: judged[k][2])
        rest = tuple(c for k, c in enumerate(best.support) if k != worst)
        trial = replace(trial)  # which forgets what was weighed
        best = improved(trial, trial.weigh(rest), len(trial.units(rest)))
    own = [h for h in near if h.support != best.support and len(h.support) <= len(best.support)]
    return Inquiry(
        tuple(suspects), columns, trial, best,
        tuple(p for _, _, p in judged), tuple(a for a, _, _ in judged),
        tuple(s for _, s, _ in judged), tuple(own),
    )  # fmt: skip


def reach_of(suspect: Suspect) -> float:
    """The largest amplitude of a suspect that makes sense."""
    if suspect.is_offset:
        return 3.0 * suspect.plausible
    return max(abs(value) for value in suspect.readings)


def _judged(
    trial: Trial, best: Hypothesis, member: int, sigma_is_known: bool
) -> tuple[float, float, float]:
    """Fitted amplitude, its sigma and the probability of a chance find, for one member.

    The other members are as the hypothesis has them: exact or fitted.
    """
    a, y = trial.evidence.signatures, trial.evidence.differences
    held = [k for k, e in enumerate(best.exact) if e is not None and k != member]
    loose = [k for k, e in enumerate(best.exact) if e is None and k != member]
    rest = y - a[:, [best.support[k] for k in held]] @ best.amplitudes[held]
    own = trial.unit[:, best.support[member]]
    if loose:
        q, _ = np.linalg.qr(trial.unit[:, [best.support[k] for k in loose]])
        rest, own = rest - q @ (q.T @ rest), own - q @ (q.T @ own)
    length2 = float(own @ own)
    along = float(own @ rest) / length2
    squares = max(float(rest @ rest) - along**2 * length2, 0.0)
    free = trial.evidence.rows - len(loose) - 1
    noise = max(1.0, squares / max(free, 1)) ** 0.5
    sigma = noise / sqrt(length2)
    degrees = inf if sigma_is_known and noise == 1.0 else float(free)
    tried = max(trial.evidence.size - len(best.support) + 1, 1)
    scale = trial.lengths[best.support[member]]
    return along / scale, sigma / scale, of_any(tail(along / sigma, degrees), tried)


def findings(inquiry: Inquiry, signatures: Array, residual_ps: Array) -> tuple[Finding, ...]:
    """The members of the best explanation.

    Parameters
    ----------
    inquiry : Inquiry
    signatures : ndarray, shape (n, k)
        Of the members.
    residual_ps : ndarray, shape (n,)
        What remains after all.
    """
    found = []
    for k, suspect in enumerate(inquiry.members):
        amplitude = float(inquiry.best.amplitudes[k])
        effect = amplitude * signatures[:, k]
        found.append(
            Finding(
                name=suspect.name,
                family=suspect.family,
                says=suspect.says,
                look_for=suspect.look_for,
                amplitude=amplitude,
                sigma=inquiry.sigmas[k],
                fitted=inquiry.fitted[k],
                exact=inquiry.best.exact[k],
                reading=reading_of(suspect, amplitude, inquiry.best.exact[k]),
                unit=suspect.unit,
                effect_ps=rms(effect),
                without_ps=rms(residual_ps + effect),
                chance=inquiry.chances[k],
            )
        )
    return tuple(found)


def reading_of(suspect: Suspect, amplitude: float, exact: float | None) -> str:
    """What an amplitude of a suspect means, in words."""
    if suspect.is_offset:
        return "offset"
    if exact is not None:
        return suspect.readings[exact]
    near = min(suspect.readings, key=lambda value: abs(amplitude - value))
    if abs(amplitude - near) < 0.02 * abs(near):
        return f"{suspect.readings[near]}, nearly"
    return "part of it, or something like it"


def rms(values: Array) -> float:
    """Root mean square."""
    return float(np.sqrt(np.mean(values**2))) if len(values) else 0.0
