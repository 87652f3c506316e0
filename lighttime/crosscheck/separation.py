"""Explanations that these ranges cannot tell apart, and the ranges that could."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from math import exp
from typing import Any

import numpy as np

from lighttime.constants import JULIAN_YEAR, MJD_ZERO
from lighttime.crosscheck.bench import Bench, Circumstances, hour_angle_h, phase_deg
from lighttime.crosscheck.findings import Inquiry
from lighttime.crosscheck.scene import Scene
from lighttime.crosscheck.selection import Hypothesis
from lighttime.crosscheck.suspects import Suspect
from lighttime.earth.station import Station
from lighttime.errors import LighttimeError
from lighttime.moon.reflector import reflectors
from lighttime.path.weather import Weather
from lighttime.query import Query
from lighttime.timescales import Epoch
from lighttime.vectors import Array

APART_SIGMA = 5.0
"""Two explanations so far apart are told apart."""

INSTANTS = 600
"""Of the year in which new ranges are thought to be taken, day and night."""

MORE = 50
"""Ranges that new data are thought to have."""

MOST_NEEDED = 20_000
"""More ranges than this are none that anybody takes."""

LOWEST_DEG = 15.0

MOST_RIVALS = 8


@dataclass(frozen=True)
class Inseparable:
    """Explanations that these ranges cannot tell apart.

    Attributes
    ----------
    findings : tuple of str
        What is taken as found.
    rivals : tuple of tuples of str
        What would explain the differences nearly as well in their place.
    odds : tuple of float
        How many times less probable each is.
    apart_sigma : tuple of float
        How far the ranges by each are from those by the findings, in sigmas, all rows together.
    singular_value : tuple of float
        The smallest of the signatures involved, each of length 1, the other findings taken out:
        0 for signatures that are the same, 1 for such that have nothing in common.
    advice : tuple of str
        New ranges that would tell them apart.
    """

    findings: tuple[str, ...]
    rivals: tuple[tuple[str, ...], ...]
    odds: tuple[float, ...]
    apart_sigma: tuple[float, ...]
    singular_value: tuple[float, ...]
    advice: tuple[str, ...]

    @property
    def names(self) -> tuple[str, ...]:
        """All suspects of the group."""
        members = (*self.findings, *(name for rival in self.rivals for name in rival))
        return tuple(dict.fromkeys(members))


@dataclass(frozen=True, eq=False)
class Possible:
    """Ranges that could be taken: in words, whether to arrays in the data, and their scene."""

    words: str
    known: bool
    scene: Scene
    circumstances: Circumstances


@dataclass(frozen=True, eq=False)
class Setting:
    """What advice is made from.

    Attributes
    ----------
    bench : Bench
    circumstances : Circumstances
        Of its ranges.
    applied : sequence of Suspect
        Choices that were applied.
    unit_ps : float
        The unit of the evidence: the noise that was stated, or its floor.
    """

    bench: Bench
    circumstances: Circumstances
    applied: Sequence[Suspect]
    unit_ps: float

    @cached_property
    def possible(self) -> list[Possible]:
        """A year of ranges that could be taken, around the middle of the data.

        To the arrays in the data, to the others, and to one of them from a second station.
        """
        bench = self.bench
        groups = bench.groups()
        largest = max(groups, key=lambda g: len(g.rows))
        query = replace(
            bench.query(largest, largest.rows[:1]), when=_year(bench), weather=_usual_weather(bench)
        )
        known = {g.array.name: g.array for g in groups}
        asked = [
            (f"to {name}", name in known, replace(query, reflector=array))
            for name, array in ({a.name: a for a in reflectors()} | known).items()
        ]
        second = replace(query, station=_second(largest.station))
        asked.append(("from a second station", False, second))
        found = (self._possible(*each) for each in asked)
        return [each for each in found if each is not None]

    def _possible(self, words: str, known: bool, query: Query) -> Possible | None:
        """Those of the instants at which the Moon is high; None if our model cannot answer."""
        model, quantity = self.bench.model, self.bench.ranges.quantity
        try:
            low = Scene(model, replace(query, weather=None), quantity)
            high = np.arcsin(np.minimum(*low.sines)) > np.radians(LOWEST_DEG)
            scene = Scene(model, replace(query, when=query.when[high]), quantity)
            for suspect in self.applied:
                assert suspect.choice is not None
                scene = Scene(*suspect.choice(scene), quantity)
            elevation = np.degrees(np.arcsin(scene.sines[0]))
        except LighttimeError:
            return None
        seen = Circumstances(elevation, hour_angle_h(scene), phase_deg(scene))
        return Possible(words, known, scene, seen)


def inseparable(inquiry: Inquiry, setting: Setting) -> tuple[Inseparable, ...]:
    """Groups of explanations, one for each set of findings that have rivals."""
    groups: dict[tuple[int, ...], list[Hypothesis]] = {}
    for rival in inquiry.rivals:
        ours = tuple(c for c in inquiry.best.support if c not in rival.support)
        theirs = tuple(c for c in rival.support if c not in inquiry.best.support)
        if ours and theirs:
            groups.setdefault(ours, []).append(rival)
    found = []
    alone = {ours[0] for ours in groups if len(ours) == 1}
    for ours, rivals in sorted(groups.items(), key=lambda item: len(item[0])):
        if len(ours) > 1 and alone & set(ours):
            continue  # a member has rivals of its own: that says it
        rivals = rivals[:MOST_RIVALS]
        named = tuple(
            tuple(_name(inquiry, c) for c in r.support if c not in inquiry.best.support)
            for r in rivals
        )
        found.append(
            Inseparable(
                findings=tuple(_name(inquiry, c) for c in ours),
                rivals=named,
                odds=tuple(exp(0.5 * (r.score - inquiry.best.score)) for r in rivals),
                apart_sigma=tuple(_apart(inquiry, r) for r in rivals),
                singular_value=tuple(_smallest(inquiry, ours, r) for r in rivals),
                advice=_advice(inquiry, rivals[0], setting),
            )
        )
    return tuple(found)


def _name(inquiry: Inquiry, column: int) -> str:
    name: str = inquiry.suspects[inquiry.columns[column]].name
    return name


def _explained(inquiry: Inquiry, hypothesis: Hypothesis) -> Array:
    signatures = inquiry.trial.evidence.signatures
    explained: Array = signatures[:, list(hypothesis.support)] @ hypothesis.amplitudes
    return explained


def _apart(inquiry: Inquiry, rival: Hypothesis) -> float:
    off = _explained(inquiry, inquiry.best) - _explained(inquiry, rival)
    return float(np.linalg.norm(off)) / inquiry.best.noise


def _smallest(inquiry: Inquiry, ours: tuple[int, ...], rival: Hypothesis) -> float:
    unit = inquiry.trial.unit
    common = [c for c in inquiry.best.support if c not in ours]
    theirs = [c for c in rival.support if c not in inquiry.best.support]
    involved = unit[:, [*ours, *theirs]]
    if common:
        q, _ = np.linalg.qr(unit[:, common])
        involved = involved - q @ (q.T @ involved)
    lengths = np.linalg.norm(involved, axis=0)
    if lengths.min() < 1e-9:
        return 0.0
    return float(np.linalg.svd(involved / lengths, compute_uv=False)[-1])


# -- what would separate them ----------------------------------------------------------------------


@dataclass(frozen=True, eq=False)
class Plan:
    """Ranges that could be taken: in words, circumstances, and what suspects do to them."""

    words: str
    known: bool
    when: Epoch
    circumstances: Circumstances
    signatures: Array


def _advice(inquiry: Inquiry, rival: Hypothesis, setting: Setting) -> tuple[str, ...]:
    """What new ranges would tell a rival from the findings, best first."""
    best = inquiry.best
    columns = sorted({*best.support, *rival.support})
    suspects = [inquiry.suspects[inquiry.columns[c]] for c in columns]
    plans = _plans(setting, suspects)
    sigma = setting.unit_ps * best.noise
    # what the findings predict and the rival's exact amplitudes do not; its free ones are refitted
    weights = np.zeros(len(columns))
    for hypothesis, sign in ((best, 1.0), (rival, -1.0)):
        for c, amplitude, exact in zip(
            hypothesis.support, hypothesis.amplitudes, hypothesis.exact, strict=True
        ):
            if sign > 0.0 or exact is not None:
                weights[columns.index(c)] += sign * amplitude
    loose = [columns.index(c) for c, e in zip(rival.support, rival.exact, strict=True) if e is None]
    old = inquiry.trial.evidence.signatures[:, columns] / best.noise
    told = []
    for what, rows in _kinds(setting, plans):
        if len(rows) < 5:
            continue
        picked = rows[np.linspace(0, len(rows) - 1, MORE).astype(int)]
        stacked = np.concatenate([old, picked / sigma])
        target = stacked @ weights
        fit, *_ = np.linalg.lstsq(stacked[:, loose], target, rcond=1e-14)
        apart = float(np.linalg.norm(target - stacked[:, loose] @ fit))
        told.append((apart, what))
    told.sort(reverse=True)
    enough = [(apart, what) for apart, what in told if apart > APART_SIGMA]
    if not told:
        return ()
    if not enough:
        apart, what = told[0]
        needed = MORE * (APART_SIGMA / max(apart, 1e-3)) ** 2
        if needed > MOST_NEEDED:
            return ("no ranges would: the two do the same to all",)
        return (
            f"no {MORE} ranges would do; the best, {what}, bring the first of these {apart:.1f} "
            f"sigma away, and some {float(f'{needed:.1g}'):.0f} would do",
        )
    return tuple(
        f"{MORE} ranges {what} bring the first of these {apart:.0f} sigma away"
        for apart, what in enough[:3]
    )


def _plans(setting: Setting, suspects: Sequence[Suspect]) -> list[Plan]:
    """What suspects do to the ranges that could be taken."""
    plans = []
    for p in setting.possible:
        try:
            table = np.stack([s.effect(p.scene) for s in suspects], axis=1)
        except LighttimeError:
            continue
        plans.append(Plan(p.words, p.known, p.scene.query.when, p.circumstances, table))
    return plans


def _second(first: Station) -> Station:
    """A station elsewhere: in the other hemisphere, 70 degrees further east."""
    latitude, longitude = -0.7 * first.latitude_deg, (first.longitude_deg + 250.0) % 360.0 - 180.0
    return Station.from_geodetic("a second station", latitude, longitude, 1000.0)


def _year(bench: Bench) -> Epoch:
    """Instants spread over a year, all hours and all phases of the Moon."""
    jd = bench.ranges.when.jd1
    series, ephemeris = bench.model.earth_orientation.coverage, bench.model.ephemeris.coverage
    first = max(series[0] + MJD_ZERO, ephemeris[0]) + 2.0
    last = min(series[1] + MJD_ZERO, ephemeris[1]) - 2.0 - JULIAN_YEAR
    start = min(max(0.5 * (jd.min() + jd.max()) - 0.5 * JULIAN_YEAR, first), max(last, first))
    steps = np.arange(INSTANTS)
    day = np.floor(steps / INSTANTS * JULIAN_YEAR)
    return Epoch(np.floor(start) + 0.5 + day, np.mod(steps * 0.6180339887498949, 1.0), "utc").to(
        "tt"
    )


def _usual_weather(bench: Bench) -> Weather | None:
    given = bench.ranges.weather
    if not given:
        return None
    return Weather(**{name: float(np.median(values)) for name, values in given.items()})


def _kinds(setting: Setting, plans: Sequence[Plan]) -> list[tuple[str, Any]]:
    """Kinds of new ranges: words, and their signatures."""
    kinds: list[tuple[str, Any]] = []
    known = [p for p in plans if p.known]
    for plan in plans:
        if not plan.known:
            kinds.append((plan.words, plan.signatures))
    if not known:
        return kinds
    signatures = np.concatenate([p.signatures for p in known])
    kinds.append(("to the same arrays at all hour angles, phases and seasons", signatures))
    for words, asked in _gaps(setting):
        mask = np.concatenate([asked(p) for p in known])
        kinds.append((words, signatures[mask]))
    return kinds


def _gaps(setting: Setting) -> list[tuple[str, Any]]:
    """What the ranges do not cover: words, and a question to a plan."""
    circumstances = setting.circumstances
    hours, phase = circumstances.hour_angle_h, circumstances.phase_deg
    months = np.unique(_month(setting.bench.ranges.when))
    low, high = float(np.min(hours)), float(np.max(hours))
    asked: list[tuple[str, Any]] = [
        (
            f"at hour angles east of {low:+.1f} h",
            lambda p: p.circumstances.hour_angle_h < low - 0.5,
        ),
        (
            f"at hour angles west of {high:+.1f} h",
            lambda p: p.circumstances.hour_angle_h > high + 0.5,
        ),
    ]
    if len(months) < 10:
        names = ", ".join(MONTHS[m] for m in range(12) if m not in months)
        asked.append((f"in {names}", lambda p: ~np.isin(_month(p.when), months)))
    seen = np.zeros(12, dtype=bool)
    seen[(phase // 30.0).astype(int) % 12] = True
    if np.count_nonzero(seen) < 10:
        asked.append(
            (
                "at phases of the Moon that are missing",
                lambda p: ~seen[(p.circumstances.phase_deg // 30.0).astype(int) % 12],
            )
        )
    return asked


MONTHS = (
    "January", "February", "March", "April", "May", "June", "July", "August", "September",
    "October", "November", "December",
)  # fmt: skip


def _month(when: Epoch) -> Array:
    """Month of the year, 0 to 11, to a day or so."""
    years = (np.atleast_1d(when.jd1) + np.atleast_1d(when.jd2) - 2451544.5) / JULIAN_YEAR
    month: Array = np.floor(np.mod(years, 1.0) * 12.0).astype(int)
    return month
