"""Figures as SVG text: points against an abscissa, sharp at any size, with no library behind."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from html import escape
from typing import Any

import numpy as np

from lighttime.crosscheck.ticks import Ticks, numbers, scale_of
from lighttime.vectors import Array

WIDTH, PANEL = 560.0, 170.0
LEFT, RIGHT, TOP, BETWEEN, BOTTOM = 58.0, 12.0, 24.0, 34.0, 46.0
CELL = 1.5
"""Points that fall into one cell of so many units are drawn once."""


@dataclass(frozen=True, eq=False)
class Axis:
    """What lies along the bottom of a figure.

    Attributes
    ----------
    name : str
    values : ndarray, shape (n,)
    ticks : list of (float, str)
    """

    name: str
    values: Array
    ticks: Ticks


@dataclass(frozen=True, eq=False)
class Panel:
    """One of the panels above each other: a title and values in ps, shape (n,)."""

    title: str
    values_ps: Array


def figure(axis: Axis, panels: Sequence[Panel], colours: Any, alt: str) -> str:
    """Panels above each other over one abscissa.

    Parameters
    ----------
    axis : Axis
    panels : sequence of Panel
    colours : ndarray of int, shape (n,)
        Which class of points, ``p0``, ``p1``, ..., each row is drawn in.
    alt : str
        What it shows, for those who do not see it.
    """
    low, high = _limits(axis.values)
    height = TOP + len(panels) * PANEL + (len(panels) - 1) * BETWEEN + BOTTOM
    parts = [
        f'<svg viewBox="0 0 {WIDTH:g} {height:g}" role="img" aria-label="{escape(alt)}" '
        f'class="chart">'
    ]
    x = _placed(axis.values, low, high, LEFT, WIDTH - RIGHT)
    for k, panel in enumerate(panels):
        top = TOP + k * (PANEL + BETWEEN)
        parts += _panel(panel, x, colours, top)
        bottom = top + PANEL
        for at, label in axis.ticks:
            if low <= at <= high:
                across = float(_placed(np.array([at]), low, high, LEFT, WIDTH - RIGHT)[0])
                parts.append(f'<path class="grid" d="M{across:.1f} {top:.1f}V{bottom + 4:.1f}"/>')
                if k == len(panels) - 1:
                    parts.append(_text(across, bottom + 18.0, label, "middle"))
    parts.append(_text(0.5 * (LEFT + WIDTH - RIGHT), height - 4.0, axis.name, "middle"))
    return "".join(parts) + "</svg>"


def _panel(panel: Panel, x: Array, colours: Any, top: float) -> list[str]:
    bottom = top + PANEL
    largest = float(np.max(np.abs(panel.values_ps), initial=0.0))
    factor, unit = scale_of(largest)
    values = panel.values_ps * factor
    low, high = _limits(values)
    y = _placed(values, low, high, bottom, top)
    parts = [
        f'<rect class="frame" x="{LEFT:g}" y="{top:.1f}" width="{WIDTH - RIGHT - LEFT:g}" '
        f'height="{PANEL:g}"/>',
        _text(LEFT, top - 7.0, f"{panel.title}, {unit}", "start", "title"),
    ]
    for at, label in numbers(low, high, 5):
        height = float(_placed(np.array([at]), low, high, bottom, top)[0])
        parts.append(f'<path class="grid" d="M{LEFT - 4:g} {height:.1f}H{WIDTH - RIGHT:g}"/>')
        parts.append(_text(LEFT - 7.0, height + 4.0, label, "end"))
    for colour in np.unique(colours).tolist():
        mask = colours == colour
        parts.append(f'<path class="p{colour}" d="{_points(x[mask], y[mask])}"/>')
    return parts


def _points(x: Array, y: Array) -> str:
    """Dots as one path; dots on top of each other are drawn once."""
    cells = np.stack([np.round(x / CELL), np.round(y / CELL)]).astype(int)
    _, first = np.unique(cells, axis=1, return_index=True)
    return "".join(f"M{x[i]:.1f} {y[i]:.1f}h0" for i in np.sort(first))


def _limits(values: Array) -> tuple[float, float]:
    low, high = float(np.min(values, initial=np.inf)), float(np.max(values, initial=-np.inf))
    if not high > low:
        middle = low if np.isfinite(low) else 0.0
        room = 0.5 * abs(middle) or 1.0
        return middle - room, middle + room
    room = 0.06 * (high - low)
    return low - room, high + room


def _placed(values: Array, low: float, high: float, start: float, end: float) -> Array:
    placed: Array = start + (values - low) / (high - low) * (end - start)
    return placed


def _text(x: float, y: float, text: str, anchor: str, kind: str = "label") -> str:
    return (
        f'<text class="{kind}" x="{x:.1f}" y="{y:.1f}" text-anchor="{anchor}">{escape(text)}</text>'
    )
