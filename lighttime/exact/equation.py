"""The light-time equation at extended precision: the round trip, and one way."""

from __future__ import annotations

from collections.abc import Iterable
from types import MappingProxyType
from typing import Any, Literal

from lighttime.errors import InputError, UnknownNameError
from lighttime.exact.answer import (
    ExactAnswer,
    ExactLeg,
    rungs_of_leg,
    rungs_of_reflector,
    rungs_of_station,
)
from lighttime.exact.bodies import de421
from lighttime.exact.leg import Leg, Path
from lighttime.exact.moon import ReflectorEvent, Target
from lighttime.exact.numbers import Real, context, fixed_point, plain
from lighttime.exact.orientation import Series
from lighttime.exact.station import Site, StationEvent
from lighttime.exact.times import DAY, instant
from lighttime.terms import omitted
from lighttime.timescales.epoch import Epoch

__all__ = ["light_time", "round_trip"]

Tag = Literal["transmit", "bounce", "receive"]

_FIRST_GUESS = "1.28"
"""Seconds of light time with which the search begins."""


class _Setup:
    """A station, a reflector and what lies between, at one working precision."""

    def __init__(
        self,
        station: Any,
        reflector: Any,
        weather: Any,
        wavelength_nm: float,
        earth_orientation: Any,
        omit: Iterable[str],
        gamma: float,
        digits: int,
    ) -> None:
        self.ctx = context(digits)
        names = omitted(omit)
        if earth_orientation is None:
            from lighttime.earth.series import EarthOrientation

            earth_orientation = EarthOrientation.bundled()
        ephemeris = de421(digits)
        series = Series(self.ctx, earth_orientation)
        self.site = Site(self.ctx, station, ephemeris, series, names)
        self.target = Target(self.ctx, reflector, ephemeris, names)
        self.path = Path(
            self.site, ephemeris, weather, wavelength_nm, self.ctx.mpf(float(gamma)), names
        )
        self.clock_counts = "clock" not in names
        self.tolerance = self.ctx.mpf(10) ** (-digits - 3)

    def tagged(self, when: Any) -> Real:
        """Julian date, TDB, of the instant handed in."""
        epoch = when if isinstance(when, Epoch) else Epoch.parse(when)
        scale, jd = instant(self.ctx, epoch)
        return jd if scale == "tdb" else self.site.tdb_of_tt(jd)

    def reflector_after(self, station: StationEvent, way: int) -> tuple[ReflectorEvent, Leg]:
        """Where light that leaves the station (way 1), or reaches it (-1), meets the reflector."""

        def predict(seconds: Real) -> tuple[Real, tuple[ReflectorEvent, Leg]]:
            reflector = self.target.event(station.tdb + way * seconds / DAY)
            leg = self.path.leg(station, reflector)
            return leg.seconds, (reflector, leg)

        return fixed_point(predict, self.ctx.mpf(_FIRST_GUESS), self.tolerance)

    def station_after(
        self, reflector: ReflectorEvent, way: int, guess: Real | str = _FIRST_GUESS
    ) -> tuple[StationEvent, Leg]:
        """Where light that leaves the reflector (way 1), or reaches it (-1), meets the station."""

        def predict(seconds: Real) -> tuple[Real, tuple[StationEvent, Leg]]:
            station = self.site.event(reflector.tdb + way * seconds / DAY)
            leg = self.path.leg(station, reflector)
            return leg.seconds, (station, leg)

        return fixed_point(predict, self.ctx.mpf(guess), self.tolerance)


def round_trip(
    when: Any,
    station: Any,
    reflector: Any,
    tag: Tag = "transmit",
    weather: Any = None,
    wavelength_nm: float = 532.0,
    *,
    earth_orientation: Any = None,
    omit: Iterable[str] = (),
    gamma: float = 1.0,
    digits: int = 50,
) -> ExactAnswer:
    """Round-trip light time from a station to a reflector and back.

    Parameters
    ----------
    when : Epoch, or what `Epoch.parse` reads
        One instant of transmission, bounce or reception. A time of bounce is that of the
        station's clock.
    station : Station
    reflector : Reflector
    tag : {"transmit", "bounce", "receive"}
        Which of the three instants `when` is.
    weather : Weather, optional
        Without it there is no troposphere.
    wavelength_nm : float
        355 to 1064.
    earth_orientation : EarthOrientation, optional
        The bundled series when not given.
    omit : iterable of str
        Terms to leave out.
    gamma : float
        Curvature of space by unit mass, 1 in general relativity.
    digits : int
        Decimal digits that hold, 20 or more. (Tides, loading and the series of nutation and of
        TDB - TT are summed in float64: their definition, not their error.)

    Returns
    -------
    ExactAnswer

    Raises
    ------
    InputError
        For an array of instants, or an input that is none.
    CoverageError
        For an instant that the ephemeris or the series does not reach.
    HorizonError
        With weather, for a reflector at 3 degrees of elevation or lower.

    Notes
    -----
    ``t2 - t1 = |x_r(t2) - x_s(t1)|/c + gravity + troposphere``, the same for t3 - t2, all in
    TDB; the answer is (t3 - t1) - [(TDB - TT)(t3) - (TDB - TT)(t1)] at the station.

    Source: Moyer 2000, Formulation for Observed and Computed Values of Deep Space Network Data
    Types for Navigation, 8.3; gravity in the rest frame of each body (`lighttime.exact.gravity`).
    """
    setup = _Setup(
        station, reflector, weather, wavelength_nm, earth_orientation, omit, gamma, digits
    )
    tdb = setup.tagged(when)
    if tag == "transmit":
        first = setup.site.event(tdb)
        middle, up = setup.reflector_after(first, +1)
        last, down = setup.station_after(middle, +1, up.seconds)
    elif tag == "bounce":
        middle = setup.target.event(tdb)
        first, up = setup.station_after(middle, -1)
        last, down = setup.station_after(middle, +1, up.seconds)
    elif tag == "receive":
        last = setup.site.event(tdb)
        middle, down = setup.reflector_after(last, -1)
        first, up = setup.station_after(middle, -1, down.seconds)
    else:
        raise UnknownNameError("tag", tag, ("transmit", "bounce", "receive"))
    return _answer(setup, digits, middle, (first, up), (last, down))


def light_time(
    when: Any,
    station: Any,
    reflector: Any,
    direction: Literal["up", "down"] = "up",
    tag: Tag | None = None,
    weather: Any = None,
    wavelength_nm: float = 532.0,
    *,
    earth_orientation: Any = None,
    omit: Iterable[str] = (),
    gamma: float = 1.0,
    digits: int = 50,
) -> ExactAnswer:
    """Light time of one leg, from station to reflector or back, in TDB seconds.

    Parameters
    ----------
    direction : {"up", "down"}
        From the station to the reflector, or from the reflector to the station.
    tag : {"transmit", "bounce", "receive"}, optional
        Which instant `when` is; the start of the leg when not given (``"transmit"`` up,
        ``"bounce"`` down).
    when, station, reflector, weather, wavelength_nm, earth_orientation, omit, gamma, digits
        As in `round_trip`.
    """
    ends = {"up": ("transmit", "bounce"), "down": ("bounce", "receive")}
    if direction not in ends:
        raise UnknownNameError("direction", direction, ends)
    chosen = ends[direction][0] if tag is None else tag
    if chosen not in ends[direction]:
        raise InputError("tag", chosen, f"for a leg {direction}, {' or '.join(ends[direction])}")
    setup = _Setup(
        station, reflector, weather, wavelength_nm, earth_orientation, omit, gamma, digits
    )
    tdb = setup.tagged(when)
    way = 1 if direction == "up" else -1
    if chosen == "bounce":
        middle = setup.target.event(tdb)
        ground, leg = setup.station_after(middle, -way)
    else:
        ground = setup.site.event(tdb)
        middle, leg = setup.reflector_after(ground, way)
    if direction == "up":
        return _answer(setup, digits, middle, (ground, leg), None)
    return _answer(setup, digits, middle, None, (ground, leg))


def _answer(
    setup: _Setup,
    digits: int,
    middle: ReflectorEvent,
    uplink: tuple[StationEvent, Leg] | None,
    downlink: tuple[StationEvent, Leg] | None,
) -> ExactAnswer:
    rungs: dict[str, Real] = {}
    if uplink is not None:
        rungs.update(rungs_of_station("t1", uplink[0]))
    rungs.update(rungs_of_reflector(middle))
    if downlink is not None:
        rungs.update(rungs_of_station("t3", downlink[0]))
    seconds = clock = setup.ctx.zero
    for name, way in (("uplink", uplink), ("downlink", downlink)):
        if way is not None:
            rungs.update(rungs_of_leg(name, way[1]))
            seconds = seconds + way[1].seconds
    if uplink is not None and downlink is not None:
        if setup.clock_counts:
            clock = uplink[0].tdb_minus_tt - downlink[0].tdb_minus_tt
        rungs["clock_s"] = clock
    rungs["answer_s"] = seconds + clock
    return ExactAnswer(
        seconds=plain(seconds + clock),
        uplink=None if uplink is None else ExactLeg.of(uplink[1]),
        downlink=None if downlink is None else ExactLeg.of(downlink[1]),
        clock=plain(clock),
        digits=digits,
        _rungs=MappingProxyType({name: plain(value) for name, value in rungs.items()}),
    )
