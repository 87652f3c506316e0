"""The displacements of a station over a month, drawn."""

from __future__ import annotations

from io import BytesIO
from typing import Final

import numpy as np
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.dates import AutoDateLocator, ConciseDateFormatter
from matplotlib.figure import Figure

from lighttime.earth import alone
from lighttime.earth.series import EarthOrientation
from lighttime.earth.station import Station
from lighttime.ephemeris import Ephemeris
from lighttime.timescales import Epoch

DAYS: Final = 30
STEP_S: Final = 1800.0

UNIX_JD: Final = 2440587.5
"""Julian date of 1970-01-01."""

STYLES: Final = (("east", "#E69F00", "-"), ("north", "#56B4E9", "--"), ("up", "#000000", "-"))
"""Colours that can be told apart with any eyes. Source: Okabe & Ito 2008 (from memory)."""


def drawn(
    station: Station,
    start: Epoch,
    earth_orientation: EarthOrientation,
    ephemeris: Ephemeris,
    kind: str,
) -> bytes:
    """A panel for each displacement that a station has: east, north and up over a month.

    Parameters
    ----------
    station : Station
    start : Epoch
        One instant.
    earth_orientation : EarthOrientation
    ephemeris : Ephemeris
    kind : {"png", "svg", "pdf"}

    Returns
    -------
    bytes
        The content of the file.
    """
    names = [name for name in alone.NAMES if alone.has(station, name)]
    count = round(DAYS * 86400.0 / STEP_S) + 1
    when = start.shift(np.arange(count) * STEP_S)
    utc = when.to("utc")
    days = (utc.jd1 - UNIX_JD) + utc.jd2  # of UTC, leap seconds or not, as matplotlib counts them
    figure = Figure(figsize=(9.0, 1.2 + 1.7 * len(names)), layout="constrained")
    FigureCanvasAgg(figure)
    panels = figure.subplots(len(names), 1, sharex=True, squeeze=False)[:, 0]
    for panel, name in zip(panels, names, strict=True):
        enu = alone.displacement(station, when, name, "enu", earth_orientation, ephemeris)
        for (axis, colour, dashes), metres in zip(STYLES, enu.T, strict=True):
            panel.plot(days, 1e3 * metres, dashes, color=colour, linewidth=1.1, label=axis)
        panel.set_ylabel("mm")
        panel.set_title(name.replace("_", " "), loc="left", fontsize="medium")
        panel.grid(alpha=0.3)
    dates = AutoDateLocator()  # type: ignore[no-untyped-call]
    panels[-1].xaxis.set_major_locator(dates)
    panels[-1].xaxis.set_major_formatter(
        ConciseDateFormatter(dates)  # type: ignore[no-untyped-call]
    )
    panels[-1].set_xlabel("UTC")
    panels[0].legend(loc="upper right", ncols=3, fontsize="small")
    figure.suptitle(f"What moves {station.name}", fontsize="large")
    content = BytesIO()
    figure.savefig(content, format=kind, dpi=150)
    return content.getvalue()
