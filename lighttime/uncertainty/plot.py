"""A stacked picture of an error budget over time."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from lighttime.errors import InputError, LighttimeError

if TYPE_CHECKING:
    from lighttime.uncertainty.result import Budget

MOST_PARTS = 9
"""So many parts have a colour of their own; the others are one."""

MM_PER_S = 0.5 * 299792458.0 * 1.0e3


def plot(budget: Budget, path: str | Path | None = None) -> Any:
    """Draw a budget over its epochs: the height is the total sigma, shared out by squares.

    Parameters
    ----------
    budget : Budget
        Of two or more epochs.
    path : path, optional
        Write a picture there, of the kind that its suffix says (``.png``, ``.svg``, ``.pdf``).

    Returns
    -------
    matplotlib Figure

    Raises
    ------
    LighttimeError
        Without matplotlib (the extra ``plot``).
    InputError
        For a single epoch.

    Notes
    -----
    Squares of sigmas add, sigmas do not: a part has that share of the total sigma which its
    square has of the sum of squares.
    """
    try:
        from matplotlib.figure import Figure
    except ImportError:
        raise LighttimeError("a picture needs matplotlib: install lighttime[plot]") from None
    if budget.query.size < 2:
        raise InputError("epochs of the budget", budget.query.size, "2 or more, to draw over time")
    when = budget.query.when
    days = np.ravel((when.jd1 - 2400000.5) + when.jd2)
    order = np.argsort(days)
    total = np.ravel(budget.total_s)[order]
    parts = [(p.name, np.ravel(p.sigma_s)[order]) for p in budget.largest_first]
    shown, rest = parts[:MOST_PARTS], parts[MOST_PARTS:]
    if rest:
        shown.append(("all others", np.sqrt(sum(sigma**2 for _, sigma in rest))))
    figure = Figure(figsize=(9.0, 5.0), layout="constrained")
    axes = figure.subplots()
    axes.stackplot(
        days[order],
        [MM_PER_S * sigma**2 / total for _, sigma in shown],
        labels=[name for name, _ in shown],
    )
    axes.plot(days[order], MM_PER_S * total, color="black", linewidth=1.0, label="total")
    axes.set_xlabel(f"modified Julian date, {when.scale.upper()}")
    axes.set_ylabel("one sigma of the range, one way, mm (parts by their squares)")
    axes.set_xlim(days.min(), days.max())
    axes.set_ylim(bottom=0.0)
    handles, labels = axes.get_legend_handles_labels()
    figure.legend(handles[::-1], labels[::-1], loc="outside right upper", frameon=False)
    if path is not None:
        figure.savefig(path, dpi=150)
    return figure
