"""What is asked of a model: the same for one epoch and for a million."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from lighttime.earth.station import Station
from lighttime.errors import InputError
from lighttime.moon.reflector import Reflector
from lighttime.path.legs import Tag
from lighttime.path.troposphere import Weather
from lighttime.timescales import Epoch

Index = NDArray[np.intp]

LUNAR_LEG_S = 1.28
"""First guess of the light time of a leg to the Moon; Newton's method does the rest."""


@dataclass(frozen=True, eq=False)
class Query:
    """Instants, both ends, and the circumstances.

    Parameters
    ----------
    when : Epoch
        Any shape.
    station, reflector : Station, Reflector or Trajectory
    tag : {"transmit", "bounce", "receive"}
    weather : Weather or None
        Scalars, or arrays that broadcast to the shape of `when`.
    wavelength_nm : float
    turnaround_s : float
    """

    when: Epoch
    station: Any
    reflector: Any
    tag: Tag
    weather: Weather | None
    wavelength_nm: float
    turnaround_s: float

    def __post_init__(self) -> None:
        if self.weather is not None:
            shape = np.broadcast_shapes(self.weather.shape, ())
            try:
                fits = np.broadcast_shapes(shape, self.when.shape) == self.when.shape
            except ValueError:
                fits = False
            if not fits:
                raise InputError(
                    "weather", f"values of shape {shape}", f"shape {self.when.shape}, as the epochs"
                )

    @property
    def shape(self) -> tuple[int, ...]:
        """Shape of the instants."""
        return self.when.shape

    @property
    def size(self) -> int:
        """Number of instants."""
        return int(np.prod(self.shape, dtype=int))

    @property
    def guess_s(self) -> float:
        """First guess of the light time of a leg."""
        lunar = isinstance(self.station, Station) and isinstance(self.reflector, Reflector)
        return LUNAR_LEG_S if lunar else 0.0

    def order(self) -> Index | None:
        """The order in which the flat instants are worked off: by time; None if they are so."""
        jd = np.ravel(self.when.jd1)
        if jd.size < 2 or np.all(jd[1:] >= jd[:-1]):
            return None
        return np.argsort(jd, kind="stable")

    def blocks(self, size: int) -> Iterator[tuple[slice | Index, Query]]:
        """The same query in flat parts of at most `size` instants, by time.

        Each comes with where it lies in the flat query.
        """
        when = Epoch(np.ravel(self.when.jd1), np.ravel(self.when.jd2), self.when.scale)
        order = self.order()
        for first in range(0, max(self.size, 1), size):  # no epochs at all are a block, too
            part = slice(first, first + size)
            index = part if order is None else order[part]
            yield index, replace(self, when=when[index], weather=self._weather(index))

    def _weather(self, part: slice | Index) -> Weather | None:
        weather = self.weather
        if weather is None or weather.shape == ():
            return weather
        values = (weather.pressure_hpa, weather.temperature_k, weather.relative_humidity)
        full = (np.ravel(np.broadcast_to(v, self.shape))[part] for v in values)
        return Weather(*full)
