"""How large each term of a range is: `sizes.json`, which the pages of the theory quote.

Round trips from three invented stations to the five arrays at random instants of 36 years, the
Moon above 20 degrees, in ordinary weather. ``python docs/figures/sizes.py`` writes the file,
``--check`` compares it with what is found and exits non-zero on a difference.
"""

from __future__ import annotations

import json
import sys
from pathlib import Path

import numpy as np
from scene import MM_ONE_WAY, STATIONS, one_way_mm, seen

import lighttime as lt

FILE = Path(__file__).with_name("sizes.json")
FIRST_JD, LAST_JD = 2447892.5, 2461041.5
"""1990-01-01 to 2026-01-01: pole and UT1 are final there, and stay what they are."""
EACH = 2000
"""Instants for each station and array, before those with a low Moon are dropped."""


def extremes(each: int = EACH) -> dict[str, tuple[float, float]]:
    """Least and most of each term, one-way millimetres."""
    random = np.random.default_rng(20251202)
    found: dict[str, list[float]] = {}
    for station in STATIONS:
        for array in lt.reflectors():
            days = np.sort(random.uniform(0.0, LAST_JD - FIRST_JD, each))
            _, answer = seen(station, lt.Epoch(FIRST_JD, days, "utc"), array)
            for name, mm in one_way_mm(answer).items():
                found.setdefault(name, []).extend((float(mm.min()), float(mm.max())))
    return {name: (min(values), max(values)) for name, values in found.items()}


LENGTHS = ((1e9, "km", 1e-6), (1e3, "m", 1e-3), (0.0, "mm", 1.0))
TIMES = ((1.0, "s", 1.0), (1e-9, "ns", 1e9), (0.0, "ps", 1e12))
"""From which size on which unit is used, and the factor to it."""


def told(name: str, least_mm: float, most_mm: float) -> dict[str, str]:
    """Two limits as a person says them: one-way length, two-way time, and both in a line."""
    lengths = in_a_unit(LENGTHS, least_mm, most_mm)
    times = in_a_unit(TIMES, least_mm / MM_ONE_WAY, most_mm / MM_ONE_WAY)
    return {
        f"length_{name}": lengths,
        f"time_{name}": times,
        f"size_{name}": f"{lengths} one-way ({times} two-way)",
    }


def in_a_unit(units: tuple[tuple[float, str, float], ...], least: float, most: float) -> str:
    """``6.8 to 8.1 m``."""
    largest = max(abs(least), abs(most))
    unit, factor = next((u, f) for size, u, f in units if largest >= size)
    return f"{rounded(least * factor)} to {rounded(most * factor)} {unit}"


def rounded(value: float) -> str:
    """Two significant digits, three where the first is a 1; a minus that is one."""
    if value == 0.0:
        return "0"
    decimals = 1 - int(np.floor(np.log10(abs(value))))
    decimals += f"{abs(value):e}"[0] == "1"
    decimals += abs(value) > 1e5  # kilometres to the Moon
    text = f"{value:.{decimals}f}" if decimals > 0 else f"{round(value, decimals):_.0f}"
    return text.replace("-", "\N{MINUS SIGN}").replace("_", "\N{NO-BREAK SPACE}")


def main() -> int:
    found = extremes()
    sizes = {
        "limits_mm": {n: [float(f"{mm:.4g}") for mm in pair] for n, pair in found.items()},
        "told": {key: text for n, pair in found.items() for key, text in told(n, *pair).items()},
    }
    text = json.dumps(sizes, indent=2, ensure_ascii=False) + "\n"
    if "--check" in sys.argv[1:]:
        same = FILE.read_text(encoding="utf-8") == text
        print("sizes.json is what is found" if same else f"sizes.json is old; found:\n{text}")
        return int(not same)
    FILE.write_text(text, encoding="utf-8")
    print(text)
    return 0


if __name__ == "__main__":
    sys.exit(main())
