"""Many epochs are worked off in blocks, and stations in turn: neither shows in the answers."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

import lighttime as lt
from lighttime import model as model_room
from lighttime import tables

HILLTOP = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
ARRAY = lt.reflector("Apollo 15")
SHUFFLED = np.random.default_rng(5).permutation(np.linspace(0.76, 0.87, 11))
WEATHER = lt.Weather(np.linspace(760.0, 780.0, 11), 280.0, 0.4)


def evening() -> lt.Epoch:
    return lt.Epoch(2458909.5, SHUFFLED, "utc")


@pytest.mark.parametrize("ask", ["round_trip", "one_way"])
def test_blocks_do_not_show(monkeypatch: pytest.MonkeyPatch, ask: str) -> None:
    """In any order of epochs, with the weather of each."""
    model = lt.Model()

    def asked() -> Any:
        return getattr(model, ask)(evening(), HILLTOP, ARRAY, weather=WEATHER)

    whole = asked()
    monkeypatch.setattr(model_room, "BLOCK", 4)
    parts = asked()
    assert np.abs(parts.seconds - whole.seconds).max() < 1e-15
    for name, values in whole.terms.items():
        assert np.abs(parts.terms[name] - values).max() < 2e-15
    with pytest.raises(ValueError, match="read-only"):
        parts.seconds[0] = 0.0


def test_progress_goes_by_blocks(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(model_room, "BLOCK", 4)
    seen: list[tuple[int, int]] = []
    lt.Model().round_trip(
        evening(), HILLTOP, ARRAY, progress=lambda done, count: seen.append((done, count))
    )
    assert seen == [(4, 11), (8, 11), (11, 11)]


def test_a_worksheet_of_more_than_one_block() -> None:
    """8192 epochs are one block."""
    when = lt.Epoch(2458909.5, np.linspace(0.2, 0.4, 8193), "utc")
    quick = lt.Model(omit=[t for t in lt.TERMS[1:] if t != "clock"])
    answer = quick.round_trip(when, HILLTOP, ARRAY)
    sheet = answer.worksheet()
    assert sheet["answer_s"] == pytest.approx(answer.seconds, abs=1e-15)
    last = quick.round_trip(when[-1], HILLTOP, ARRAY).worksheet()
    for name in ("t1.position_m", "t3.position_m", "downlink.geometry_s"):
        assert sheet[name][..., -1] == pytest.approx(last[name][..., 0], rel=1e-14)


def test_stations_of_long_ago_are_let_go(monkeypatch: pytest.MonkeyPatch) -> None:
    """Of three stations two are kept, those that were used last."""
    monkeypatch.setattr(tables, "MOST_STATIONS", 2)
    model, when = lt.Model(), lt.Epoch(2458909.5, np.linspace(0.2, 0.4, 200), "utc")
    places = [lt.Station.from_geodetic(f"site {k}", 46.2, 7.1 + k, 2310.0) for k in range(3)]
    first = [model.round_trip(when, place, ARRAY).seconds for place in places]
    told = model.tables()
    assert [f"site {k}: " in told for k in range(3)] == [False, True, True]
    again = model.round_trip(when, places[0], ARRAY).seconds
    assert np.abs(again - first[0]).max() < 2e-15
    told = model.tables()
    assert [f"site {k}: " in told for k in range(3)] == [True, False, True]


def test_a_model_that_was_not_asked_yet_has_no_tables() -> None:
    told = lt.Model().tables()
    assert "0 spans of" in told
    assert "left out" not in told
