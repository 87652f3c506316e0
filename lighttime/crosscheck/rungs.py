"""Rung by rung: intermediate values that the other program gives, held against our worksheet."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from lighttime.constants import SPEED_OF_LIGHT
from lighttime.crosscheck.bench import Bench
from lighttime.errors import UnknownNameError
from lighttime.timescales import twopart
from lighttime.vectors import Array

PS_OF_UNIT = {
    "s": 1e12,
    "m": 1e12 / SPEED_OF_LIGHT,
    "rad": 1e12 * 6.4e6 / SPEED_OF_LIGHT,
    "s_of_time": 1e12 * 1.5e-6,
    "arcsec": 1e12 * 6.4e6 / SPEED_OF_LIGHT * np.pi / 648000.0,
    "deg": 1e12 * 12e-9 * 0.02,
    "m_per_s": 1e12 * 1.3 / SPEED_OF_LIGHT * 1e-4,
    "jd": 86400.0 * 1e12 * 1.5e-6,
    "m2_per_s2": 1e12 * 6.4e6 / SPEED_OF_LIGHT**3,
}
"""Picoseconds of range for one unit of a rung: what its error can do at most, roughly."""


@dataclass(frozen=True)
class Rung:
    """One intermediate value in both programs.

    Attributes
    ----------
    name : str
    largest : float
        Largest difference, other minus ours, in the unit of the rung.
    rms : float
    effect_ps : float
        What that does to a range, roughly and at most.
    departs : bool
        Whether it is more than the tolerance.
    """

    name: str
    largest: float
    rms: float
    effect_ps: float
    departs: bool


def unit_of(name: str) -> str:
    """The unit of a rung, from its name."""
    stem = name.split(".")[1] if "." in name else name
    for ending, unit in (
        ("_m2_per_s2", "m2_per_s2"), ("_m_per_s", "m_per_s"), ("_arcsec", "arcsec"),
        ("_rad", "rad"), ("_deg", "deg"), ("_jd", "jd"), ("seconds_after_tag", "s"),
        ("tdb_minus_tt_s", "s_of_time"), ("_m", "m"), ("_s", "s"), ("seconds", "s"),
    ):  # fmt: skip
        if stem.endswith(ending):
            return unit
    return "jd"


def compare(bench: Bench, tolerance_ps: float) -> tuple[Rung, ...]:
    """Every rung that the other program gives, in the order of the worksheet.

    Components of vectors are ``t1.itrf_m.x`` and so on; instants may be given as one Julian date,
    ``t1.tt_jd``, in as many digits as there are.

    Parameters
    ----------
    bench : Bench
    tolerance_ps : float
        An effect on the range above which a rung departs.

    Raises
    ------
    UnknownNameError
        For a rung that the worksheet does not have.
    """
    given = bench.ranges.rungs
    if not given:
        return ()
    off: dict[str, Array] = {name: np.empty(len(bench.ranges)) for name in given}
    order: list[str] = []
    for rows, scene in bench.scenes():
        ours = _worksheet(scene)
        order = list(ours)
        for name, values in given.items():
            high, low = _rung(ours, name)
            there = twopart.subtract(
                twopart.pair(values.high[rows], values.low[rows]), twopart.pair(high, low)
            )
            off[name][rows] = _wrapped(there[0], name)
    compared = []
    for name in sorted(given, key=lambda n: _place(order, n)):
        digit = np.max(given[name].last_digit)
        largest = float(off[name][np.argmax(np.abs(off[name]))])
        effect = PS_OF_UNIT[unit_of(name)] * max(abs(largest) - 0.5 * float(digit), 0.0)
        root = float(np.sqrt(np.mean(off[name] ** 2)))
        compared.append(Rung(name, largest, root, effect, bool(effect > tolerance_ps)))
    return tuple(compared)


def _worksheet(scene: Any) -> dict[str, Any]:
    """Our rungs for a block, vectors (3, n)."""
    from lighttime.answer import RoundTrip

    answer = RoundTrip.of(scene.model, scene.query, scene.legs)
    rungs = dict(answer.worksheet())
    for event in ("t1", "t3"):
        for scale in ("tai", "tt", "ut1"):
            first = f"{event}.{scale}{'_' if scale == 'ut1' else ''}1"
            second = f"{event}.{scale}{'_' if scale == 'ut1' else ''}2"
            if first in rungs:
                rungs[f"{event}.{scale}_jd"] = (rungs[first], rungs[second])
    return rungs


def _rung(ours: dict[str, Any], name: str) -> tuple[Any, Any]:
    stem, _, component = name.rpartition(".")
    if name in ours:
        value = ours[name]
        if isinstance(value, tuple):
            return value
        if np.ndim(value) == 1:
            return value, np.zeros_like(value)
    elif stem in ours and component in ("x", "y", "z") and np.ndim(ours[stem]) == 2:
        value = ours[stem]["xyz".index(component)]
        return value, np.zeros_like(value)
    raise UnknownNameError("rung", name, _names(ours))


def _names(ours: dict[str, Any]) -> list[str]:
    return [
        n
        for name, value in ours.items()
        for n in ([f"{name}.{c}" for c in "xyz"] if np.ndim(value) == 2 and not isinstance(
            value, tuple
        ) else [name])
    ]  # fmt: skip


def _place(order: list[str], name: str) -> int:
    stem = name if name in order else name.rpartition(".")[0]
    # a Julian date in one number stands where its parts do
    for event in ("t1", "t3"):
        if stem.startswith(f"{event}.") and stem.endswith("_jd"):
            scale = stem.removeprefix(f"{event}.").removesuffix("_jd")
            stem = f"{event}.{scale}{'_' if scale == 'ut1' else ''}1"
    return order.index(stem)


def _wrapped(difference: Array, name: str) -> Array:
    """Angles that differ by whole turns are the same."""
    if unit_of(name) != "rad":
        return difference
    turned: Array = np.mod(difference + np.pi, 2.0 * np.pi) - np.pi
    return turned
