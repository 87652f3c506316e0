"""Suspects: another time scale, another instant, another rotation angle."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
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
from lighttime.crosscheck.scene import QUANTITIES, Choice, Scene
from lighttime.crosscheck.suspects.suspect import Suspect, chosen
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


def tagged_in(scene: Scene, scale_minus_tai: Callable[[Scene], Any]) -> tuple[Model, Query]:
    """The number that stands for UTC taken as a reading of another scale."""
    return scene.model, scene.later(utc_minus_tai(scene) - scale_minus_tai(scene))


def tagged_later(scene: Scene, seconds: float) -> tuple[Model, Query]:
    """Every instant some seconds later."""
    return scene.model, scene.later(seconds)


def tagged_at(scene: Scene, tag: Any) -> tuple[Model, Query]:
    """The instant taken as that of another event."""
    if tag not in QUANTITIES[scene.quantity]:
        return scene.model, scene.query
    return scene.model, replace(scene.query, tag=tag)


# -- the time of the ephemeris, the Earth's rotation being right -----------------------------------


@dataclass(frozen=True)
class Delayed:
    """A series of Earth orientation read `seconds` too early and corrected for it.

    Together with epochs that are `seconds` later it turns the Earth as it should be turned,
    while Sun, Moon and planets are where they are later.
    """

    series: EarthOrientation
    seconds: float

    def at(self, tai1: Any, tai2: Any) -> PoleAndUT1:
        """Pole and UT1 - TAI."""
        pole = self.series.at(tai1, np.asarray(tai2) - self.seconds / DAY)
        return replace(pole, ut1_tai_s=pole.ut1_tai_s - self.seconds)

    def __getattr__(self, name: str) -> Any:
        if name.startswith("__"):
            raise AttributeError(name)
        return getattr(self.series, name)


def ephemeris_later(scene: Scene, seconds: float) -> tuple[Model, Query]:
    """TT, and TDB with it, ahead by some seconds; UT1 right."""

    def make(model: Model) -> Model:
        series: Any = Delayed(model.earth_orientation, seconds)
        return replace(model, earth_orientation=series)

    return scene.variant(("ephemeris_later", seconds), make), scene.later(seconds)


def without_leap_seconds(scene: Scene) -> tuple[Model, Query]:
    """TAI - UTC taken as zero on the way to TT: by its value at the first of the instants."""
    return ephemeris_later(scene, float(utc_minus_tai(scene)[0]))


def without_32_184(scene: Scene) -> tuple[Model, Query]:
    """TAI used as TT."""
    return ephemeris_later(scene, -TT_MINUS_TAI)


def utc_as_tdb(scene: Scene) -> tuple[Model, Query]:
    """UTC used as the argument of the ephemeris."""
    return ephemeris_later(scene, float(utc_minus_tai(scene)[0]) - TT_MINUS_TAI)


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


# -- the list --------------------------------------------------------------------------------------


def _tag(name: str, says: str, look_for: str, choice: Choice) -> Suspect:
    return chosen(name, says, f"{look_for} (the whole computation is for another instant)", choice)


def _ephemeris(name: str, says: str, look_for: str, choice: Choice) -> Suspect:
    return chosen(name, says, f"{look_for} (Earth rotation is right, the Moon is not)", choice)


SUSPECTS: tuple[Suspect, ...] = (
    _tag(
        "epoch_as_tai", "epochs taken as TAI", "where the epochs are read: no UTC to TAI",
        partial(tagged_in, scale_minus_tai=lambda scene: 0.0),
    ),
    _tag(
        "epoch_as_gps", "epochs taken as GPS time", "where the epochs are read: GPS week and second",
        partial(tagged_in, scale_minus_tai=lambda scene: GPS_MINUS_TAI),
    ),
    _tag(
        "epoch_as_tt", "epochs taken as TT", "where the epochs are read: no UTC to TT",
        partial(tagged_in, scale_minus_tai=lambda scene: TT_MINUS_TAI),
    ),
    _tag(
        "epoch_as_tdb", "epochs taken as TDB", "where the epochs are read: no UTC to TDB",
        partial(tagged_in, scale_minus_tai=tdb_minus_tai),
    ),
    _tag(
        "epoch_as_ut1", "epochs taken as UT1", "where the epochs are read: UT1-UTC subtracted?",
        partial(tagged_in, scale_minus_tai=ut1_minus_tai),
    ),
    _tag(
        "epoch_second_early", "epochs one second early", "the reading of seconds; a leap second",
        partial(tagged_later, seconds=-1.0),
    ),
    _tag(
        "epoch_second_late", "epochs one second late", "the reading of seconds; a leap second",
        partial(tagged_later, seconds=1.0),
    ),
    _tag(
        "epoch_at_transmit", "epochs taken as the instants of transmission",
        "which of the three events the epoch tags", partial(tagged_at, tag="transmit"),
    ),
    _tag(
        "epoch_at_bounce", "epochs taken as the instants of the bounce",
        "which of the three events the epoch tags", partial(tagged_at, tag="bounce"),
    ),
    _tag(
        "epoch_at_receive", "epochs taken as the instants of reception",
        "which of the three events the epoch tags", partial(tagged_at, tag="receive"),
    ),
    _ephemeris(
        "leap_second_missing", "TAI-UTC one second too small on the way to TT",
        "the table of leap seconds: is the last one in it?",
        partial(ephemeris_later, seconds=-1.0),
    ),
    _ephemeris(
        "leap_second_extra", "TAI-UTC one second too large on the way to TT",
        "the table of leap seconds: one too many, or applied on the wrong day",
        partial(ephemeris_later, seconds=1.0),
    ),
    _ephemeris(
        "tt_without_leap_seconds", "TT made from UTC without leap seconds",
        "TT = UTC + 32.184 s where it should be TAI + 32.184 s", without_leap_seconds,
    ),
    _ephemeris(
        "tai_as_tt", "TAI used as TT", "the 32.184 s between TAI and TT", without_32_184
    ),
    _ephemeris(
        "utc_as_tdb", "UTC used as the argument of the ephemeris",
        "what time the ephemeris is asked for", utc_as_tdb,
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
