"""Suspects: another time scale, another instant, another rotation angle."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, fields, replace
from functools import partial
from typing import Any

import numpy as np

from lighttime.constants import (
    ARCSECOND,
    DAY,
    EARTH_ROTATION_RATE,
    L_B,
    MJD_ZERO,
    TT_MINUS_TAI,
)
from lighttime.crosscheck.curves import EPHEMERIS_NODES, EPOCH_NODES, Curve
from lighttime.crosscheck.scene import QUANTITIES, Scene
from lighttime.crosscheck.suspects.suspect import Suspect
from lighttime.earth.series import EarthOrientation, PoleAndUT1
from lighttime.model import Model
from lighttime.query import Query
from lighttime.timescales.scales import tai_minus_utc, tai_to_utc
from lighttime.timescales.tdb import tdb_minus_tt
from lighttime.vectors import Array

AS_DESCRIBED = {1.0: "as described"}

GPS_MINUS_TAI = -19.0


# -- the tagged instant ----------------------------------------------------------------------------


def utc_minus_tai(scene: Scene) -> Array:
    """At the tagged instants, s."""
    tai1, tai2 = scene.tagged_tai
    return -np.asarray(tai_minus_utc(*tai_to_utc(tai1, tai2)))


def ut1_minus_tai(scene: Scene) -> Array:
    """At the tagged instants, as published (without sub-daily terms), s."""
    return np.asarray(scene.model.earth_orientation.at(*scene.tagged_tai).ut1_tai_s)


def tdb_minus_tai(scene: Scene) -> Array:
    """At the tagged instants, s."""
    tagged = scene.t1 if scene.query.tag != "receive" else scene.t3
    offset: Array = TT_MINUS_TAI + tagged.tdb_minus_tt
    return offset


def epoch_curve(scene: Scene) -> Curve:
    """The range as a function of a shift of the epochs."""
    return scene.shared(  # type: ignore[no-any-return]
        "epoch_curve",
        lambda: Curve.through(EPOCH_NODES, lambda s: scene.as_if(query=scene.later(s))),
    )


def ephemeris_curve(scene: Scene) -> Curve:
    """The range as a function of a shift of the time of the ephemeris."""
    return scene.shared(  # type: ignore[no-any-return]
        "ephemeris_curve",
        lambda: Curve.through(EPHEMERIS_NODES, lambda s: scene.as_if(*ephemeris_later(scene, s))),
    )


def tagged_at(scene: Scene, tag: Any) -> tuple[Model, Query]:
    """The instant taken as that of another event."""
    if tag not in QUANTITIES[scene.quantity]:
        return scene.model, scene.query
    return scene.model, replace(scene.query, tag=tag)


# -- the time of the ephemeris, the Earth's rotation being right -----------------------------------


@dataclass(frozen=True, eq=False, repr=False)
class Delayed(EarthOrientation):
    """A series of Earth orientation read `seconds` too early and corrected for it.

    Together with epochs that are `seconds` later it turns the Earth as it should be turned,
    while Sun, Moon and planets are where they are later.
    """

    seconds: float = 0.0

    @classmethod
    def of(cls, series: EarthOrientation, seconds: float) -> Delayed:
        """The same values, to be read late."""
        values = {field.name: getattr(series, field.name) for field in fields(series)}
        return cls(**values | {"name": f"{series.name}, {seconds:g} s late"}, seconds=seconds)

    def at(self, tai1: Any, tai2: Any) -> PoleAndUT1:
        """Pole and UT1 - TAI."""
        pole = super().at(tai1, np.asarray(tai2) - self.seconds / DAY)
        return replace(pole, ut1_tai_s=pole.ut1_tai_s - self.seconds)


def ephemeris_later(scene: Scene, seconds: float) -> tuple[Model, Query]:
    """TT, and TDB with it, ahead by some seconds; UT1 right."""

    def make(model: Model) -> Model:
        return replace(model, earth_orientation=Delayed.of(model.earth_orientation, seconds))

    return scene.variant(("ephemeris_later", seconds), make), scene.later(seconds)


def ephemeris_shifted(scene: Scene, at1: Array, at2: Array, at3: Array) -> Array:
    """The effect of an argument of the ephemeris that is later by some milliseconds at most."""
    return scene.moved(
        at1=scene.t1.earth_velocity * at1,
        at2=scene.t2.velocity * at2,
        at3=scene.t3.earth_velocity * at3,
    )


def tt_for_tdb(scene: Scene) -> Array:
    """TT as the argument of the ephemeris."""
    at1, at3 = -scene.t1.tdb_minus_tt, -scene.t3.tdb_minus_tt
    return ephemeris_shifted(scene, at1, 0.5 * (at1 + at3), at3)


def geocentric_tdb(scene: Scene) -> Array:
    """TDB - TT of the geocentre, without the terms of the station's place."""
    late1, late3 = (
        np.asarray(tdb_minus_tt(e.ladder["tt1"], e.ladder["tt2"] + e.tdb_minus_tt / DAY))
        - e.tdb_minus_tt
        for e in (scene.t1, scene.t3)
    )
    clock = scene.zero
    if scene.quantity == "round_trip" and "clock" not in scene.model.omit:
        clock = -1e12 * (late3 - late1)
    return clock + ephemeris_shifted(scene, late1, 0.5 * (late1 + late3), late3)


def tcb_seconds(scene: Scene) -> Array:
    """The interval counted in TCB where TDB is meant."""
    return 1e12 * L_B / (1.0 - L_B) * scene.seconds[0]


# -- the Earth's rotation --------------------------------------------------------------------------


def ut1_as_utc(scene: Scene) -> Array:
    """UT1 - UTC ignored."""
    late = utc_minus_tai(scene) - ut1_minus_tai(scene)
    return scene.turned_itrf(scene.zero, scene.zero, EARTH_ROTATION_RATE * late)


def interpolated(scene: Scene, how: Callable[[Array, Array, Array], Array]) -> Array:
    """Pole and UT1 found from the two nearest days of the series in another way."""
    series = scene.model.earth_orientation
    if series.constant is not None:
        return scene.zero
    tai1, tai2 = scene.tagged_tai
    utc1, utc2 = tai_to_utc(tai1, tai2)
    days = (utc1 - MJD_ZERO) - series.mjd[0] + utc2
    day = np.floor(days).astype(int)
    x = days - day
    ours = series.at(tai1, tai2)
    changed = [
        how(values[day], values[day + 1], x) * unit - mine
        for values, unit, mine in (
            (series.xp_arcsec, ARCSECOND, ours.xp_rad),
            (series.yp_arcsec, ARCSECOND, ours.yp_rad),
            (series.ut1_tai_s, 1.0, ours.ut1_tai_s),
        )
    ]
    return scene.turned_itrf(changed[0], changed[1], EARTH_ROTATION_RATE * changed[2])


def _linear(first: Array, second: Array, x: Array) -> Array:
    return first + x * (second - first)


def _at_0h(first: Array, second: Array, x: Array) -> Array:
    return first


# -- shifts ----------------------------------------------------------------------------------------

Shift = Callable[[Scene], Any]
"""From a scene to seconds, one number or one for each range."""


def from_tai(scale_minus_tai: Callable[[Scene], Any]) -> Shift:
    """How much later the instants are if the numbers are readings of another scale than UTC."""
    return lambda scene: utc_minus_tai(scene) - scale_minus_tai(scene)


def by(seconds: float) -> Shift:
    """The same for all."""
    return lambda scene: seconds


# -- the list --------------------------------------------------------------------------------------


def _epoch(name: str, says: str, look_for: str, shift: Shift) -> Suspect:
    return Suspect(
        name,
        "time",
        says,
        f"{look_for} (the whole computation is for another instant)",
        lambda scene: epoch_curve(scene).at(shift(scene)),
        AS_DESCRIBED,
        choice=lambda scene: (scene.model, scene.later(shift(scene))),
    )


def _event(name: str, event: str) -> Suspect:
    def choice(scene: Scene) -> tuple[Model, Query]:
        return tagged_at(scene, name.removeprefix("epoch_at_"))

    def effect(scene: Scene) -> Array:
        model, query = choice(scene)
        return scene.zero if query is scene.query else scene.as_if(model, query)

    return Suspect(
        name, "time", f"epochs taken as the instants of {event}",
        "which of the three events the epoch tags", effect, AS_DESCRIBED, choice=choice,
    )  # fmt: skip


def _ephemeris(name: str, says: str, look_for: str, shift: Shift) -> Suspect:
    return Suspect(
        name,
        "time",
        says,
        f"{look_for} (Earth rotation is right, the Moon is not)",
        lambda scene: ephemeris_curve(scene).at(shift(scene)),
        AS_DESCRIBED,
        choice=lambda scene: ephemeris_later(scene, float(np.ravel(shift(scene))[0])),
    )


SUSPECTS: tuple[Suspect, ...] = (
    _epoch(
        "epoch_as_tai", "epochs taken as TAI", "where the epochs are read: no UTC to TAI",
        from_tai(lambda scene: 0.0),
    ),
    _epoch(
        "epoch_as_gps", "epochs taken as GPS time", "where the epochs are read: GPS time or UTC",
        from_tai(lambda scene: GPS_MINUS_TAI),
    ),
    _epoch(
        "epoch_as_tt", "epochs taken as TT", "where the epochs are read: no UTC to TT",
        from_tai(lambda scene: TT_MINUS_TAI),
    ),
    _epoch(
        "epoch_as_tdb", "epochs taken as TDB", "where the epochs are read: no UTC to TDB",
        from_tai(tdb_minus_tai),
    ),
    _epoch(
        "epoch_as_ut1", "epochs taken as UT1", "where the epochs are read: UT1-UTC subtracted?",
        from_tai(ut1_minus_tai),
    ),
    _epoch(
        "epoch_second_early", "epochs one second early", "the reading of seconds; a leap second",
        by(-1.0),
    ),
    _epoch(
        "epoch_second_late", "epochs one second late", "the reading of seconds; a leap second",
        by(1.0),
    ),
    _event("epoch_at_transmit", "transmission"),
    _event("epoch_at_bounce", "the bounce"),
    _event("epoch_at_receive", "reception"),
    _ephemeris(
        "leap_second_missing", "TAI-UTC one second too small on the way to TT",
        "the table of leap seconds: is the last one in it?", by(-1.0),
    ),
    _ephemeris(
        "leap_second_extra", "TAI-UTC one second too large on the way to TT",
        "the table of leap seconds: one too many, or applied on the wrong day", by(1.0),
    ),
    _ephemeris(
        "tt_without_leap_seconds", "TT made from UTC without leap seconds",
        "TT = UTC + 32.184 s where it should be TAI + 32.184 s", utc_minus_tai,
    ),
    _ephemeris(
        "tai_as_tt", "TAI used as TT", "the 32.184 s between TAI and TT", by(-TT_MINUS_TAI),
    ),
    _ephemeris(
        "utc_as_tdb", "UTC used as the argument of the ephemeris",
        "what time the ephemeris is asked for", lambda scene: utc_minus_tai(scene) - TT_MINUS_TAI,
    ),
    Suspect(
        "tt_for_tdb", "time", "TT in the place of TDB as the argument of the ephemeris",
        "what time the ephemeris is asked for: TDB-TT (1.7 ms) is missing", tt_for_tdb,
        {1.0: "TDB-TT ignored", 2.0: "TDB-TT with the wrong sign", -1.0: "TDB-TT added twice"},
    ),
    Suspect(
        "tdb_of_geocentre", "time", "TDB-TT of the geocentre in the place of the station's",
        "whether TDB-TT knows the station: terms in u, v, longitude and UT1 (2 us a day)",
        geocentric_tdb, {1.0: "as described", 2.0: "the station's terms with the wrong sign"},
    ),
    Suspect(
        "tcb_seconds", "time", "interval in TCB seconds in the place of TDB",
        "the factor 1 - L_B between TCB and TDB, in times and in lengths", tcb_seconds,
        {1.0: "as described", -1.0: "the factor applied once too often"},
    ),
    Suspect(
        "ut1_as_utc", "time", "UT1-UTC ignored",
        "the argument of the Earth rotation angle: UT1, or UTC?", ut1_as_utc,
        {1.0: "ignored", 2.0: "with the wrong sign", -1.0: "added twice"},
    ),
    Suspect(
        "rotation_linear", "time", "pole and UT1 interpolated linearly between days",
        "how the daily series is interpolated, and whether zonal tides are removed before",
        partial(interpolated, how=_linear), AS_DESCRIBED,
    ),
    Suspect(
        "rotation_at_0h", "time", "pole and UT1 of 0h UTC for the whole day",
        "how the daily series is read: is it interpolated at all?",
        partial(interpolated, how=_at_0h), AS_DESCRIBED,
    ),
)  # fmt: skip
"""Time scales, the tagged event, and UT1."""
