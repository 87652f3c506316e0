"""How the figures look: small, quiet, readable on a phone, the same to every kind of eye."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import matplotlib

matplotlib.use("svg")

import matplotlib.pyplot as plt

BLUE, ORANGE, GREEN, RED, PURPLE, SKY = (
    "#0072B2", "#E69F00", "#009E73", "#D55E00", "#CC79A7", "#56B4E9",
)  # fmt: skip
"""Source: Okabe & Ito 2008, a palette that colour-blind people tell apart (from memory)."""

INK, FAINT = "#333333", "#BBBBBB"
WIDTH_IN = 4.6
"""As wide as the screen of a phone, at 10 points."""

plt.rcParams |= {
    "font.size": 10.0,
    "font.family": "sans-serif",
    "svg.fonttype": "none",
    "svg.hashsalt": "lighttime",
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.edgecolor": FAINT,
    "axes.labelcolor": INK,
    "text.color": INK,
    "xtick.color": INK,
    "ytick.color": INK,
    "axes.titlesize": 10.0,
    "axes.titlelocation": "left",
    "lines.linewidth": 1.2,
    "figure.constrained_layout.use": True,
    "path.simplify_threshold": 0.3,
}


def save(figure: Any, name: str) -> None:
    """Write ``name.svg`` beside this file, without a date."""
    path = Path(__file__).with_name(f"{name}.svg")
    figure.savefig(path, metadata={"Date": None})
    plt.close(figure)
    text = path.read_text(encoding="utf-8")
    text = "\n".join(line.rstrip() for line in text.splitlines())
    path.write_text(text + "\n", encoding="utf-8")
    print(f"{path.name:28}{len(text) / 1024:8.1f} kB")
