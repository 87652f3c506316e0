"""Write lighttime/data/tidal_potential.csv: the 342 largest lines of the tidal potential.

The catalogue is that of Hartmann & Wenzel 1995, as it lies in the package pyTMD. Of its 12,583
lines, those of degree 2 and of arguments without planets are taken, lines of one frequency
(from several bodies) added up, the constant left out, and the 342 largest kept: down to 50
micrometres of the equilibrium tide, 8e-5 of M2.

    python validation/make_tidal_potential.py [--check]

With --check nothing is written; the exit status says whether the table in the package is this
one.
"""

from __future__ import annotations

import sys
from collections import defaultdict
from pathlib import Path

import pyTMD

CATALOGUE = Path(pyTMD.__file__).parent / "data" / "hw1995_tab.txt"
TABLE = Path(__file__).parent.parent / "lighttime" / "data" / "tidal_potential.csv"
LINES = 342
HEAD = """\
# Source: Hartmann & Wenzel 1995, Geophys. Res. Lett. 22, 3553: the 342 largest lines of degree 2
# Multipliers of the Doodson arguments tau, s, h, p, N', p_s. Amplitude: metres of the equilibrium
# tide, in the normalisation of Cartwright & Tayler 1971.
tau,s,h,p,n_prime,p_s,amplitude_m
"""


def largest_lines() -> list[tuple[tuple[int, ...], float]]:
    """Multipliers and amplitudes, by species (2, 1, 0), the largest first."""
    amplitude: defaultdict[tuple[int, ...], float] = defaultdict(float)
    with CATALOGUE.open(encoding="ascii") as lines:
        next(lines)
        for line in lines:
            cells = line.split()
            degree, *numbers = map(int, cells[:12])
            multipliers, planets = tuple(numbers[:6]), numbers[6:]
            if degree == 2 and any(multipliers) and not any(planets):
                amplitude[multipliers] += float(cells[12])
    largest = sorted(amplitude.items(), key=lambda item: -abs(item[1]))[:LINES]
    return sorted(largest, key=lambda item: (-item[0][0], -abs(item[1])))


def main() -> int:
    rows = (",".join(map(str, key)) + f",{value:.9f}\n" for key, value in largest_lines())
    text = HEAD + "".join(rows)
    if "--check" in sys.argv[1:]:
        same = TABLE.read_text(encoding="utf-8") == text
        print(f"{TABLE.name}: {'as made from the catalogue' if same else 'DIFFERS'}")
        return 0 if same else 1
    TABLE.write_text(text, encoding="utf-8")
    print(f"{TABLE.name}: {LINES} lines written")
    return 0


if __name__ == "__main__":
    sys.exit(main())
