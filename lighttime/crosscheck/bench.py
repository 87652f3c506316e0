"""The other program's ranges beside ours: differences, circumstances, signatures."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np

from lighttime.constants import DAY, DEGREE, MJD_ZERO, TURN
from lighttime.crosscheck.ranges import Ranges
from lighttime.crosscheck.scene import PS, QUANTITIES, Scene
from lighttime.crosscheck.suspects import Suspect
from lighttime.earth.station import Station
from lighttime.errors import InputError, LighttimeError, UnknownNameError
from lighttime.model import Model
from lighttime.moon.reflector import Reflector, reflector
from lighttime.path.troposphere import LOWEST_ELEVATION_DEG, Weather
from lighttime.query import Query
from lighttime.timescales import Epoch
from lighttime.timescales.scales import tai_minus_utc
from lighttime.vectors import Array, dot, norm

BLOCK = 4096
"""Ranges solved together with all that suspects need."""

KEPT = 10_000
"""Ranges whose solution is kept from pass to pass: some 100 MB."""

SUSPECTS_AS_ONE_RANGE = 10
"""So many suspects take about the time of one range."""

MARGIN = 100.0 / DAY
"""Days at either end that suspects may need besides."""

Progress = Callable[[int, int], None]


class Meter:
    """How far a cross-check is, in ranges solved or what takes as long.

    Parameters
    ----------
    progress : callable or None
        Called with (done, in all).
    """

    def __init__(self, progress: Progress | None = None) -> None:
        self.progress = progress
        self.done, self.total = 0, 1

    def expect(self, more: int) -> None:
        """So much is still to come."""
        self.total = self.done + max(more, 1)

    def advance(self, ranges: int) -> None:
        """So much has been done."""
        self.done += ranges
        if self.progress is not None:
            self.total = max(self.total, self.done)
            self.progress(self.done, self.total)


@dataclass(frozen=True, eq=False)
class Group:
    """Rows that one query can hold.

    Attributes
    ----------
    station : Station
    array : Reflector
    tag : str
    wavelength_nm : float
    rows : ndarray of int
        By time.
    """

    station: Station
    array: Reflector
    tag: Any
    wavelength_nm: float
    rows: Any


@dataclass(frozen=True, eq=False)
class Circumstances:
    """Under which every range was taken; arrays are (n,)."""

    elevation_deg: Array
    hour_angle_h: Array
    phase_deg: Array
    """Elongation of the Moon from the Sun: 0 new, 180 full."""


@dataclass(frozen=True, eq=False)
class Base:
    """Ours, and the other's minus ours; arrays are (n,)."""

    difference_ps: Array
    ours_s: Array
    circumstances: Circumstances


@dataclass(frozen=True, eq=False)
class Bench:
    """Ranges, the stations and arrays they were taken between, and our model.

    Parameters
    ----------
    ranges : Ranges
    model : Model
    stations, arrays : mapping of str to Station, mapping of str to Reflector
        By plain name; a single one serves all rows when the table names none.
    tag, wavelength_nm
        For rows that do not say.
    """

    ranges: Ranges
    model: Model
    stations: Mapping[str, Station]
    arrays: Mapping[str, Reflector]
    tag: str = "transmit"
    wavelength_nm: float = 532.0
    variants: dict[Any, dict[Any, Model]] = field(default_factory=dict, repr=False)
    meter: Meter = field(default_factory=Meter, repr=False)
    kept: dict[Any, Scene] = field(default_factory=dict, repr=False, init=False)

    # -- groups and scenes -------------------------------------------------------------------

    def groups(self, rows: Any = None) -> list[Group]:
        """The rows by station, array, tag, wavelength and TAI-UTC."""
        ranges = self.ranges
        chosen = np.arange(len(ranges)) if rows is None else np.asarray(rows)
        when = ranges.when
        leap = np.asarray(tai_minus_utc(when.jd1, when.jd2))[chosen]
        keys: list[Any] = [np.round(leap, 1)]
        for values in (ranges.station, ranges.array, ranges.tag, ranges.wavelength_nm):
            keys.append(np.zeros(len(chosen)) if values is None else values[chosen])
        numbered = np.stack([np.unique(k, return_inverse=True)[1] for k in keys])
        _, first, member = np.unique(numbered, axis=1, return_index=True, return_inverse=True)
        jd = when.jd1[chosen] + when.jd2[chosen]
        found = []
        for k, index in enumerate(first):
            members = np.flatnonzero(member.ravel() == k)
            members = members[np.argsort(jd[members], kind="stable")]
            found.append(self._group(int(chosen[index]), chosen[members]))
        return found

    def _group(self, row: int, rows: Any) -> Group:
        ranges = self.ranges
        tag = self.tag if ranges.tag is None else str(ranges.tag[row])
        if tag not in QUANTITIES[ranges.quantity]:
            allowed = " or ".join(QUANTITIES[ranges.quantity])
            raise InputError("tag", tag, f"{allowed} where the {ranges.quantity} is compared")
        return Group(
            named("station", self.stations, ranges.station, row),
            named("array", self.arrays, ranges.array, row),
            tag,
            self.wavelength_nm
            if ranges.wavelength_nm is None
            else float(ranges.wavelength_nm[row]),
            rows,
        )

    def query(self, group: Group, rows: Any) -> Query:
        """Of some rows of a group."""
        when = self.ranges.when
        return Query(
            Epoch(when.jd1[rows], when.jd2[rows], "utc").to("tt"),
            group.station,
            group.array,
            group.tag,
            self._weather(rows),
            group.wavelength_nm,
            0.0,
        )

    def _weather(self, rows: Any) -> Weather | None:
        given = self.ranges.weather
        return Weather(**{name: values[rows] for name, values in given.items()}) if given else None

    def scenes(
        self, rows: Any = None, applied: Sequence[Suspect] = ()
    ) -> Iterator[tuple[Any, Scene]]:
        """Blocks of rows with what suspects are shown.

        Parameters
        ----------
        rows : array of int, optional
            All when not given.
        applied : sequence of Suspect
            Choices of the other program that are made here, too, one after another.
        """
        for group in self.groups(rows):
            for first in range(0, len(group.rows), BLOCK):
                some = group.rows[first : first + BLOCK]
                yield some, self._kept_scene(group, some, applied)

    def _kept_scene(self, group: Group, rows: Any, applied: Sequence[Suspect]) -> Scene:
        """A block that may be asked for again: solved once, as long as there are few."""
        key = tuple(s.name for s in applied), rows.tobytes()
        found = self.kept.get(key)
        if found is None:
            found = self.scene(group, rows, applied)
            if sum(scene.size for scene in self.kept.values()) + len(rows) <= KEPT:
                self.kept[key] = found
        return found

    def scene(self, group: Group, rows: Any, applied: Sequence[Suspect] = ()) -> Scene:
        """One block, after the choices that are applied."""
        scene = self._scene(self.model, self.query(group, rows), ())
        for k, suspect in enumerate(applied):
            assert suspect.choice is not None
            model, query = suspect.choice(scene)
            scene = self._scene(model, query, tuple(s.name for s in applied[: k + 1]))
        return scene

    def _scene(self, model: Model, query: Query, key: Any) -> Scene:
        return Scene(model, query, self.ranges.quantity, self.variants.setdefault(key, {}))

    # -- what is compared --------------------------------------------------------------------

    def less(self, wrong: Mapping[int, str], skip: bool) -> Bench:
        """Without some rows; InputError that names them unless they may be skipped."""
        return replace(self, ranges=self.ranges.without(wrong, skip)) if wrong else self

    def too_low(self) -> dict[int, str]:
        """Rows at which the array is too low for a troposphere."""
        low: dict[int, str] = {}
        geometry = replace(self, ranges=replace(self.ranges, weather={}))
        for rows, scene in geometry.scenes():
            for sine in scene.sines:
                angle = np.arcsin(sine) / DEGREE
                for i in np.flatnonzero(~(angle > LOWEST_ELEVATION_DEG)):
                    low[int(rows[i])] = (
                        f"the array is at an elevation of {angle[i]:.1f} deg; allowed with a "
                        f"troposphere: above {LOWEST_ELEVATION_DEG:g}"
                    )
        return low

    def not_covered(self) -> dict[int, str]:
        """Rows for which there is no ephemeris, no Earth orientation, no motion of the station."""
        wrong: dict[int, str] = {}
        for group in self.groups():
            when = self.ranges.when
            jd = (when.jd1 + when.jd2)[group.rows]
            for name, (first, last) in self._spans(group.station):
                for row in group.rows[~((jd > first + MARGIN) & (jd < last - MARGIN))]:
                    wrong[int(row)] = (
                        f"the epoch {str(when[int(row)])[:19]} is outside of {_day(first)} to "
                        f"{_day(last)}, what {name} covers"
                    )
        return wrong

    def _spans(self, station: Station) -> list[tuple[str, tuple[float, float]]]:
        """First and last Julian date of whatever does not reach for ever."""
        series, ephemeris = self.model.earth_orientation, self.model.ephemeris
        first, last = series.coverage
        spans = [
            (series.name, (MJD_ZERO + first, MJD_ZERO + last)),
            (ephemeris.name, ephemeris.coverage),
        ]
        motion = station.residual_motion
        if motion is not None and "residual_motion" not in self.model.omit:
            ends = [epoch.to("utc") for epoch in motion.coverage]
            first, last = (epoch.jd1 + epoch.jd2 for epoch in ends)
            spans.append((f"the residual motion of {station.name}", (first, last)))
        return spans

    def base(self, applied: Sequence[Suspect] = ()) -> Base:
        """Our ranges, the other's minus ours, and the circumstances."""
        count, ranges = len(self.ranges), self.ranges
        difference, ours, elevation, hours, phase = (np.empty(count) for _ in range(5))
        for rows, scene in self.scenes(None, applied):
            high, low = scene.seconds
            difference[rows] = PS * ((ranges.high_s[rows] - high) + (ranges.low_s[rows] - low))
            ours[rows] = high
            elevation[rows] = np.arcsin(scene.sines[0]) / DEGREE
            hours[rows] = hour_angle_h(scene)
            phase[rows] = phase_deg(scene)
            self.meter.advance(len(rows))
        return Base(difference, ours, Circumstances(elevation, hours, phase))

    def signatures(
        self,
        rows: Any,
        suspects: Sequence[Suspect],
        applied: Sequence[Suspect] = (),
    ) -> tuple[Array, Array, dict[str, str]]:
        """What every suspect does to some rows.

        Returns
        -------
        signatures : ndarray, shape (len(rows), len(suspects))
            In ps at amplitude 1. Zero for suspects that could not be tested.
        difference_ps : ndarray, shape (len(rows),)
            The other's minus ours, with the applied choices made.
        untested : dict of str to str
            Why a suspect could not be tested.
        """
        place = {int(row): k for k, row in enumerate(rows)}
        table = np.zeros((len(rows), len(suspects)))
        difference = np.empty(len(rows))
        untested: dict[str, str] = {}
        for some, scene in self.scenes(rows, applied):
            at = [place[int(row)] for row in some]
            high, low = scene.seconds
            ranges = self.ranges
            difference[at] = PS * ((ranges.high_s[some] - high) + (ranges.low_s[some] - low))
            for k, suspect in enumerate(suspects):
                if suspect.name in untested:
                    continue
                try:
                    table[at, k] = suspect.effect(scene)
                except LighttimeError as error:
                    untested[suspect.name] = str(error)
            self.meter.advance(len(some) * (1 + len(suspects) // SUSPECTS_AS_ONE_RANGE))
        for k, suspect in enumerate(suspects):
            if suspect.name in untested or not np.all(np.isfinite(table[:, k])):
                table[:, k] = 0.0
                untested.setdefault(suspect.name, "not finite on these ranges")
            elif not table[:, k].any():
                untested[suspect.name] = "nothing in these ranges depends on it"
        return table, difference, untested


def named(what: str, known: Mapping[str, Any], column: Any, row: int) -> Any:
    """The station or array of a row."""
    if column is None:
        if len(known) == 1:
            return next(iter(known.values()))
        names = [each.name for each in known.values()]
        raise InputError(what, names, f"one, or a column {what!r} in the table that says which")
    name = str(column[row])
    found = known.get(plain(name))
    if found is not None:
        return found
    if what == "array":
        return reflector(name)
    raise UnknownNameError(what, name, [each.name for each in known.values()])


def by_name(what: str, things: Any, kind: type) -> dict[str, Any]:
    """One thing, several, or a mapping from names, as a mapping from plain names."""
    if things is None:
        return {}
    if isinstance(things, Mapping):
        pairs = list(things.items())
    else:
        several = things if isinstance(things, (list, tuple)) else [things]
        pairs = [(getattr(each, "name", each), each) for each in several]
    found = {}
    for name, thing in pairs:
        thing = reflector(thing) if kind is Reflector and isinstance(thing, str) else thing
        if not isinstance(thing, kind):
            raise InputError(what, thing, f"a {kind.__name__}, several, or a mapping from names")
        found[plain(str(name))] = thing
    return found


def plain(name: str) -> str:
    """A name without case, spaces and hyphens."""
    return "".join(character for character in name.lower() if character.isalnum())


def hour_angle_h(scene: Scene) -> Array:
    """Local hour angle of the ray at transmission, -12 to 12 h, west positive."""
    x, y, _ = np.einsum("ij...,i...->j...", scene.to_gcrs1, scene.legs.up.direction)
    angle = scene.station.longitude_rad - np.arctan2(y, x)
    hours: Array = (np.mod(angle / TURN + 0.5, 1.0) - 0.5) * 24.0
    return hours


def phase_deg(scene: Scene) -> Array:
    """Elongation of the Moon from the Sun, counted from new moon, 0 to 360 degrees."""
    moon, sun = (scene.geocentric(body, scene.t1) for body in ("moon", "sun"))
    angle = np.arccos(np.clip(dot(moon, sun) / (norm(moon) * norm(sun)), -1.0, 1.0))
    # waxing: the Moon is east of the Sun
    east = moon[1] * sun[0] - moon[0] * sun[1]
    return np.where(east > 0.0, angle, TURN - angle) / DEGREE


def _day(jd: float) -> str:
    return str(Epoch(min(max(jd, 1721426.0), 5373484.0), 0.0, "tdb").isoformat(0))[:10]
