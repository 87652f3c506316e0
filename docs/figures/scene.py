"""What the figures and the sizes of the documentation are computed from: invented stations."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cache

import numpy as np
from numpy.typing import NDArray

import lighttime as lt
from lighttime.constants import SPEED_OF_LIGHT
from lighttime.earth.loading import AtmosphereLoading, OceanLoading, OceanPoleTide

Array = NDArray[np.float64]

MM_ONE_WAY = 0.5 * SPEED_OF_LIGHT * 1e3
"""From two-way seconds to one-way millimetres."""

LOWEST_DEG = 20.0
"""The Moon is above this where a range is asked for."""


def air(height_m: float) -> lt.Weather:
    """Ordinary weather at a height: the standard atmosphere, half humid."""
    kelvin = 288.15 - 0.0065 * height_m
    return lt.Weather(1013.25 * (kelvin / 288.15) ** 5.2559, kelvin, 0.5)


OCEAN = OceanLoading(
    [
        [0.00352, 0.00123, 0.00080, 0.00032, 0.00187, 0.00112, 0.00063, 0.00003, 0.00082, 0.00044,
         0.00037],
        [0.00144, 0.00035, 0.00035, 0.00008, 0.00053, 0.00049, 0.00018, 0.00009, 0.00012, 0.00005,
         0.00006],
        [0.00086, 0.00023, 0.00023, 0.00006, 0.00029, 0.00028, 0.00010, 0.00007, 0.00004, 0.00002,
         0.00001],
    ],
    [
        [-64.7, -52.0, -96.2, -55.2, -58.8, -151.4, -65.6, -138.1, 8.4, 5.2, 2.1],
        [85.5, 114.5, 56.5, 113.6, 99.4, 19.1, 94.1, -10.4, -167.4, -170.0, -177.7],
        [109.5, 147.0, 92.7, 148.8, 50.5, -55.1, 36.4, -170.4, -15.0, 2.3, 5.2],
    ],
    "test case of the ocean loading routine of the IERS Conventions (2010)",
)  # fmt: skip

INVENTED_LOADS = {
    "ocean_loading": OCEAN,
    "ocean_pole_tide": OceanPoleTide(-0.21 + 0.13j, 0.05 - 0.02j, -0.03 + 0.04j, "invented"),
    "atmosphere_loading": AtmosphereLoading(
        1e-3 * np.array([[0.9, -0.5], [0.1, 0.05], [-0.12, 0.07]]),
        1e-3 * np.array([[-0.4, 0.6], [0.06, -0.08], [0.1, 0.03]]),
        "invented",
    ),
}
"""Coefficients for the three loads: of the ocean tide from a test case, the others invented."""

STATIONS = tuple(
    lt.Station.from_geodetic(name, latitude, longitude, height, **INVENTED_LOADS)
    for name, latitude, longitude, height in (
        ("Hilltop", 46.2, 7.1, 2310.0),
        ("Atoll", 2.0, 73.0, 5.0),
        ("Cape", -41.5, 146.0, 400.0),
    )
)


@cache
def model() -> lt.Model:
    """The default model."""
    return lt.Model()


def visible(station: lt.Station, when: lt.Epoch, array: lt.Reflector) -> lt.Epoch:
    """The epochs at which the Moon is high enough, up and down."""
    answer = model().round_trip(when, station, array)
    low = np.minimum(answer.uplink.elevation_deg, answer.downlink.elevation_deg)
    return when[low > LOWEST_DEG]


def seen(station: lt.Station, when: lt.Epoch, array: lt.Reflector) -> tuple[lt.Epoch, lt.RoundTrip]:
    """Epochs at which the Moon is high enough, and the round trips then, with air."""
    high = visible(station, when, array)
    answer = model().round_trip(high, station, array, weather=air(station.height_m))
    return high, answer


def one_way_mm(answer: lt.RoundTrip) -> Mapping[str, Array]:
    """Terms as one-way millimetres."""
    return {name: np.asarray(value) * MM_ONE_WAY for name, value in answer.terms.items()}
