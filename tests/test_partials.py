"""Derivatives: against central differences, against the twin, against identities."""

from __future__ import annotations

import sys
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from ocean_case import AMPLITUDES_M, PHASES_DEG

import lighttime as lt
from lighttime.constants import ARCSECOND, MOON_MEAN_RADIUS
from lighttime.earth.loading import OceanLoading, OceanPoleTide
from lighttime.earth.local import east_north_up, geodetic
from lighttime.moon.tide import lunar_tide
from lighttime.partials import PARAMETERS
from lighttime.partials.geodetic import geodetic_slopes
from lighttime.partials.leg import shapiro_slopes
from lighttime.partials.tide import Tide, source
from lighttime.path.gravity import shapiro
from lighttime.path.troposphere import slant_delay
from lighttime.path.troposphere_slopes import slant_slopes

VALIDATION = Path(__file__).parents[1] / "validation"
STATION = lt.Station.from_geodetic(
    "Hilltop",
    46.2,
    7.1,
    2310.0,
    velocity_m_per_yr=(-0.013, 0.018, 0.011),
    ocean_loading=OceanLoading(AMPLITUDES_M, PHASES_DEG),
    ocean_pole_tide=OceanPoleTide(-0.2 + 0.1j, 0.05 - 0.02j, -0.03 + 0.04j),
)
REFLECTOR = lt.reflector("Apollo 15")
WEATHER = lt.Weather(770.0, 280.0, 0.4)
HOURS = np.arange(0.0, 4.0, 0.5)
WHEN = lt.Epoch(2458910.5, (18.0 + HOURS) / 24.0, "utc")
"""2020-03-01, 18 h to 22 h: the Moon 58 to 24 degrees high."""
MODEL = lt.Model()

Changed = Callable[[float], dict[str, Any]]


def ranges(tag: str, **changed: Any) -> tuple[np.ndarray, np.ndarray]:
    """Round trips with some inputs changed, as sums of two numbers."""
    given: dict[str, Any] = {
        "when": WHEN, "station": STATION, "reflector": REFLECTOR, "weather": WEATHER,
    } | changed  # fmt: skip
    model = given.pop("model", MODEL)
    answer = model.round_trip(tag=tag, **given)
    return answer.seconds, answer.seconds_low


def difference(tag: str, changed: Changed, step: float) -> np.ndarray:
    """Central difference; the ranges are sums of two float64."""
    (a, a_low), (b, b_low) = (ranges(tag, **changed(h)) for h in (step, -step))
    return ((a - b) + (a_low - b_low)) / (2.0 * step)


def component(thing: str, field: str, axis: int) -> Changed:
    whole = {"station": STATION, "reflector": REFLECTOR}[thing]

    def changed(h: float) -> dict[str, Any]:
        values = list(getattr(whole, field))
        values[axis] += h
        return {thing: replace(whole, **{field: tuple(values)})}

    return changed


def orientation(field: str) -> Changed:
    series = MODEL.earth_orientation

    def changed(h: float) -> dict[str, Any]:
        moved = replace(series, **{field: getattr(series, field) + h})
        return {"model": lt.Model(earth_orientation=moved)}

    return changed


def weather(field: str) -> Changed:
    return lambda h: {"weather": replace(WEATHER, **{field: getattr(WEATHER, field) + h})}


def model(field: str) -> Changed:
    return lambda h: {"model": replace(MODEL, **{field: getattr(MODEL, field) + h})}


def louder_ocean(h: float) -> dict[str, Any]:
    ocean = OceanLoading((1.0 + h) * AMPLITUDES_M, PHASES_DEG)
    return {"station": replace(STATION, ocean_loading=ocean)}


# name: how it is changed, a step, and the allowed error as a fraction of the largest derivative.
# The steps are as large as curvature allows: the ranges have errors of 1e-15 s.
CASES: dict[str, tuple[Changed, float, float]] = {
    **{f"station_{x}_m": (component("station", "xyz_m", k), 300.0, 2e-8)
       for k, x in enumerate("xyz")},
    **{f"station_v{x}_m_per_yr": (component("station", "velocity_m_per_yr", k), 0.5, 4e-7)
       for k, x in enumerate("xyz")},
    **{f"reflector_{x}_m": (component("reflector", "xyz_m", k), 300.0, 2e-8)
       for k, x in enumerate("xyz")},
    "ut1_s": (orientation("ut1_tai_s"), 0.5, 2e-8),
    "xp_arcsec": (orientation("xp_arcsec"), 10.0, 1e-8),
    "yp_arcsec": (orientation("yp_arcsec"), 10.0, 1e-8),
    "dx_mas": (orientation("dx_mas"), 10000.0, 1e-8),
    "dy_mas": (orientation("dy_mas"), 10000.0, 1e-8),
    "ocean_loading_scale": (louder_ocean, 1.0, 1e-4),
    "pressure_hpa": (weather("pressure_hpa"), 100.0, 1e-6),
    "temperature_k": (weather("temperature_k"), 2.0, 2e-2),
    "relative_humidity": (weather("relative_humidity"), 0.4, 1e-4),
    "h2_moon": (model("moon_h2"), 1.0, 1e-7),
    "l2_moon": (model("moon_l2"), 1.0, 1e-7),
    "epoch_s": (lambda h: {"when": WHEN.shift(h)}, 4.0, 4e-8),
    "gamma": (model("gamma"), 1.0, 1e-7),
}  # fmt: skip


@pytest.fixture(scope="module")
def slopes() -> dict[str, lt.Partials]:
    return {
        tag: MODEL.round_trip(WHEN, STATION, REFLECTOR, tag=tag, weather=WEATHER).partials()
        for tag in ("transmit", "bounce", "receive")
    }


@pytest.mark.parametrize("name", CASES)
def test_central_differences_of_the_range(name: str, slopes: dict[str, lt.Partials]) -> None:
    changed, step, allowed = CASES[name]
    tags = slopes if name in ("epoch_s", "station_x_m", "reflector_y_m") else ("bounce",)
    for tag in tags:
        expected = difference(tag, changed, step)
        size = np.abs(expected).max()
        np.testing.assert_allclose(slopes[tag][name], expected, rtol=0, atol=allowed * size)


def test_extended_precision_twin(monkeypatch: pytest.MonkeyPatch) -> None:
    # what the fast model has no input for; all parameters at 50 cases: the script in validation/
    monkeypatch.syspath_prepend(str(VALIDATION))
    import partials_against_twin as twin

    inputs = next(twin.asked(1))
    fast, tagged = twin.analytic(inputs), twin.tagged_tdb(inputs)
    for name in ("libration_psi_rad", "moon_y_m", "earth_vx_m_per_s", "h2_earth"):
        expected = twin.numerical(inputs, twin.CHANGES[name], tagged)
        assert fast[name] == pytest.approx(expected, rel=1e-8)
    for module in ("partials_against_twin", "cases"):
        sys.modules.pop(module)


def test_every_parameter_that_has_its_inputs(slopes: dict[str, lt.Partials]) -> None:
    assert tuple(slopes["transmit"]) == PARAMETERS
    for values in slopes["transmit"].values():
        assert values.shape == WHEN.shape
        assert np.all(np.isfinite(values))


def test_the_documentation_tells_of_every_parameter() -> None:
    page = (Path(__file__).parents[1] / "docs" / "reference" / "partials.md").read_text("utf-8")
    for name in PARAMETERS:
        told = name.replace("vy_", "vx_").replace("vz_", "vx_")  # "..." stands for y and z
        assert f"`{told}`" in page, name


def test_timer(slopes: dict[str, lt.Partials]) -> None:
    seconds, _ = ranges("transmit")
    np.testing.assert_array_equal(slopes["transmit"]["clock_rate"], seconds)
    np.testing.assert_array_equal(slopes["transmit"]["bias_s"], np.ones(HOURS.size))


# -- identities ----------------------------------------------------------------------------------


def test_turning_the_moon_about_its_pole_moves_a_reflector_along_its_parallel() -> None:
    # psi turns about the polar axis; without a tide that stays with the Earth, d/dpsi is x d/dy -
    # y d/dx of the coordinates
    rigid = lt.Model(omit=["lunar_tide"])
    s = rigid.round_trip(WHEN, STATION, REFLECTOR).partials()
    x, y, _ = REFLECTOR.xyz_m
    turned = x * s["reflector_y_m"] - y * s["reflector_x_m"]
    np.testing.assert_allclose(s["libration_psi_rad"], turned, rtol=1e-12)


def test_turning_the_pole_moves_a_station_in_its_meridian() -> None:
    # x_p turns about the y axis of the ITRF (but for y_p, 2e-6 rad) against the sense of the axis
    rigid = lt.Model(omit=["solid_earth_tide", "pole_tide", "ocean_pole_tide", "clock"])
    s = rigid.round_trip(WHEN, STATION, REFLECTOR).partials()
    x, _, z = STATION.xyz_m
    turned = ARCSECOND * (x * s["station_z_m"] - z * s["station_x_m"])
    np.testing.assert_allclose(s["xp_arcsec"], turned, rtol=1e-5)


def test_gravity_is_proportional_to_its_masses_and_to_one_plus_gamma() -> None:
    answer = MODEL.round_trip(WHEN, STATION, REFLECTOR)
    gravity = sum(answer.terms[f"{name}_gravity"] for name in ("sun", "earth", "moon", "planet"))
    slope = answer.partials(["gamma"])["gamma"]
    np.testing.assert_allclose(slope, gravity / 2.0, rtol=1e-9)


def test_left_out_terms_have_no_derivative() -> None:
    bare = lt.Model(omit=["lunar_tide", "solid_earth_tide", "sun_gravity", "station_contraction"])
    s = bare.round_trip(WHEN, STATION, REFLECTOR).partials()
    for name in ("h2_moon", "l2_moon", "h2_earth", "l2_earth", "gm_sun_relative"):
        np.testing.assert_array_equal(s[name], 0.0)


# -- their parts ---------------------------------------------------------------------------------


def numerical_gradient(f: Callable[[np.ndarray], Any], x: np.ndarray, h: float) -> np.ndarray:
    return np.array([(f(x + h * e) - f(x - h * e)) / (2.0 * h) for e in np.eye(3)])


def test_tide_and_its_slopes() -> None:
    place = np.array([1554678.104, 98094.498, 765005.863])
    earth, sun = np.array([3.7e8, 3.0e7, -4.0e7]), np.array([-1.1e11, 0.9e11, 2.0e9])
    w = np.array([0.3, -0.8, 0.5])

    def tide(r: np.ndarray, e: np.ndarray) -> Tide:
        sources = tuple(
            source(ratio, MOON_MEAN_RADIUS, body) for ratio, body in ((81.3, e), (2.7e7, sun))
        )
        return Tide(r / np.linalg.norm(r), sources, 0.0476, 0.0107)

    here = tide(place, earth)
    expected = lunar_tide(place, earth, sun, 1.0, 81.3, 2.7e7)
    np.testing.assert_allclose(here.displacement(), expected, rtol=1e-13)
    by_place = numerical_gradient(lambda r: w @ tide(r, earth).displacement(), place, 100.0)
    np.testing.assert_allclose(
        here.by_place(w, np.linalg.norm(place)), by_place, rtol=1e-7, atol=1e-16
    )
    by_source = numerical_gradient(lambda e: w @ tide(place, e).displacement(), earth, 1e4)
    slope = here.by_source(w, 0, np.linalg.norm(earth))
    np.testing.assert_allclose(slope, by_source, rtol=1e-6, atol=1e-18)


def test_slopes_of_the_delay_in_the_air() -> None:
    at = {"sine": 0.3, "lat": 0.7, "height": 2300.0, "p": 770.0, "t": 283.0, "rh": 0.5}

    def delay(sine: float, lat: float, height: float, p: float, t: float, rh: float) -> float:
        return float(slant_delay(np.arcsin(sine), lat, height, lt.Weather(p, t, rh), 532.0))

    air = lt.Weather(at["p"], at["t"], at["rh"])
    s = slant_slopes(at["sine"], at["lat"], at["height"], air, 532.0)
    for key, slope, step in (
        ("sine", s.sine, 1e-5), ("lat", s.latitude_rad, 1e-3), ("height", s.height_m, 10.0),
        ("p", s.pressure_hpa, 5.0), ("t", s.temperature_k, 1e-2), ("rh", s.relative_humidity, 0.1),
    ):  # fmt: skip
        ends = [delay(**(at | {key: at[key] + h})) for h in (step, -step)]
        assert slope == pytest.approx((ends[0] - ends[1]) / (2.0 * step), rel=1e-6)


def test_slopes_of_geodetic_coordinates() -> None:
    xyz = np.array(STATION.xyz_m)
    latitude, height, zenith = geodetic_slopes(STATION.xyz_m)
    h = 10.0
    np.testing.assert_allclose(
        latitude, numerical_gradient(lambda r: geodetic(r)[0], xyz, h), rtol=1e-7, atol=1e-15
    )
    np.testing.assert_allclose(
        height, numerical_gradient(lambda r: geodetic(r)[2], xyz, h), rtol=1e-8, atol=1e-9
    )
    up = numerical_gradient(lambda r: east_north_up(r)[2], xyz, h)
    np.testing.assert_allclose(zenith.T, up, atol=1e-16)


def test_slopes_of_shapiros_logarithm() -> None:
    x1, x2 = np.array([4.4e6, 0.5e6, 4.6e6]), np.array([3.1e8, 1.5e8, 1.2e8])
    norm = np.linalg.norm

    def delay(a: np.ndarray, b: np.ndarray) -> Any:
        return shapiro(4e14, norm(a), norm(b), norm(b - a))

    near, far = shapiro_slopes(2.0 * 4e14, x1, x2)
    by_near = numerical_gradient(lambda a: delay(a, x2), x1, 1e3)
    np.testing.assert_allclose(near, by_near, rtol=1e-6)
    by_far = numerical_gradient(lambda b: delay(x1, b), x2, 1e5)
    np.testing.assert_allclose(far, by_far, rtol=1e-5)


# -- what comes back -----------------------------------------------------------------------------


def test_scalars_stay_scalars_and_arrays_keep_their_shape_and_order() -> None:
    one = MODEL.round_trip(WHEN[3], STATION, REFLECTOR).partials(["ut1_s"])["ut1_s"]
    assert isinstance(one, float)
    shuffled = np.array([[5, 0, 3], [7, 1, 2]])
    when = lt.Epoch(WHEN.jd1[shuffled], WHEN.jd2[shuffled], "utc")
    many = MODEL.round_trip(when, STATION, REFLECTOR).partials(["ut1_s"])["ut1_s"]
    assert many.shape == (2, 3)
    # a single epoch is evaluated, several are read from tables of a day
    assert many[0, 2] == pytest.approx(one, rel=1e-10)
    with pytest.raises(ValueError, match="read-only"):
        many[0, 0] = 0.0


def test_tables() -> None:
    s = MODEL.round_trip(WHEN, STATION, REFLECTOR).partials(["station_x_m", "ut1_s", "gamma"])
    assert dict(s).keys() == {"station_x_m", "ut1_s", "gamma"}
    table = s.table()
    assert table.colnames == ["epoch_utc", "station_x_m", "ut1_s", "gamma"]
    assert [str(table[name].unit) for name in s] == ["s / m", "", "s"]
    np.testing.assert_array_equal(table["gamma"].value, s["gamma"])
    matrix = s.matrix(["gamma", "ut1_s"])
    np.testing.assert_array_equal(matrix, np.stack([s["gamma"], s["ut1_s"]], axis=1))
    assert "station_x_m" in str(s)
    with pytest.raises(lt.UnknownNameError, match="did you mean gamma"):
        s["gama"]


def test_names_that_cannot_be_had() -> None:
    dry = MODEL.round_trip(WHEN[0], replace(STATION, ocean_loading=None), REFLECTOR)
    assert "zenith_delay_m" not in dry.partials()
    with pytest.raises(lt.InputError, match=r"zenith_delay_m.*needs weather"):
        dry.partials(["zenith_delay_m"])
    with pytest.raises(lt.InputError, match=r"needs Station\.ocean_loading"):
        dry.partials(["ocean_loading_scale"])
    with pytest.raises(lt.UnknownNameError, match="did you mean station_x_m"):
        dry.partials(["station_x"])


class Probe:
    """Something that stands still 400 000 km from the Earth's place at an instant."""

    name = "Probe"
    position = np.array([4.0e8, 0.0, 0.0]) - np.array([1.41e11, 4.5e10, 1.96e10])

    def bcrs(self, when: lt.Epoch) -> tuple[np.ndarray, np.ndarray]:
        shape = (*np.shape(when.jd1), 3)
        return np.broadcast_to(self.position, shape), np.zeros(shape)


def test_a_trajectory_has_the_parameters_of_the_other_end() -> None:
    answer = MODEL.round_trip(WHEN, STATION, Probe())
    s = answer.partials()
    assert "station_x_m" in s
    assert "reflector_x_m" not in s
    with pytest.raises(lt.InputError, match="it needs a Station and a Reflector"):
        answer.partials(["earth_vx_m_per_s"])
    ends = [MODEL.round_trip(WHEN.shift(h), STATION, Probe()).seconds for h in (0.5, -0.5)]
    np.testing.assert_allclose(s["epoch_s"], ends[0] - ends[1], rtol=1e-6)


# -- parameters of one's own ---------------------------------------------------------------------


def softer(changed: lt.Model, amount: float) -> lt.Model:
    return replace(changed, moon_l2=changed.moon_l2 + amount)


def test_a_parameter_of_ones_own_is_differentiated_numerically_and_says_so() -> None:
    answer = MODEL.round_trip(WHEN[:2], STATION, REFLECTOR)
    for step in (0.1, 1e-7):  # a good one, and one that drowns in the arithmetic at first
        s = answer.partials(["l2_moon", lt.Parameter("own", softer, step)])
        np.testing.assert_allclose(s["own"], s["l2_moon"], rtol=2e-6)
        assert s.notes["own"].startswith("numerical: central differences with steps of")
        assert "l2_moon" not in s.notes
    assert "numerical" in str(s)


def test_a_parameter_without_a_derivative_is_refused() -> None:
    def jumps(changed: lt.Model, amount: float) -> lt.Model:
        return replace(changed, moon_h2=changed.moon_h2 + np.sign(amount) * abs(amount) ** 0.3)

    answer = MODEL.round_trip(WHEN[:2], STATION, REFLECTOR)
    with pytest.raises(lt.InputError, match=r"step of jumps is 0\.1; allowed: one for which"):
        answer.partials([lt.Parameter("jumps", jumps, 0.1)])
    with pytest.raises(lt.InputError, match="a function that gives a Model"):
        answer.partials([lt.Parameter("none", lambda changed, amount: amount, 0.1)])
    with pytest.raises(lt.InputError, match="a positive number"):
        lt.Parameter("back", softer, -1.0)
    with pytest.raises(lt.InputError, match="a name that no other parameter has"):
        answer.partials(["ut1_s", lt.Parameter("ut1_s", softer, 1.0)])
