"""What comes back: seconds, legs, terms, and what they rest on."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Any

import numpy as np

from lighttime.constants import DEGREE, MJD_ZERO, SPEED_OF_LIGHT
from lighttime.earth.alone import geocentre
from lighttime.earth.displacement import not_modelled
from lighttime.earth.series import EarthOrientation
from lighttime.earth.station import Station
from lighttime.moon.reflector import Reflector
from lighttime.path.delays import GRAVITY_TERMS, elevation
from lighttime.path.legs import Leg, Legs
from lighttime.query import Query
from lighttime.terms import TERMS
from lighttime.timescales import Epoch
from lighttime.vectors import Array, dot

if TYPE_CHECKING:
    from astropy.table import QTable

    from lighttime.model import Model
    from lighttime.partials import Parameter, Partials
    from lighttime.uncertainty import Budget

c = SPEED_OF_LIGHT


@dataclass(frozen=True, eq=False, repr=False)
class LegAnswer:
    """One leg, in the shape of the epochs.

    Attributes
    ----------
    seconds : float or array
        Duration, TDB seconds.
    geometry : float or array
        Distance over c, s.
    gravity : mapping of str to float or array
        Delay by each body, s.
    troposphere : float, array or None
        Delay by the air, s; None where it was not asked for.
    elevation_deg : float, array or None
        Elevation of the ray in the rest frame of the station (without refraction); None where
        no station is at the end.
    own : mapping of str to float or array
        Delays by a user's own terms, s.
    """

    seconds: Any
    geometry: Any
    gravity: Mapping[str, Any]
    troposphere: Any
    elevation_deg: Any
    own: Mapping[str, Any]

    @classmethod
    def of(cls, leg: Leg, upward: bool) -> LegAnswer:
        """From a solved leg."""
        gravity = {k: v for k, v in leg.delays.items() if k in GRAVITY_TERMS}
        own = {k: v for k, v in leg.delays.items() if k not in (*gravity, "troposphere")}
        angle = elevation(leg.near, leg.far, upward)
        return cls(
            leg.seconds,
            leg.geometry,
            gravity,
            leg.delays.get("troposphere"),
            None if angle is None else angle / DEGREE,
            own,
        )

    def __repr__(self) -> str:
        return f"<LegAnswer: {_told(self.seconds)} TDB>"


@dataclass(frozen=True, eq=False, repr=False)
class Answer:
    """What every answer has.

    Attributes
    ----------
    query : Query
        What was asked.
    model : Model
        What answered.
    seconds : float or array
        The light time.
    terms : mapping of str to float or array
        Of what it is made, s; their sum is `seconds`.
    not_modelled : tuple of str
        Terms for which nothing was given: they are absent, not zero.
    """

    query: Query
    model: Model
    seconds: Any
    terms: Mapping[str, Any]
    not_modelled: tuple[str, ...]

    @property
    def notes(self) -> tuple[str, ...]:
        """Which data were used, how far they reach, and what does not go together."""
        return notes(self.model, self.query)

    def __repr__(self) -> str:
        ends = (
            getattr(end, "name", type(end).__name__)
            for end in (self.query.station, self.query.reflector)
        )
        return f"<{type(self).__name__} {' - '.join(ends)}: {_told(self.seconds)}>"

    def _columns(self) -> dict[str, Any]:
        when = self.query.when
        columns: dict[str, Any] = {f"epoch_{when.scale}": np.ravel(when.isoformat(12))}
        columns["light_time"] = np.ravel(self.seconds)
        return columns

    def table(self) -> QTable:
        """An astropy `QTable` with a row per epoch: light time, elevations, terms (with units)."""
        from astropy import units
        from astropy.table import QTable

        columns = self._columns()
        seconds = {"light_time": "light_time"} | {n: f"term_{n}" for n in self.terms}
        out = QTable()
        for name, values in columns.items():
            unit = units.s if name in seconds else units.deg if name.endswith("_deg") else None
            out[name.removesuffix("_deg")] = values if unit is None else values * unit
        for name, values in self.terms.items():
            out[seconds[name]] = np.ravel(values) * units.s
        out.meta["notes"] = list(self.notes)
        out.meta["not_modelled"] = list(self.not_modelled)
        return out


@dataclass(frozen=True, eq=False, repr=False)
class RoundTrip(Answer):
    """A round trip, in seconds of the station's timer.

    Attributes
    ----------
    seconds_low : float or array
        ``seconds + seconds_low`` is the answer as an unevaluated sum of two float64.
    uplink, downlink : LegAnswer
    """

    seconds_low: Any
    uplink: LegAnswer
    downlink: LegAnswer

    @classmethod
    def of(cls, model: Model, query: Query, legs: Legs) -> RoundTrip:
        """From the solved legs of a flat block of epochs."""
        up, down = legs.up, legs.down
        terms = _terms(legs, model.omit)
        high, low = _sum(
            up.geometry,
            down.geometry,
            *up.delays.values(),
            *down.delays.values(),
            np.full(query.size, query.turnaround_s),
            terms.get("clock", np.zeros(query.size)),
        )
        geometry = high - sum(terms.values())
        return cls(
            query=query,
            model=model,
            seconds=high,
            terms=_in_order(geometry, terms),
            not_modelled=_not_modelled(model, query),
            seconds_low=low,
            uplink=LegAnswer.of(up, True),
            downlink=LegAnswer.of(down, False),
        )

    def _columns(self) -> dict[str, Any]:
        columns = super()._columns()
        for name, leg in (("uplink", self.uplink), ("downlink", self.downlink)):
            if leg.elevation_deg is not None:
                columns[f"elevation_{name}_deg"] = np.ravel(leg.elevation_deg)
        return columns

    def worksheet(self) -> Mapping[str, Any]:
        """Every intermediate value, in the order in which it is found, at full digits.

        Returns
        -------
        mapping of str to ndarray
            Names say event, quantity and unit (``"t1.era_rad"``); vectors are (3, n).
        """
        from lighttime.worksheet import worksheet

        return worksheet(self)

    def partials(self, names: Iterable[str | Parameter] | None = None) -> Partials:
        """Derivatives of the round trip with respect to what it depends on.

        Parameters
        ----------
        names : iterable of str or Parameter, optional
            Names of `lighttime.partials.PARAMETERS` (they end in the unit), parameters of the
            model's own delay terms (``"term.parameter"``), or a `Parameter` of one's own. All
            but the last, as far as their inputs were given, when not given.

        Returns
        -------
        Partials
            A mapping from names to floats or arrays; `Partials.table` and `Partials.matrix`
            give them as tables.

        Raises
        ------
        UnknownNameError
            For a name that is none.
        InputError
            For a parameter that needs an input which was not given.

        Notes
        -----
        The tagged epoch is held; the other events move with every change, and the light-time
        equation is differentiated so. Each parameter moves alone: the Moon's position with the
        Earth held, the Earth's velocity with its position at the tagged epoch held.

        Examples
        --------
        >>> import lighttime as lt
        >>> hilltop = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
        >>> answer = lt.round_trip("2020-03-01T19:00:00", hilltop, lt.reflector("Apollo 15"))
        >>> slopes = answer.partials(["reflector_x_m", "ut1_s"])
        >>> f"{slopes['reflector_x_m']:.3e}"
        '-6.604e-09'
        """
        from lighttime.partials import partials

        return partials(self, names)

    @cached_property
    def budget(self) -> Budget:
        """The error budget: what every uncertain input contributes, and all of them together.

        Sigmas are those of `Model.uncertainties`, of the station, of the reflector, and of the
        series of Earth orientation at the date.

        Examples
        --------
        >>> import lighttime as lt
        >>> hilltop = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
        >>> answer = lt.round_trip("2020-03-01T19:00:00", hilltop, lt.reflector("Apollo 15"))
        >>> answer.budget.largest_first[0].name
        'reflector'
        """
        from lighttime.uncertainty import budget

        return budget(self)

    @property
    def sigma_s(self) -> Any:
        """One sigma of the round trip, s: the total of `budget`."""
        return self.budget.total_s

    def __str__(self) -> str:
        from lighttime.printing import round_trip_text

        return round_trip_text(self)


@dataclass(frozen=True, eq=False, repr=False)
class OneWay(Answer):
    """A one-way light time, in TDB seconds.

    Attributes
    ----------
    leg : LegAnswer
    """

    leg: LegAnswer

    @classmethod
    def of(cls, model: Model, query: Query, leg: Leg, upward: bool) -> OneWay:
        """From the solved leg of a flat block of epochs."""
        terms: dict[str, Array] = {}
        for body, delay in leg.delays.items():
            name = GRAVITY_TERMS.get(body, body)
            terms[name] = terms.get(name, 0.0) + delay
        for name, extra in _displaced(leg, 1.0 if upward else -1.0):
            terms[name] = terms.get(name, 0.0) + extra
        geometry = leg.seconds - sum(terms.values())
        return cls(
            query=query,
            model=model,
            seconds=leg.seconds,
            terms=_in_order(geometry, terms),
            not_modelled=_not_modelled(model, query),
            leg=LegAnswer.of(leg, upward),
        )

    def __str__(self) -> str:
        from lighttime.printing import one_way_text

        return one_way_text(self)


def _told(seconds: Any) -> str:
    """One light time, or how many and between which."""
    if np.ndim(seconds) == 0:
        return f"{seconds:.12f} s"
    if not seconds.size:
        return "no epochs"
    return f"{seconds.size} epochs, {seconds.min():.6f} to {seconds.max():.6f} s"


# -- terms ---------------------------------------------------------------------------------------


def _terms(legs: Legs, omit: Any) -> dict[str, Array]:
    """What each term but geometry adds to the round trip, s.

    A delay of a leg, or a displacement of one of its ends along the ray, moves the events; the
    response of the round trip to either leg carries it into the answer.
    """
    terms: dict[str, Array] = {}
    for leg, response in zip((legs.up, legs.down), legs.response(), strict=True):
        for body, delay in leg.delays.items():
            name = GRAVITY_TERMS.get(body, body)
            terms[name] = terms.get(name, 0.0) + response * delay
        for name, longer in _displaced(leg, 1.0 if leg is legs.up else -1.0):
            terms[name] = terms.get(name, 0.0) + response * longer
    if "clock" not in omit and hasattr(legs.up.near, "tdb_minus_tt"):
        terms["clock"] = -(legs.down.near.tdb_minus_tt - legs.up.near.tdb_minus_tt)
    return terms


def _in_order(geometry: Array, terms: dict[str, Array]) -> dict[str, Array]:
    """Geometry, the built-in terms as they are told, then a user's own."""
    names = [*(n for n in TERMS if n in terms), *(n for n in terms if n not in TERMS)]
    return {"geometry": geometry} | {n: terms[n] for n in names}


def _displaced(leg: Leg, sense: float) -> list[tuple[str, Array]]:
    """By how much the displacements of its ends lengthen a leg, s."""
    outward = sense * leg.direction
    longer = []
    for event, sign in ((leg.near, -1.0), (leg.far, +1.0)):
        for name, displacement in getattr(event, "displacement", {}).items():
            longer.append((name, sign * dot(outward, displacement) / c))
    return longer


def _sum(*parts: Array) -> tuple[Array, Array]:
    """The sum of arrays as an unevaluated sum of two float64 (Neumaier's compensated sum)."""
    high = np.zeros_like(parts[0])
    low = np.zeros_like(parts[0])
    for part in parts:
        total = high + part
        bigger = np.abs(high) >= np.abs(part)
        low = low + np.where(bigger, (high - total) + part, (part - total) + high)
        high = total
    result = high + low
    return result, (high - result) + low


def _not_modelled(model: Model, query: Query) -> tuple[str, ...]:
    """Terms that would need an input which was not given, and were not left out on purpose."""
    if not isinstance(query.station, Station):
        return ()
    names = () if query.weather is not None else ("troposphere",)
    return tuple(n for n in (*names, *not_modelled(query.station)) if n not in model.omit)


def notes(model: Model, query: Query) -> tuple[str, ...]:
    """See `Answer.notes`."""
    first, last = (_day(jd) for jd in model.ephemeris.coverage)
    lines = [f"ephemeris {model.ephemeris.name}: {first} to {last}"]
    if isinstance(query.station, Station):
        lines += _orientation_notes(model.earth_orientation, query.when)
        lines += _geocentre_notes(query.station, model)
    if isinstance(query.reflector, Reflector):
        note = query.reflector.axes_note(model.ephemeris.name)
        lines += [note] if note else []
    return tuple(lines)


def _orientation_notes(series: EarthOrientation, when: Epoch) -> list[str]:
    if series.constant is not None:
        return [f"Earth orientation {series.name}: the same at every instant"]
    first, last = (_day(MJD_ZERO + mjd) for mjd in series.coverage)
    lines = [f"Earth orientation {series.name}: {first} to {last}"]
    latest = float(np.max(when.to("utc").jd1, initial=-np.inf)) - MJD_ZERO
    if latest > series.last_measured_mjd:
        measured = _day(MJD_ZERO + series.last_measured_mjd)
        lines.append(f"pole and UT1 are predicted: the last measured day is {measured}")
    if latest > series.last_dxdy_mjd:
        known = _day(MJD_ZERO + series.last_dxdy_mjd)
        lines.append(f"dX and dY are taken as zero: the last published day is {known}")
    return lines


def _geocentre_notes(station: Station, model: Model) -> list[str]:
    """Said where ocean loading is in use and may lack the motion of the geocentre."""
    ocean = None if "ocean_loading" in model.omit else station.ocean_loading
    return [] if ocean is None or ocean.centre_of_mass else [geocentre(station)[1]]


def _day(jd: float) -> str:
    return str(Epoch(jd, 0.0, "tdb").isoformat(0))[:10]
