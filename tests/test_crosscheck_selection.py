"""The statistics of the cross-check on signatures that are made up."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from lighttime.crosscheck.chance import of_any, tail
from lighttime.crosscheck.curves import EPOCH_NODES, Curve
from lighttime.crosscheck.evidence import Folding
from lighttime.crosscheck.findings import Inquiry, findings, inquire, reading_of
from lighttime.crosscheck.noise import rest, rounding_of, roundings, standing_apart
from lighttime.crosscheck.selection import Trial
from lighttime.crosscheck.suspects import Suspect

ROWS = 150
RNG = np.random.default_rng(11)


def suspect(name: str, readings: dict[float, str] | None = None, **more: Any) -> Suspect:
    kind = {"unit": "ps"} if readings is None else {"readings": readings}
    family = "offset" if readings is None else "term"
    return Suspect(name, family, name, "nothing", lambda scene: scene.zero, **kind, **more)


CHOICE = {1.0: "left out", -1.0: "counted twice", 2.0: "with the wrong sign", 0.5: "half of it"}
PLACE = "coordinates"
SUSPECTS = (
    *(suspect(f"choice_{k}", CHOICE) for k in range(20)),
    *(suspect(f"offset_{k}", plausible=10.0) for k in range(6)),
    *(suspect(f"place_{k}", plausible=10.0, block=PLACE) for k in range(3)),
)
SIZES = 10.0 ** RNG.uniform(0.5, 4.0, len(SUSPECTS))
SIGNATURES = RNG.normal(0.0, 1.0, (ROWS, len(SUSPECTS))) * SIZES
SIGNATURES[:, 20:] /= SIZES[20:]
SIGNATURES[:, 1] = SIGNATURES[:, 0] + RNG.normal(0.0, 0.02 * SIZES[0], ROWS)  # alike


def asked(
    amplitudes: dict[str, float], noise: float = 1.0, stated: bool = True, **more: Any
) -> Any:
    names = [s.name for s in SUSPECTS]
    rng = np.random.default_rng(3)
    theirs = rng.normal(0.0, noise, ROWS)
    for name, size in amplitudes.items():
        theirs = theirs + size * SIGNATURES[:, names.index(name)]
    sigma = np.full(ROWS, noise if stated else 1e-3)
    return theirs, inquire(SIGNATURES, theirs, sigma, stated, SUSPECTS, **more)


def names_of(inquiry: Inquiry) -> set[str]:
    return {s.name for s in inquiry.members}


# -- probabilities ---------------------------------------------------------------------------------


def test_tails_are_those_of_scipy() -> None:
    stats = pytest.importorskip("scipy.stats")
    for t in (0.3, 2.0, 7.0):
        assert tail(t, np.inf) == pytest.approx(2.0 * stats.norm.sf(t), rel=1e-12)
        for degrees in (1.0, 5.0, 180.0):
            assert tail(-t, degrees) == pytest.approx(2.0 * stats.t.sf(t, degrees), rel=1e-9)
    assert tail(1.0, 0.0) == 1.0


@given(st.floats(0.0, 1.0), st.integers(1, 1000))
def test_more_tries_more_chance(probability: float, tried: int) -> None:
    assert probability <= of_any(probability, tried) * (1.0 + 1e-12) + 1e-300
    assert of_any(probability, tried) <= min(1.0, tried * probability) * (1.0 + 1e-9)


# -- compression -----------------------------------------------------------------------------------


@pytest.mark.parametrize("block", [7, 50, ROWS])
def test_folding_in_blocks_loses_nothing(block: int) -> None:
    theirs = RNG.normal(0.0, 1.0, ROWS)
    sigma = RNG.uniform(0.5, 2.0, ROWS)
    folding = Folding(len(SUSPECTS))
    for first in range(0, ROWS, block):
        rows = slice(first, first + block)
        folding.add(SIGNATURES[rows], theirs[rows], sigma[rows])
    evidence = folding.evidence()
    a, y = SIGNATURES / sigma[:, None], theirs / sigma
    assert evidence.rows == ROWS
    np.testing.assert_allclose(evidence.signatures.T @ evidence.signatures, a.T @ a, rtol=1e-9)
    np.testing.assert_allclose(evidence.differences @ evidence.differences, y @ y)
    assert evidence.signatures.shape[0] == len(SUSPECTS) + 1


def test_signatures_that_differ_by_a_part_in_a_thousand_million() -> None:
    # normal equations would not tell them apart
    first = 1e8 * RNG.normal(0.0, 1.0, ROWS)
    table = np.stack([first, first + 2.0 * RNG.normal(0.0, 1.0, ROWS)], axis=1)
    two = (suspect("one", {1.0: "so"}), suspect("other", {1.0: "so"}))
    for k in (0, 1):
        theirs = table[:, k] + RNG.normal(0.0, 1.0, ROWS)
        inquiry = inquire(table, theirs, np.ones(ROWS), True, two)
        assert names_of(inquiry) == {two[k].name}
        assert not inquiry.rivals


# -- finding ---------------------------------------------------------------------------------------


@pytest.mark.parametrize("stated", [True, False])
@pytest.mark.parametrize(
    "amplitudes",
    [
        {"choice_4": 1.0},
        {"choice_4": -1.0},
        {"choice_7": 2.0, "offset_2": -13.0},
        {"choice_0": 0.5, "choice_9": 1.0, "offset_0": 4.0},
        {"place_0": 20.0, "place_1": -15.0, "place_2": 8.0, "choice_12": 1.0},
    ],
)
def test_what_is_there_is_found(amplitudes: dict[str, float], stated: bool) -> None:
    theirs, inquiry = asked(amplitudes, stated=stated)
    assert names_of(inquiry) == set(amplitudes)
    columns = [inquiry.columns[c] for c in inquiry.best.support]
    left = theirs - SIGNATURES[:, columns] @ inquiry.best.amplitudes
    for finding in findings(inquiry, SIGNATURES[:, columns], left):
        true = amplitudes[finding.name]
        if finding.unit:
            assert finding.exact is None
            assert abs(finding.fitted - true) < 4.0 * finding.sigma
        else:
            assert finding.exact == true
            assert finding.reading == CHOICE[true]
        assert finding.chance < 1e-6
        assert finding.without_ps > 1.5
    assert float(np.std(left)) == pytest.approx(1.0, abs=0.15)


def test_noise_is_not_explained() -> None:
    rng = np.random.default_rng(8)
    for trial in range(20):
        stated = bool(trial % 2)
        sigma = np.full(ROWS, 1.0 if stated else 1e-3)
        inquiry = inquire(SIGNATURES, rng.normal(0.0, 1.0, ROWS), sigma, stated, SUSPECTS)
        assert not inquiry.members


def test_an_amplitude_that_is_not_exact_is_not_called_so() -> None:
    _, inquiry = asked({"choice_5": 0.81})
    assert names_of(inquiry) == {"choice_5"}
    assert inquiry.best.exact == (None,)
    assert inquiry.fitted[0] == pytest.approx(0.81, abs=5.0 * inquiry.sigmas[0])
    assert reading_of(SUSPECTS[5], 0.81, None) == "part of it, or something like it"
    assert reading_of(SUSPECTS[5], 1.01, None) == "left out, nearly"


def test_suspects_that_look_the_same_are_named_together() -> None:
    noise = 0.2 * SIZES[0]  # at which the two cannot be told apart
    _, inquiry = asked({"choice_0": 1.0}, noise)
    named = {frozenset(s.name for s in inquiry.named(r)) for r in inquiry.rivals}
    named.add(frozenset(names_of(inquiry)))
    assert named == {frozenset({"choice_0"}), frozenset({"choice_1"})}


def test_something_that_is_not_on_the_list_raises_the_noise() -> None:
    rng = np.random.default_rng(2)
    theirs = 30.0 * np.sin(np.arange(ROWS) / 9.0) + rng.normal(0.0, 1.0, ROWS)
    inquiry = inquire(SIGNATURES, theirs, np.ones(ROWS), True, SUSPECTS)
    assert inquiry.best.noise > 15.0
    assert len(inquiry.members) <= 1


def test_few_rows_find_little() -> None:
    for rows in (1, 2, 5):
        inquiry = inquire(SIGNATURES[:rows], np.ones(rows), np.ones(rows), True, SUSPECTS)
        assert not inquiry.members
    theirs = SIGNATURES[:12, 4] + np.random.default_rng(1).normal(0.0, 1.0, 12)
    inquiry = inquire(SIGNATURES[:12], theirs, np.ones(12), True, SUSPECTS)
    assert names_of(inquiry) == {"choice_4"}


def test_identical_ranges() -> None:
    inquiry = inquire(SIGNATURES, np.zeros(ROWS), np.full(ROWS, 1e-3), False, SUSPECTS)
    assert not inquiry.members
    assert inquiry.best.squares == 0.0


@settings(max_examples=8, deadline=None)
@given(st.integers(0, 19), st.sampled_from(sorted(CHOICE)), st.floats(1e-3, 1e3))
def test_units_do_not_matter(column: int, amplitude: float, unit: float) -> None:
    if column in (0, 1):  # those that look the same
        column = 2
    theirs = amplitude * SIGNATURES[:, column] + np.random.default_rng(5).normal(0.0, 1.0, ROWS)
    choices = SUSPECTS[:20]
    table = SIGNATURES[:, :20]
    first = inquire(table, theirs, np.ones(ROWS), True, choices)
    second = inquire(unit * table, unit * theirs, np.full(ROWS, unit), True, choices)
    assert names_of(first) == names_of(second) == {f"choice_{column}"}
    np.testing.assert_allclose(first.best.amplitudes, second.best.amplitudes, rtol=1e-9)


def test_score_is_the_evidence_of_a_linear_model() -> None:
    # MacKay 1992: -2 ln N(y; 0, 1 + a tau^2 a^T), but for the shrinking of the amplitude
    rng = np.random.default_rng(9)
    a, tau = rng.normal(0.0, 3.0, ROWS), 10.0
    y = 2.0 * a + rng.normal(0.0, 1.0, ROWS)
    folding = Folding(1)
    folding.add(a[:, None], y, np.ones(ROWS))
    trial = Trial(folding.evidence(), [()], np.array([tau]), 1, [""])
    covariance = np.eye(ROWS) + tau**2 * np.outer(a, a)
    _, logarithm = np.linalg.slogdet(covariance)
    exact = float(y @ np.linalg.solve(covariance, y) + logarithm)
    found = trial.weigh((0,))
    ours = found.squares + 2.0 * np.log(1.0 + (found.amplitudes[0] / tau) ** 2) + logarithm
    assert found.score - trial.misfit(found.squares) == pytest.approx(ours - found.squares)
    assert ours == pytest.approx(exact, abs=0.5)


# -- what remains ----------------------------------------------------------------------------------


def test_structure_in_what_remains() -> None:
    rng = np.random.default_rng(4)
    time = rng.uniform(0.0, 365.0, 400)
    noise = rng.normal(0.0, 1.0, 400)
    orders = {"time": time, "hour angle": rng.normal(0.0, 3.0, 400)}
    assert not rest(noise, np.ones(400), orders).has_structure
    wave = rest(noise + np.sin(time / 30.0), np.ones(400), orders)
    assert wave.has_structure
    assert wave.order == "time"
    assert wave.correlation > 0.2


def test_rows_that_stand_apart() -> None:
    residual = np.random.default_rng(6).normal(0.0, 1.0, 300)
    assert not standing_apart(residual, np.ones(300)).any()
    residual[[5, 70]] = 400.0, -30.0
    assert np.flatnonzero(standing_apart(residual, np.ones(300))).tolist() == [5, 70]
    residual[:40] += 400.0  # too many to be set aside
    assert not standing_apart(residual, np.ones(300)).any()


def test_rounding_is_recognised_by_its_size() -> None:
    known = roundings(1e-12, 1.2)
    assert [r.what.split(" (")[0] for r in rounding_of(0.29, known)] == [
        "the last digit of the ranges as given",
        "barycentric coordinates in one float64",
    ]
    assert rounding_of(1e6, known) == ()


# -- curves ----------------------------------------------------------------------------------------


def test_a_day_is_a_polynomial_over_a_minute() -> None:
    def wave(shift: Any) -> Any:
        phases = np.linspace(0.0, 6.0, 9)
        rate = 2.0 * np.pi / 86164.0
        return 6.4e6 * (np.sin(phases + rate * shift) - np.sin(phases))

    curve = Curve.through(EPOCH_NODES, wave)
    for shift in (-69.184, -37.0, -1.0, 1.0, 2.6):
        np.testing.assert_allclose(curve.at(shift), wave(shift), atol=2e-8)
