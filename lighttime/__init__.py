"""Light time between the Earth and the Moon, to a known accuracy, taken apart term by term.

>>> import lighttime as lt
>>> hilltop = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
>>> answer = lt.round_trip("2020-03-01T19:00:00", hilltop, lt.reflector("Apollo 15"))
"""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from importlib import import_module
from typing import TYPE_CHECKING, Any

from lighttime.answer import OneWay, RoundTrip
from lighttime.crosscheck import crosscheck
from lighttime.earth.loading import AtmosphereLoading, OceanLoading, OceanPoleTide
from lighttime.earth.residual_motion import ResidualMotion
from lighttime.earth.series import EarthOrientation
from lighttime.earth.station import Station
from lighttime.ephemeris import Ephemeris
from lighttime.errors import (
    ConvergenceError,
    CoverageError,
    FileError,
    HorizonError,
    InputError,
    LighttimeError,
    UnknownNameError,
)
from lighttime.model import Model
from lighttime.moon.reflector import Reflector, reflector, reflectors
from lighttime.path.ends import Trajectory
from lighttime.path.troposphere import Weather
from lighttime.sigmas import Covariance, Uncertainties
from lighttime.terms import TERMS
from lighttime.timescales import Epoch
from lighttime.user_terms import DelayTerm, Ray
from lighttime.version import __version__

if TYPE_CHECKING:
    from lighttime import exact as exact
    from lighttime.earth.sinex import read_sinex
    from lighttime.partials import Parameter, Partials

__all__ = [
    "TERMS",
    "AtmosphereLoading",
    "ConvergenceError",
    "Covariance",
    "CoverageError",
    "DelayTerm",
    "EarthOrientation",
    "Ephemeris",
    "Epoch",
    "FileError",
    "HorizonError",
    "InputError",
    "LighttimeError",
    "Model",
    "OceanLoading",
    "OceanPoleTide",
    "OneWay",
    "Parameter",
    "Partials",
    "Ray",
    "Reflector",
    "ResidualMotion",
    "RoundTrip",
    "Station",
    "Trajectory",
    "Uncertainties",
    "UnknownNameError",
    "Weather",
    "__version__",
    "crosscheck",
    "one_way",
    "read_sinex",
    "reflector",
    "reflectors",
    "round_trip",
]


def round_trip(
    when: Any,
    station: Any,
    reflector: Any,
    tag: str = "transmit",
    weather: Weather | None = None,
    wavelength_nm: float = 532.0,
    turnaround_s: float = 0.0,
    progress: Callable[[int, int], None] | None = None,
) -> RoundTrip:
    """The round trip by the default model: see `Model.round_trip`.

    Examples
    --------
    >>> hilltop = Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
    >>> answer = round_trip("2020-03-01T19:00:00", hilltop, reflectors()[2])
    >>> f"{answer.seconds:.6f}"
    '2.606622'
    """
    return _default_model().round_trip(
        when, station, reflector, tag, weather, wavelength_nm, turnaround_s, progress
    )


def one_way(
    when: Any,
    start: Any,
    end: Any,
    tag: str = "transmit",
    weather: Weather | None = None,
    wavelength_nm: float = 532.0,
) -> OneWay:
    """The one-way light time by the default model: see `Model.one_way`."""
    return _default_model().one_way(when, start, end, tag, weather, wavelength_nm)


@cache
def _default_model() -> Model:
    return Model()


_ROOMS_ON_DEMAND = ("exact",)
_NAMES_ON_DEMAND = {
    "Parameter": "lighttime.partials",
    "Partials": "lighttime.partials",
    "read_sinex": "lighttime.earth.sinex",
}
"""What most programs do not need, and what brings other libraries with it."""


def __getattr__(name: str) -> Any:
    """Import what is on demand when it is first asked for."""
    if name in _ROOMS_ON_DEMAND:
        return import_module(f"lighttime.{name}")
    if name in _NAMES_ON_DEMAND:
        return getattr(import_module(_NAMES_ON_DEMAND[name]), name)
    raise AttributeError(f"module 'lighttime' has no attribute {name!r}")


def __dir__() -> list[str]:
    return sorted([*__all__, *_ROOMS_ON_DEMAND])
