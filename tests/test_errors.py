"""Errors: what they tell of a value, whatever the value is, and that they travel."""

from __future__ import annotations

import pickle
import time
from typing import Any

import pytest

import lighttime as lt
from lighttime.errors import LONGEST_SHOWN, MOST_NAMES, shown


class Unprintable:
    def __repr__(self) -> str:
        raise RuntimeError("no")


@pytest.mark.parametrize(
    ("value", "told"),
    [
        (770.0, "770.0"),
        ("a\x1b[2J", r"'a\x1b[2J'"),
        (10**5000, "of type int and cannot be shown"),
        (Unprintable(), "of type Unprintable and cannot be shown"),
        ("x" * 1000, f"'{'x' * (LONGEST_SHOWN - 1)}... (1002 characters)"),
    ],
    ids=["number", "escape", "integer", "class", "long"],
)
def test_a_value_is_told_as_far_as_that_goes(value: Any, told: str) -> None:
    assert shown(value) == told
    assert str(lt.InputError("height_m", value, "a number")) == (
        f"height_m is {told}; allowed: a number"
    )


@pytest.mark.parametrize(
    "error",
    [
        lt.InputError("height_m", 2e6, "-1000 to 10000 m"),
        lt.CoverageError("epoch", "2150-01-01", "1960 to 2099"),
        lt.HorizonError("elevation_deg", -3.0, "above 0"),
        lt.UnknownNameError("tag", "recieve", ("transmit", "receive")),
        lt.FileError("a.blq", 7, "no number"),
        lt.FileError("a.blq", None, "no number"),
    ],
)
def test_errors_travel_between_processes(error: lt.LighttimeError) -> None:
    same = pickle.loads(pickle.dumps(error))
    assert type(same) is type(error)
    assert (str(same), vars(same)) == (str(error), vars(error))


def test_of_many_names_the_first_are_told() -> None:
    names = [f"site {k}" for k in range(MOST_NAMES + 1)]
    told = str(lt.UnknownNameError("site", "sita 40", names))
    assert "did you mean site 40 or site 4 or" in told
    assert told.endswith(f"one of {', '.join(names[:10])}, ... ({MOST_NAMES + 1} in all)")


def test_near_names_are_looked_for_in_seconds() -> None:
    """A file of a hundred thousand names of 500 letters each, and one to look for."""
    names = ["".join("ab"[(k >> (j % 17)) & 1] for j in range(500)) for k in range(1000)] * 100
    start = time.process_time()
    told = str(lt.UnknownNameError("site", "ab" * 250, names))
    told += str(lt.UnknownNameError("site", "ab", names))
    assert "did you mean" not in told
    assert time.process_time() - start < 1.0


def test_a_name_need_not_be_text() -> None:
    assert "tag is 3; allowed: one of transmit" in str(lt.UnknownNameError("tag", 3, ["transmit"]))  # type: ignore[arg-type]
