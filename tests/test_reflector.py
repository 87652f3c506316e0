"""Reflectors and the conventions of their coordinates."""

from __future__ import annotations

import pickle
from dataclasses import FrozenInstanceError
from typing import Any

import numpy as np
import pytest

from lighttime.errors import InputError, UnknownNameError
from lighttime.moon.reflector import Reflector, reflector, reflectors

PLACE = (1554678.0, 98094.0, 765005.0)


def selenographic(xyz_m: tuple[float, float, float]) -> tuple[float, float]:
    x, y, z = xyz_m
    return np.degrees(np.arctan2(z, np.hypot(x, y))), np.degrees(np.arctan2(y, x))


@pytest.mark.parametrize(
    ("name", "latitude_deg", "longitude_deg"),
    [
        # Where the missions landed, mean-Earth axes (press kits and atlases, from memory);
        # principal axes are within 0.03 degrees of these.
        ("Apollo 11", 0.67, 23.47),
        ("Apollo 14", -3.64, -17.48),
        ("Apollo 15", 26.13, 3.63),
        ("Lunokhod 1", 38.32, -35.01),
        ("Lunokhod 2", 25.83, 30.92),
    ],
)
def test_the_five_arrays_stand_where_they_landed(
    name: str, latitude_deg: float, longitude_deg: float
) -> None:
    found = selenographic(reflector(name).xyz_m)
    assert found == pytest.approx((latitude_deg, longitude_deg), abs=0.05)


def test_the_set_is_five_and_says_whose_axes_it_is_in() -> None:
    assert len(reflectors()) == 5
    for each in reflectors():
        assert (each.axes, each.scale, each.contains_permanent_tide) == ("DE430", "tdb", False)
        assert "from memory" in each.source


@pytest.mark.parametrize("name", ["Apollo 15", "apollo 15", "APOLLO15", " Apollo-15 "])
def test_names_are_found_however_they_are_written(name: str) -> None:
    assert reflector(name).name == "Apollo 15"


@pytest.mark.parametrize(
    ("name", "message"),
    [
        ("Apolo 15", "reflector is 'Apolo 15'; allowed: did you mean Apollo 15"),
        ("lunokod 2", "did you mean Lunokhod 2"),
        ("Tycho", "allowed: one of Apollo 11, Apollo 14, Apollo 15, Lunokhod 1, Lunokhod 2"),
        ("", "allowed: one of Apollo 11"),
    ],
)
def test_unknown_names(name: str, message: str) -> None:
    with pytest.raises(UnknownNameError, match=message):
        reflector(name)


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"xyz_m": (1737.4, 0.0, 0.0)}, r"xyz_m is .*; allowed: 1717400 to .*in kilometres\?"),
        ({"xyz_m": (1.76e6, 0.0, 0.0)}, r"to 1757400 m from the centre .*; this is 1\.76e\+06 m$"),
        ({"xyz_m": (1.71e6, 0.0, 0.0)}, "xyz_m is"),
        ({"xyz_m": (np.nan, 0.0, 0.0)}, "xyz_m is .*nan.*; allowed: three finite numbers"),
        ({"xyz_m": (1.0, 2.0)}, "xyz_m is .*; allowed: three finite numbers"),
        ({"xyz_m": "here"}, "xyz_m is 'here'; allowed: a number"),
        ({"sigma_m": (0.1, -0.1, 0.1)}, "sigma_m is .*none negative"),
        ({"sigma_m": (0.1, np.inf, 0.1)}, "sigma_m is .*; allowed: three finite numbers"),
        ({"scale": "tcb"}, "scale is 'tcb'; allowed: .*one of tdb, tt, local"),
        ({"axes": "mean Earth"}, "axes is 'mean Earth'; allowed: the ephemeris whose principal"),
        ({"axes": "ME"}, "axes is 'ME'"),
        ({"axes": ""}, "axes is ''"),
    ],
)
def test_bad_input(change: dict[str, Any], message: str) -> None:
    with pytest.raises(InputError, match=message):
        Reflector(**{"name": "here", "xyz_m": PLACE, **change})


def test_is_a_value() -> None:
    here = Reflector("here", np.array(PLACE), sigma_m=[0.1, 0.2, 0.3])  # type: ignore[arg-type]
    assert here == Reflector("here", PLACE, sigma_m=(0.1, 0.2, 0.3))
    assert hash(here) == hash(pickle.loads(pickle.dumps(here)))
    assert all(type(x) is float for x in here.xyz_m)
    with pytest.raises(FrozenInstanceError):
        here.name = "there"  # type: ignore[misc]


def test_change_of_scale() -> None:
    # Potential at the Moon: GM_Sun/au + GM_Earth/384400 km, over c^2: 9.87e-9 + 1.15e-11. With
    # L_C = 1.48082686741e-8 (IAU 2000 B1.5) and L_B = 1.550519768e-8 (IAU 2006 B3).
    potential = 1.32712440018e20 / 149597870700.0 + 3.986004418e14 / 3.844e8
    ratio = potential / 299792458.0**2
    assert ratio == pytest.approx(9.882e-9, rel=1e-4)
    for scale, expected in (
        ("tdb", 0.0),
        ("tt", -ratio - 1.48082686741e-8),
        ("local", -ratio - 1.550519768e-8),
    ):
        here = Reflector("here", PLACE, scale=scale)  # type: ignore[arg-type]
        assert here.scale_change(potential) == pytest.approx(expected, rel=1e-13, abs=0.0)
        assert here.scale_change(np.full(4, potential)).shape == (4,)


@pytest.mark.parametrize("name", ["DE430", "de430", "DE-430"])
def test_axes_of_the_ephemeris_in_use_need_no_note(name: str) -> None:
    assert reflector("Apollo 15").axes_note(name) is None


def test_a_mismatch_of_axes_is_said() -> None:
    note = reflector("Apollo 15").axes_note("DE421")
    assert note is not None
    assert "Apollo 15" in note
    assert "DE430" in note
    assert "DE421" in note
    assert "up to about a metre" in note
    other = reflector("Apollo 15").axes_note("INPOP19a")
    assert other is not None
    assert "not known" in other
