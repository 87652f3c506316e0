"""Weather and the delay in the troposphere."""

from __future__ import annotations

import pickle
from typing import Any

import numpy as np
import pytest

from lighttime.errors import HorizonError, InputError
from lighttime.path import troposphere
from lighttime.path.troposphere import (
    Weather,
    mapping,
    mapping_rate,
    slant_delay,
    zenith_delay,
    zenith_delay_of_vapour,
)
from lighttime.path.weather import saturation_pressure_hpa

LATITUDE = np.radians(30.67166667)
WEATHER = Weather(798.4188, 300.15, 0.4)


# -- the test cases of the IERS Conventions (2010), chapter 9, routine headers -----------------


def test_mapping_of_the_iers_case() -> None:
    value = mapping(np.radians(15.0), LATITUDE, 2075.0, 300.15)
    assert value == pytest.approx(3.800243667312344087, rel=2e-16)


IERS_ZENITH = (LATITUDE, 2003.344, 798.4188, 14.322, 532.0)
IERS_HYDROSTATIC, IERS_WET, IERS_TOTAL = (
    1.932992176591644462,
    0.002233748255158703871,
    1.935225924846803114,
)


def test_zenith_delay_of_the_iers_case() -> None:
    # what is left, 1.6e-12 and 9e-11 m, is explained by the next test
    hydrostatic, wet = zenith_delay_of_vapour(*IERS_ZENITH)
    assert hydrostatic == pytest.approx(IERS_HYDROSTATIC, abs=2e-12)
    assert wet == pytest.approx(IERS_WET, abs=1e-10)


def test_zenith_delay_of_the_iers_case_to_every_digit(monkeypatch: pytest.MonkeyPatch) -> None:
    # the routine that printed the case holds two of its constants in single precision
    monkeypatch.setattr(troposphere, "_GRAVITY_OF_LATITUDE", float(np.float32(0.00266)))
    monkeypatch.setattr(troposphere, "_WET_FROM_DRY", float(np.float32(3.759)))
    hydrostatic, wet = zenith_delay_of_vapour(*IERS_ZENITH)
    assert hydrostatic == pytest.approx(IERS_HYDROSTATIC, rel=2e-16)
    assert wet == pytest.approx(IERS_WET, rel=3e-15)  # a difference: 2 digits cancel
    assert hydrostatic + wet == pytest.approx(IERS_TOTAL, rel=3e-16)


def test_zenith_delay_at_the_height_that_the_header_prints() -> None:
    total = sum(zenith_delay_of_vapour(LATITUDE, 2010.344, 798.4188, 14.322, 532.0))
    assert round(float(total), 8) == 1.93522972


# -- physics from elsewhere --------------------------------------------------------------------


def test_dispersion_is_the_group_refractivity_of_ciddor() -> None:
    # Phase refractivity of dry air and of water vapour, Ciddor 1996, Appl. Opt. 35, 1566,
    # equations 1 and 3 (from memory); group = d(wave number x refractivity)/d(wave number).
    def dry(k: Any) -> Any:
        return 5792105.0 / (238.0185 - k**2) + 167917.0 / (57.362 - k**2)

    def vapour(k: Any) -> Any:
        return 295.235 + 2.6422 * k**2 - 0.032380 * k**4 + 0.004028 * k**6

    wavelength_um = np.array([0.355, 0.4235, 0.532, 0.694, 0.847, 1.064])
    wave_number = 1.0 / wavelength_um
    hydrostatic, wet = troposphere._dispersion(wavelength_um)
    step = 1e-30j
    for found, phase in ((hydrostatic, dry), (wet, vapour)):
        group = ((wave_number + step) * phase(wave_number + step)).imag / step.imag
        assert found / found[2] == pytest.approx(group / group[2], rel=3e-10)


@pytest.mark.parametrize(
    ("temperature_k", "pressure_hpa"),
    [
        # IAPWS-IF97, table 35: saturation at 300 K
        (300.0, 35.3658941),
        # Triple point of water, 611.657 Pa (Guildner et al. 1976; IAPWS)
        (273.16, 6.11657),
    ],
)
def test_saturation_pressure(temperature_k: float, pressure_hpa: float) -> None:
    assert saturation_pressure_hpa(temperature_k) == pytest.approx(pressure_hpa, rel=2e-5)


def test_saturation_pressure_over_supercooled_water() -> None:
    # Murphy & Koop 2005, Q. J. R. Meteorol. Soc. 131, 1539, equation 10 (from memory)
    t = np.linspace(233.15, 323.15, 91)
    log = 54.842763 - 6763.22 / t - 4.210 * np.log(t) + 0.000367 * t
    log += np.tanh(0.0415 * (t - 218.8)) * (
        53.878 - 1331.22 / t - 9.44523 * np.log(t) + 0.014025 * t
    )
    ratio = saturation_pressure_hpa(t) / (np.exp(log) / 100.0)
    assert np.max(np.abs(ratio - 1.0)[t > 263.15]) < 3e-4
    assert np.max(np.abs(ratio - 1.0)) < 1e-2


def test_ray_through_an_exponential_atmosphere() -> None:
    # Straight rays through spherical shells of scale height RT/g: the refractivity of a gas in
    # hydrostatic balance. The bending and the lapse of temperature are left out: 7e-5 at 20
    # degrees.
    scale, radius, elevation = 8000.0, 6_371_000.0, np.radians([20.0, 30.0, 45.0, 60.0, 80.0])
    height = np.linspace(0.0, 20.0 * scale, 40_001)
    slope = np.sqrt(1.0 - (radius / (radius + height[:, None]) * np.cos(elevation)) ** 2)
    density = np.exp(-height / scale)[:, None] / slope
    expected = (density.sum(axis=0) - 0.5 * (density[0] + density[-1])) * height[1] / scale
    assert mapping(elevation, 0.8, 0.0, 283.15) == pytest.approx(expected, rel=2e-4)


def test_mapping_towards_the_zenith_is_one() -> None:
    assert mapping(np.pi / 2.0, 0.3, 500.0, 290.0) == 1.0


def test_mapping_rate_is_the_slope_of_the_mapping() -> None:
    elevation = np.radians([3.1, 5.0, 10.0, 29.0, 60.0, 89.0])
    rest, step = (-0.6, 2100.0, 275.0), 1e-5
    slope = (mapping(elevation + step, *rest) - mapping(elevation - step, *rest)) / (2.0 * step)
    assert mapping_rate(elevation, *rest) == pytest.approx(slope, rel=3e-8)


def test_slant_delay_is_zenith_delay_times_mapping() -> None:
    delay = slant_delay(np.radians(15.0), LATITUDE, 2075.0, WEATHER, 532.0)
    hydrostatic, wet = zenith_delay(LATITUDE, 2075.0, WEATHER, 532.0)
    assert delay == (hydrostatic + wet) * mapping(np.radians(15.0), LATITUDE, 2075.0, 300.15)


def test_vapour_pressure_enters_through_the_humidity() -> None:
    vapour = WEATHER.vapour_pressure_hpa
    assert vapour == pytest.approx(0.4 * saturation_pressure_hpa(300.15), rel=5e-3)
    by_humidity = zenith_delay(LATITUDE, 2075.0, WEATHER, 532.0)
    by_vapour = zenith_delay_of_vapour(LATITUDE, 2075.0, 798.4188, vapour, 532.0)
    assert by_humidity == by_vapour
    assert zenith_delay(LATITUDE, 2075.0, Weather(798.4188, 300.15, 0.0), 532.0).wet_m == 0.0


# -- arrays ------------------------------------------------------------------------------------


def test_arrays_are_the_scalars_one_by_one() -> None:
    elevation = np.radians([[10.0], [40.0]])
    pressure, temperature, humidity = [700.0, 720.0, 740.0], [260.0, 275.0, 290.0], 0.5
    delay = slant_delay(elevation, 0.5, 2700.0, Weather(pressure, temperature, humidity), 1064.0)
    assert delay.shape == (2, 3)
    for (i, j), value in np.ndenumerate(delay):
        weather = Weather(pressure[j], temperature[j], humidity)
        assert value == slant_delay(elevation[i, 0], 0.5, 2700.0, weather, 1064.0)


def test_weather_is_a_value() -> None:
    pressure = np.array([700.0, 710.0])
    weather = Weather(pressure, 280.0, 0.2)
    pressure[0] = 0.0
    assert weather == Weather([700.0, 710.0], 280.0, 0.2)
    assert weather != Weather([700.0, 711.0], 280.0, 0.2)
    assert weather != Weather(700.0, 280.0, 0.2)
    assert hash(weather) == hash(Weather([700.0, 710.0], 280.0, 0.2))
    assert pickle.loads(pickle.dumps(weather)) == weather
    assert weather.shape == (2,)
    with pytest.raises(ValueError, match="read-only"):
        weather.pressure_hpa[0] = 0.0  # type: ignore[index]


# -- bad input ---------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("values", "message"),
    [
        ((72439.0, 268.0, 0.3), "pressure_hpa is 72439.0; .*300 to 1100 hPa .in pascals. .*724.39"),
        ((72.4, 268.0, 0.3), "pressure_hpa is 72.4; .*in kilopascals. then 724"),
        ((21.4, 268.0, 0.3), "pressure_hpa is 21.4; .*in inches of mercury. then 724"),
        ((-1.0, 268.0, 0.3), r"pressure_hpa is -1.0; allowed: 300 to 1100 hPa$"),
        ((724.0, -5.1, 0.3), "temperature_k is -5.1; .*180 to 340 K .in degrees Celsius. .*268.05"),
        ((724.0, 3000.0, 0.3), r"temperature_k is 3000.0; allowed: 180 to 340 K$"),
        ((724.0, 268.0, 34.0), "relative_humidity is 34.0; .*0 to 1 .in percent. then 0.34"),
        ((724.0, 268.0, -0.1), r"relative_humidity is -0.1; allowed: 0 to 1$"),
        ((np.nan, 268.0, 0.3), "pressure_hpa is nan"),
        ((724.0, np.inf, 0.3), "temperature_k is inf"),
        (([724.0, 72400.0], 268.0, 0.3), r"pressure_hpa\[1\] is 72400.0"),
        (([724.0, 725.0], [268.0] * 3, 0.3), r"shape of \(pressure_hpa, temperature_k\) is"),
        (("high", 268.0, 0.3), "pressure_hpa is 'high'; allowed: a number"),
        ((724.0, None, 0.3), "temperature_k is nan"),
    ],
)
def test_bad_weather(values: tuple[Any, Any, Any], message: str) -> None:
    with pytest.raises(InputError, match=message):
        Weather(*values)


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"wavelength_nm": 0.532}, "wavelength_nm is 0.532; allowed: 355 to 1064 nm"),
        ({"wavelength_nm": 1550.0}, "wavelength_nm is 1550.0; allowed: 355 to 1064 nm"),
        ({"wavelength_nm": np.nan}, "wavelength_nm is nan"),
        ({"height_m": 50_000.0}, "height_m is 50000.0; allowed: -1000 to 10000 m"),
        ({"latitude_rad": 32.8}, "latitude_rad is 32.8; allowed: -1.57.* to 1.57.* rad"),
        ({"elevation_rad": 29.0}, "elevation_rad is 29.0; allowed: -pi/2 to pi/2, in radians"),
        ({"elevation_rad": np.nan}, "elevation_rad is nan"),
        ({"elevation_rad": np.ones(3), "weather": Weather([700.0, 701.0], 280.0, 0.1)}, "shape of"),
    ],
)
def test_bad_ray(change: dict[str, Any], message: str) -> None:
    good: dict[str, Any] = {
        "elevation_rad": 0.5,
        "latitude_rad": 0.57,
        "height_m": 2780.0,
        "weather": Weather(724.0, 268.0, 0.3),
        "wavelength_nm": 532.0,
    }
    assert slant_delay(**good) > 3.0
    with pytest.raises(InputError, match=message):
        slant_delay(**{**good, **change})


@pytest.mark.parametrize(
    ("elevation_deg", "message"),
    [
        (-12.0, r"elevation_deg is -12.0; allowed: above 3 deg .*the target is below the horizon"),
        (2.0, "elevation_deg is 2.0; allowed: above 3 deg .*does not hold lower"),
        (3.0, "elevation_deg is 3.0; allowed: above 3 deg"),
        ([40.0, 1.0], r"elevation_deg\[1\] is 1.0"),
    ],
)
def test_low_rays(elevation_deg: Any, message: str) -> None:
    elevation = np.radians(elevation_deg)
    for function in (mapping, mapping_rate):
        with pytest.raises(HorizonError, match=message):
            function(elevation, 0.57, 2780.0, 268.0)


def test_just_above_the_limit_there_is_an_answer() -> None:
    assert 14.0 < mapping(np.radians(3.000001), 0.57, 0.0, 288.0) < 15.5
