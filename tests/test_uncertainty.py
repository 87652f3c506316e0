"""Error budgets: what each part is, how parts add up, and what is said of them."""

from __future__ import annotations

import pickle
from dataclasses import replace

import numpy as np
import pytest
from ocean_case import AMPLITUDES_M, PHASES_DEG

import lighttime as lt
from lighttime.earth.loading import OceanLoading
from lighttime.sigmas import ephemeris_sigmas
from lighttime.uncertainty.air import mapping_error
from lighttime.uncertainty.moon import orbit_axes

STATION = lt.Station.from_geodetic(
    "Hilltop", 46.2, 7.1, 2310.0, ocean_loading=OceanLoading(AMPLITUDES_M, PHASES_DEG)
)
REFLECTOR = lt.reflector("Apollo 15")
WEATHER = lt.Weather(770.0, 280.0, 0.4)
WHEN = lt.Epoch(2458910.5, np.array([18.0, 20.0, 22.0]) / 24.0, "utc")
MODEL = lt.Model()
C = 299792458.0


def answer_of(model: lt.Model = MODEL, **changed: object) -> lt.RoundTrip:
    given = {"when": WHEN, "station": STATION, "reflector": REFLECTOR, "weather": WEATHER}
    return model.round_trip(**(given | changed))


def with_sigmas(**given: object) -> lt.Model:
    return lt.Model(uncertainties=lt.Uncertainties(**given))


@pytest.fixture(scope="module")
def answer() -> lt.RoundTrip:
    return answer_of()


# -- parts ---------------------------------------------------------------------------------------


def test_coordinates_with_their_own_sigmas() -> None:
    sigma = (0.01, 0.02, 0.03)
    answer = answer_of(
        station=replace(STATION, sigma_m=sigma), reflector=replace(REFLECTOR, sigma_m=sigma)
    )
    s = answer.partials()
    for thing in ("station", "reflector"):
        expected = np.sqrt(
            sum((s[f"{thing}_{a}_m"] * v) ** 2 for a, v in zip("xyz", sigma, strict=True))
        )
        np.testing.assert_allclose(answer.budget[thing].sigma_s, expected, rtol=1e-12)
    assert answer.budget["station"].source == "Station.sigma_m"


def test_axes_of_another_ephemeris_count(answer: lt.RoundTrip) -> None:
    # the arrays are given in the axes of DE430: 0.5 m in each coordinate is one way in the range
    one_way = 0.5 * C * answer.budget["reflector"].sigma_s
    np.testing.assert_allclose(one_way, 0.5, rtol=1e-3)
    same = answer_of(reflector=replace(REFLECTOR, axes="DE421")).budget["reflector"]
    np.testing.assert_allclose(0.5 * C * same.sigma_s, 0.05, rtol=1e-3)


def test_ut1_is_its_derivative_times_the_sigma_of_the_date(answer: lt.RoundTrip) -> None:
    series = MODEL.earth_orientation
    tai = WHEN.to("tai")
    sigma = series.sigmas(tai.jd1, tai.jd2).ut1_tai_s
    expected = np.abs(answer.partials(["ut1_s"])["ut1_s"]) * sigma
    np.testing.assert_allclose(answer.budget["ut1"].sigma_s, expected, rtol=1e-12)


def test_ut1_grows_in_the_prediction_and_ends_with_it() -> None:
    series = MODEL.earth_orientation
    measured, last = series.last_measured_mjd, series.coverage[1]
    lunations = 27.321582 * np.arange(13)  # the Moon stands where it stood, to some degrees
    mjd = measured + 1.0 + lunations
    mjd = mjd[mjd < last]
    assert mjd.size >= 10
    when = lt.Epoch(2400000.5 + mjd, 0.0, "utc")
    grown = answer_of(when=when, weather=None)
    slope = np.abs(grown.partials(["ut1_s"])["ut1_s"])
    effective = grown.budget["ut1"].sigma_s / slope
    i = np.floor(mjd).astype(int) - int(series.mjd[0])
    assert np.all(effective >= np.minimum(series.sigma_ut1_s[i], series.sigma_ut1_s[i + 1]))
    assert np.all(effective <= np.maximum(series.sigma_ut1_s[i], series.sigma_ut1_s[i + 1]))
    assert np.all(np.diff(effective) > 0.0)
    assert effective[-1] > 100.0 * series.sigma_ut1_s[series.mjd == measured][0]
    with pytest.raises(lt.CoverageError, match="what IERS 20 C04"):
        answer_of(when=lt.Epoch(2400000.5 + last, 1.0, "utc"), weather=None)


def test_fixed_orientation_is_exact() -> None:
    fixed = lt.Model(earth_orientation=lt.EarthOrientation.fixed(0.1, 0.1, 0.3))
    part = answer_of(fixed, weather=None).budget["ut1"]
    np.testing.assert_array_equal(part.sigma_s, 0.0)
    assert part.source == "taken as exact"


def test_weather() -> None:
    model = with_sigmas(pressure_hpa=2.0, temperature_k=3.0, relative_humidity=0.1)
    answer = answer_of(model)
    # 2 hPa of 770, of a delay that is hydrostatic but for a thousandth
    expected = answer.terms["troposphere"] * 2.0 / 770.0
    np.testing.assert_allclose(answer.budget["pressure"].sigma_s, expected, rtol=2e-3)
    assert answer.budget["pressure"].source == "supplied"
    s = answer.partials()
    np.testing.assert_allclose(
        answer.budget["temperature"].sigma_s, 3.0 * np.abs(s["temperature_k"]), rtol=1e-12
    )


def test_errors_of_the_mapping_function_are_told_at_10_degrees() -> None:
    assert mapping_error(np.deg2rad(10.0)) == pytest.approx(1.0, rel=1e-14)
    assert mapping_error(np.deg2rad(90.0)) == pytest.approx(0.0, abs=1e-15)
    part = answer_of().budget["mapping_function"]
    up = np.deg2rad(answer_of().uplink.elevation_deg)
    np.testing.assert_allclose(part.sigma_s, 2.0 * 0.007 * mapping_error(up) / C, rtol=1e-2)


def test_what_is_left_out_or_not_given_has_no_part(answer: lt.RoundTrip) -> None:
    assert answer.budget.missing == ("ocean_pole_tide", "atmosphere_loading")
    assert "ocean_loading" in answer.budget.parts
    dry = answer_of(weather=None).budget
    assert "pressure" not in dry.parts
    assert "troposphere" in dry.missing
    still = answer_of(lt.Model(omit=["ocean_loading"])).budget
    assert "ocean_loading" not in still.parts


def test_orbit_axes(answer: lt.RoundTrip) -> None:
    axes = np.stack(orbit_axes(answer))
    np.testing.assert_allclose(
        np.einsum("ikn,jkn->ijn", axes, axes), np.eye(3)[:, :, None] + np.zeros(3), atol=1e-14
    )
    # the radius is nearly all of a range: a metre of it alone is a metre one way
    only = with_sigmas(moon_radial_m=1.0, moon_along_m=0.0, moon_across_m=0.0)
    one_way = 0.5 * C * answer_of(only).budget["moon_orbit"].sigma_s
    np.testing.assert_allclose(one_way, 1.0, rtol=1e-3)


def test_libration_turns_the_reflector() -> None:
    # without a tide, turning the Moon is moving the reflector: psi turns about the polar axis
    model = lt.Model(omit=["lunar_tide"], uncertainties=lt.Uncertainties(libration_rad=1e-7))
    answer = answer_of(model)
    s = answer.partials()
    x, y, z = REFLECTOR.xyz_m
    by_x, by_y, by_z = (s[f"reflector_{a}_m"] for a in "xyz")
    turns = (y * by_z - z * by_y, z * by_x - x * by_z, x * by_y - y * by_x)
    expected = 1e-7 * np.sqrt(sum(t**2 for t in turns))
    np.testing.assert_allclose(answer.budget["libration"].sigma_s, expected, rtol=1e-12)
    np.testing.assert_allclose(turns[2], s["libration_psi_rad"], rtol=1e-12)


def test_coordinates_hide_the_permanent_tide(answer: lt.RoundTrip) -> None:
    # 0.0064 in h2 is 13 % of a tide of 0.4 m; what varies of it is a fifth at most
    naive = 0.0064 * np.abs(answer.partials(["h2_moon"])["h2_moon"])
    assert np.all(0.5 * C * naive > 0.04)
    assert np.all(0.5 * C * answer.budget["lunar_tide"].sigma_s < 0.02)


def test_ephemeris_figures() -> None:
    given = lt.Uncertainties()
    assert ephemeris_sigmas("DE421", given).orbit_source == "order of magnitude, from memory"
    assert ephemeris_sigmas("DE440s", given).radial_m == 0.02
    assert "no figures for INPOP" in ephemeris_sigmas("INPOP", given).libration_source
    mine = lt.Uncertainties(moon_radial_m=0.01)
    assert ephemeris_sigmas("DE421", mine).radial_m == 0.01
    assert ephemeris_sigmas("DE421", mine).orbit_source.startswith("partly supplied")
    assert ephemeris_sigmas("DE421", lt.Uncertainties(libration_rad=0.0)).libration_source == (
        "supplied"
    )


# -- how they add up -----------------------------------------------------------------------------


def test_squares_add(answer: lt.RoundTrip) -> None:
    budget = answer.budget
    parts = np.sqrt(sum(p.sigma_s**2 for p in budget.parts.values()))
    np.testing.assert_allclose(answer.sigma_s, parts, rtol=1e-12)
    np.testing.assert_allclose(
        np.sqrt(sum(value**2 for value in budget.terms.values())), answer.sigma_s, rtol=1e-12
    )
    assert set(budget.terms) <= set(answer.terms)


def test_covariance_takes_the_place_of_sigmas() -> None:
    names = ("station_x_m", "station_y_m", "station_z_m", "ut1_s")
    sigmas = np.array([0.01, 0.02, 0.03, 5e-5])
    independent = with_sigmas(covariance=lt.Covariance(names, np.diag(sigmas**2)))
    answer = answer_of(independent)
    assert "station" in answer.budget.parts
    np.testing.assert_array_equal(answer.budget["station"].sigma_s, 0.0)
    s = answer.partials()
    expected = np.sqrt(sum((s[n] * v) ** 2 for n, v in zip(names, sigmas, strict=True)))
    np.testing.assert_allclose(answer.budget["covariance"].sigma_s, expected, rtol=1e-10)
    # two that cancel: only the difference of two parameters is uncertain
    pair = ("h2_moon", "l2_moon")
    ratio = s["h2_moon"][0] / s["l2_moon"][0]
    v = np.array([1.0, -ratio])
    tied = with_sigmas(covariance=lt.Covariance(pair, 1e-4 * np.outer(v, v)))
    cancelled = answer_of(tied).budget["covariance"].sigma_s[0]
    assert cancelled < 1e-9 * np.abs(s["h2_moon"][0])


def test_covariances_that_are_none() -> None:
    with pytest.raises(lt.InputError, match="eigenvalue"):
        lt.Covariance(("a", "b"), [[1.0, 2.0], [2.0, 1.0]])
    with pytest.raises(lt.InputError, match="symmetric"):
        lt.Covariance(("a", "b"), [[1.0, 0.5], [0.2, 1.0]])
    with pytest.raises(lt.InputError, match=r"shape \(2, 2\)"):
        lt.Covariance(("a", "b"), [1.0, 2.0])
    with pytest.raises(lt.InputError, match="each once"):
        lt.Covariance(("a", "a"), np.eye(2))
    with pytest.raises(lt.UnknownNameError, match="did you mean ut1_s"):
        _ = answer_of(with_sigmas(covariance=lt.Covariance(("ut1",), [[1.0]]))).sigma_s
    moon = with_sigmas(covariance=lt.Covariance(("moon_x_m",), [[1.0]]))
    with pytest.raises(lt.InputError, match=r"moon_y_m.*too \(moon_orbit\)"):
        _ = answer_of(moon).sigma_s


def hill(ray: lt.Ray, a: float) -> np.ndarray:
    return a / np.sin(ray.elevation_rad)


def test_own_terms_have_their_part() -> None:
    term = lt.DelayTerm("dust", hill, {"a": 0.0}, {"a": 1e-12})
    answer = answer_of(lt.Model(delays=[term]))
    expected = 1e-12 * np.abs(answer.partials(["dust.a"])["dust.a"])
    np.testing.assert_allclose(answer.budget["dust"].sigma_s, expected, rtol=1e-12)
    assert answer.budget["dust"].term == "dust"


class Probe:
    """Something that stands still some 400 000 km from the Earth."""

    name = "Probe"

    def bcrs(self, when: lt.Epoch) -> np.ndarray:
        earth, _ = MODEL.ephemeris.earth(when.jd1, when.jd2)
        return (earth + np.array([[4.0e8], [0.0], [0.0]])).T


def test_a_trajectory_has_no_reflector_in_its_budget() -> None:
    parts = answer_of(reflector=Probe(), weather=None).budget.parts
    assert "station" in parts
    assert not {"reflector", "moon_orbit", "libration"} & set(parts)


# -- what comes back -----------------------------------------------------------------------------


def test_scalars_and_shapes() -> None:
    one = answer_of(when=WHEN[0])
    assert isinstance(one.sigma_s, float)
    assert isinstance(one.budget["ut1"].sigma_s, float)
    assert answer_of().sigma_s.shape == WHEN.shape


def test_printed_largest_first(answer: lt.RoundTrip) -> None:
    lines = str(answer.budget).splitlines()
    assert lines[0] == "Error budget, one sigma, rms of 3 epochs"
    assert lines[3].split()[:2] == ["reflector", "geometry"]
    sizes = [float(line[42:54].replace(" ", "")) for line in lines[3:-3]]
    assert sizes == sorted(sizes, reverse=True)
    assert lines[-1] == "  not modelled, so in neither: ocean_pole_tide, atmosphere_loading"
    ps, mm = float(lines[-2][42:54].replace(" ", "")), float(lines[-2][54:66].replace(" ", ""))
    assert mm == pytest.approx(ps * 0.5 * C * 1e-9, abs=2e-3)


def test_table(answer: lt.RoundTrip) -> None:
    table = answer.budget.table()
    assert table["part"][0] == "reflector"
    assert table["part"][-1] == "total"
    rms = float(np.sqrt(np.mean(answer.sigma_s**2)))
    assert table["sigma"][-1].to_value("s") == pytest.approx(rms, rel=1e-12)
    assert table["one_way"][-1].to_value("mm") == pytest.approx(rms * C / 2.0 * 1e3, rel=1e-12)
    with pytest.raises(lt.UnknownNameError, match="did you mean reflector"):
        answer.budget["reflektor"]


def test_picture(answer: lt.RoundTrip, tmp_path: object) -> None:
    pytest.importorskip("matplotlib")
    path = f"{tmp_path}/budget.svg"
    figure = answer.budget.plot(path)
    [axes] = figure.axes
    top = np.sum([band.get_paths()[0].vertices[:, 1].max() for band in axes.collections[-1:]])
    assert top == pytest.approx(answer.sigma_s.max() * C / 2.0 * 1e3, rel=1e-6)
    with pytest.raises(lt.InputError, match="2 or more, to draw over time"):
        answer_of(when=WHEN[0]).budget.plot()


def test_uncertainties_are_checked_and_part_of_the_model() -> None:
    for bad in (-1.0, np.nan, "much"):
        with pytest.raises(lt.InputError, match="pressure_hpa"):
            lt.Uncertainties(pressure_hpa=bad)
    with pytest.raises(lt.InputError, match="three numbers"):
        lt.Uncertainties(station_motion_enu_m=0.1)
    with pytest.raises(lt.InputError, match="an Uncertainties object"):
        lt.Model(uncertainties=3.0)
    model = with_sigmas(epoch_s=1e-7)
    assert pickle.loads(pickle.dumps(model)) == model
    assert "epoch" in answer_of(model).budget.parts
    assert "epoch" not in answer_of().budget.parts
