"""Random round trips on which the arithmetic is tried: ordinary ones and hard ones.

Everything that a range depends on is drawn from one seed: the instant, the station, the array,
the tag, weather. Five kinds of instants:

``any``       1969-07-21 to 2050-12-31, UTC
``seam``      an event within 1 microsecond of the end of a record of DE421 (or exactly on it):
              the tagged one, or (not exactly) one that light reaches from there
``leap``      days of UTC that end in a leap second, and some inside of it, 23:59:60
``drift``     1969 to 1971, when UTC ran slower than TAI
``midnight``  within 3 seconds of 0h UTC, where a day's tables and the daily values of Earth
              orientation meet

Stations are invented; the last has loading coefficients of every kind. The Moon is above 10
degrees at each. One array in ten is told in another convention than the rest.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import erfa
import numpy as np

import lighttime as lt

DAY = 86400.0
FIRST_MJD, END_MJD = 40423, 70172
"""1969-07-21, and the day after 2050-12-31."""
RECORDS_START_JD = 2414992.5
RECORD_DAYS = (4, 8, 16, 32)
"""Of DE421: its first record begins there, and the records of every body are this long."""
NEAR_SEAM_S, BESIDE_S = 1e-6, 1e-11
LOWEST_DEG = 10.0
SHARES = {"any": 0.55, "seam": 0.20, "leap": 0.14, "drift": 0.05, "midnight": 0.06}
TAGS = ("transmit", "bounce", "receive")
LATE_SERIES = (
    lt.EarthOrientation.fixed(0.1234567, 0.123456, 0.345678, 0.12, -0.23),
    lt.EarthOrientation.fixed(-0.6543219, -0.054321, 0.234567, -0.31, 0.08),
)
"""Earth orientation of the years that the bundled series does not reach."""


def _station(
    name: str,
    latitude_deg: float,
    longitude_deg: float,
    height_m: float,
    velocity: tuple[float, float, float],
    epoch: float,
) -> lt.Station:
    return lt.Station.from_geodetic(
        name,
        latitude_deg,
        longitude_deg,
        height_m,
        velocity_m_per_yr=velocity,
        epoch=epoch,
    )


STATIONS = (
    _station("Mesa", 32.8, -105.8, 2790.0, (-0.0141, 0.0008, -0.0015), 2000.0),
    _station("Plain", 43.7, 6.9, 1270.0, (-0.0130, 0.0190, 0.0120), 2010.0),
    _station("Ridge", -24.6, -70.4, 2400.0, (0.0250, -0.0060, 0.0180), 2015.0),
    _station("Bush", -35.3, 149.0, 800.0, (-0.0340, 0.0010, 0.0470), 2010.0),
    _station("Crater", 20.7, -156.3, 3060.0, (-0.0130, 0.0620, 0.0330), 2005.0),
    _station("Fjord", 78.9, 11.9, 40.0, (-0.0140, 0.0070, 0.0100), 2015.0),
    _station("Temple", 35.9, 140.1, 60.0, (-0.0020, -0.0050, -0.0080), 2010.0),
    lt.Station.from_file(Path(__file__).parent / "reference" / "harbour.toml"),
)


@dataclass(frozen=True)
class Case:
    """One round trip that is asked.

    Attributes
    ----------
    kind : str
    when : Epoch
        The tagged instant, UTC or TDB.
    station, array
    tag : str
    weather : Weather or None
    wavelength_nm : float
    late : int or None
        Which of `LATE_SERIES` tells the orientation of the Earth; None: the bundled series.
    """

    kind: str
    when: lt.Epoch
    station: lt.Station
    array: lt.Reflector
    tag: str
    weather: lt.Weather | None
    wavelength_nm: float
    late: int | None

    @property
    def series(self) -> lt.EarthOrientation | None:
        """Orientation of the Earth; None: the bundled series."""
        return None if self.late is None else LATE_SERIES[self.late]

    @property
    def inputs(self) -> dict[str, Any]:
        """What both `Model.round_trip` and `exact.round_trip` take."""
        return {
            "station": self.station,
            "reflector": self.array,
            "tag": self.tag,
            "weather": self.weather,
            "wavelength_nm": self.wavelength_nm,
        }


def draw(count: int, seed: int = 19690721) -> list[Case]:
    """As many cases, in the shares of the kinds; the same for the same seed."""
    rng = np.random.default_rng(seed)
    wanted = Counter({kind: round(share * count) for kind, share in SHARES.items()})
    wanted["any"] += count - wanted.total()
    found: list[Case] = []
    while len(found) < count:
        tried = [_candidate(rng, kind) for kind, n in wanted.items() for _ in range(4 * n)]
        for case in _visible(tried):
            if wanted[case.kind] > 0:
                wanted[case.kind] -= 1
                found.append(case)
    order = rng.permutation(count)
    return [found[k] for k in order]


# -- instants ------------------------------------------------------------------------------------


def _candidate(rng: np.random.Generator, kind: str) -> Case:
    when, tag = _INSTANTS[kind](rng), str(rng.choice(TAGS))
    late = when.jd1 - 2400000.5 > lt.EarthOrientation.bundled().coverage[1] - 2.0
    array = lt.reflectors()[rng.integers(5)]
    if kind != "seam" and rng.random() < 0.1:
        array = replace(array, scale=rng.choice(["tt", "local"]), contains_permanent_tide=True)
    case = Case(
        kind=kind,
        when=when,
        station=STATIONS[rng.integers(len(STATIONS))],
        array=array,
        tag=tag,
        weather=_weather(rng) if rng.random() < 0.6 else None,
        wavelength_nm=float(rng.choice([532.0, 1064.0, 355.0, 694.3])),
        late=int(rng.integers(len(LATE_SERIES))) if late else None,
    )
    return case


def _weather(rng: np.random.Generator) -> lt.Weather:
    return lt.Weather(
        pressure_hpa=round(rng.uniform(650.0, 1020.0), 2),
        temperature_k=round(rng.uniform(255.0, 305.0), 2),
        relative_humidity=round(rng.uniform(0.05, 0.95), 2),
    )


def _utc(rng: np.random.Generator, mjd: float, fraction: float) -> lt.Epoch:
    """With a random tail, so that no digit of the instant is zero."""
    return lt.Epoch(2400000.5 + mjd, fraction + rng.uniform(-1e-17, 1e-17), "utc")


def _any(rng: np.random.Generator) -> lt.Epoch:
    return _utc(rng, rng.integers(FIRST_MJD, END_MJD), rng.random())


def _drift(rng: np.random.Generator) -> lt.Epoch:
    return _utc(rng, rng.integers(FIRST_MJD, 41317), rng.random())


def _midnight(rng: np.random.Generator) -> lt.Epoch:
    return _utc(rng, rng.integers(FIRST_MJD, END_MJD), rng.uniform(-3.0, 3.0) / DAY)


def _leap(rng: np.random.Generator) -> lt.Epoch:
    """Any instant of such a day, its last seconds, or its second 60."""
    year, month, _ = rng.choice([row for row in erfa.leap_seconds.get().tolist() if row[0] >= 1972])
    first = lt.Epoch.parse(f"{int(year)}-{int(month):02d}-01T00:00:00")
    part = rng.random()
    if part < 0.3:
        return first.shift(-rng.uniform(3.0, DAY))
    if part < 0.6:
        return first.shift(rng.uniform(-3.0, 2.0))
    return first.shift(-rng.uniform(1e-9, 1.0))


def _seam(rng: np.random.Generator) -> lt.Epoch:
    """Within a microsecond of the end of a record, nanoseconds and nothing among them, TDB."""
    days = int(rng.choice(RECORD_DAYS))
    first = int((2400000.5 + FIRST_MJD - RECORDS_START_JD) // days) + 1
    last = int((2400000.5 + END_MJD - RECORDS_START_JD) // days)
    seam = RECORDS_START_JD + days * rng.integers(first, last)
    part = rng.random()
    if part < 0.1:
        return lt.Epoch(seam, 0.0, "tdb")
    sign = rng.choice([-1.0, 1.0])
    size = 10.0 ** rng.uniform(-12.0, -6.0) if part < 0.4 else rng.uniform(0.0, NEAR_SEAM_S)
    return lt.Epoch(seam, sign * size / DAY, "tdb")


_INSTANTS = {"any": _any, "seam": _seam, "leap": _leap, "drift": _drift, "midnight": _midnight}


# -- what can be seen ----------------------------------------------------------------------------


def _visible(cases: list[Case]) -> list[Case]:
    """Those whose reflector stands high enough, with the seams where they are wanted."""
    high = np.zeros(len(cases))
    for indices, answer in _answers(cases, lambda c: (c.station.name, "Apollo 15", "transmit")):
        high[indices] = np.minimum(answer.uplink.elevation_deg, answer.downlink.elevation_deg)
    seen = [case for case, angle in zip(cases, high, strict=True) if angle > LOWEST_DEG]
    seams = [k for k, case in enumerate(seen) if case.kind == "seam"]
    moved = _other_events([seen[k] for k in seams])
    for k, case in zip(seams, moved, strict=True):
        seen[k] = case
    return seen


def _other_events(cases: list[Case]) -> list[Case]:
    """Of two in five, the event that is on the seam becomes another one than the tagged.

    Not where it is nearer to the seam than `BESIDE_S`: positions jump there, by up to 0.14 mm
    or 0.5 ps, and light may reach the end neither before the jump nor after it.
    """
    clear = [abs(case.when.jd2) * DAY > BESIDE_S for case in cases]
    on_seam = [
        (case.tag, case.tag, *TAGS)[k % 5] if clear[k] else case.tag for k, case in enumerate(cases)
    ]
    held = [replace(case, tag=tag) for case, tag in zip(cases, on_seam, strict=True)]
    out = list(cases)
    for indices, answer in _answers(held, lambda c: (c.station.name, c.array.name, c.tag)):
        zero = np.zeros(len(indices))
        at = np.stack([-answer.uplink.seconds, zero, answer.downlink.seconds])  # after the bounce
        for n, k in enumerate(indices):
            after = at[TAGS.index(cases[k].tag), n] - at[TAGS.index(on_seam[k]), n]
            out[k] = replace(cases[k], when=cases[k].when.shift(after))
    return out


def _answers(
    cases: list[Case], group: Callable[[Case], tuple[str, str, str]]
) -> Iterator[tuple[list[int], lt.RoundTrip]]:
    """Round trips of many cases, those of one station, array and tag in one call."""
    groups: dict[tuple[Any, ...], list[int]] = {}
    for index, case in enumerate(cases):
        groups.setdefault((*group(case), case.when.scale, case.late), []).append(index)
    for (_, array, tag, scale, _), indices in groups.items():
        some = [cases[k] for k in indices]
        when = lt.Epoch([c.when.jd1 for c in some], [c.when.jd2 for c in some], scale)
        model = lt.Model(earth_orientation=some[0].series)
        yield indices, model.round_trip(when, some[0].station, lt.reflector(array), tag)
