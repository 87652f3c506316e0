"""Is the extended-precision twin right? Its digits, its iteration, its derivatives.

1. Twice the digits change no answer by more than 1e-25 s, whatever the tag, on instants that are
   hard: seams of the ephemeris' records, leap seconds, the drifting UTC of 1969 to 1971.
2. The secants of the twin end where plain repeated substitution ends, which gains a factor of
   v/c a step; the distance from the end is printed at each.
3. Moving one input by a known amount moves the answer as its derivative says. The derivatives
   are written down here from the geometry of the light-time equation alone:

       (1 - k.v_r/c) dt2 = (1 - k.v_s/c) dt1 + k.(dx_r - dx_s)/c + dg

   and likewise for the leg down, k being the direction in which the light flies.

Exits with 1 when one of them fails.
"""

from __future__ import annotations

import random
import sys
from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any

import mpmath

from lighttime.earth.series import EarthOrientation
from lighttime.earth.station import Station
from lighttime.exact import round_trip
from lighttime.exact.bodies import de421
from lighttime.exact.equation import Tag, _Setup
from lighttime.exact.leg import Leg
from lighttime.exact.moon import ReflectorEvent, to_principal_axes
from lighttime.exact.numbers import Context, Real, Vector
from lighttime.exact.station import StationEvent
from lighttime.moon.reflector import reflectors
from lighttime.timescales.epoch import Epoch

C = 299792458
DAY = 86400
DIGITS = 40
DOUBLED = 80
DIGITS_LIMIT = 1e-25
DERIVATIVE_LIMIT = 1e-7
TAGS: tuple[Tag, ...] = ("transmit", "bounce", "receive")
SITES = (
    Station.from_geodetic("Mesa", 32.8, -105.8, 2790.0, velocity_m_per_yr=(-0.014, 0.001, -0.002)),
    Station.from_geodetic("Ridge", -24.6, -70.4, 2400.0),
    Station.from_geodetic("Plain", 43.7, 6.9, 1270.0, velocity_m_per_yr=(-0.013, 0.019, 0.012)),
)


# --- 1. digits --------------------------------------------------------------------------------


def instants(rng: random.Random) -> list[tuple[str, Epoch]]:
    """Ordinary instants and hard ones."""
    found = [
        ("any", Epoch(2440222.5 + rng.randrange(20500), rng.random(), "utc")) for _ in range(12)
    ]
    found += [
        (text, Epoch.parse(text))
        for text in (
            "1969-07-21T03:15:30.123456789",
            "1971-12-31T23:59:59.9",
            "1985-06-30T23:59:60.3",
            "2016-12-31T23:59:58.7",
            "2017-01-01T00:00:00",
        )
    ]
    records = de421(DIGITS).records
    for name in ("moon", "librations", "earthmoon"):
        span = float(records[name].span)
        seam = float(records[name].start) + span * rng.randrange(int(21000 / span), 23000 // 4)
        for offset in (-1e-6, -1e-9, 0.0, 1e-9):
            found.append((f"{name} {offset:+.0e} s", Epoch(seam, offset / DAY, "tdb")))
    return found


def check_digits() -> bool:
    """Every answer at DIGITS and at DOUBLED digits."""
    rng = random.Random(1)
    fixed = EarthOrientation.fixed(0.1, 0.05, 0.3, 0.1, -0.1)
    print(f"1. {DIGITS} and {DOUBLED} digits, seconds apart")
    worst = mpmath.mpf(0)
    for label, when in instants(rng):
        station, array = rng.choice(SITES), rng.choice(reflectors())
        tag = rng.choice(TAGS)
        series = None if 37700 < when.jd1 - 2400000.5 < 60000 else fixed
        once, twice = (
            round_trip(when, station, array, tag, earth_orientation=series, digits=digits)
            for digits in (DIGITS, DOUBLED)
        )
        apart = abs(once.seconds - twice.seconds)
        worst = max(worst, apart)
        print(f"   {label:<32}{tag:<10}{array.name:<12}{mpmath.nstr(apart, 3):>12}")
    print(f"   largest {mpmath.nstr(worst, 3)} s, limit {DIGITS_LIMIT}\n")
    return bool(worst < DIGITS_LIMIT)


# --- 2. iteration -----------------------------------------------------------------------------


def check_iteration() -> bool:
    """Repeated substitution towards the answer of the secants, both legs."""
    case = _Setup(SITES[0], reflectors()[2], None, 532.0, None, (), 1.0, DIGITS)
    ctx = case.ctx
    tdb = case.tagged(Epoch.parse("2008-03-30T12:39:50"))
    first = case.site.event(tdb)
    middle, up = case.reflector_after(first, +1)
    _, down = case.station_after(middle, +1)

    def to_the_moon(seconds: Real) -> Real:
        return case.path.leg(first, case.target.event(tdb + seconds / DAY)).seconds

    def to_the_ground(seconds: Real) -> Real:
        return case.path.leg(case.site.event(middle.tdb + seconds / DAY), middle).seconds

    print("2. repeated substitution, seconds from where the secants end")
    good = True
    for name, step, end in (
        ("up", to_the_moon, up.seconds),
        ("down", to_the_ground, down.seconds),
    ):
        seconds = ctx.mpf("1.28")
        distances = []
        for _ in range(14):
            distances.append(abs(seconds - end))
            seconds = step(seconds)
        shown = " ".join(ctx.nstr(distance, 2) for distance in distances)
        print(f"   {name:<6}{shown}")
        good = good and distances[-1] < ctx.mpf(10) ** -DIGITS
    print()
    return good


# --- 3. derivatives ---------------------------------------------------------------------------


@dataclass(frozen=True)
class Trip:
    """The three events of a round trip with what the derivatives need of them."""

    ctx: Context
    first: StationEvent
    middle: ReflectorEvent
    last: StationEvent
    uplink: Leg
    downlink: Leg
    v1: Vector
    v2: Vector
    v3: Vector
    """Velocities of station and reflector, m/s, by central differences."""
    slopes: tuple[Real, Real]
    """d(TDB - TT)/dTDB at transmission and reception, likewise."""

    @classmethod
    def of(cls, case: _Setup, when: Epoch) -> Trip:
        """With transmission at `when`."""
        first = case.site.event(case.tagged(when))
        middle, uplink = case.reflector_after(first, +1)
        last, downlink = case.station_after(middle, +1)
        short, wide = case.ctx.mpf("0.01"), case.ctx.mpf(60)

        def velocity(at: Callable[[Real], StationEvent | ReflectorEvent], tdb: Real) -> Vector:
            return (at(tdb + short / DAY).bcrs - at(tdb - short / DAY).bcrs) / (2 * short)

        def slope(tdb: Real) -> Real:
            clock = case.site.tdb_minus_tt
            return (clock(tdb + wide / DAY) - clock(tdb - wide / DAY)) / (2 * wide)

        return cls(
            case.ctx,
            first,
            middle,
            last,
            uplink,
            downlink,
            velocity(case.site.event, first.tdb),
            velocity(case.target.event, middle.tdb),
            velocity(case.site.event, last.tdb),
            (slope(first.tdb), slope(last.tdb)),
        )

    def change(
        self,
        *,
        dt1: Real | None = None,
        ground: tuple[Vector, Vector] | None = None,
        moon: Vector | None = None,
        delays: tuple[Real, Real] | None = None,
    ) -> Real:
        """Change of the answer, s, when something changes.

        dt1 (s) the time of transmission; ground and moon (m) the places of the station at t1
        and t3 and of the reflector; delays (s) of the two legs. The clock of a station moved by
        dx differs by V.dx/c^2, V the velocity of the Earth.
        """
        zero = self.ctx.zero
        still = Vector(zero, zero, zero)
        t1 = zero if dt1 is None else dt1
        x1, x3 = ground or (still, still)
        x2 = moon or still
        g_up, g_down = delays or (zero, zero)
        up = (self.middle.bcrs - self.first.bcrs).unit() / C
        down = (self.last.bcrs - self.middle.bcrs).unit() / C
        t2 = (t1 * (1 - up @ self.v1) + up @ (x2 - x1) + g_up) / (1 - up @ self.v2)
        t3 = (t2 * (1 - down @ self.v2) + down @ (x3 - x2) + g_down) / (1 - down @ self.v3)
        clock = self.first.bodies["earth"].velocity @ (x3 - x1) / C**2
        return t3 * (1 - self.slopes[1]) - t1 * (1 - self.slopes[0]) - clock


def check_derivatives() -> bool:
    """Move inputs; compare with the geometry of the light-time equation."""
    omit = ("solid_earth_tide", "pole_tide", "subdaily_rotation", "lunar_tide")
    when = Epoch.parse("2008-03-30T12:39:50")
    station, array, series = SITES[0], reflectors()[2], _series()
    trip = Trip.of(_Setup(station, array, None, 532.0, series, omit, 1.0, DIGITS), when)
    ctx = trip.ctx

    def slope(vary: Callable[[float], dict[str, Any]], step: float) -> Real:
        """By central differences of the twin; the steps are exact in binary."""
        ends = []
        for side in (1.0, -1.0):
            inputs: dict[str, Any] = {
                "when": when,
                "station": station,
                "reflector": array,
                "gamma": 1.0,
            }
            inputs |= {"earth_orientation": series, **vary(side * step)}
            ends.append(round_trip(**inputs, omit=omit, digits=DIGITS).seconds)
        return (ends[0] - ends[1]) / (2 * step)

    x, y, z = station.xyz_m
    px, py, pz = array.xyz_m
    x_axis, z_axis = Vector(ctx.one, ctx.zero, ctx.zero), Vector(ctx.zero, ctx.zero, ctx.one)
    first, last = trip.first, trip.last
    turned = first.earth.matrix @ x_axis, last.earth.matrix @ x_axis
    spin = (
        first.velocity - first.bodies["earth"].velocity,
        last.velocity - last.bodies["earth"].velocity,
    )
    pulls = (
        ctx.fsum(trip.uplink.gravity.values()) / 2,
        ctx.fsum(trip.downlink.gravity.values()) / 2,
    )
    axis = to_principal_axes(ctx, trip.middle.librations).transposed @ z_axis
    rows = (
        (
            "station x, s/m",
            slope(lambda step: {"station": replace(station, xyz_m=(x + step, y, z))}, 4.0),
            trip.change(ground=turned),
        ),
        (
            "reflector z, s/m",
            slope(lambda step: {"reflector": replace(array, xyz_m=(px, py, pz + step))}, 4.0),
            trip.change(moon=axis),
        ),
        (
            "epoch, s/s",
            slope(lambda step: {"when": Epoch(when.jd1, when.jd2 + step / DAY, "utc")}, 2.0**-5),
            trip.change(dt1=1 + trip.slopes[0]),
        ),
        (
            "UT1, s/s",
            slope(lambda step: {"earth_orientation": _series(step)}, 2.0**-8),
            trip.change(ground=spin),
        ),
        (
            "gamma, s",
            slope(lambda step: {"gamma": 1.0 + step}, 2.0**-3),
            trip.change(delays=pulls),
        ),
    )
    print("3. derivatives of the answer: the twin's differences, from the geometry, relative")
    good = True
    for name, found, expected in rows:
        off = abs(float(found) / float(expected) - 1)
        good = good and off < DERIVATIVE_LIMIT
        print(f"   {name:<18}{float(found):>24.15e}{float(expected):>24.15e}{off:>10.1e}")
    print(f"   limit {DERIVATIVE_LIMIT}\n")
    return good


def _series(more: float = 0.0) -> EarthOrientation:
    return EarthOrientation.fixed(0.125 + more, 0.05, 0.3, 0.1, -0.1)


def main() -> int:
    """Print all three; 0 when all are good."""
    good = [check_digits(), check_iteration(), check_derivatives()]
    print("ok" if all(good) else "MISS")
    return 0 if all(good) else 1


if __name__ == "__main__":
    sys.exit(main())
