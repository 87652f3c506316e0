"""One immutable choice of ephemeris, Earth orientation and terms; and the range by it."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, fields
from typing import Any, ClassVar

import numpy as np

from lighttime.answer import OneWay, RoundTrip
from lighttime.constants import DAY, DEGREE, SPEED_OF_LIGHT
from lighttime.earth.motion import StationMotion
from lighttime.earth.series import EarthOrientation
from lighttime.earth.station import Station
from lighttime.ephemeris import Ephemeris, time_integral
from lighttime.ephemeris.frame import EarthFrame
from lighttime.ephemeris.time_integral import TimeEphemeris
from lighttime.errors import CoverageError, HorizonError, InputError, UnknownNameError
from lighttime.gathering import gather
from lighttime.inputs import number
from lighttime.moon.motion import ReflectorMotion
from lighttime.moon.reflector import Reflector
from lighttime.path.delays import gravity_delays, sine_of_elevation
from lighttime.path.ends import Trajectory, TrajectoryMotion
from lighttime.path.legs import Legs, solve_one_way, solve_round_trip
from lighttime.path.troposphere import Weather, slant_delay
from lighttime.query import Index, Query
from lighttime.sigmas import Uncertainties
from lighttime.tables import Tables
from lighttime.terms import omitted
from lighttime.timescales import Epoch
from lighttime.user_terms import DelayTerm, Ray, delay_terms
from lighttime.vectors import Array

BLOCK = 8192
"""Epochs solved together: enough to hide numpy's overhead, few enough to stay in the cache."""

TAGS = ("transmit", "bounce", "receive")


@dataclass(frozen=True)
class Model:
    """An immutable choice of data and terms.

    Parameters
    ----------
    ephemeris : Ephemeris, optional
        DE421 if not given.
    earth_orientation : EarthOrientation, optional
        The bundled IERS series if not given.
    omit : names of terms
        Terms to leave out: see `lighttime.terms.TERMS`.
    gamma : float
        Parameter gamma of the post-Newtonian formalism, 1 in general relativity.
    moon_h2, moon_l2 : float
        Love and Shida number of degree 2 of the Moon's solid tide.
    solar_bending : bool
        Moyer's extra term for the bending of the ray in the Sun's delay.
    delays : DelayTerm objects
        Delay terms of one's own.
    uncertainties : Uncertainties
        How well the inputs are known, for error budgets.
    tdb : {"series", "integrated"} or TimeEphemeris
        What TDB - TT is from: the series of Fairhead & Bretagnon, or the orbits of the
        ephemeris, integrated.

    Raises
    ------
    UnknownNameError, InputError
        For a name that is no term, and for numbers that are not finite.

    Examples
    --------
    >>> import lighttime as lt
    >>> hilltop = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
    >>> model = lt.Model(omit=("planet_gravity",))
    >>> answer = model.round_trip("2020-03-01T19:00:00", hilltop, lt.reflector("Apollo 15"))
    >>> f"{answer.seconds:.6f}"
    '2.606622'
    """

    ephemeris: Ephemeris = None  # type: ignore[assignment]
    earth_orientation: EarthOrientation = None  # type: ignore[assignment]
    omit: frozenset[str] | Iterable[str] = ()
    gamma: float = 1.0
    moon_h2: float = 0.0476
    moon_l2: float = 0.0107
    solar_bending: bool = False
    delays: tuple[DelayTerm, ...] | Iterable[DelayTerm] = ()
    uncertainties: Uncertainties = Uncertainties()  # noqa: RUF009 (it is frozen)
    tdb: str | TimeEphemeris = "series"

    _tables: ClassVar[Tables]  # one of its own for each model; no field, since no choice

    def __post_init__(self) -> None:
        put = object.__setattr__
        if self.ephemeris is None:
            put(self, "ephemeris", Ephemeris.default())
        if self.earth_orientation is None:
            put(self, "earth_orientation", EarthOrientation.bundled())
        if not isinstance(self.ephemeris, Ephemeris):
            allowed = "an Ephemeris: Ephemeris.open reads one from files"
            raise InputError("ephemeris", self.ephemeris, allowed)
        if not isinstance(self.earth_orientation, EarthOrientation):
            allowed = "an EarthOrientation: EarthOrientation.read reads one from a file"
            raise InputError("earth_orientation", self.earth_orientation, allowed)
        put(self, "delays", delay_terms(self.delays))
        put(self, "omit", omitted(self.omit, [term.name for term in self.delays]))
        for name in ("gamma", "moon_h2", "moon_l2"):
            value = number(name, getattr(self, name))
            if not np.isfinite(value):
                raise InputError(name, value, "a finite number")
            put(self, name, value)
        if not isinstance(self.uncertainties, Uncertainties):
            raise InputError("uncertainties", self.uncertainties, "an Uncertainties object")
        put(self, "_tables", Tables(self.ephemeris, self._relation))

    def __reduce__(self) -> tuple[Any, ...]:
        return Model, tuple(getattr(self, f.name) for f in fields(self))  # without the tables

    def tables(self) -> str:
        """What has been tabulated so far, and what the tables leave out; for people."""
        return str(self._tables)

    # -- the range ---------------------------------------------------------------------------

    def round_trip(
        self,
        when: Any,
        station: Any,
        reflector: Any,
        tag: str = "transmit",
        weather: Weather | None = None,
        wavelength_nm: float = 532.0,
        turnaround_s: float = 0.0,
        progress: Callable[[int, int], None] | None = None,
    ) -> RoundTrip:
        """The time from transmission to reception, in seconds of the station's timer (UTC, TT).

        Parameters
        ----------
        when : Epoch, str, datetime, astropy Time, or an array or list of them
            The tagged instant; text is UTC.
        station : Station or Trajectory
            Where the light begins and ends. With a trajectory the answer is in TDB seconds.
        reflector : Reflector or Trajectory
            Where it turns back.
        tag : {"transmit", "bounce", "receive"}
            Which instant `when` is.
        weather : Weather, optional
            At the station. Without it there is no troposphere term, and the answer says so.
        wavelength_nm : float
            355 to 1064.
        turnaround_s : float
            Delay of a transponder between arrival and departure, TDB seconds.
        progress : callable, optional
            Called with (epochs done, epochs in all) after each block.

        Returns
        -------
        RoundTrip
            In the shape of `when`.

        Raises
        ------
        LighttimeError
            If an input is out of coverage, not finite, below the horizon or of the wrong shape.
        """
        query = self._query(when, station, reflector, tag, weather, wavelength_nm, turnaround_s)

        def parts() -> Iterator[tuple[slice | Index, RoundTrip]]:
            done = 0
            for index, part in query.blocks(BLOCK):
                yield index, RoundTrip.of(self, part, self.solve(part))
                done += part.size
                if progress is not None:
                    progress(done, query.size)

        answer: RoundTrip = gather(query, parts())
        return answer

    def one_way(
        self,
        when: Any,
        start: Any,
        end: Any,
        tag: str = "transmit",
        weather: Weather | None = None,
        wavelength_nm: float = 532.0,
    ) -> OneWay:
        """The light time from one end to another, in TDB seconds.

        Parameters
        ----------
        when : Epoch, str, ...
            The tagged instant, as in `round_trip`.
        start, end : Station, Reflector or Trajectory
            At most one of them a `Station`.
        tag : {"transmit", "receive"}
            Whether `when` is the departure from `start` or the arrival at `end`.
        weather, wavelength_nm
            As in `round_trip`.

        Returns
        -------
        OneWay
        """
        if tag not in ("transmit", "receive"):
            raise UnknownNameError("tag", tag, ("transmit", "receive"))
        upward = not isinstance(end, Station)
        near, far = (start, end) if upward else (end, start)
        query = self._query(when, near, far, tag, weather, wavelength_nm, 0.0)
        sense = +1 if tag == "transmit" else -1
        known_near = upward == (tag == "transmit")

        def parts() -> Iterator[tuple[slice | Index, OneWay]]:
            for index, part in query.blocks(BLOCK):
                _, near_end, far_end, delays = self._ends(part)
                leg = solve_one_way(
                    near_end, far_end, np.zeros(part.size), known_near, sense, upward,
                    delays(upward), part.guess_s,
                )  # fmt: skip
                yield index, OneWay.of(self, part, leg, upward)

        answer: OneWay = gather(query, parts())
        return answer

    # -- solving one block -------------------------------------------------------------------

    def solve(self, query: Query) -> Legs:
        """Both legs of a block of epochs with every intermediate value (for maintainers)."""
        return self.solve_in_frame(query)[1]

    def solve_in_frame(self, query: Query) -> tuple[EarthFrame, Legs]:
        """The same, with the working frame of its events."""
        frame, near, far, delays = self._ends(query)
        return frame, solve_round_trip(
            near, far, np.zeros(query.size), query.tag, delays(True), delays(False),
            query.guess_s, query.turnaround_s,
        )  # fmt: skip

    def _query(
        self, when: Any, near: Any, far: Any, tag: str, weather: Any, wavelength: float, turn: float
    ) -> Query:
        if tag not in TAGS:
            raise UnknownNameError("tag", tag, TAGS)
        wavelength, turn = number("wavelength_nm", wavelength), number("turnaround_s", turn)
        if not np.isfinite(turn) or turn < 0.0:
            raise InputError("turnaround_s", turn, "0 or more seconds")
        for name, end in (("station", near), ("reflector", far)):
            if not isinstance(end, (Station, Reflector, Trajectory)):
                kinds = "a Station, a Reflector, or an object with bcrs(when)"
                raise InputError(name, end, kinds)
        if isinstance(far, Station):
            raise InputError("reflector", far, "a Reflector, or an object with bcrs(when)")
        if weather is not None and not isinstance(weather, Weather):
            raise InputError("weather", weather, "a Weather, or None")
        if weather is not None and not isinstance(near, Station):
            raise InputError("weather", weather, "None where no Station is at the end of the ray")
        epoch = Epoch.parse(when)
        return Query(epoch, near, far, tag, weather, wavelength, turn)  # type: ignore[arg-type]

    def _ends(self, query: Query) -> tuple[EarthFrame, Any, Any, Any]:
        """The working frame, both ends in it, and the delays between them."""
        tt1, tt2 = self._tt(query)
        station = query.station
        if isinstance(station, Station):
            states = self._tables.of(self, station)
            plan = states.plan(tt1, tt2)
            tagged = states.at(tt1, tt2, plan)
            tdb_minus_tt = tagged["tdb_minus_tt"]
        else:
            tdb_minus_tt = self._tables.celestial.at(tt1, tt2, frozenset())[3]
        if query.when.scale == "tdb":  # as it was given, to the last bit
            tdb1, tdb2 = np.atleast_1d(query.when.jd1), np.atleast_1d(query.when.jd2)
        else:
            tdb1, tdb2 = tt1, tt2 + tdb_minus_tt / DAY
        frame = EarthFrame(self.ephemeris, tdb1, tdb2)

        def end(thing: Any, name: str) -> Any:
            if isinstance(thing, Station):
                return StationMotion(states, plan, frame, tt1, tt2, tagged)
            if isinstance(thing, Reflector):
                return ReflectorMotion(thing, frame, self.moon_h2, self.moon_l2, self._omit)
            return TrajectoryMotion(thing, frame, getattr(thing, "name", name))

        def delays(upward: bool) -> Callable[[Any, Any], Mapping[str, Array]]:
            def between(near: Any, far: Any) -> Mapping[str, Array]:
                late = gravity_delays(frame, near, far, self.gamma, self._omit, self.solar_bending)
                if query.weather is not None and "troposphere" not in self._omit:
                    late["troposphere"] = self._troposphere(query, query.weather, near, far, upward)
                for term in self.delays:
                    if term.name not in self._omit:
                        late[term.name] = term.seconds(Ray(frame, near, far, upward))
                return late

            return between

        near, far = end(query.station, "the near end"), end(query.reflector, "the far end")
        return frame, near, far, delays

    @property
    def _relation(self) -> TimeEphemeris | None:
        """What TDB - TT is from; None for the series."""
        return time_integral.chosen(self.tdb, self.ephemeris)

    @property
    def _omit(self) -> frozenset[str]:
        return self.omit  # type: ignore[return-value]

    def _tt(self, query: Query) -> tuple[Array, Array]:
        """The tagged instants, TT in two parts, within the span of the ephemeris."""
        station = query.station if isinstance(query.station, Station) else None
        tt = query.when.to(
            "tt",
            place=station,
            earth_orientation=self.earth_orientation,
            tdb=self._relation,
        )
        tt1, tt2 = np.atleast_1d(tt.jd1), np.atleast_1d(tt.jd2)
        first, last = self.ephemeris.coverage
        margin = 10.0 / DAY  # the other events are within seconds
        outside = ~((tt1 > first + margin) & (tt1 < last - margin))
        if np.any(outside):
            bad = Epoch(float(tt1[outside][0]), 0.0, "tt")
            first_date, last_date = (Epoch(jd, 0.0, "tdb").isoformat(0) for jd in (first, last))
            raise CoverageError(
                "when",
                f"{bad.isoformat(0)} TT",
                f"{first_date} to {last_date} TDB, the span of {self.ephemeris.name}",
            )
        return tt1, tt2

    def _troposphere(
        self, query: Query, weather: Weather, near: Any, far: Any, upward: bool
    ) -> Array:
        station = query.station
        angle = np.arcsin(sine_of_elevation(near, far, upward))
        try:
            metres = slant_delay(
                angle, station.latitude_rad, station.height_m, weather, query.wavelength_nm
            )
        except HorizonError as error:
            lowest = int(np.argmin(angle))
            when = query.when[lowest] if query.shape else query.when
            value = round(float(angle[lowest]) / DEGREE, 4)
            raise HorizonError(f"elevation_deg at {when}", value, error.allowed) from None
        return np.asarray(metres) / SPEED_OF_LIGHT
