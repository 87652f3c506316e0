"""A stacked picture of an error budget over time."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from lighttime.errors import InputError, LighttimeError
from lighttime.uncertainty.result import MM_PER_S
from lighttime.vectors import Array

if TYPE_CHECKING:
    from lighttime.uncertainty.result import Budget

MOST_PARTS = 9
"""So many parts have a colour of their own; the others are one."""

UNIX_MJD = 40587.0


def plot(budget: Budget, path: str | Path | None = None) -> Any:
    """Draw a budget over its epochs.

    Parameters
    ----------
    budget : Budget
        Of two or more epochs.
    path : path, optional
        Write a picture there, of the kind that its suffix says (``.png``, ``.svg``, ``.pdf``).

    Returns
    -------
    matplotlib Figure
        See `drawn`.
    """
    utc = budget.query.when.to("utc")
    days = np.ravel((utc.jd1 - 2400000.5) + utc.jd2)
    figure = drawn(days, {name: np.ravel(part.sigma_s) for name, part in budget.parts.items()})
    if path is not None:
        figure.savefig(path, dpi=150)
    return figure


def drawn(mjd_utc: Array, parts: Mapping[str, Array]) -> Any:
    """The picture: its height is the total sigma, shared out by squares.

    Parameters
    ----------
    mjd_utc : ndarray, shape (n,)
        Two epochs or more, in any order.
    parts : mapping of str to ndarray, shape (n,)
        One sigma of the round trip by each, s.

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
        from matplotlib.dates import AutoDateLocator, ConciseDateFormatter
        from matplotlib.figure import Figure
    except ImportError:
        reason = "a figure needs matplotlib: pip install 'lighttime[plot]'"
        raise LighttimeError(reason) from None
    if mjd_utc.size < 2:
        raise InputError("epochs of the budget", mjd_utc.size, "2 or more, to draw over time")
    order = np.argsort(mjd_utc, kind="stable")
    days = mjd_utc[order] - UNIX_MJD  # of UTC, leap seconds or not, as matplotlib counts them
    squares = {name: np.square(sigma[order]) for name, sigma in parts.items()}
    ranked = sorted(squares, key=lambda name: -float(np.mean(squares[name])))
    shown = {name: squares[name] for name in ranked[:MOST_PARTS]}
    if len(ranked) > MOST_PARTS:
        shown["all others"] = np.sum([squares[name] for name in ranked[MOST_PARTS:]], axis=0)
    total = np.sqrt(np.sum(list(squares.values()), axis=0))
    figure = Figure(figsize=(9.0, 5.0), layout="constrained")
    axes = figure.subplots()
    bands = [MM_PER_S * square / total for square in shown.values()]
    axes.stackplot(days, bands, labels=list(shown))
    axes.plot(days, MM_PER_S * total, color="black", linewidth=0.8, label="total")
    dates = AutoDateLocator()  # type: ignore[no-untyped-call]
    axes.xaxis.set_major_locator(dates)
    axes.xaxis.set_major_formatter(ConciseDateFormatter(dates))  # type: ignore[no-untyped-call]
    axes.set_xlabel("UTC")
    axes.set_ylabel("one sigma of the range, one way, mm")
    axes.set_xlim(days[0], days[-1])
    axes.set_ylim(bottom=0.0)
    axes.set_title("Error budget; parts by their squares", loc="left", fontsize="medium")
    handles, labels = axes.get_legend_handles_labels()
    figure.legend(handles[::-1], labels[::-1], loc="outside right upper", frameon=False)
    return figure
