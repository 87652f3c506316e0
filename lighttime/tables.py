"""The tables of one model: kept while it lives, bounded, dropped by use."""

from __future__ import annotations

from collections import OrderedDict
from threading import Lock
from typing import TYPE_CHECKING

from lighttime.earth.celestial import SPAN_DAYS, celestial_series
from lighttime.earth.state import SCALARS, StateModel
from lighttime.earth.station import Station
from lighttime.ephemeris.bodies import Ephemeris
from lighttime.ephemeris.piecewise import PiecewiseSeries
from lighttime.timescales.inputs import Relation

if TYPE_CHECKING:
    from lighttime.model import Model

MOST_STATIONS = 16


class Tables:
    """Series of precession-nutation and TDB, and of the state of each station that is used."""

    def __init__(self, ephemeris: Ephemeris, relation: Relation | None = None) -> None:
        self.celestial: PiecewiseSeries = celestial_series(ephemeris, relation)
        self._exact_place = relation is not None
        self._stations: OrderedDict[Station, StateModel] = OrderedDict()
        self._lock = Lock()

    def of(self, model: Model, station: Station) -> StateModel:
        """The state of a station under the choices of `model`, to which these tables belong."""
        with self._lock:
            states = self._stations.get(station)
            if states is None:
                states = StateModel(
                    station, model.ephemeris, model.earth_orientation, model._omit,
                    self.celestial, self._exact_place,
                )  # fmt: skip
                self._stations[station] = states
            self._stations.move_to_end(station)
            while len(self._stations) > MOST_STATIONS:
                self._stations.popitem(last=False)
            return states

    def __str__(self) -> str:
        lines = [
            _told("precession-nutation and TDB-TT", f"spans of {SPAN_DAYS:g} d", self.celestial)
        ]
        left = self.celestial.truncation
        if left is not None:
            lines.append(f"    left out: {max(left[:3]):.1e} rad, {left[3]:.1e} s")
        with self._lock:
            known = list(self._stations.items())
        for station, states in known:
            lines.append(_told(station.name, "days", states.daily))
            left = states.daily.truncation
            if left is not None:
                ut1 = SCALARS.index("ut1_minus_tai")
                moved = max(left[len(SCALARS) :], default=0.0)
                told = f"{max(left[:3]):.1e} rad, {left[ut1]:.1e} s of UT1, {moved:.1e} m"
                lines.append(f"    left out: {told}")
        return "\n".join(lines)


def _told(what: str, spans: str, series: PiecewiseSeries) -> str:
    return f"{what}: {series.built} {spans} built, {series.terms} terms each"
