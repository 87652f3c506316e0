"""Answers as text for people: terms in ps and mm, and what they rest on."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from lighttime.constants import SPEED_OF_LIGHT
from lighttime.timescales import Epoch

if TYPE_CHECKING:
    from lighttime.answer import Answer, OneWay, RoundTrip

MOST_ROWS = 10
"""So many epochs of a long answer are printed."""

RULE = "  " + "-" * 72


def round_trip_text(answer: RoundTrip) -> str:
    """See `RoundTrip`."""
    title = f"Round trip {_name(answer, 'station')} - {_name(answer, 'reflector')}"
    if answer.query.shape:
        return _many(answer, title)
    up, down = answer.uplink, answer.downlink
    one_way_km = 0.5 * answer.seconds * SPEED_OF_LIGHT / 1e3
    unit = "s" if hasattr(answer.query.station, "xyz_m") else "s (TDB)"
    lines = [
        title,
        f"  {answer.query.tag} {answer.query.when}",
        f"  {spaced(answer.seconds)} {unit}   half of it: {one_way_km:.6f} km",
        *_elevations(("up", up), ("down", down)),
        "",
        *_term_rows(answer, two_way=True),
        *_closing(answer),
    ]
    return "\n".join(lines)


def one_way_text(answer: OneWay) -> str:
    """See `OneWay`."""
    title = f"One way, {_name(answer, 'station')} and {_name(answer, 'reflector')}"
    if answer.query.shape:
        return _many(answer, title)
    lines = [
        title,
        f"  {answer.query.tag} {answer.query.when}",
        f"  {spaced(answer.seconds)} s (TDB)   {answer.seconds * SPEED_OF_LIGHT / 1e3:.6f} km",
        *_elevations(("", answer.leg)),
        "",
        *_term_rows(answer, two_way=False),
        *_closing(answer),
    ]
    return "\n".join(lines)


def spaced(seconds: float) -> str:
    """Seconds to the femtosecond, in groups of three digits.

    Examples
    --------
    >>> spaced(2.5674123456789012)
    '2.567 412 345 678 901'
    """
    whole, digits = f"{seconds:.15f}".split(".")
    return f"{whole}." + " ".join(digits[i : i + 3] for i in range(0, 15, 3))


def _name(answer: Answer, end: str) -> str:
    thing: Any = getattr(answer.query, end)
    return str(getattr(thing, "name", type(thing).__name__))


def _elevations(*legs: tuple[str, Any]) -> list[str]:
    seen = [
        f"{name} {leg.elevation_deg:.4f}".lstrip()
        for name, leg in legs
        if leg.elevation_deg is not None
    ]
    below = any(leg.elevation_deg is not None and leg.elevation_deg < 0.0 for _, leg in legs)
    where = ": below the horizon" if below else ""
    return [f"  elevation {', '.join(seen)} deg{where}"] if seen else []


def _term_rows(answer: Answer, two_way: bool) -> list[str]:
    half = 0.5 if two_way else 1.0
    way = "ps two-way" if two_way else "ps"
    lines = [f"  {'term':24}{way:>24}{'mm one-way':>24}", RULE]
    for name, seconds in (*answer.terms.items(), ("sum", answer.seconds)):
        mm = half * seconds * SPEED_OF_LIGHT * 1e3
        if name == "sum":
            lines.append(RULE)
        lines.append(f"  {name:24}{seconds * 1e12:>24,.3f}{mm:>24,.3f}".replace(",", " "))
    return lines


def _closing(answer: Answer) -> list[str]:
    lines = [""]
    if answer.not_modelled:
        lines.append(f"  not modelled (nothing was given): {', '.join(answer.not_modelled)}")
    omitted = sorted(answer.model.omit)
    if omitted:
        lines.append(f"  left out on request: {', '.join(omitted)}")
    return lines + [f"  {note}" for note in answer.notes]


def _many(answer: Answer, title: str) -> str:
    size, shape = answer.query.size, answer.query.shape
    grid = f" {shape}" if len(shape) > 1 else ""
    lines = [f"{title}, {size} epochs{grid}, {answer.query.tag}", *_rows(answer)]
    if size:
        lines += ["", f"  {'term':24}{'least, ps':>24}{'most, ps':>24}", RULE]
    for name, values in answer.terms.items() if size else ():
        least, most = float(np.min(values)) * 1e12, float(np.max(values)) * 1e12
        lines.append(f"  {name:24}{least:>24,.3f}{most:>24,.3f}".replace(",", " "))
    return "\n".join([*lines, *_closing(answer)])


def _rows(answer: Answer) -> list[str]:
    """Epoch, light time and elevation of the first epochs and the last."""
    size, when = answer.query.size, answer.query.when
    shown = np.arange(size)
    if size > MOST_ROWS:
        shown = np.concatenate([shown[: MOST_ROWS // 2], shown[-MOST_ROWS // 2 :]])
    jd1, jd2, seconds = (np.ravel(v)[shown] for v in (when.jd1, when.jd2, answer.seconds))
    epochs = Epoch(jd1, jd2, when.scale).isoformat(6).tolist()
    lines = [
        f"  {epoch} {when.scale.upper()}   {spaced(light_time)} s"
        for epoch, light_time in zip(epochs, seconds.tolist(), strict=True)
    ]
    leg: Any = getattr(answer, "uplink", None) or getattr(answer, "leg", None)
    if leg.elevation_deg is not None:
        angles = np.ravel(leg.elevation_deg)[shown].tolist()
        lines = [
            f"{row}   elevation {deg:8.3f} deg" for row, deg in zip(lines, angles, strict=True)
        ]
    if size > MOST_ROWS:
        lines.insert(MOST_ROWS // 2, "  ...")
    return lines
