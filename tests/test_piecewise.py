"""Series that stand for slow functions: their error, their bound, and when they are built."""

from __future__ import annotations

from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pytest

from lighttime.earth.days import FIRST_MJD, LAST_MJD, UtcDays
from lighttime.ephemeris import fit
from lighttime.ephemeris.chebyshev import polynomials
from lighttime.ephemeris.piecewise import EqualSpans, PiecewiseSeries


def test_series_of_a_known_function() -> None:
    """exp(x) = I_0 + 2 sum I_n T_n: coefficients are modified Bessel functions (A&S 9.6.34)."""
    import mpmath

    coefficients = fit.series(np.exp(fit.nodes(20))[None])[0]
    expected = [float(mpmath.besseli(n, 1)) * (1 if n == 0 else 2) for n in range(20)]
    assert np.abs(coefficients - expected).max() < 1e-15
    assert fit.truncation(coefficients[None])[0] < 1e-15


def test_what_varies_is_fitted_beside_a_large_constant() -> None:
    """A ripple of 1e-6 on 1e3 is fitted to the rounding of the sum, 1e-13, and not worse."""
    x = np.linspace(-1.0, 1.0, 101)
    samples = 1.0e3 + 1.0e-6 * np.sin(3.0 * fit.nodes(24))
    values = fit.series(samples[None]) @ polynomials(x, 24)
    assert np.abs(values - (1.0e3 + 1.0e-6 * np.sin(3.0 * x))).max() < 2.5e-13


class Counted:
    """A smooth function that counts how often it is asked."""

    def __init__(self) -> None:
        self.asked = 0

    def __call__(self, tt1: np.ndarray, tt2: np.ndarray) -> np.ndarray:
        self.asked += tt2.size
        days = (tt1 - 2451545.0) + tt2
        return np.stack([np.sin(days), np.cos(0.3 * days)])


def instants(count: int, days: float) -> tuple[np.ndarray, np.ndarray]:
    return np.full(count, 2451545.0), np.linspace(0.0, days, count)


def test_a_series_is_built_where_it_repays() -> None:
    function = Counted()
    table = PiecewiseSeries(function, EqualSpans(2451544.5, 4.0), terms=24, most=10)
    few = instants(10, 3.0)
    assert table.worth(*few) == frozenset()
    assert np.array_equal(table.at(*few, table.worth(*few)), Counted()(*few))
    assert (function.asked, table.built) == (10, 0)
    many = instants(1000, 7.0)
    worth = table.worth(*many)
    assert len(worth) == 2
    error = table.at(*many, worth) - Counted()(*many)
    assert np.abs(error).max() < 2e-13
    assert (function.asked, table.built) == (10 + 2 * 24, 2)
    assert table.truncation is not None
    assert table.truncation.max() < 1e-13
    # what is there is used, however few ask for it
    assert table.worth(*few) == frozenset(worth & table.worth(*few)) != frozenset()
    table.at(*few, table.worth(*few))
    assert function.asked == 10 + 2 * 24


def test_some_from_series_and_some_not() -> None:
    function = Counted()
    table = PiecewiseSeries(function, EqualSpans(2451544.5, 4.0), terms=24, most=10)
    tt1, tt2 = np.full(103, 2451545.0), np.append(np.linspace(0.0, 3.0, 100), [50.0, 60.0, 1.0])
    values = table.at(tt1, tt2, table.worth(tt1, tt2))
    assert table.built == 1
    assert np.abs(values - Counted()(tt1, tt2)).max() < 2e-13


def test_the_oldest_are_dropped() -> None:
    function = Counted()
    table = PiecewiseSeries(function, EqualSpans(2451544.5, 4.0), terms=24, most=3)
    many = instants(1000, 38.0)
    table.at(*many, table.worth(*many))
    assert table.built == 10
    assert len(table._series) == 3
    last = (np.full(50, 2451545.0), np.linspace(36.0, 38.0, 50))
    before = function.asked
    table.at(*last, table.worth(*last))
    assert function.asked == before


def test_many_threads_get_the_same() -> None:
    table = PiecewiseSeries(Counted(), EqualSpans(2451544.5, 4.0), terms=24, most=4)
    many = instants(2000, 38.0)
    worth = table.worth(*many)
    with ThreadPoolExecutor(8) as pool:
        answers = list(pool.map(lambda _: table.at(*many, worth), range(32)))
    assert all(np.array_equal(a, answers[0]) for a in answers)


@pytest.mark.parametrize("spans", [EqualSpans(2451544.5, 4.0), UtcDays()])
def test_spans_find_the_instants_they_give(spans: EqualSpans | UtcDays) -> None:
    """Leap-second days and the days of 1960 to 1971, whose length is another, among them."""
    mjd = np.array([36934, 38394, 41316, 41317, 57753, 57754, 61000, 88066])
    number = mjd if isinstance(spans, UtcDays) else (mjd - 51544) // 4
    x = np.array([-1.0 + 1e-9, -0.5, 0.0, 0.7, 1.0 - 1e-9])
    tt1, tt2 = spans.instants(number, x)
    found, where = spans.locate(tt1.ravel(), tt2.ravel())
    assert np.array_equal(found.reshape(tt1.shape), np.repeat(number[:, None], 5, axis=1))
    assert np.abs(where.reshape(tt1.shape) - x).max() < 1e-14


def test_a_day_of_utc_begins_at_midnight() -> None:
    """2017-01-01 0h UTC is 37 s later in TAI, after a day of 86401 s (IERS Bulletin C 52)."""
    days = UtcDays()
    start = days.instants(np.array([57754]), np.array([-1.0]))
    since = ((start[0] - 2457754.5) + start[1]) * 86400.0
    assert since[0, 0] == pytest.approx(37.0 + 32.184, abs=1e-10)
    number, x = days.locate(np.array([2457753.5]), np.array([(43200.5 + 36 + 32.184) / 86400.0]))
    assert number[0] == 57753
    assert x[0] == pytest.approx(0.0, abs=1e-14)
    assert (FIRST_MJD, LAST_MJD) == (36934, 88068)
