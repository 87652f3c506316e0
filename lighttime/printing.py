"""Answers as text for people: terms in ps and mm, and what they rest on."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from lighttime.constants import SPEED_OF_LIGHT

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
        f"{name} {leg.elevation_deg:.4f}" for name, leg in legs if leg.elevation_deg is not None
    ]
    return [f"  elevation {', '.join(seen)} deg"] if seen else []


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
    seconds = np.ravel(answer.seconds)
    when = answer.query.when
    lines = [f"{title}, {seconds.size} epochs {answer.query.shape}, {answer.query.tag}"]
    shown = np.arange(seconds.size)
    if seconds.size > MOST_ROWS:
        shown = np.concatenate([shown[: MOST_ROWS // 2], shown[-MOST_ROWS // 2 :]])
    flat = np.ravel(when.isoformat(6))
    for k, index in enumerate(shown):
        if seconds.size > MOST_ROWS and k == MOST_ROWS // 2:
            lines.append("  ...")
        lines.append(f"  {flat[index]} {when.scale.upper()}   {spaced(float(seconds[index]))} s")
    ranges = [
        f"  {name:24}{float(np.min(v)) * 1e12:>24,.3f}{float(np.max(v)) * 1e12:>24,.3f}"
        for name, v in answer.terms.items()
    ]
    head = f"  {'term':24}{'least, ps':>24}{'most, ps':>24}"
    return "\n".join(
        [*lines, "", head, RULE, *(r.replace(",", " ") for r in ranges), *_closing(answer)]
    )
