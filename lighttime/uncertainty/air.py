"""Parts of the error budget: the air above the station."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from lighttime.constants import DEGREE, SPEED_OF_LIGHT
from lighttime.path.troposphere import mapping
from lighttime.uncertainty.case import Case, Contribution
from lighttime.vectors import Array

__all__ = ["air", "mapping_error"]

c = SPEED_OF_LIGHT


def air(case: Case) -> Iterator[Contribution]:
    """Weather, the formula for the zenith, the mapping function, horizontal gradients.

    It is the same air on both legs: what it does adds up.
    """
    if not case.has("troposphere"):
        return
    sizes = case.sigmas
    for name in ("pressure_hpa", "temperature_k", "relative_humidity", "zenith_delay_m"):
        short = name.removesuffix("_hpa").removesuffix("_k").removesuffix("_m")
        rows = case.rows((name,), (getattr(sizes, name),))
        yield Contribution(short, "troposphere", rows, sizes.source(name))
    mapped, sloped = _shapes(case)
    rows = sizes.mapping_at_10_deg_m * mapped[None, :]
    source = sizes.source("mapping_at_10_deg_m")
    yield Contribution("mapping_function", "troposphere", rows, source)
    rows = sizes.gradient_m * sloped[None, :]
    yield Contribution("air_gradient", "troposphere", rows, sizes.source("gradient_m"))


def mapping_error(elevation_rad: Array) -> Array:
    """How an error of the mapping function grows towards the horizon: 1 at 10 degrees.

    As 1/(sin e tan^2 e): the form of the first term in which mapping functions differ.
    """
    ten = 10.0 * DEGREE
    size: Array = (np.sin(ten) * np.tan(ten) ** 2) / (
        np.sin(elevation_rad) * np.tan(elevation_rad) ** 2
    )
    return size


def _shapes(case: Case) -> tuple[Array, Array]:
    """What a metre at 10 degrees, and a metre of gradient, do to the round trip, s."""
    query = case.answer.query
    station, weather = query.station, query.weather
    assert weather is not None
    temperature = np.ravel(np.broadcast_to(weather.temperature_k, query.shape))
    mapped, sloped = np.zeros(query.size), np.zeros(query.size)
    for leg in (case.answer.uplink, case.answer.downlink):
        elevation = np.ravel(leg.elevation_deg) * DEGREE
        factor = mapping(elevation, station.latitude_rad, station.height_m, temperature)
        mapped += mapping_error(elevation) / c
        sloped += factor / np.tan(elevation) / c
    return mapped, sloped
