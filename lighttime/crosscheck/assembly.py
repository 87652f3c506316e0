"""The report, put together from what the search found."""

from __future__ import annotations

import numpy as np

from lighttime.constants import J2000
from lighttime.crosscheck.answering import Answered, Question
from lighttime.crosscheck.bench import Base, Bench
from lighttime.crosscheck.findings import VISIBLE, Finding, findings, reach_of, rms
from lighttime.crosscheck.noise import rest, rounding_of, roundings
from lighttime.crosscheck.report import Report
from lighttime.crosscheck.rungs import compare
from lighttime.crosscheck.separation import Setting, inseparable
from lighttime.model import Model
from lighttime.vectors import Array

RUNG_TOLERANCE_PS = 0.01
"""Effect on the range above which a rung departs."""

NOISE_AS_STATED = 1.3
"""Noise so many times the stated one is worth a note."""


def assembled(
    question: Question, base: Base, found: Answered, tolerance_ps: float | None
) -> Report:
    """The report of what was found."""
    bench, ranges, inquiry = question.bench, question.bench.ranges, found.inquiry
    good = ~found.apart
    noise = inquiry.best.noise
    sigma = question.sigma_ps if question.stated else question.sigma_ps * noise
    circumstances = base.circumstances
    orders = {
        "time": ranges.when.jd1 + ranges.when.jd2,
        "hour angle": circumstances.hour_angle_h,
        "elevation": circumstances.elevation_deg,
        "phase of the Moon": circumstances.phase_deg,
    }
    left = rest(found.residual_ps[good], sigma[good], {k: v[good] for k, v in orders.items()})
    all_findings = (
        *_applied_findings(found),
        *findings(inquiry, found.signatures, found.residual_ps),
    )
    setting = Setting(
        bench,
        circumstances,
        [a.suspect for a in found.applied],
        float(np.median(question.sigma_ps)),
    )
    lengths = np.sqrt(np.sum(inquiry.trial.evidence.signatures**2, axis=0))
    seen = {
        inquiry.suspects[i].name
        for i, length in zip(inquiry.columns, lengths, strict=True)
        if length * reach_of(inquiry.suspects[i]) > VISIBLE * noise
    }
    groups = bench.groups()
    jd = np.round((ranges.when.jd1 - J2000 + ranges.when.jd2) * 86400e6)
    return Report(
        ranges=ranges,
        station=", ".join(dict.fromkeys(g.station.name for g in groups)),
        array=", ".join(dict.fromkeys(g.array.name for g in groups)),
        model=_model_words(bench.model),
        difference_ps=base.difference_ps,
        residual_ps=found.residual_ps,
        sigma_ps=sigma,
        sigma_stated=question.stated,
        findings=tuple(sorted(all_findings, key=lambda f: -f.effect_ps)),
        inseparable=inseparable(inquiry, setting),
        rest=left,
        rounding=rounding_of(
            left.rms_ps, roundings(float(np.median(ranges.last_digit_s)), found.ps_per_us)
        ),
        apart=found.apart,
        rungs=compare(bench, RUNG_TOLERANCE_PS),
        suspects={s.name: s.says for s in question.suspects},
        untested=found.untested,
        invisible=tuple(
            s.name for s in inquiry.suspects if s.name not in seen and s.name not in found.untested
        ),
        signatures=_signatures(found),
        circumstances=circumstances,
        searched=found.searched,
        repeated=len(jd) - len(np.unique(jd)),
        tolerance_ps=tolerance_ps,
        notes=_notes(bench, base, question, found),
    )


def _applied_findings(found: Answered) -> list[Finding]:
    """The choices that were applied before the search went on."""
    told = []
    for k, applied in enumerate(found.applied):
        suspect, effect = applied.suspect, found.applied_effects[:, k]
        told.append(
            Finding(
                name=suspect.name,
                family=suspect.family,
                says=suspect.says,
                look_for=suspect.look_for,
                amplitude=1.0,
                sigma=applied.sigma,
                fitted=applied.fitted,
                exact=1.0,
                reading=suspect.readings[1.0],
                unit="",
                effect_ps=rms(effect),
                without_ps=rms(found.residual_ps + effect),
                chance=applied.chance,
            )
        )
    return told


def _signatures(found: Answered) -> dict[str, Array]:
    """Of every finding, by name."""
    made = {a.suspect.name: found.applied_effects[:, k] for k, a in enumerate(found.applied)}
    members = found.inquiry.members
    return made | {s.name: found.signatures[:, k] for k, s in enumerate(members)}


def _model_words(model: Model) -> str:
    omit = sorted(model.omit)
    left_out = f", without {', '.join(omit)}" if omit else ""
    return f"{model.ephemeris.name}, {model.earth_orientation.name}{left_out}"


def _notes(bench: Bench, base: Base, question: Question, found: Answered) -> tuple[str, ...]:
    """What a reader has to know besides."""
    ranges, count = bench.ranges, len(bench.ranges)
    notes = []
    if ranges.unreadable:
        notes.append(f"{len(ranges.unreadable)} rows were left out (see `ranges.unreadable`)")
    if found.searched < count - np.count_nonzero(found.apart):
        notes.append(
            f"the search used {found.searched} of {count} rows, evenly over stations, arrays and "
            "time; differences and residuals are of all rows"
        )
    noise = found.inquiry.best.noise
    if question.stated and noise > NOISE_AS_STATED:
        notes.append(f"the noise is {noise:.1f} times what was stated")
    low = int(np.count_nonzero(base.circumstances.elevation_deg < 0.0))
    if low:
        notes.append(f"{low} ranges are to an array below the horizon")
    if len(found.inquiry.best.support) == question.most:
        notes.append(f"{question.most} findings is the most that was looked for at once")
    if not ranges.weather and "troposphere" not in bench.model.omit:
        notes.append("no weather was given: ours has no troposphere")
    return tuple(notes)
