"""The figures of a report with matplotlib."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from lighttime.crosscheck.figures import axes, kinds
from lighttime.crosscheck.text import told
from lighttime.crosscheck.ticks import scale_of
from lighttime.errors import LighttimeError

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from lighttime.crosscheck.report import Report


def plot(report: Report) -> Figure:
    """See `Report.plot`."""
    try:
        from matplotlib.figure import Figure
    except ImportError:
        raise LighttimeError(
            "report.plot() needs matplotlib: pip install 'lighttime[plot]', or write an .html"
        ) from None
    names, kind = kinds(report)
    rows: list[tuple[str, Any]] = [("difference before", report.difference_ps)]
    if report.findings:
        rows.append(("after the findings", report.residual_ps))
        rows += [(told(f), f.amplitude * report.signatures[f.name]) for f in report.findings]
    across = axes(report)
    figure = Figure(figsize=(4.0 * len(across), 2.4 * len(rows) + 0.6), layout="constrained")
    grid = figure.subplots(len(rows), len(across), sharex="col", sharey="row", squeeze=False)
    for (title, values), line in zip(rows, grid, strict=True):
        factor, unit = scale_of(float(np.max(np.abs(values))))
        for axis, panel in zip(across, line, strict=True):
            for k, name in enumerate(names):
                mask = kind == k
                panel.plot(axis.values[mask], factor * values[mask], ".", ms=3, label=name)
            panel.grid(alpha=0.3)
        line[0].set_ylabel(f"{title}, {unit}", fontsize="small", wrap=True)
    for axis, panel in zip(across, grid[-1], strict=True):
        panel.set_xlabel(axis.name)
        panel.set_xticks([t for t, _ in axis.ticks], [label for _, label in axis.ticks])
    if len(names) > 1:
        grid[0][0].legend(fontsize="small")
    return figure
