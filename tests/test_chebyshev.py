"""Records against extended precision: mpmath evaluates the same coefficients with 40 digits."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

import mpmath
import numpy as np
import pytest

from lighttime.ephemeris import Ephemeris
from lighttime.ephemeris.chebyshev import Records
from lighttime.errors import CoverageError

mp = mpmath.MPContext()
mp.dps = 40


def exact(records: Records, jd1: float, jd2: float, seconds: float = 0.0) -> list[Any]:
    """The polynomials from exact dates, by the textbook recurrence."""
    days = Fraction(jd1) + Fraction(jd2) + Fraction(seconds) / 86400 - Fraction(records.start_jd)
    span = Fraction(records.span_days)
    index = min(int(days // span), len(records.coefficients) - 1)
    fraction = 2 * (days - index * span) / span - 1
    x = mp.mpf(fraction.numerator) / fraction.denominator
    values = []
    for series in np.asarray(records.coefficients[index]):
        terms = [mp.mpf(1), x]
        while len(terms) < len(series):
            terms.append(2 * x * terms[-1] - terms[-2])
        values.append(sum(mp.mpf(float(a)) * t for a, t in zip(series, terms, strict=False)))
    return [v * records.scale for v in values]


@pytest.fixture(scope="module")
def moon() -> Records:
    return Ephemeris.default().moon_from_earth


@pytest.fixture(scope="module")
def barycentre() -> Records:
    return Ephemeris.default().barycentric["earth_moon_barycentre"]


def instants(seed: int, count: int) -> tuple[np.ndarray, np.ndarray]:
    """Dates of 1969 to 2050 as (full float64, remainder): the normal form of an Epoch."""
    rng = np.random.default_rng(seed)
    day = np.floor(rng.uniform(2440400.0, 2469800.0, count)) + 0.5
    fraction = rng.uniform(0.0, 1.0, count)
    jd1 = day + fraction
    return jd1, fraction - (jd1 - day)


def test_value_keeps_its_digits(moon: Records) -> None:
    """Largest error over 200 instants 0.13 um measured: two units in the last place."""
    jd1, jd2 = instants(1, 200)
    value = moon.value(moon.locate(jd1, jd2, 1.28))
    errors = [
        float(value[k, n] - v)
        for n in range(200)
        for k, v in enumerate(exact(moon, jd1[n], jd2[n], 1.28))
    ]
    assert max(map(abs, errors)) < 2.0e-7


def test_difference_is_good_relative_to_itself(barycentre: Records) -> None:
    """The Earth-Moon barycentre moves 77 km in 2.6 s: known to 1e-10 m, not to 3e-5 m."""
    jd1, jd2 = instants(2, 100)
    moved = barycentre.difference(jd1, jd2, 0.0, 2.6)
    for n in range(100):
        a = exact(barycentre, jd1[n], jd2[n])
        b = exact(barycentre, jd1[n], jd2[n], 2.6)
        for k in range(3):
            assert abs(float(moved[k, n] - (b[k] - a[k]))) < 1.0e-10


@pytest.mark.parametrize("before_s", [1e-6, 0.7, 1.3, 2.599999])
@pytest.mark.parametrize("sense", [1.0, -1.0])
def test_difference_over_a_seam(barycentre: Records, before_s: float, sense: float) -> None:
    """Records meet to 0.2 mm only; the jump belongs to the difference, forwards and back."""
    seams = barycentre.start_jd + barycentre.span_days * np.arange(3000, 3010)
    jd2 = np.full(10, -before_s / 86400.0 if sense > 0 else (2.6 - before_s) / 86400.0)
    start, end = (0.0, 2.6) if sense > 0 else (0.0, -2.6)
    moved = barycentre.difference(seams, jd2, start, end)
    index_a = barycentre.locate(seams, jd2, start).index
    index_b = barycentre.locate(seams, jd2, end).index
    assert np.all(np.abs(index_a - index_b) == 1)
    for n in range(10):
        a = exact(barycentre, seams[n], jd2[n], start)
        b = exact(barycentre, seams[n], jd2[n], end)
        for k in range(3):
            assert abs(float(moved[k, n] - (b[k] - a[k]))) < 1.0e-10


def test_rate_is_the_derivative(moon: Records) -> None:
    """Against the difference quotient of exact values over 0.2 s, itself good to 1e-11 m/s."""
    jd1, jd2 = instants(3, 20)
    rate = moon.rate(moon.locate(jd1, jd2))
    for n in range(20):
        later, earlier = exact(moon, jd1[n], jd2[n], 0.1), exact(moon, jd1[n], jd2[n], -0.1)
        for k in range(3):
            quotient = (later[k] - earlier[k]) / (2 * mp.mpf(0.1))
            assert abs(float(rate[k, n] - quotient)) < 1.0e-10


def test_many_in_one_record_equal_one_by_one(moon: Records) -> None:
    """The path without gathering gives the same numbers as the path with it."""
    jd1, jd2 = np.full(500, 2455197.5), np.linspace(0.0, 7.9, 500)
    together = moon.value(moon.locate(jd1, jd2))
    apart = np.stack([moon.value(moon.locate(a, b)) for a, b in zip(jd1, jd2, strict=True)], 1)
    assert np.array_equal(together, apart)


def test_shapes(moon: Records) -> None:
    assert moon.value(moon.locate(2455197.5, 0.3)).shape == (3,)
    assert moon.value(moon.locate(np.full((2, 5), 2455197.5), 0.3)).shape == (3, 2, 5)
    assert moon.value(moon.locate(np.zeros(0), np.zeros(0))).shape == (3, 0)


def test_last_instant_belongs_to_the_last_record(moon: Records) -> None:
    place = moon.locate(moon.end_jd, 0.0)
    assert place.index == len(moon.coefficients) - 1


@pytest.mark.parametrize("jd", [2414992.4, 2524624.6, float("nan"), float("inf")])
def test_outside_is_refused(moon: Records, jd: float) -> None:
    with pytest.raises(CoverageError, match=r"allowed: JD 2414992\.5 to 2524624\.5 TDB"):
        moon.locate(jd, 0.0)


def test_a_record_says_what_it_is(moon: Records) -> None:
    assert repr(moon) == "<Records DE421 moon: 27408 of 4 d from JD 2414992.5, 3 x degree 12>"


def test_constant_records_do_not_move() -> None:
    """Series of one term: the value at all instants, no rate, no difference."""
    still = Records(2451544.5, 4.0, np.array([[[7.0], [-2.0]]]), 1000.0)
    place = still.locate(2451545.0, [0.0, 2.9])
    assert still.value(place).tolist() == [[7000.0, 7000.0], [-2000.0, -2000.0]]
    assert not still.rate(place).any()
    assert not still.difference(2451545.0, [0.0, 2.9], 0.0, 2.6).any()
    assert still.jet(place, 2).tolist() == [still.value(place).tolist(), *[[[0.0] * 2] * 2] * 2]
