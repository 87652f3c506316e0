"""The figures of the accuracy page, from what validation/accuracy.py saved.

python docs/figures/accuracy.py
"""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import matplotlib.pyplot as plt
import numpy as np
from style import BLUE, FAINT, INK, ORANGE, WIDTH_IN, save

RESULTS = Path(__file__).parents[2] / "validation" / "results" / "accuracy.json"
BAR_FS = 2.0
MM_PER_FS = 0.5 * 299792458.0 * 1e3 * 1e-15
LOOK_UP = "record found by (Julian date - start)"


def fast(results: dict[str, Any]) -> None:
    """Fast minus exact, one epoch a call and from tables."""
    figure, axes = plt.subplots(figsize=(WIDTH_IN, 2.7))
    edges = np.arange(-2.05, 2.06, 0.1)
    axes.hist(results["alone"], edges, color=BLUE, label="one epoch a call")
    axes.hist(
        results["tables"], edges, histtype="step", color=ORANGE, linewidth=1.6, label="from tables"
    )
    for bar in (-BAR_FS, BAR_FS):
        axes.axvline(bar, color=INK, linestyle="--", linewidth=1.0)
    axes.set(xlim=(-2.3, 2.3), xlabel="fast minus exact, femtoseconds", ylabel="round trips")
    axes.legend(frameon=False, loc="upper left", bbox_to_anchor=(0.06, 1.0), fontsize=9)
    save(figure, "accuracy-fast")


def plain(results: dict[str, Any]) -> None:
    """How far off, on a scale of powers of ten: this library and the plain assembly."""
    off = np.array(results["plain"])
    rest = off - np.array(results["losses"][LOOK_UP])
    ours = np.array(results["alone"])[results["compared"]]
    figure, axes = plt.subplots(figsize=(WIDTH_IN, 2.9))
    edges = np.linspace(-3.0, 6.0, 46)

    def logarithms(values: Any) -> Any:
        return np.log10(np.maximum(np.abs(values), 1.1e-3))

    axes.hist(logarithms(ours), edges, color=BLUE)
    axes.hist(logarithms(rest), edges, color="none", edgecolor=INK, hatch="////", linewidth=0.8)
    axes.hist(logarithms(off), edges, color=ORANGE)
    top = axes.get_ylim()[1]
    for place, told in (
        (-0.45, "this library"),
        (4.4, "plain"),
        (1.9, "plain, records\nfound exactly"),
    ):
        axes.text(place, 1.02 * top, told, ha="center", fontsize=9)
    powers = (-3, -1, 1, 3, 5)
    axes.set_xticks(powers, [f"$10^{{{power}}}$" for power in powers])
    axes.set(xlim=(-3.0, 6.0), ylim=(0.0, 1.25 * top), ylabel="round trips")
    axes.set_xlabel("off by, femtoseconds")
    lengths = (("1 nm", 1e-6), ("1 µm", 1e-3), ("1 mm", 1.0), ("1 cm", 10.0))
    for told, mm in lengths:
        axes.axvline(np.log10(mm / MM_PER_FS), color=FAINT, linewidth=0.8, zorder=0)
        axes.text(np.log10(mm / MM_PER_FS), 1.24 * top, told, ha="center", va="top", fontsize=8)
    save(figure, "accuracy-plain")


def main() -> None:
    """Both."""
    results = json.loads(RESULTS.read_text(encoding="utf-8"))
    fast(results)
    plain(results)


if __name__ == "__main__":
    main()
