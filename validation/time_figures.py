"""The figures of docs/timescales.md.

    python validation/time_figures.py docs/figures

Colours are those of Okabe & Ito, which people who are colour-blind tell apart; lines differ in
style as well.
"""

from __future__ import annotations

import sys
from pathlib import Path
from typing import Any

import matplotlib as mpl
import numpy as np

mpl.use("agg")
import matplotlib.pyplot as plt
from tdb_integrated import CENTURY, against_series, spectrum

from lighttime.constants import SCALES_ORIGIN
from lighttime.ephemeris.time_integral import TimeEphemeris
from lighttime.moon.clock import lunar_clock_minus_tt, tcl_minus_tcg

BLUE, ORANGE, GREEN, BLACK = "#0072B2", "#D55E00", "#009E73", "#000000"


def years(jd: Any) -> Any:
    """Julian years of a Julian date."""
    return 2000.0 + (jd - 2451545.0) / 365.25


def series_figure(relation: TimeEphemeris, folder: Path) -> None:
    """Integrated minus series, the constants apart, and its spectrum."""
    jd, apart, line = against_series(relation, 2.0)
    straight = np.polyval(line, (jd - SCALES_ORIGIN[0]) / CENTURY)
    figure, (top, bottom) = plt.subplots(2, 1, figsize=(7.2, 6.0), constrained_layout=True)
    top.plot(years(jd), apart, color=BLUE, lw=0.6, label="integrated - series")
    top.plot(years(jd), straight, color=BLACK, lw=1.2, ls="--", label="constants: straight line")
    top.plot(years(jd), apart - straight - 12.0, color=ORANGE, lw=0.6,
             label="without the line, lowered by 12 ns")  # fmt: skip
    top.set_xlabel("year")
    top.set_ylabel("TDB - TT, ns")
    top.legend(loc="upper right", fontsize=8, ncols=3)
    top.set_ylim(-22.0, 19.0)
    period, amplitude = spectrum(apart - straight, 2.0)
    bottom.loglog(period, amplitude, color=BLUE, lw=0.6)
    bottom.set_xlim(5.0, CENTURY / 2.0)
    bottom.set_ylim(1e-5, 3.0)
    for at, name in ((365.25, "1 year"), (398.9, "Jupiter"), (583.9, "Venus"), (29.53, "Moon")):
        bottom.axvline(at, color=GREEN, lw=0.6, ls=":")
        side = "left" if name == "Jupiter" else "right"
        bottom.text(at, 1.6, name, rotation=90, fontsize=7, ha=side, va="top")
    bottom.set_xlabel("period, days")
    bottom.set_ylabel("amplitude, ns")
    for axes in (top, bottom):
        axes.grid(alpha=0.3)
    figure.savefig(folder / "tdb_integrated.png", dpi=110)


def lunar_figure(relation: TimeEphemeris, folder: Path) -> None:
    """How TCL and a clock on the Moon run against TCG and TT."""
    jd = 2460676.5 + np.arange(0.0, 180.0, 0.125)
    day = jd - jd[0]

    def waves(values: Any) -> Any:
        return 1e6 * (values - np.polyval(np.polyfit(day, values, 1), day))

    one_event = tcl_minus_tcg(relation, jd, 0.0)
    one_tdb = lunar_clock_minus_tt(relation, None, jd, 0.0)
    figure, (top, bottom) = plt.subplots(2, 1, figsize=(7.2, 5.0), constrained_layout=True)
    top.plot(day, waves(one_event), color=BLUE, lw=1.0)
    top.set_ylabel("TCL - TCG, us\none event at the Moon")
    bottom.plot(day, waves(one_tdb), color=ORANGE, lw=1.0)
    bottom.set_ylabel("TCL - TT, us\none instant of TDB")
    for axes in (top, bottom):
        axes.set_xlabel("days from 2025-01-01; mean rate taken out")
        axes.grid(alpha=0.3)
    figure.savefig(folder / "lunar_time.png", dpi=110)


def main() -> int:
    """All figures."""
    if len(sys.argv) != 2:
        print(__doc__)
        return 2
    folder = Path(sys.argv[1])
    folder.mkdir(parents=True, exist_ok=True)
    relation = TimeEphemeris.integrate(first="1950-01-01", last="2050-01-01")
    series_figure(relation, folder)
    lunar_figure(relation, folder)
    for path in sorted(folder.glob("*.png")):
        print(path.name, path.stat().st_size, "bytes")
    return 0


if __name__ == "__main__":
    sys.exit(main())
